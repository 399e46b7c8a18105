"""One schematic file as drawn: what stands on the sheet, read once however often the sheet is used."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from analyzer import limits
from analyzer.circuit import Place
from analyzer.errors import Fault, InputError
from analyzer.findings import reading as kinds
from analyzer.reading.geometry import GRID_PER_MM, Point, point
from analyzer.reading.library import TILDE_IS_A_NAME, LibrarySymbol, read_fields, read_symbol
from analyzer.reading.report import Report
from analyzer.reading.sexpr import Node, every, first, flag, parse, text, word

NEWEST_FORMAT = 20260306
"""Newest schematic format whose rules are known here: KiCad 10's."""
OLDEST_FORMAT = 20200310
"""Oldest S-expression schematic format."""

Flags = tuple[bool, bool, bool]
"""(populated, in the bill of materials, on the board)."""


def both(one: Flags, other: Flags) -> Flags:
    """The marks of a thing inside another: each must hold for both."""
    return one[0] and other[0], one[1] and other[1], one[2] and other[2]


@dataclass(frozen=True, slots=True)
class Label:
    """A label: `kind` is "local", "global" or "hierarchical"."""

    text: str
    kind: str
    at: Point


@dataclass(frozen=True, slots=True)
class Usage:
    """What one use of a sheet makes of a symbol: its reference and unit there, and its variants.

    Attributes:
        project: Name of the project the use belongs to.
        path: Sheet path as uuids, "/root/sheet".
        reference: Reference designator.
        unit: Unit, or None where it is not stated or not a number.
        value: Value stated for this use (old files), else None.
        footprint: Footprint stated for this use (old files), else None.
        variants: The `(variant ...)` expressions.
    """

    project: str
    path: str
    reference: str
    unit: int | None
    value: str | None = None
    footprint: str | None = None
    variants: tuple[Node, ...] = ()


@dataclass(frozen=True, slots=True)
class Symbol:
    """A placed symbol as the file holds it, before it is looked at from a sheet instance."""

    lib_id: str
    library_name: str
    at: Point
    quarter_turns: int
    mirror: str
    unit: int
    style: int
    uuid: str
    fields: Mapping[str, str]
    flags: Flags
    usages: tuple[Usage, ...]
    alternates: Mapping[str, str]
    node: Node


@dataclass(frozen=True, slots=True)
class SheetSymbol:
    """A sheet symbol: the box that stands for another file."""

    uuid: str
    name: str
    file: str
    at: Point | None
    fields: Mapping[str, str]
    pins: tuple[tuple[str, Point], ...]
    flags: Flags
    usages: tuple[Usage, ...]


@dataclass(slots=True)
class Drawing:
    """Everything of one schematic file that matters here.

    Attributes:
        file: Path relative to the project folder, with forward slashes.
        version: Format version.
        uuid: The file's own uuid, "" in early files.
        library: Expressions of the library symbols by name.
        old_usages: Symbol uuid path → use, of files before 20221002 (root file only).
        title: Title-block entries by upper-case name.
    """

    file: str
    version: int
    uuid: str
    wires: list[tuple[Point, Point]]
    buses: list[tuple[Point, Point]]
    junctions: list[Point]
    no_connects: list[Point]
    bus_entries: list[tuple[Point, Point]]
    labels: list[Label]
    symbols: list[Symbol]
    sheets: list[SheetSymbol]
    notes: list[tuple[str, Point | None]]
    aliases: dict[str, tuple[str, ...]]
    areas: list[Node]
    library: dict[str, Node]
    old_usages: dict[str, Usage]
    title: dict[str, str]
    _symbols_read: dict[str, LibrarySymbol | None]

    def library_symbol(self, name: str) -> LibrarySymbol | None:
        """The library symbol of that name, read at first use."""
        if name not in self._symbols_read:
            node = self.library.get(name)
            self._symbols_read[name] = None if node is None else read_symbol(node, self.version, self.library)
        return self._symbols_read[name]

    def place(self, at: Point | None, sheet: str = "/") -> Place:
        """A position on this sheet, for messages and parts."""
        if at is None:
            return Place(self.file, sheet)
        return Place(self.file, sheet, at[0] / GRID_PER_MM, at[1] / GRID_PER_MM)


def read_drawing(data: bytes, file: str, report: Report) -> Drawing:
    """Read one `.kicad_sch`.

    Args:
        data: Its bytes.
        file: Its path relative to the project folder, for messages.
        report: Takes what could not be read.

    Raises:
        InputError: If the file as a whole is unreadable.
    """
    tree = parse(data, file, "kicad_sch")
    version = _version(tree, file, report)
    drawing = Drawing(
        file=file,
        version=version,
        uuid=word(tree, "uuid"),
        wires=[],
        buses=[],
        junctions=[],
        no_connects=[],
        bus_entries=[],
        labels=[],
        symbols=[],
        sheets=[],
        notes=[],
        aliases={},
        areas=[],
        library={},
        old_usages={},
        title={},
        _symbols_read={},
    )
    for node in tree:
        if type(node) is list and node:
            take = _TAKERS.get(node[0]) if type(node[0]) is str else None
            if take is not None and not take(drawing, node):
                what = _describe(node)
                report.add(
                    kinds.BAD_ITEM,
                    what,
                    f"{what}: bad position or missing entry; left out",
                    drawing.place(None),
                    lost=True,
                )
    return drawing


def _version(tree: Node, file: str, report: Report) -> int:
    found = word(tree, "version")
    try:
        version = int(found)
    except ValueError:
        shown = f"'{found}' is no format version" if found else "the format version is missing"
        raise InputError(Fault(shown, file, "line 1", "Open and save the file in KiCad.")) from None
    if version < OLDEST_FORMAT:
        raise InputError(Fault(f"format {version} is older than any KiCad release wrote", file, remedy="Restore it."))
    if version > NEWEST_FORMAT:
        report.add(
            kinds.NEWER_FORMAT, file, f"{file} has format {version}; known here are formats up to {NEWEST_FORMAT}", file
        )
    return version


def _describe(node: Node) -> str:
    if node[0] == "symbol":
        return f"symbol {read_fields(node).get('Reference') or word(node, 'lib_id') or '?'}"
    if node[0] == "sheet":
        return f"sheet {next(iter(read_fields(node).values()), '?')}"
    shown = text(node[1]) if len(node) > 1 else ""
    return f"{node[0].replace('_', ' ')} {shown}".strip()


def _line(node: Node) -> tuple[Point, Point] | None:
    points = first(node, "pts")
    if points is None or len(points) < 3:
        return None
    start, end = points[1], points[2]
    a = point(start) if isinstance(start, list) else None
    b = point(end) if isinstance(end, list) else None
    return None if a is None or b is None else (a, b)


def _wire(drawing: Drawing, node: Node) -> bool:
    line = _line(node)
    if line is not None:
        drawing.wires.append(line)
    return line is not None


def _bus(drawing: Drawing, node: Node) -> bool:
    line = _line(node)
    if line is not None:
        drawing.buses.append(line)
    return line is not None


def _junction(drawing: Drawing, node: Node) -> bool:
    at = point(first(node, "at"))
    if at is not None:
        drawing.junctions.append(at)
    return at is not None


def _no_connect(drawing: Drawing, node: Node) -> bool:
    at = point(first(node, "at"))
    if at is not None:
        drawing.no_connects.append(at)
    return at is not None


def _bus_entry(drawing: Drawing, node: Node) -> bool:
    at, size = point(first(node, "at")), point(first(node, "size"))
    if at is None or size is None:
        return False
    drawing.bus_entries.append((at, (at[0] + size[0], at[1] + size[1])))
    return True


_LABELS = {"label": "local", "global_label": "global", "hierarchical_label": "hierarchical"}


def _label(drawing: Drawing, node: Node) -> bool:
    at = point(first(node, "at"))
    if at is None or len(node) < 2:
        return False
    drawing.labels.append(Label(text(node[1]), _LABELS[node[0]], at))
    return True


def _library(drawing: Drawing, node: Node) -> bool:
    for child in node:
        if type(child) is list and len(child) > 1 and child[0] == "symbol":
            drawing.library.setdefault(text(child[1]), child)
    return True


def _note(drawing: Drawing, node: Node) -> bool:
    if len(node) > 1:
        drawing.notes.append((text(node[1]), point(first(node, "at"))))
    return True


def _table(drawing: Drawing, node: Node) -> bool:
    for cells in every(node, "cells"):
        for cell in every(cells, "table_cell"):
            _note(drawing, cell)
    return True


def _alias(drawing: Drawing, node: Node) -> bool:
    members = first(node, "members")
    if len(node) < 2 or members is None:
        return False
    drawing.aliases.setdefault(text(node[1]), tuple(text(member) for member in members[1:]))
    return True


def _area(drawing: Drawing, node: Node) -> bool:
    drawing.areas.append(node)
    return True


def _title(drawing: Drawing, node: Node) -> bool:
    for child in node[1:]:
        if type(child) is list and len(child) > 1:
            if child[0] == "comment" and len(child) > 2:
                drawing.title[f"COMMENT{text(child[1])}"] = text(child[2])
            else:
                drawing.title[text(child[0]).upper()] = text(child[1])
    return True


def _old_usages(drawing: Drawing, node: Node) -> bool:
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


def _symbol(drawing: Drawing, node: Node) -> bool:
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
        elif key in {"convert", "body_style"}:
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


def _sheet(drawing: Drawing, node: Node) -> bool:
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


_TAKERS = {
    "wire": _wire,
    "bus": _bus,
    "junction": _junction,
    "no_connect": _no_connect,
    "bus_entry": _bus_entry,
    "label": _label,
    "global_label": _label,
    "hierarchical_label": _label,
    "lib_symbols": _library,
    "symbol": _symbol,
    "sheet": _sheet,
    "text": _note,
    "text_box": _note,
    "table": _table,
    "bus_alias": _alias,
    "rule_area": _area,
    "title_block": _title,
    "symbol_instances": _old_usages,
}
