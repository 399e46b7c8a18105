"""Discrete parts that pass supply current: series diodes, power-path transistors, switches, filter resistors."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from itertools import pairwise

from analyzer.circuit import Component, natural_key, plain_name
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rails.kinds import Kind, is_schottky, symbol_of
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
    kind: Kind

    @property
    def is_diode(self) -> bool:
        """Whether it conducts one way only."""
        return self.kind is Kind.DIODE


def find_passages(power: Power, taken: frozenset[str], feeds: Iterable[tuple[str, str]]) -> tuple[Passage, ...]:
    """Discrete passages between supplies.

    Args:
        power: What is known of the groups.
        taken: Keys of parts that belong to converters.
        feeds: (input group, output group) of recognised parts.
    """
    edges = tuple(dict.fromkeys(feeds))
    candidates = tuple(_candidates(power, taken))
    between = _between(candidates)
    behind_diode = {candidate.other for candidate in candidates if candidate.is_diode}
    made = frozenset(sink for _, sink in edges)
    sure = set(made) | {group for group in power.mesh.members if power.is_sure_source(group)}
    fed = sure | {group for group in power.mesh.members if power.is_entry(group)}
    fed |= {group for group in power.rails if power.sources(group)} - behind_diode
    state = _State(power, edges, made, between)
    found: dict[tuple[str, str, str], Passage] = {}
    while True:
        fresh_sure: set[str] = set()
        fresh: set[str] = set()
        for candidate in candidates:
            passage = state.settle(candidate, sure, fed)
            if passage is None:
                continue
            mark = _mark(passage.ref, passage.source, passage.sink)
            if mark not in found:
                found[mark] = passage
                fresh.add(passage.sink)
                fresh_sure |= {passage.sink} if passage.source in sure else set()
        if not (fresh - fed or fresh_sure - sure):
            break
        fed |= fresh
        sure |= fresh_sure
    for candidate in candidates:
        mark = _mark(candidate.component.ref, candidate.one, candidate.other)
        if mark not in found and not candidate.is_diode and {candidate.one, candidate.other} <= power.rails:
            # neither end is known to be fed: the body diode says which way it was meant
            source, sink = _body_diode(candidate)
            found[mark] = Passage(candidate.component.ref, source, sink, _drop(candidate), _what(candidate))
    every = tuple(found.values())
    every += tuple(_filters(power, fed | {passage.sink for passage in every}, edges))
    return tuple(sorted(every, key=lambda passage: (natural_key(passage.ref), passage.source, passage.sink)))


def _mark(ref: str, one: str, other: str) -> tuple[str, str, str]:
    return (ref, min(one, other), max(one, other))


def _candidates(power: Power, taken: frozenset[str]) -> Iterable[_Candidate]:
    barred = power.ground | power.mesh.joined.pulsed
    for component in power.mesh.circuit.components:
        kind = power.mesh.joined.kinds[component.key]
        if kind not in _SERIES or not component.fitted or component.key in taken:
            continue
        for one, other in _pairs(power, component, kind):
            if one != other and not {one, other} & barred and not (power.is_boot(one) or power.is_boot(other)):
                yield _Candidate(component, one, other, kind)


def _pairs(power: Power, component: Component, kind: Kind) -> list[tuple[str, str]]:
    """(anode, cathode), (drain, source) or two contacts, as groups."""
    of = power.mesh.groups.of

    def named(*names: str) -> list[str]:
        return list(dict.fromkeys(of(pin.net) for pin in component.pins if plain_name(pin.name).upper() in names))

    if kind is Kind.TRANSISTOR:
        drains = named("D", "DRAIN", "D1", "D2", "D3", "D4")
        sources = named("S", "SOURCE", "S1", "S2", "S3")
        return [(drains[0], sources[0])] if len(drains) == len(sources) == 1 else []
    if kind is Kind.SWITCH:
        contacts = list(dict.fromkeys(of(pin.net) for pin in component.pins))
        return list(pairwise(contacts)) if len(component.pins) <= 6 else []
    if len(component.pins) == 4 and len(plus := named("+")) == 1 and named("-"):
        inputs = [of(pin.net) for pin in component.pins if pin.name not in ("+", "-")]
        return [(one, plus[0]) for one in dict.fromkeys(inputs)]  # a bridge rectifier
    anodes = dict.fromkeys(of(pin.net) for pin in component.pins if diode_end(pin) == "A")
    cathodes = dict.fromkeys(of(pin.net) for pin in component.pins if diode_end(pin) == "K")
    return [(anode, cathode) for anode in anodes for cathode in cathodes]


def _between(candidates: tuple[_Candidate, ...]) -> frozenset[str]:
    """Groups between two transistors back to back."""
    count: dict[str, int] = {}
    for candidate in candidates:
        if candidate.kind is Kind.TRANSISTOR:
            for group in (candidate.one, candidate.other):
                count[group] = count.get(group, 0) + 1
    return frozenset(group for group, number in count.items() if number > 1)


@dataclass(frozen=True)
class _State:
    """What does not change while passages are settled one after another."""

    power: Power
    edges: tuple[tuple[str, str], ...]
    made: frozenset[str]
    between: frozenset[str]

    def settle(self, candidate: _Candidate, sure: set[str], fed: set[str]) -> Passage | None:
        """The passage a candidate is, as far as is known which groups are fed."""
        direction = self._diode(candidate, sure, fed) if candidate.is_diode else self._switch(candidate, sure, fed)
        if direction is None or _downstream(direction[1], direction[0], self.edges):
            return None  # from a regulator's output back to its input: protection, blocks in use
        return Passage(candidate.component.ref, *direction, _drop(candidate), _what(candidate))

    def _switch(self, candidate: _Candidate, sure: set[str], fed: set[str]) -> tuple[str, str] | None:
        one, other = candidate.one, candidate.other
        if not all(g in self.power.rails or self.power.is_entry(g) or g in self.between for g in (one, other)):
            return None
        for known in (sure, fed):
            if one in known and other in known:
                return _body_diode(candidate)
            if one in known or other in known:
                return (one, other) if one in known else (other, one)
        return None

    def _diode(self, candidate: _Candidate, sure: set[str], fed: set[str]) -> tuple[str, str] | None:
        source, sink = candidate.one, candidate.other
        if any(self.power.is_named_negative(group) for group in (source, sink)):
            source, sink = sink, source
        if source not in fed or sink not in self.power.rails:
            return None
        # into a rail that a regulator makes, only a sure source counts: else it is a clamp at a connector
        return (source, sink) if sink not in self.made or source in sure else None


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
    """Channel of a transistor, "P" or "N", by the part's own texts; "" if they do not say, or say both."""
    texts = " ".join((symbol_of(component), component.value, component.description, component.keywords))
    p, n = bool(_P.search(texts)), bool(_N.search(texts))
    return "P" if p and not n else "N" if n and not p else ""


def _what(candidate: _Candidate) -> str:
    return candidate.kind.value


def _drop(candidate: _Candidate) -> Evidence:
    component = candidate.component
    if candidate.kind is Kind.SWITCH:
        return _presumed(component, Span.exact(0.0), "switch taken as closed")
    if candidate.kind is Kind.TRANSISTOR:
        return _presumed(component, TRANSISTOR_DROP, "transistor, on-resistance not stated")
    if is_schottky(component):
        drop, note = SCHOTTKY_DROP, "Schottky diode, common practice"
    elif _SILICON.search(f"{component.value} {component.description}"):
        drop, note = SILICON_DROP, "silicon diode, common practice"
    else:
        drop, note = UNKNOWN_DIODE_DROP, "diode of unknown kind, common practice"
    if len(component.pins) == 4 and any(pin.name == "+" for pin in component.pins):
        return _presumed(component, drop.scaled(2), f"bridge, two of: {note}")
    return _presumed(component, drop, note)


_SILICON = re.compile(
    r"(?<![a-z0-9])1N(?:4148|400\d|540\d|914)|silicon|rectifier|(?<![a-z0-9])S[1-3][A-M]\b|switching diode",
    re.IGNORECASE,
)
_SERIES = frozenset({Kind.DIODE, Kind.TRANSISTOR, Kind.SWITCH})


def _presumed(component: Component, span: Span, note: str) -> Evidence:
    return Evidence(
        f"drop of {component.ref}",
        span,
        "V",
        f"presumed for {component.ref} '{component.value}'",
        Grade.PRESUMED,
        note=note,
    )


def _filters(power: Power, fed: set[str], edges: tuple[tuple[str, str], ...]) -> Iterable[Passage]:
    """Supply pins behind a small resistor: the rail feeds them, less a drop nobody stated."""
    sinks = {sink for _, sink in edges}
    for group in sorted(power.rails - fed - sinks):
        there = [
            (component, far)
            for component, _, far in power.mesh.by_group.get(group, ())
            if far in power.rails
            and (branch := power.mesh.resistance(component, group, far))
            and branch.span.nominal <= MOST_FILTER_OHMS
        ]
        if len(there) == 1 and there[0][1] not in power.ground:
            component, far = there[0]
            drop = Evidence(
                f"drop of {component.ref}",
                FILTER_DROP,
                "V",
                f"presumed for {component.ref} '{component.value}'",
                Grade.PRESUMED,
                note="resistor in the supply path, current not stated",
            )
            yield Passage(component.ref, far, group, drop, "resistor")
