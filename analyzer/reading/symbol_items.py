"""Reads placed symbols and sheet symbols, with what each use of the sheet makes of them."""

from __future__ import annotations

from analyzer import limits
from analyzer.reading.drawing import Drawing, Flags, SheetSymbol, Symbol, Usage
from analyzer.reading.geometry import Point, point
from analyzer.reading.library import TILDE_IS_A_NAME, read_fields
from analyzer.reading.sexpr import Node, every, first, flag, text, word

NO_SUCH_UNIT = -1
"""Stands for a unit that is no number: no library symbol has it, so the part is reported."""


def take_old_usages(drawing: Drawing, node: Node) -> bool:
    """Take the uses listed in the root file (formats before 20221002)."""
    for child in every(node, "path"):
        if len(child) > 1:
            usage = _usage("", child)
            drawing.old_usages[usage.path] = usage
    return True


def _usage(project: str, node: Node) -> Usage:
    reference, unit, value, footprint = "", None, None, None
    variants: list[Node] = []
    for child in node[2:]:
        if type(child) is not list or len(child) < 2:
            continue
        if child[0] == "reference":
            reference = text(child[1])
        elif child[0] == "unit":
            unit = _integer(child[1])
            unit = NO_SUCH_UNIT if unit is None else unit
        elif child[0] == "value":
            value = text(child[1])
        elif child[0] == "footprint":
            footprint = text(child[1])
        elif child[0] == "variant":
            variants.append(child)
    return Usage(project, text(node[1]), reference, unit, value, footprint, tuple(variants))


def _usages(node: Node) -> tuple[Usage, ...]:
    return tuple(
        _usage(text(project[1]), path)
        for project in every(node, "project")
        if len(project) > 1
        for path in every(project, "path")
        if len(path) > 1
    )


def _integer(atom: object) -> int | None:
    return atom if isinstance(atom, int) else int(atom) if isinstance(atom, str) and atom.isdecimal() else None


def _flags(node: Node) -> Flags:
    return not flag(node, "dnp"), flag(node, "in_bom", True), flag(node, "on_board", True)


def take_symbol(drawing: Drawing, node: Node) -> bool:
    """Take a placed symbol; False if it cannot be read."""
    lib_id = library_name = mirror = uuid = ""
    at: Point | None = None
    angle: object = 0
    unit: int | None = 1
    style: int | None = 1
    fitted, in_bom, on_board = True, True, True
    usages: tuple[Usage, ...] = ()
    fields: dict[str, str] = {}
    alternates: dict[str, str] = {}
    for child in node:
        if type(child) is not list or len(child) < 2:
            continue
        key, entry = child[0], child[1]
        if key == "property":
            if len(child) > 2:
                shift = 2 if entry == "private" and len(child) > 3 and type(child[3]) is not list else 1
                fields.setdefault(text(child[shift]), text(child[shift + 1]))
        elif key == "pin":
            for mark in child:
                if type(mark) is list and len(mark) > 1 and mark[0] == "alternate":
                    alternates[text(entry)] = text(mark[1])
        elif key == "lib_id":
            lib_id = text(entry)
        elif key == "lib_name":
            library_name = text(entry)
        elif key == "at":
            at = point(child)
            angle = child[3] if len(child) > 3 else 0
        elif key == "mirror":
            mirror = text(entry)
        elif key == "unit":
            unit = _integer(entry)
        elif key == "convert" or key == "body_style":
            style = _integer(entry)
        elif key == "uuid":
            uuid = text(entry)
        elif key == "in_bom":
            in_bom = entry == "yes"
        elif key == "on_board":
            on_board = entry == "yes"
        elif key == "dnp":
            fitted = entry != "yes"
        elif key == "instances":
            usages = _usages(child)
    empty = {"~", " "} if drawing.version < TILDE_IS_A_NAME else {" "}
    fields = {name: "" if value in empty else value for name, value in fields.items()}
    turns = _quarter_turns(angle)
    if at is None or turns is None or unit is None or style is None or not lib_id:
        return False
    drawing.symbols.append(
        Symbol(
            lib_id,
            library_name or lib_id,
            at,
            turns,
            mirror,
            unit,
            style,
            uuid,
            fields,
            (fitted, in_bom, on_board),
            usages,
            alternates,
            node,
        )
    )
    return len(drawing.symbols) <= limits.SYMBOL_INSTANCES


def _quarter_turns(angle: object) -> int | None:
    try:
        turns = float(angle) / 90  # type: ignore[arg-type]
        return int(turns) % 4 if turns == int(turns) else None
    except (TypeError, ValueError, OverflowError):
        return None


_NAMES = ("Sheetname", "Sheet name")
_FILES = ("Sheetfile", "Sheet file")


def take_sheet(drawing: Drawing, node: Node) -> bool:
    """Take a sheet symbol; False if it, or a pin of it, cannot be read."""
    fields = read_fields(node)
    values = list(fields.items())
    # the two are known by name, or (in translated files) by being the first two
    name = next((fields[key] for key in _NAMES if key in fields), values[0][1] if values else "")
    file = next((fields[key] for key in _FILES if key in fields), values[1][1] if len(values) > 1 else "")
    readable = bool(file)
    pins: list[tuple[str, Point]] = []
    for pin in every(node, "pin"):
        at = point(first(pin, "at"))
        if at is None or len(pin) < 2:
            readable = False
        else:
            pins.append((text(pin[1]), at))
    instances = first(node, "instances")
    drawing.sheets.append(
        SheetSymbol(
            word(node, "uuid"),
            name,
            file,
            point(first(node, "at")),
            fields,
            tuple(pins),
            _flags(node),
            _usages(instances) if instances else (),
        )
    )
    return readable
