"""Looks for drawing faults that make a rail seem to have no regulator, or a regulator no rail."""

from __future__ import annotations

from collections import Counter, defaultdict

from analyzer.findings import reading as kinds
from analyzer.findings.base import FindingKind
from analyzer.reading.geometry import Point
from analyzer.reading.joins import Netting
from analyzer.reading.names import Rank
from analyzer.reading.netlisting import NetNames
from analyzer.reading.placement import PlacedPin, Placement
from analyzer.reading.report import Report
from analyzer.reading.wiring import VALUE_NAMES_THE_NET, WiredSheet

_NEAR = 1_000
"""A wire end within 100 µm of a pin was meant to touch it [100 nm]."""


def check_sheets(wired: list[WiredSheet], report: Report) -> None:
    """Report sheet pins without label, labels without sheet pin, and sheet pins drawn twice."""
    for each in wired:
        sheet = each.sheet
        for position, symbol in enumerate(sheet.drawing.sheets):
            child = sheet.children.get(position)
            counts = Counter(text for text, _ in symbol.pins)
            place = sheet.drawing.place(symbol.at, sheet.name)
            for text in sorted(text for text, count in counts.items() if count > 1):
                message = f"sheet '{symbol.name}' has {counts[text]} pins named '{text}'"
                report.add(kinds.SHEET_PIN_LOOSE, symbol.name, message, place)
            if child is None:
                continue
            inside = {label.text for label in child.drawing.labels if label.kind == "hierarchical"}
            for text in sorted(counts.keys() - inside):
                message = f"sheet pin '{text}' of '{symbol.name}' has no hierarchical label on its sheet"
                report.add(kinds.SHEET_PIN_LOOSE, symbol.name, message, place)
            for text in sorted(inside - counts.keys()):
                message = f"hierarchical label '{text}' of sheet '{symbol.name}' has no sheet pin"
                report.add(kinds.SHEET_PIN_LOOSE, symbol.name, message, place)


def check_names(netting: Netting, names: NetNames, report: Report) -> None:
    """Report nets that bear several names valid on all sheets: two rails are one there, or should not be."""
    bearers: dict[int, set[str]] = defaultdict(set)
    for node, candidate in netting.candidates:
        if candidate.rank in {Rank.GLOBAL_LABEL, Rank.GLOBAL_POWER}:
            bearers[netting.joins.root(node)].add(candidate.name)
    for net in sorted(bearers, key=lambda each: min(bearers[each])):
        if len(bearers[net]) > 1 and net in names.of_root:
            shown = ", ".join(sorted(bearers[net]))
            subject = names.of_root[net]
            report.add(kinds.SEVERAL_NAMES, subject, f"net {subject} bears several names: {shown}")


def check_buses(wired: list[WiredSheet], placements: list[Placement], report: Report) -> None:
    """Report buses that seem to name an alias nobody defined: their single member is no net of the sheet."""
    suspects = [(each, label) for each in wired for label in each.bus_labels if label.bus.lone]
    if not suspects:
        return
    powers = {placement.fields.get("Value", "") for placement in placements if placement.is_power}
    for each, label in suspects:
        plain = {drawn.text for drawn in each.sheet.drawing.labels}
        if label.bus.members[0] not in plain | powers:
            message = f"bus '{label.text}' has the single member '{label.bus.lone}': an alias that is not defined?"
            place = each.sheet.drawing.place(None, each.sheet.name)
            report.add(kinds.BUS_UNKNOWN, label.text, message, place, lost=True)


def check_pins(
    placements: list[Placement], wired: list[WiredSheet], netting: Netting, names: NetNames, report: Report
) -> None:
    """Report pins that nearly touch a wire, loose power pins, and power pins that connect by their names."""
    by_number = {each.sheet.number: each for each in wired}
    marked = {netting.joins.root(node) for node in netting.no_connects}
    near: dict[int, dict[Point, list[Point]]] = {}
    for placement in placements:
        if placement.is_power:
            _check_power_symbol(placement, report)
        for placed in placement.pins:
            net = netting.joins.root(placed.node)
            if placed.pin.kind == "no_connect" or not names.of_root[net].startswith("unconnected-("):
                if placed.pin.hidden and placed.pin.kind == "power_in" and not placement.is_power:
                    _report(kinds.HIDDEN_POWER_PIN, placed, f"joins the net {names.of_root[net]}, invisibly", report)
                continue
            if net in marked or placement.reference.startswith("#"):
                continue
            sheet = by_number[placement.sheet.number]
            if sheet.index.under(placed.at) and placed.at not in sheet.ends:
                _report(kinds.PIN_BESIDE_WIRE, placed, "lies on a wire without a junction: not connected", report)
                continue
            ends = near.setdefault(placement.sheet.number, {}) or _buckets(near, sheet)
            gap = _nearest(placed.at, ends)
            if gap:
                shown = f"is {gap / 10:g} µm from a wire's end: not connected"
                _report(kinds.PIN_BESIDE_WIRE, placed, shown, report)
            elif placed.pin.kind == "power_in" and not placement.is_power:
                _report(kinds.POWER_PIN_LOOSE, placed, f"({placed.pin.name}) is not connected", report)


def _report(kind: FindingKind, placed: PlacedPin, what: str, report: Report) -> None:
    owner = placed.owner
    place = owner.sheet.drawing.place(placed.at, owner.sheet.name)
    report.add(kind, owner.reference, f"{owner.reference}.{placed.pin.number} {what}", place, key=owner.key)


def _check_power_symbol(placement: Placement, report: Report) -> None:
    value = placement.fields.get("Value", "")
    pins = placement.pins
    if placement.sheet.drawing.version >= VALUE_NAMES_THE_NET or len(pins) != 1:
        return
    pin = pins[0].pin
    if pin.hidden and pin.kind == "power_in" and pin.name and pin.name != value:
        message = f"power symbol '{value}' connects to net '{pin.name}', the name of its hidden pin"
        place = placement.sheet.drawing.place(placement.symbol.at, placement.sheet.name)
        report.add(kinds.POWER_NAME_DIFFERS, value, message, place)


def _buckets(near: dict[int, dict[Point, list[Point]]], sheet: WiredSheet) -> dict[Point, list[Point]]:
    buckets: dict[Point, list[Point]] = defaultdict(list)
    for x, y in sheet.ends:
        buckets[x // _NEAR, y // _NEAR].append((x, y))
    near[sheet.sheet.number] = buckets
    return buckets


def _nearest(at: Point, buckets: dict[Point, list[Point]]) -> float:
    """Distance of the nearest wire end within reach [100 nm]; 0 if there is none."""
    x, y = at
    column, row = x // _NEAR, y // _NEAR
    best = 0.0
    for i in (column - 1, column, column + 1):
        for j in (row - 1, row, row + 1):
            for ex, ey in buckets.get((i, j), ()):
                gap = float((ex - x) ** 2 + (ey - y) ** 2) ** 0.5
                if 0 < gap <= _NEAR and (not best or gap < best):
                    best = gap
    return best
