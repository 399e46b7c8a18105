"""One sheet instance becomes nodes: wires, pins, labels, junctions and sheet pins that share a point are joined."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field

from analyzer.findings import reading as kinds
from analyzer.reading.buses import Bus
from analyzer.reading.drawing import Label
from analyzer.reading.geometry import Point, WireIndex
from analyzer.reading.hierarchy import SheetInstance
from analyzer.reading.joins import Netting
from analyzer.reading.names import Rank, meant, written
from analyzer.reading.placement import PlacedPin, Placement
from analyzer.reading.report import Report

VALUE_NAMES_THE_NET = 20230221
"""From this format on a power symbol's value names its net; before, a hidden pin's name does."""

RANKS = {"local": Rank.LOCAL_LABEL, "global": Rank.GLOBAL_LABEL, "hierarchical": Rank.HIERARCHICAL_LABEL}

LOCAL = {Rank.LOCAL_POWER, Rank.LOCAL_LABEL, Rank.HIERARCHICAL_LABEL}

Named = tuple[int, str, Rank]
"""A node, a name it bears, and what kind of thing bears it."""

Expand = Callable[[str], str]
ReadBus = Callable[[str, SheetInstance, Point], "Bus | None"]


@dataclass(frozen=True, slots=True)
class BusLabel:
    """A bus text on a sheet: on a label, or on a sheet pin (`kind` "pin")."""

    text: str
    kind: str
    bus: Bus
    line: int


@dataclass(slots=True)
class WiredSheet:
    """What other sheets, the bus joiner and the checks need to know of a wired sheet instance.

    Attributes:
        sheet: The instance.
        hierarchical: Meant text of hierarchical labels → node.
        sheet_pins: (position of the sheet symbol, meant text) → node.
        bus_labels: Bus texts with the bus line they stand on.
        bus_pins: (position of the sheet symbol, meant text) → bus text of that pin.
        index: Finds wires under a point.
        ends: Ends of wires.
        drawn_names: For each net as drawn (before equal names are joined) its names, strongest first.
    """

    sheet: SheetInstance
    index: WireIndex
    ends: set[Point]
    drawn_names: list[list[tuple[Rank, str]]] = field(default_factory=list)
    hierarchical: dict[str, int] = field(default_factory=dict)
    sheet_pins: dict[tuple[int, str], int] = field(default_factory=dict)
    bus_labels: list[BusLabel] = field(default_factory=list)
    bus_pins: dict[tuple[int, str], BusLabel] = field(default_factory=dict)


class _Lines:
    """Wires, or buses, of one sheet: nodes by point, and which line lies under a point."""

    def __init__(self, netting: Netting, lines: Iterable[tuple[Point, Point]]) -> None:
        self._joins = netting.joins
        self.at: dict[Point, int] = {}
        segments = []
        for start, end in lines:
            node = self.node(start)
            self._joins.join(node, self.node(end))
            segments.append((start, end, node))
        self.index = WireIndex(segments)
        self.ends = set(self.at)

    def node(self, at: Point) -> int:
        found = self.at.get(at)
        if found is None:
            found = self.at[at] = self._joins.new()
        return found

    def tap(self, at: Point) -> int | None:
        """Join all lines under a point, ends included, with what stands there; None if nothing does."""
        node = self.at.get(at)
        for under in self.index.under(at):
            if node is None:
                node = self.at[at] = under
            else:
                self._joins.join(node, under)
        return node


def wire_sheet(
    sheet: SheetInstance,
    placements: list[Placement],
    netting: Netting,
    expand: Expand,
    read_bus: ReadBus,
    report: Report,
) -> WiredSheet:
    """Join everything on one sheet instance that KiCad joins.

    Args:
        sheet: The instance.
        placements: Its symbols.
        netting: Takes nodes and names.
        expand: Puts text variables into a label's text.
        read_bus: Takes a bus text apart.
        report: Takes labels that touch nothing.
    """
    drawing = sheet.drawing
    wires = _Lines(netting, drawing.wires)
    buses = _Lines(netting, drawing.buses)
    wired = WiredSheet(sheet, wires.index, wires.ends)
    named: list[Named] = []
    for placement in placements:
        for pin in placement.pins:
            if pin.pin.kind == "no_connect":
                pin.node = netting.joins.new()  # never joins anything, wired or stacked
            else:
                pin.node = wires.node(pin.at)
    for at in drawing.junctions:
        wires.tap(at)
        buses.tap(at)
    occupied = set(wires.at)
    touchable = occupied.union(at for symbol in drawing.sheets for _, at in symbol.pins)
    for label in drawing.labels:
        text = meant(expand(label.text))
        if not _attach(label, text, sheet, wires, buses, wired, named, netting, read_bus) and label.at not in touchable:
            report.add(
                kinds.LABEL_LOOSE,
                text,
                f"label '{text}' touches neither a wire nor a pin",
                drawing.place(label.at, sheet.name),
            )
        occupied.add(label.at)
    for at in drawing.no_connects:
        node = wires.tap(at)
        if node is not None:
            netting.no_connects.add(node)
    for placement in placements:
        for pin in placement.pins:
            _power(pin, sheet, named, expand)
    for position, symbol in enumerate(drawing.sheets):
        for raw, at in symbol.pins:
            text = meant(expand(raw))
            bus = read_bus(text, sheet, at)
            if bus is not None:
                line = buses.tap(at)
                line = netting.joins.new() if line is None else line
                wired.bus_pins[position, text] = BusLabel(text, "pin", bus, line)
                continue
            under = wires.tap(at) if at in occupied or wires.index.under(at) else None
            node = netting.joins.new() if under is None else under
            if (position, text) in wired.sheet_pins:
                netting.joins.join(node, wired.sheet_pins[position, text])
            wired.sheet_pins[position, text] = node
            named.append((node, text, Rank.SHEET_PIN))
    wired.drawn_names = _names_by_net(named, netting)
    netting.drawn |= {sheet.name + written(names[0][1]) for names in wired.drawn_names if names[0][0] in LOCAL}
    for node, name, rank in named:
        netting.name(node, sheet, name, rank)
    return wired


def _names_by_net(named: list[Named], netting: Netting) -> list[list[tuple[Rank, str]]]:
    nets: dict[int, list[tuple[Rank, str]]] = {}
    for node, name, rank in named:
        nets.setdefault(netting.joins.root(node), []).append((rank, name))
    return [sorted(names) for names in nets.values()]


def _attach(
    label: Label,
    text: str,
    sheet: SheetInstance,
    wires: _Lines,
    buses: _Lines,
    wired: WiredSheet,
    named: list[Named],
    netting: Netting,
    read_bus: ReadBus,
) -> bool:
    """Give a label's name to what lies under it; False if that is no wire and no bus."""
    bus = read_bus(text, sheet, label.at)
    if bus is not None:
        line = buses.tap(label.at)
        if line is None and label.kind == "local":
            return False  # off its bus it names nothing
        wired.bus_labels.append(BusLabel(text, label.kind, bus, netting.joins.new() if line is None else line))
        return True
    touches = bool(wires.index.under(label.at))
    node = wires.tap(label.at)
    if node is None:
        node = wires.node(label.at)
    named.append((node, text, RANKS[label.kind]))
    if label.kind == "hierarchical":
        wired.hierarchical[text] = node
    return touches


def _power(placed: PlacedPin, sheet: SheetInstance, named: list[Named], expand: Expand) -> None:
    pin, owner = placed.pin, placed.owner
    library = owner.library
    if pin.kind != "power_in" or library is None:
        return
    if library.power:
        name = owner.fields.get("Value", "")
        if sheet.drawing.version < VALUE_NAMES_THE_NET and pin.hidden and len(owner.pins) == 1 and pin.name:
            name = pin.name
        rank = Rank.GLOBAL_POWER if library.power == "global" else Rank.LOCAL_POWER
    elif pin.hidden:
        name, rank = pin.name, Rank.GLOBAL_POWER
    else:
        return
    if name:
        named.append((placed.node, meant(expand(name)), rank))
