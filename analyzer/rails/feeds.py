"""What feeds what: regulators, passages, connectors and batteries as edges between groups."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from graphlib import CycleError, TopologicalSorter

from analyzer.circuit import natural_key, plain_name
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rails.followers import follower
from analyzer.rails.kinds import Kind
from analyzer.rails.passages import SILICON_DROP, Passage
from analyzer.rails.power import Power
from analyzer.rails.wiring import Trace
from analyzer.rule import PASSAGES, Topology

SWITCH_DROP = Span(0.0, 0.05, 0.2)


@dataclass(frozen=True)
class Edge:
    """One feed.

    Attributes:
        ref, kind, channel: As in `rail.Feed`.
        source: Group it draws from; None from outside.
        sink: Group it feeds.
        first: References between its own pin and the net where it arrives.
        trace: The channel, for recognised parts.
        drop: What it loses, for passages.
        gives: Voltage it gives by itself, for discrete series regulators.
        is_opaque: True where nothing is known of what it gives.
    """

    ref: str
    kind: str
    channel: str
    source: str | None
    sink: str
    first: tuple[str, ...] = ()
    trace: Trace | None = None
    drop: Evidence | None = None
    gives: Evidence | None = None
    is_opaque: bool = False


def part_edges(power: Power, traces: Iterable[Trace]) -> tuple[Edge, ...]:
    """Feeds of recognised parts that are fitted, switched on, and not bridged."""
    of = power.mesh.groups.of
    found: list[Edge] = []
    for trace in traces:
        if not trace.part.component.fitted or trace.is_off or trace.output is None:
            continue
        sink = of(trace.output)
        is_passage = trace.channel.topology in PASSAGES
        inputs = trace.inputs if trace.channel.topology is Topology.POWER_MUX else trace.inputs[:1]
        drop = passage_drop(trace) if is_passage else None
        kind = "passage" if is_passage else "regulator"
        sources: list[str | None] = [of(net) for net in inputs]
        found += [
            Edge(trace.part.ref, kind, trace.channel.name, source, sink, trace.first, trace, drop)
            for source in sources or [None]
            if source != sink
        ]
    return tuple(found)


def passage_drop(trace: Trace) -> Evidence:
    """Drop of a recognised passage: from its rule, else presumed for its kind."""
    figures = trace.channel.figures
    if "forward_drop" in figures:
        return figures["forward_drop"]
    if "on_resistance" in figures and "output_current_max" in figures:
        ohms, amps = figures["on_resistance"], figures["output_current_max"]
        worst = ohms.span.high * amps.span.high
        return Evidence(
            f"drop of {trace.part.ref}",
            Span(0.0, worst / 2, worst),
            "V",
            f"{trace.part.ref} on-resistance and rating",
            Grade.DERIVED,
            f"0 to {ohms.span.high:g} Ω · {amps.span.high:g} A",
            (ohms, amps),
        )
    span = SILICON_DROP if trace.channel.topology is Topology.SERIES_DIODE else SWITCH_DROP
    return Evidence(
        f"drop of {trace.part.ref}",
        span,
        "V",
        f"presumed for {trace.channel.topology.value}",
        Grade.PRESUMED,
        note="drop not stated, common practice",
    )


def discrete_edges(passages: Iterable[Passage]) -> tuple[Edge, ...]:
    """Feeds through discrete parts."""
    return tuple(
        Edge(passage.ref, "passage", "", passage.source, passage.sink, (), None, passage.drop) for passage in passages
    )


def follower_edges(power: Power, taken: frozenset[str], fed: frozenset[str]) -> tuple[Edge, ...]:
    """Feeds through bipolar transistors into supplies that nothing else feeds."""
    found: list[Edge] = []
    for component in power.mesh.circuit.components:
        is_transistor = power.mesh.joined.kinds[component.key] is Kind.TRANSISTOR
        if not is_transistor or not component.fitted or component.key in taken:
            continue
        ends = follower(power, component)
        if ends is not None and ends[1] not in fed:
            source, sink, gives = ends
            found.append(Edge(component.ref, "passage", "", source, sink, gives=gives, is_opaque=gives is None))
    return tuple(found)


_SWITCHES = re.compile(
    r"(?:load|power|limit(?:ed|ing)?|high[- ]side|USB)[- ]switch|ideal diode|e-?fuse|hot[- ]?swap|power distribution"
    r"|current[- ]limit|over-?voltage protect|power multiplexer|power mux",
    re.IGNORECASE,
)
_IN_PIN = re.compile(r"V?IN[A-D1-4]?|V_?IN")
_OUT_PIN = re.compile(r"V?OUT[A-D1-4]?|V_?OUT")


def switch_edges(power: Power, taken: frozenset[str], fed: frozenset[str]) -> tuple[Edge, ...]:
    """Feeds through chips that their own description calls a switch, into supplies that nothing else feeds."""
    of = power.mesh.groups.of
    found: list[Edge] = []
    for component in power.mesh.circuit.components:
        is_chip = power.mesh.joined.kinds[component.key] is Kind.CHIP
        if not is_chip or not component.fitted or component.key in taken or not _SWITCHES.search(component.description):
            continue
        ins = {of(pin.net) for pin in component.pins if _IN_PIN.fullmatch(plain_name(pin.name).upper())} - power.ground
        outs = {
            of(pin.net) for pin in component.pins if _OUT_PIN.fullmatch(plain_name(pin.name).upper())
        } - power.ground
        if len(ins) != 1:
            continue
        (source,) = ins
        for sink in sorted(outs - fed - ins, key=natural_key):
            if sink in power.rails or power.is_entry(sink):
                note = "drop not stated, common practice"
                drop = Evidence(
                    f"drop of {component.ref}", SWITCH_DROP, "V", "presumed for a switch", Grade.PRESUMED, note=note
                )
                found.append(Edge(component.ref, "passage", "", source, sink, drop=drop))
    return tuple(found)


def source_edges(power: Power, groups: Iterable[str], fed: frozenset[str]) -> tuple[Edge, ...]:
    """Sources from outside: batteries everywhere; connectors and chips' supply outputs where nothing else feeds."""
    found: list[Edge] = []
    for group in groups:
        if group not in fed and power.is_stated(group):
            found.append(Edge("", "supply", "", None, group))
            continue
        inside = () if group in fed else power.chip_sources(group)
        found += [Edge(component.ref, "supply", "", None, group) for component in inside]
        if inside:
            continue
        for component, _ in power.sources(group):
            is_battery = power.mesh.joined.kinds[component.key] is Kind.BATTERY
            if is_battery or group not in fed:
                found.append(Edge(component.ref, "battery" if is_battery else "connector", "", None, group))
    return tuple(found)


def cut_cycles(
    needs: dict[str, set[str]], prefer: frozenset[str] = frozenset()
) -> tuple[tuple[str, ...], list[tuple[str, ...]], set[tuple[str, str]]]:
    """Order of groups so that each follows what it needs, with every cycle cut.

    Args:
        needs: For each group, the groups it needs first.
        prefer: Groups at which a cycle is cut first, because other evidence stands in there.

    Returns:
        The order; the cycles found, each as a path that ends where it began; the (group, needed) pairs cut.
    """
    cycles: list[tuple[str, ...]] = []
    cut: set[tuple[str, str]] = set()
    remaining = {group: set(needed) for group, needed in needs.items()}
    while True:
        sorter = TopologicalSorter(
            {group: sorted(remaining[group], key=natural_key) for group in sorted(remaining, key=natural_key)}
        )
        try:
            return tuple(sorter.static_order()), cycles, cut
        except CycleError as error:
            path: Sequence[str] = error.args[1]
            # graphlib lists each node before the one that needs it
            pairs = list(zip(path[1:], path, strict=False))
            pair = min(pairs, key=lambda item: (item[1] not in prefer, natural_key(item[0]), natural_key(item[1])))
            cycles.append(_rotated(path))
            cut.add(pair)
            remaining[pair[0]].discard(pair[1])


def _rotated(path: Sequence[str]) -> tuple[str, ...]:
    body = list(path[:-1])
    start = body.index(min(body, key=natural_key))
    body = body[start:] + body[:start]
    return (*body, body[0])
