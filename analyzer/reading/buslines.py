"""Buses joined: labels on one bus line, and bus pins of sheets with the bus labels inside them."""

from __future__ import annotations

from collections import defaultdict

from analyzer.reading.hierarchy import SheetInstance
from analyzer.reading.joins import Netting
from analyzer.reading.names import Rank
from analyzer.reading.wiring import BusLabel, WiredSheet

Table = dict[tuple[bool, int | str], int]
"""(is the bus a vector, index or member name) → node of that member on one bus line."""

_RANKS = {
    "local": Rank.BUS_LABEL,
    "global": Rank.GLOBAL_LABEL,
    "hierarchical": Rank.BUS_HIERARCHICAL,
    "pin": Rank.BUS_SHEET_PIN,
}


def join_buses(wired: list[WiredSheet], netting: Netting) -> None:
    """Join the members of all buses that meet on a line or through a sheet pin."""
    joins = netting.joins
    tables: dict[int, Table] = defaultdict(dict)
    inside: dict[tuple[int, str], list[tuple[BusLabel, SheetInstance]]] = defaultdict(list)
    for each in wired:
        for label in each.bus_labels:
            _name_members(label, each.sheet, netting, tables[joins.root(label.line)])
            if label.kind == "hierarchical":
                inside[each.sheet.number, label.text].append((label, each.sheet))
    for each in wired:
        # a bus line takes its names from its labels; a bare one from the first of its sheet pins, by name
        bare = [pin for pin in each.bus_pins.values() if joins.root(pin.line) not in tables]
        for pin in sorted(bare, key=lambda pin: pin.text):
            line = joins.root(pin.line)
            if line not in tables:
                _name_members(pin, each.sheet, netting, tables[line])
    for each in wired:
        for (position, text), pin in each.bus_pins.items():
            child = each.sheet.children.get(position)
            if child is None:
                continue
            outside = tables[joins.root(pin.line)]
            for label, sheet in inside.get((child.number, text), ()):
                for key, member in zip(label.bus.keys, label.bus.members, strict=True):
                    there = outside.get((label.bus.is_vector, key))
                    if there is not None:
                        joins.join(there, netting.local_node(sheet, member))


def _name_members(label: BusLabel, sheet: SheetInstance, netting: Netting, table: Table) -> None:
    rank = _RANKS[label.kind]
    for key, member in zip(label.bus.keys, label.bus.members, strict=True):
        node = netting.local_node(sheet, member)
        netting.name(node, sheet, member, rank, by=label.text)
        netting.joins.join(table.setdefault((label.bus.is_vector, key), node), node)
