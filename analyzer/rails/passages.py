"""Discrete parts that pass supply current: series diodes, reverse-protection and switching transistors, filter resistors."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass

from analyzer.circuit import Component, natural_key, plain_name
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rails.kinds import Kind, is_schottky, symbol_of
from analyzer.rails.names import named_volts
from analyzer.rails.power import Power
from analyzer.rails.wiring import diode_end

SCHOTTKY_DROP = Span.between(0.2, 0.5)
SILICON_DROP = Span.between(0.6, 1.0)
UNKNOWN_DIODE_DROP = Span.between(0.2, 1.0)
TRANSISTOR_DROP = Span(0.0, 0.05, 0.2)
FILTER_DROP = Span(0.0, 0.0, 0.1)
MOST_FILTER_OHMS = 100.0


@dataclass(frozen=True, slots=True)
class Passage:
    """A discrete part in a supply path.

    Attributes:
        ref: Its reference.
        source, sink: Groups it passes current from and to; for negative rails the sink is the more positive one's
            source, that is, `source` is always the side that supplies.
        drop: Voltage lost in it [V], positive.
        what: What it is, for reports.
    """

    ref: str
    source: str
    sink: str
    drop: Evidence
    what: str


@dataclass(frozen=True, slots=True)
class _Candidate:
    component: Component
    one: str
    other: str
    is_diode: bool


def find_passages(power: Power, taken: frozenset[str], feeds: Iterable[tuple[str, str]]) -> tuple[Passage, ...]:
    """Discrete passages between supplies.

    Args:
        power: What is known of the groups.
        taken: Keys of parts that belong to converters.
        feeds: (input group, output group) of recognised parts.
    """
    edges = tuple(dict.fromkeys(feeds))
    candidates = tuple(_candidates(power, taken, edges))
    between = _between(candidates)
    fed = {sink for _, sink in edges} | {group for group in power.mesh.members if power.is_entry(group)}
    fed |= {group for group in power.rails if power.sources(group)} - {c.other for c in candidates if c.is_diode}
    found: dict[tuple[str, str, str], Passage] = {}
    while True:
        fresh: set[str] = set()
        for candidate in candidates:
            passage = _settle(power, candidate, fed, between, edges)
            if passage is not None:
                mark = _mark(passage.ref, passage.source, passage.sink)
                if mark not in found:
                    found[mark] = passage
                    fresh.add(passage.sink)
        if not fresh - fed:
            break
        fed |= fresh
    for candidate in candidates:
        marks = _mark(candidate.component.ref, candidate.one, candidate.other)
        if marks not in found and not candidate.is_diode and all(g in power.rails for g in (candidate.one, candidate.other)):
            # neither end is known to be fed: the body diode says which way it was meant
            source, sink = _body_diode(candidate)
            found[marks] = Passage(candidate.component.ref, source, sink, _drop(candidate.component, False), "transistor")
    every = tuple(found.values())
    every += tuple(_filters(power, fed | {passage.sink for passage in every}, edges))
    return tuple(sorted(every, key=lambda passage: (natural_key(passage.ref), passage.source, passage.sink)))


def _mark(ref: str, one: str, other: str) -> tuple[str, str, str]:
    return (ref, min(one, other), max(one, other))


def _candidates(power: Power, taken: frozenset[str], edges: tuple[tuple[str, str], ...]) -> Iterable[_Candidate]:
    of = power.mesh.groups.of
    for component in power.mesh.circuit.components:
        kind = power.mesh.joined.kinds[component.key]
        if kind not in (Kind.DIODE, Kind.TRANSISTOR) or not component.fitted or component.key in taken:
            continue
        if kind is Kind.DIODE:
            anodes = dict.fromkeys(of(pin.net) for pin in component.pins if diode_end(pin) == "A")
            cathodes = dict.fromkeys(of(pin.net) for pin in component.pins if diode_end(pin) == "K")
            pairs = [(a, k) for a in anodes for k in cathodes]
        else:
            sources = dict.fromkeys(of(p.net) for p in component.pins if plain_name(p.name).upper() in ("S", "SOURCE", "S1", "S2", "S3"))
            drains = dict.fromkeys(of(p.net) for p in component.pins if plain_name(p.name).upper() in ("D", "DRAIN", "D1", "D2", "D3", "D4"))
            pairs = [(d, s) for d in drains for s in sources] if len(sources) == len(drains) == 1 else []
        for one, other in pairs:
            if one != other and not {one, other} & (power.ground | power.mesh.joined.pulsed) and not (
                power.is_boot(one) or power.is_boot(other)
            ):
                yield _Candidate(component, one, other, kind is Kind.DIODE)


def _between(candidates: tuple[_Candidate, ...]) -> frozenset[str]:
    """Groups between two transistors back to back."""
    count: dict[str, int] = {}
    for candidate in candidates:
        if not candidate.is_diode:
            for group in (candidate.one, candidate.other):
                count[group] = count.get(group, 0) + 1
    return frozenset(group for group, number in count.items() if number > 1)


def _settle(
    power: Power, candidate: _Candidate, fed: set[str], between: frozenset[str], edges: tuple[tuple[str, str], ...]
) -> Passage | None:
    one, other = candidate.one, candidate.other
    if candidate.is_diode:
        return _settle_diode(power, candidate, fed, edges)
    if not all(group in power.rails or power.is_entry(group) or group in between for group in (one, other)):
        return None
    if one in fed and other in fed:
        source, sink = _body_diode(candidate)
    elif one in fed or other in fed:
        source, sink = (one, other) if one in fed else (other, one)
    else:
        return None
    if _downstream(sink, source, edges):
        return None
    return Passage(candidate.component.ref, source, sink, _drop(candidate.component, False), "transistor")


def _settle_diode(
    power: Power, candidate: _Candidate, fed: set[str], edges: tuple[tuple[str, str], ...]
) -> Passage | None:
    anode, cathode = candidate.one, candidate.other
    source, sink = anode, cathode
    if any(_is_negative(power, group) for group in (anode, cathode)):
        source, sink = cathode, anode
    if source not in fed or (sink not in power.rails):
        return None
    if (sink, source) in edges or _downstream(sink, source, edges):
        return None  # from a regulator's output back to its input: protection, blocks in use
    return Passage(candidate.component.ref, source, sink, _drop(candidate.component, True), "diode")


def _is_negative(power: Power, group: str) -> bool:
    volts = [named for net in power.names(group) if (named := named_volts(net))]
    return bool(volts) and all(item.volts < 0 for item in volts)


def _downstream(start: str, goal: str, edges: tuple[tuple[str, str], ...]) -> bool:
    """Whether recognised parts lead from `start` to `goal`."""
    seen, queue = {start}, [start]
    for group in queue:
        for source, sink in edges:
            if source == group and sink not in seen:
                seen.add(sink)
                queue.append(sink)
    return goal in seen


def _body_diode(candidate: _Candidate) -> tuple[str, str]:
    """(source, sink) by the body diode: drain to source in a P-channel part, source to drain in an N-channel one."""
    drain, source = candidate.one, candidate.other
    return (source, drain) if channel_type(candidate.component) == "N" else (drain, source)


_P = re.compile(r"P[-_ ]?(?:channel|CH\b|MOS|FET)|(?<![a-z])PMOS|Q_PMOS", re.IGNORECASE)
_N = re.compile(r"N[-_ ]?(?:channel|CH\b|MOS|FET)|(?<![a-z])NMOS|Q_NMOS", re.IGNORECASE)


def channel_type(component: Component) -> str:
    """ "P" or "N" by the part's own texts; "" if they do not say, or say both."""
    texts = " ".join((symbol_of(component), component.value, component.description, component.keywords))
    p, n = bool(_P.search(texts)), bool(_N.search(texts))
    return "P" if p and not n else "N" if n and not p else ""


def _drop(component: Component, is_diode: bool) -> Evidence:
    if not is_diode:
        return _presumed(component, TRANSISTOR_DROP, "transistor, on-resistance not stated")
    if is_schottky(component):
        return _presumed(component, SCHOTTKY_DROP, "Schottky diode, common practice")
    if re.search(r"(?<![a-z0-9])1N(?:4148|400\d|540\d|914)|silicon|rectifier|S1[A-M]\b|switching diode", " ".join((component.value, component.description)), re.IGNORECASE):
        return _presumed(component, SILICON_DROP, "silicon diode, common practice")
    return _presumed(component, UNKNOWN_DIODE_DROP, "diode of unknown kind, common practice")


def _presumed(component: Component, span: Span, note: str) -> Evidence:
    return Evidence(f"drop of {component.ref}", span, "V", f"presumed for {component.ref} '{component.value}'", Grade.PRESUMED, note=note)


def _filters(power: Power, fed: set[str], edges: tuple[tuple[str, str], ...]) -> Iterable[Passage]:
    """Supply pins behind a small resistor: the rail feeds them, less a drop nobody stated."""
    sinks = {sink for _, sink in edges}
    for group in sorted(power.rails - fed - sinks):
        there = [
            (component, far)
            for component, _, far in power.mesh.by_group.get(group, ())
            if far in power.rails and (branch := power.mesh.resistance(component, group, far)) and branch.span.nominal <= MOST_FILTER_OHMS
        ]
        if len(there) == 1 and there[0][1] not in power.ground:
            component, far = there[0]
            drop = Evidence(
                f"drop of {component.ref}", FILTER_DROP, "V", f"presumed for {component.ref} '{component.value}'", Grade.PRESUMED,
                note="resistor in the supply path, current not stated",
            )
            yield Passage(component.ref, far, group, drop, "resistor")
