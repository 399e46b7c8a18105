"""Reads one schematic file into a drawing, item by item."""

from __future__ import annotations

from analyzer.errors import Fault, InputError
from analyzer.findings import reading as kinds
from analyzer.reading.drawing import Drawing, Label
from analyzer.reading.geometry import Point, point
from analyzer.reading.library import read_fields
from analyzer.reading.report import Report
from analyzer.reading.sexpr import Node, every, first, parse, text, word
from analyzer.reading.symbol_items import take_old_usages, take_sheet, take_symbol

NEWEST_FORMAT = 20260306
"""Newest schematic format whose rules are known here: KiCad 10's."""
OLDEST_FORMAT = 20200310
"""Oldest S-expression schematic format."""


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
    drawing = Drawing(file, version, word(tree, "uuid"))
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
    for name in drawing.twice:
        message = f"{file} holds two different library symbols named '{name}'; the first was used"
        report.add(kinds.LIBRARY_TWICE, name, message, file, lost=True)
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
            name = text(child[1])
            if drawing.library.setdefault(name, child) != child:
                drawing.twice.append(name)
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
    drawing.aliases.setdefault(text(node[1]), tuple(text(member) for member in members[1:] if type(member) is not list))
    return True


def _area(drawing: Drawing, node: Node) -> bool:
    drawing.areas.append(node)
    return True


_TITLE_VARIABLES = {"rev": "REVISION", "date": "ISSUE_DATE"}


def _title(drawing: Drawing, node: Node) -> bool:
    for child in node[1:]:
        if type(child) is list and len(child) > 1:
            if child[0] == "comment" and len(child) > 2:
                drawing.title[f"COMMENT{text(child[1])}"] = text(child[2])
            else:
                key = text(child[0])
                drawing.title[_TITLE_VARIABLES.get(key, key.upper())] = text(child[1])
    return True


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
    "symbol": take_symbol,
    "sheet": take_sheet,
    "text": _note,
    "text_box": _note,
    "table": _table,
    "bus_alias": _alias,
    "rule_area": _area,
    "title_block": _title,
    "symbol_instances": take_old_usages,
}
