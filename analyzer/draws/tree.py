"""The tree of currents: a rail's load is its own draws and what the regulators and passages below it take.

Solved from the leaves up. What a channel takes from its input is the business of its topology and comes in as a
function. Where a rail below is not fully known, what is known of it counts as a lower bound and the part is a gap on
the rail above; nothing unknown ever becomes zero.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from graphlib import CycleError, TopologicalSorter
from itertools import pairwise

from analyzer.circuit import Component, natural_key
from analyzer.evidence import Evidence
from analyzer.findings import currents as kinds
from analyzer.findings.base import Finding
from analyzer.load import Draw, Gap, Pulse, RailLoad, joined_pulse
from analyzer.quantity import ZERO, Span, total


@dataclass(frozen=True, slots=True)
class Edge:
    """What leads current from one rail to another: one channel of a regulator or passage, or a filter resistor.

    Attributes:
        component: The part.
        channel: Name of the channel.
        above: Rail it takes its current from.
        below: Rail it feeds; None if none was found.
        takes: Load of the rail below [A] → current from the rail above [A], None if it cannot be known.
        share: Fraction of the load below that it carries.
    """

    component: Component
    channel: str
    above: str
    below: str | None
    takes: Callable[[Span], Evidence | None]
    share: float = 1.0

    @property
    def depends(self) -> str | None:
        """The rail whose load must be known first."""
        return self.below if self.share else None


@dataclass(frozen=True)
class Tree:
    """The solved tree: the load of every rail, what every channel takes where it is known, and findings."""

    loads: Mapping[str, RailLoad]
    input_amps: Mapping[tuple[str, str], Evidence]
    findings: tuple[Finding, ...] = ()


@dataclass
class _Rail:
    draws: list[Draw] = field(default_factory=list)
    gaps: dict[str, Gap] = field(default_factory=dict)


def solve_tree(rails: Iterable[str], draws: Iterable[Draw], gaps: Iterable[Gap], edges: Iterable[Edge]) -> Tree:
    """The load of every rail, given the draws and gaps of the parts themselves."""
    sums: dict[str, _Rail] = {rail: _Rail() for rail in rails}
    for draw in draws:
        sums[draw.rail].draws.append(draw)
    for gap in gaps:
        sums[gap.rail].gaps.setdefault(gap.key, gap)
    order, kept, cut, findings = _order(sums, list(edges))
    for edge in cut:
        _miss(sums[edge.above], edge, "it is part of a circle of feeds")
    above: dict[str, list[Edge]] = defaultdict(list)
    for edge in kept:
        above[edge.above].append(edge)
    taken: dict[tuple[str, str], Evidence] = {}
    solved: dict[str, RailLoad] = {}
    for rail in order:
        for edge in above[rail]:
            _add(sums[rail], edge, solved, taken)
        solved[rail] = _load(rail, sums[rail])
    return Tree({rail: solved[rail] for rail in sums}, taken, tuple(findings))


def _add(here: _Rail, edge: Edge, solved: Mapping[str, RailLoad], taken: dict[tuple[str, str], Evidence]) -> None:
    """Put what one edge takes on the rail above it."""
    component = edge.component
    if edge.below is None:
        _miss(here, edge, "its output leads to no rail")
        return
    below = solved[edge.below] if edge.share else RailLoad(edge.below, (), (), ZERO)
    amps = edge.takes(below.known.scaled(edge.share))
    if amps is None:
        _miss(here, edge, "what it takes from its input cannot be computed")
        return
    is_known, pulse = _pulse(edge, below)
    if not is_known:
        _miss(here, edge, f"what it takes while {edge.below} is pulsed cannot be computed")
    elif below.is_complete:
        taken[component.key, edge.channel] = amps
    else:
        _miss(here, edge, f"{edge.below} has gaps")
        if amps.span.high == 0:
            return  # nothing known yet is no draw of nothing
    here.draws.append(Draw(component.ref, component.key, edge.above, amps, "regulator", pulse))


def _miss(here: _Rail, edge: Edge, why: str) -> None:
    part = edge.component
    why = f"load of {part.ref} not known: {why}"
    here.gaps.setdefault(part.key, Gap(part.ref, part.key, edge.above, part.value, part.place.sheet, why, follows=True))


def _pulse(edge: Edge, below: RailLoad) -> tuple[bool, Pulse | None]:
    """Whether it is known how pulses of the rail below show above, and how they do: None if there are none."""
    pulse = joined_pulse(below.draws)
    if pulse is None:
        return True, None
    peak = edge.takes(pulse.peak.scaled(edge.share))
    rest = edge.takes(pulse.rest.scaled(edge.share))
    if peak is None or rest is None:
        return False, None
    return True, Pulse(peak.span, pulse.on_seconds, pulse.period_seconds, rest.span)


def _load(rail: str, here: _Rail) -> RailLoad:
    draws = tuple(sorted(here.draws, key=lambda draw: (natural_key(draw.ref), draw.key, draw.kind, draw.amps.quantity)))
    gaps = tuple(sorted(here.gaps.values(), key=lambda gap: (natural_key(gap.ref), gap.key)))
    known = total([draw.amps.span for draw in draws])
    if known.low < 0:
        # a rail that is given more than it gives still puts nothing back into its feed
        known = Span(*(max(corner, 0.0) for corner in known.corners))
    return RailLoad(rail, draws, gaps, known)


def _order(
    rails: Mapping[str, _Rail], edges: list[Edge]
) -> tuple[tuple[str, ...], list[Edge], list[Edge], list[Finding]]:
    """Rails from the leaves up, the edges that are left, those cut out of circles, and a finding for each circle."""
    cut: list[Edge] = []
    findings: list[Finding] = []
    while True:
        graph: dict[str, list[str]] = {rail: [] for rail in rails}
        for edge in edges:
            if edge.depends is not None:
                graph[edge.above].append(edge.depends)
        try:
            return tuple(TopologicalSorter(graph).static_order()), edges, cut, findings
        except CycleError as error:
            circle: list[str] = error.args[1]
            # graphlib lists each rail before the one that depends on it
            steps = {(above, below) for below, above in pairwise(circle)}
            gone = [edge for edge in edges if (edge.above, edge.depends) in steps]
            edges = [edge for edge in edges if (edge.above, edge.depends) not in steps]
            cut += gone
            findings.append(_circle(circle[::-1], gone))


def _circle(path: list[str], gone: Iterable[Edge]) -> Finding:
    refs = sorted({edge.component.ref for edge in gone}, key=natural_key)
    start = min(range(len(path) - 1), key=lambda n: natural_key(path[n]))
    turned = [*path[start:-1], *path[: start + 1]]
    return kinds.CIRCULAR_LOAD.found(turned[0], f"{' → '.join(turned)}, through {', '.join(refs)}")
