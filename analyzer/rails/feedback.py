"""Output voltage from the resistive network around the feedback pin, solved exactly, with exact corners.

With the pin at its reference (reference across the lower side) or one reference below the output (across the upper
side), the current that the network drives into the pin is linear in the output voltage; the output is where that
current equals the pin's own. Each resistor enters as a quotient of linear terms, so the extremes lie at corners.
"""

from __future__ import annotations

import itertools
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from analyzer.evidence import Evidence, Grade
from analyzer.quantity import ZERO, Span
from analyzer.rails.links import Groups
from analyzer.rails.network import End, Network, Resistance
from analyzer.rails.nodal import Branch, current_into, node_volts

OUTPUT = "the output"
GROUND = "the ground"
_EXHAUSTIVE = 7


@dataclass(frozen=True, slots=True)
class Drive:
    """Voltage at the end of a leg that is not ground or output.

    Attributes:
        span: The voltage it may have [V].
        reason: What drives it.
    """

    span: Span
    reason: str


@dataclass(frozen=True)
class Solved:
    """Result of a network.

    Attributes:
        volts: The voltage across output and the part's ground; None if it could not be found.
        trouble: Why not.
        reasons: What makes the output adjustable, one line each.
        resistors: Resistors that take part.
        formula: The numbers put in.
    """

    volts: Span | None
    trouble: tuple[str, ...] = ()
    reasons: tuple[str, ...] = ()
    resistors: tuple[Resistance, ...] = ()
    formula: str = ""


@dataclass(frozen=True)
class _Choice:
    """One way the switchable parts can stand: nodes merged, branches added."""

    merged: tuple[tuple[str, str], ...] = ()
    added: tuple[Branch, ...] = ()


def solve_feedback(
    network: Network,
    reference: Span,
    current: Span = ZERO,
    *,
    across: str = "lower",
    drives: Mapping[str, Drive] | None = None,
) -> Solved:
    """Output voltage of a regulator from the network at its feedback pin.

    Args:
        network: The network; groups that are the output end with `End.OUTPUT`.
        reference: Reference voltage of the pin [V], negative for negative regulators.
        current: Current into the pin (reference across "lower") or out of it ("upper") [A].
        across: Which side of the divider the reference is across.
        drives: Voltage of driven legs and other rails, by group.

    Returns:
        The span over all corners and switch positions.
    """
    drives = drives or {}
    trouble = list(network.trouble)
    trouble += [
        f"voltage of {leg.group} in the feedback network is not known"
        for leg in network.legs.values()
        if leg.end in (End.DRIVEN, End.RAIL) and leg.group not in drives
    ]
    if not network.legs_of(End.OUTPUT):
        trouble.append("no resistor leads from the feedback pin to the output")
    if trouble:
        return Solved(None, tuple(dict.fromkeys(trouble)))
    live = _live(network)
    spans = [*(item.span for item in live), reference, current, *(drives[g].span for g in sorted(drives))]
    lows: list[float] = []
    highs: list[float] = []
    nominal: float | None = None
    for choice in _choices(network):
        solver = _Solver(network, live, across, sorted(drives), choice)
        middle = solver.volts([span.nominal for span in spans])
        if middle is None:
            continue
        low, high = _extremes(solver, spans)
        lows.append(low)
        highs.append(high)
        nominal = middle if nominal is None else nominal
    if nominal is None:
        return Solved(None, ("the feedback network fixes no output voltage",))
    reasons = [drives[group].reason for group in sorted(drives) if drives[group].reason]
    reasons += [f"{switch.ref} switches a leg of the divider" for switch in network.switches]
    reasons += [f"{item[0]} is adjustable" for item in network.trimmers]
    low, high = min(lows), max(highs)
    if reasons and reference.nominal > 0:
        low = max(0.0, low)  # a positive regulator cannot pull below its ground
        if nominal < low or high < low:
            return Solved(None, ("the feedback network fixes no output voltage",))
    return Solved(Span(low, nominal, high), (), tuple(reasons), live, _formula(live, reference, across))


def _live(network: Network) -> tuple[Resistance, ...]:
    """Resistances that can carry current: dead ends pruned."""
    ends = {network.tap, *network.legs, *(node for item in network.trimmers for node in item[1:4])}
    ends.update(node for switch in network.switches for pair in switch.pairs for node in pair)
    kept = list(network.resistances)
    while True:
        count: dict[str, int] = {}
        for item in kept:
            for node in (item.one, item.other):
                count[node] = count.get(node, 0) + 1
        pruned = [item for item in kept if all(node in ends or count[node] > 1 for node in (item.one, item.other))]
        if len(pruned) == len(kept):
            return tuple(kept)
        kept = pruned


def _choices(network: Network) -> list[_Choice]:
    """All positions of switched legs and trimmers; the first is "as drawn": switches open, trimmers in the middle."""
    options = [[_Choice(), *(_Choice((pair,)) for pair in switch.pairs)] for switch in network.switches]
    for ref, first, wiper, last, span in network.trimmers:
        places = []
        for part in (0.5, 0.0, 1.0):
            lower = max(part, 1e-9) * span.nominal
            upper = max(1 - part, 1e-9) * span.nominal
            pair = (Branch(ref, first, wiper, lower), Branch(ref, wiper, last, upper))
            places.append(_Choice(added=tuple(branch for branch in pair if branch.one != branch.other)))
        options.append(places)
    return [
        _Choice(
            tuple(pair for choice in combination for pair in choice.merged),
            tuple(branch for choice in combination for branch in choice.added),
        )
        for combination in itertools.islice(itertools.product(*options), 64)
    ]


class _Solver:
    """Output voltage as a function of all numbers that have a tolerance."""

    def __init__(
        self, network: Network, live: Sequence[Resistance], across: str, driven: Sequence[str], choice: _Choice
    ) -> None:
        rename = {leg.group: OUTPUT for leg in network.legs_of(End.OUTPUT)}
        rename.update({leg.group: GROUND for leg in network.legs_of(End.GROUND)})
        merged = Groups()
        for near, far in choice.merged:
            merged.join(rename.get(near, near), rename.get(far, far))
        # a merged set keeps the name of the member whose voltage is fixed
        keep = {merged.of(node): node for node in (*sorted(driven), network.tap, OUTPUT, GROUND)}

        def name(group: str) -> str:
            root = merged.of(rename.get(group, group))
            return keep.get(root, root)

        self.tap = name(network.tap)
        self.live = [(item.ref, name(item.one), name(item.other)) for item in live]
        self.added = [Branch(item.name, name(item.one), name(item.other), item.ohms) for item in choice.added]
        self.driven = driven
        self.upper = across == "upper"

    def volts(self, numbers: Sequence[float]) -> float | None:
        """Output voltage for one set of numbers, in the order: resistors, reference, pin current, drives."""
        count = len(self.live)
        reference, pin_current = numbers[count], numbers[count + 1]
        branches = [
            Branch(name, one, other, ohms)
            for (name, one, other), ohms in zip(self.live, numbers, strict=False)
            if one != other
        ]
        branches += [branch for branch in self.added if branch.one != branch.other]
        fixed = {GROUND: 0.0, **dict(zip(self.driven, numbers[count + 2 :], strict=True))}
        branches = _reachable(branches, {*fixed, OUTPUT, self.tap})
        if not branches or self.tap in fixed or self.tap == OUTPUT:
            return None
        wanted = -pin_current if self.upper else pin_current
        flows = []
        for trial in (0.0, 1.0):
            tap = trial - reference if self.upper else reference
            volts = node_volts(branches, {**fixed, OUTPUT: trial, self.tap: tap})
            if volts is None:
                return None
            flows.append(current_into(self.tap, branches, volts))
        slope = flows[1] - flows[0]
        scale = sum(1 / branch.ohms for branch in branches)
        if abs(slope) <= 1e-12 * scale:
            return None
        return (wanted - flows[0]) / slope


def _reachable(branches: list[Branch], held: set[str]) -> list[Branch]:
    """Branches without those that end in the air or float as a whole, so that the system is never singular."""
    kept = branches
    while True:
        count: dict[str, int] = {}
        for branch in kept:
            for node in (branch.one, branch.other):
                count[node] = count.get(node, 0) + 1
        pruned = [
            branch for branch in kept if all(count[node] > 1 or node in held for node in (branch.one, branch.other))
        ]
        if len(pruned) == len(kept):
            break
        kept = pruned
    islands = Groups()
    for branch in kept:
        islands.join(branch.one, branch.other)
    alive = {islands.of(node) for node in held}
    return [branch for branch in kept if islands.of(branch.one) in alive]


def _extremes(solver: _Solver, spans: Sequence[Span]) -> tuple[float, float]:
    middle = [span.nominal for span in spans]
    loose = [number for number, span in enumerate(spans) if not span.is_exact]
    low = high = middle_volts = solver.volts(middle) or 0.0
    if len(loose) <= _EXHAUSTIVE:
        for signs in itertools.product((False, True), repeat=len(loose)):
            numbers = list(middle)
            for number, up in zip(loose, signs, strict=True):
                numbers[number] = spans[number].high if up else spans[number].low
            volts = solver.volts(numbers)
            if volts is not None:
                low, high = min(low, volts), max(high, volts)
        return low, high
    for want_high in (False, True):
        numbers, reached = list(middle), middle_volts
        improved = True
        rounds = 0
        while improved and rounds < 8:
            improved = False
            rounds += 1
            for number in loose:
                for end in (spans[number].low, spans[number].high):
                    trial = [*numbers[:number], end, *numbers[number + 1 :]]
                    volts = solver.volts(trial)
                    if volts is not None and (volts > reached if want_high else volts < reached):
                        numbers, reached, improved = trial, volts, True
        low, high = min(low, reached), max(high, reached)
    return low, high


def _formula(live: Sequence[Resistance], reference: Span, across: str) -> str:
    listed = ", ".join(f"{item.ref} {item.span.nominal:g} Ω" for item in live)
    return f"network solved with {reference.nominal:g} V across the {across} side: {listed}"


def divider_evidence(
    solved: Solved, reference: Evidence, current: Evidence | None, where: str, tolerance: Evidence
) -> Evidence:
    """The solved voltage as evidence, with the reference, pin current and resistor tolerance it rests on."""
    if solved.volts is None:
        raise ValueError("no voltage was found")
    notes = list(solved.reasons)
    parents = [reference]
    if current is not None:
        parents.append(current)
    if any(not item.tolerance_stated for item in solved.resistors):
        parents.append(tolerance)
        if tolerance.grade is Grade.PRESUMED:
            notes.append(f"resistor tolerance taken as {tolerance.span.high:.3g} (fraction): not stated")
    return Evidence(
        "output voltage", solved.volts, "V", where, Grade.DERIVED, solved.formula, tuple(parents), "; ".join(notes)
    )
