"""What leads current from rail to rail: the channels of regulators and passages, and filter resistors."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from analyzer.circuit import Component
from analyzer.draws.board import Board
from analyzer.draws.kinds import takes_supply
from analyzer.draws.resistances import Resistances, is_rail, rail_node, rail_of
from analyzer.draws.resistors import gap
from analyzer.draws.tree import Edge
from analyzer.evidence import Evidence, Grade
from analyzer.load import Gap
from analyzer.quantity import Span
from analyzer.rail import Rail, Wiring
from analyzer.rule import Role, Topology
from analyzer.wording import show_span

_FILTER_LOSS = 0.05
InputCurrent = Callable[[Wiring, Span], Evidence | None]
"""(wiring, load of its output [A]) → current from its input rail [A], None if it cannot be known."""


def find_edges(board: Board, network: Resistances, input_current: InputCurrent) -> tuple[list[Edge], list[Gap]]:
    """The edges of channels, and gaps for those whose input rail is not known."""
    edges: list[Edge] = []
    gaps: list[Gap] = []
    between = {frozenset((resistor.a, resistor.b)) for resistor in network.resistors}
    for wiring in board.rails.wirings:
        if not wiring.part.component.fitted or wiring.is_off:
            continue
        above, below = _live(board, wiring.input_rail), _live(board, wiring.output_rail)
        if above is None:
            gaps += _lost(board, wiring)
            continue
        if above == below:
            continue  # bypassed: nothing flows through it
        fed = frozenset((rail_node(above), rail_node(below or "")))
        if wiring.channel.topology is Topology.SHUNT and fed in between:
            continue  # the resistor in front of it is in the network
        takes = partial(input_current, wiring)
        share = _share(board, wiring, below)
        edges.append(Edge(wiring.part.component, wiring.channel.name, above, below, takes, share))
        control = _live(board, wiring.control_rail)
        if control and wiring.channel.topology is Topology.LINEAR_TWO_SUPPLY:
            name = f"{wiring.channel.name} control".lstrip()
            edges.append(Edge(wiring.part.component, name, control, below, partial(_control, wiring), share))
    return edges, gaps


def passage_edges(board: Board, network: Resistances) -> tuple[list[Edge], frozenset[str]]:
    """Discrete parts through which a rail is fed, as edges, and their keys: what flows there is the load of the rail.

    Besides the feeds that the rails stage found, a resistor that alone leads from a fed rail to one without a feed.
    """
    wired = {(wiring.part.ref, wiring.channel.name, wiring.input_rail) for wiring in board.rails.wirings}
    edges = []
    for rail in board.rails.rails:
        for feed in rail.feeds:
            above = _live(board, feed.from_rail)
            if above is None or rail.is_ground or (feed.ref, feed.channel, above) in wired:
                continue
            # further inputs of a power multiplexer come here too
            edges += [
                Edge(component, feed.channel, above, rail.name, partial(_passed, component, rail.name), feed.share)
                for component in board.circuit.by_ref.get(feed.ref, ())[:1]
            ]
    for resistor in network.resistors:
        if not (is_rail(resistor.a) and is_rail(resistor.b)):
            continue
        a, b = (board.rails.by_name[rail_of(node)] for node in (resistor.a, resistor.b))
        if a.is_ground or b.is_ground or bool(a.feeds) == bool(b.feeds) or _drops(a, b):
            continue
        above, below = (a.name, b.name) if a.feeds else (b.name, a.name)
        edges.append(Edge(resistor.component, "", above, below, partial(_passed, resistor.component, below)))
    return edges, frozenset(edge.component.key for edge in edges)


def _drops(a: Rail, b: Rail) -> bool:
    """Whether two rails' voltages differ by more than a filter resistor loses: then Ohm's law says what flows."""
    if a.volts is None or b.volts is None:
        return False
    one, other = a.volts.span.nominal, b.volts.span.nominal
    return abs(one - other) > _FILTER_LOSS * max(abs(one), abs(other))


def _passed(component: Component, below: str, load: Span) -> Evidence:
    source = f"{component.place}, {component.ref}"
    return Evidence(f"current through {component.ref}", load, "A", source, Grade.DERIVED, f"I = load of {below}")


def _control(wiring: Wiring, load: Span) -> Evidence | None:
    """Current of the control supply: as stated for the load, or the load over the control ratio, the greater."""
    figures, ref = wiring.channel.figures, wiring.part.ref
    spans = []
    if curve := wiring.channel.curves.get("control_current"):
        try:
            spans = [Span.hull(curve.at(max(load.nominal, curve.lowest)), curve.at(max(load.high, curve.lowest)))]
        except ValueError:
            return None
    elif stated := figures.get("control_current"):
        spans = [stated.span]
    if ratio := figures.get("control_ratio"):
        spans.append(Span(load.low / ratio.span.high, load.nominal / ratio.span.nominal, load.high / ratio.span.low))
    if not spans:
        return None
    span = max(spans, key=lambda one: one.high)
    used = tuple(figures[key] for key in ("control_current", "control_ratio") if key in figures)
    source = f"{ref} control supply for {show_span(load, 'A')} of load"
    return Evidence("control current", span, "A", source, Grade.DERIVED, parents=used)


def _live(board: Board, name: str | None) -> str | None:
    rail = board.rails.by_name.get(name) if name else None
    return None if rail is None or rail.is_ground else rail.name


def _share(board: Board, wiring: Wiring, below: str | None) -> float:
    if below is None:
        return 1.0
    feeds = board.rails.by_name[below].feeds
    own = [feed for feed in feeds if feed.ref == wiring.part.ref and feed.channel == wiring.channel.name]
    return own[0].share if own else 1.0


def _lost(board: Board, wiring: Wiring) -> list[Gap]:
    """A part whose input rail was not found may hang on any rail that its input pins can be traced to."""
    component: Component = wiring.part.component
    if wiring.input_rail is not None:
        return []
    # a part whose input pins are not known has supply pins at least
    pins = wiring.channel.pins.get(Role.INPUT) or [pin for pin in component.pins if takes_supply(pin)]
    outputs = set(wiring.channel.pins.get(Role.OUTPUT, ()))
    rails = [rail for pin in pins if pin not in outputs for rail, _ in board.supplying(pin)]
    why = f"load of {component.ref} not known: its input rail was not found"
    return [gap(component, rail, why) for rail in dict.fromkeys(rails)]
