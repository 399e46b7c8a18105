"""Closing the budgets: every part's case worked out, judged, and written down as an entry."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import replace

from analyzer.circuit import Circuit
from analyzer.evidence import Evidence, Grade
from analyzer.findings import heat as kinds
from analyzer.findings.base import Finding, Verdict, Weight
from analyzer.findings.currents import POSSIBLE_LOADS
from analyzer.heat import coupling, ratings
from analyzer.heat.case import Case, Worked, corner, nominal, worst
from analyzer.heat.draft import Draft, by_part, draft
from analyzer.heat.headroom import headroom
from analyzer.heat.live import live_numbers
from analyzer.heat.path.board import design_class
from analyzer.heat.pulses import swing_of, worked_swing
from analyzer.heat.remedies import remedies
from analyzer.heat.sensitivity import sensitivity
from analyzer.heat.trail import steps, unique
from analyzer.heat.uncertainty import chance
from analyzer.ledger import Entry, Headroom, Input, Output
from analyzer.load import Loads
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.rail import Rails, Wiring
from analyzer.rule import Rulebook, Topology
from analyzer.settings import Settings
from analyzer.wording import show

_HEATING_FIGURES = ("on_resistance", "forward_drop")
_SETTLING_ROUNDS = 20


def close_entries(
    circuit: Circuit,
    parts: tuple[Part, ...],
    rails: Rails,
    loads: Loads,
    rulebook: Rulebook,
    settings: Settings,
    *,
    known: Iterable[Finding] = (),
    chance_seed: int | None = None,
) -> tuple[Entry, ...]:
    """The budget of every regulator, and of every passage whose resistance or drop is known.

    Args:
        circuit: The circuit as read.
        parts: Recognised parts.
        rails: Rails and wirings.
        loads: Load of every rail.
        rulebook: Rules in force, for generic package figures.
        settings: What was stated.
        known: Findings of earlier stages; open ones about a part or its rails keep its budget open.
        chance_seed: Seed of the Monte-Carlo estimate; None leaves it out.
    """
    wirings = by_part(rails.wirings)
    known = tuple(known)
    silent = {finding.subject: finding.message for finding in known if finding.name == POSSIBLE_LOADS.name}
    matters = [finding for finding in (*circuit.findings, *known) if finding.weight is Weight.OPEN]
    drafts = [
        draft(part, wirings.get(part.key, ()), circuit, rails, loads, rulebook, settings, matters, silent)
        for part in parts
        if _has_entry(part)
    ]
    drafts = [replace(one, findings=(*one.findings, *_informed(one, drafts, settings))) for one in drafts]
    return tuple(
        _entry(one, extra, lost, circuit, rulebook, settings, chance_seed)
        for one, extra, lost in _with_neighbours(drafts, settings)
    )


def _informed(one: Draft, drafts: list[Draft], settings: Settings) -> Iterator[Finding]:
    """What a copper plane would bring over from neighbours of which only the distance is stated."""
    near = coupling.by_distance(one.part.ref, settings.coupling)
    for other in drafts if near else ():
        distance, watts = near.get(other.part.ref), _heat(other, 0.0)
        if distance is not None and watts is not None and other.part.component.fitted:
            kelvin = coupling.plane_estimate(distance) * watts
            message = (
                f"{other.part.ref} makes {show(watts, 'W')} at {show(distance, 'm')}: one copper plane would warm "
                f"{one.part.ref} by about {kelvin:.0f} K (information only)"
            )
            yield kinds.NEIGHBOUR_HEAT.found(one.part.ref, message, key=one.part.key)


def _has_entry(part: Part) -> bool:
    """Passages are entries only where something is known of their heat."""
    return any(
        channel.topology.regulates or any(key in channel.figures or key in channel.curves for key in _HEATING_FIGURES)
        for channel in part.channels
    )


def _with_neighbours(drafts: list[Draft], settings: Settings) -> list[tuple[Draft, float, tuple[str, ...]]]:
    """Each draft with the kelvin its neighbours add, and neighbours whose heat is not known.

    A neighbour's heat may depend on its own temperature, so the rises are settled together.
    """
    pairs = {one.part.ref: coupling.neighbours(one.part.ref, settings.coupling) for one in drafts}
    if not any(pairs.values()):
        return [(one, 0.0, ()) for one in drafts]
    refs = [one.part.ref for one in drafts]
    doubled = {ref for ref in refs if refs.count(ref) > 1}
    rises = dict.fromkeys(pairs, 0.0)
    watts: Mapping[str, float] = {}
    for _ in range(_SETTLING_ROUNDS):
        watts = {
            one.part.ref: heat
            for one in drafts
            if one.part.ref not in doubled
            and one.part.component.fitted
            and (heat := _heat(one, rises[one.part.ref])) is not None
        }
        found = {
            ref: coupling.rise({by: k for by, k in around.items() if by in watts}, watts)
            for ref, around in pairs.items()
        }
        if all(abs(found[ref] - rises[ref]) < 1e-9 for ref in found):
            break
        rises = found
    else:
        # neighbours that heat each other without end: their heat is as good as unknown
        watts = {}
    unfitted = {one.part.ref for one in drafts if not one.part.component.fitted}
    return [
        (one, rises[one.part.ref], tuple(by for by in pairs[one.part.ref] if by not in watts and by not in unfitted))
        for one in drafts
    ]


def _heat(one: Draft, rise: float) -> float | None:
    """Worst heat of a part whose budget lacks nothing that its heat rests on."""
    if not one.case.channels or not one.is_complete:
        return None
    if one.case.path is None and any(channel.model.heats for channel in one.case.channels):
        return None
    try:
        swing = swing_of(one.case)
        worked = worst(_warmer(swing.peak if swing else one.case, rise))
    except ValueError:
        return None
    return None if worked.runs_away else worked.watts


def _warmer(case: Case, rise: float) -> Case:
    return case.with_ambient(case.ambient + Span(0.0, rise, rise)) if rise else case


def _entry(
    one: Draft,
    extra: float,
    lost: tuple[str, ...],
    circuit: Circuit,
    rulebook: Rulebook,
    settings: Settings,
    chance_seed: int | None,
) -> Entry:
    case = _warmer(one.case, extra)
    one = replace(one, case=case, missing=(*one.missing, *(f"heat of its neighbour {ref}" for ref in lost)))
    hottest, middle, case, found = _work(one)
    pulses = case is not one.case
    one = replace(one, case=case)
    missing = one.missing
    findings = list(one.findings)
    if case.channels and hottest is None:
        missing = (*missing, *(finding.message for finding in found if finding.weight is Weight.OPEN))
    findings += found
    fitted = one.part.component.fitted
    if hottest is not None:
        findings += _judged(one, hottest, settings)
    if not fitted:
        missing = ("not fitted",)
        findings = [finding for finding in findings if finding.weight is Weight.NOTE]
    elif missing:
        message = "missing: " + "; ".join(missing)
        findings.append(kinds.BUDGET_OPEN.found(one.part.ref, message, str(one.part.component.place), key=one.part.key))
    grade = Grade.worst([evidence.weakest for evidence in one.evidence]) if one.evidence else Grade.PRESUMED
    if one.part.rule is None or not one.part.rule.verified:
        grade = Grade.PRESUMED
    corners = []
    if middle is not None and hottest is not None:
        corners = [corner(middle, "nominal", case), corner(hottest, "worst", case)]
    room, greatest, rated = _room(case, one.part, settings)
    board, _ = design_class(circuit, settings, one.stated)
    packages = {rule.family: rule for rule in rulebook.packages}
    complete = hottest is not None and hottest.junction is not None and not missing
    one = replace(one, missing=missing)
    return Entry(
        key=one.part.key,
        ref=one.part.ref,
        sheet=one.part.component.place.sheet,
        part=one.part.identity,
        value=one.part.component.value,
        kind=one.part.topology.value,
        fitted=fitted,
        rule=one.part.rule.name if one.part.rule else None,
        package=one.part.package.family,
        input=_input(one.wirings),
        outputs=tuple(_output(wiring, one, number) for number, wiring in enumerate(one.wirings)),
        nominal=corners[0] if corners else None,
        worst=corners[1] if corners else None,
        limit=case.limit,
        data_sheet_limit=one.limits.data_sheet if one.limits else None,
        policy_limit=one.limits.policy if one.limits else None,
        tight_above=case.tight_above,
        headroom=room,
        greatest_load=greatest,
        rated_load=rated,
        verdict=verdict(findings, missing),
        missing=missing,
        grade=grade,
        findings=tuple(findings),
        evidence=tuple(unique(one.evidence)),
        steps=steps(one, case, corners, grade),
        remedies=remedies(one, case, hottest, greatest, packages, board, settings.policy) if hottest else (),
        sensitivity=sensitivity(case, hottest.junction) if hottest and hottest.junction is not None else (),
        chance=chance(case, chance_seed) if chance_seed is not None and complete else None,
        live=live_numbers(case, hottest, extra, steady=not pulses) if hottest else {},
    )


def verdict(findings: Iterable[Finding], missing: tuple[str, ...]) -> Verdict:
    """The heaviest finding decides; nothing missing and nothing found is clear.

    What is over even with everything unknown left out is over.
    """
    weights = {finding.weight for finding in findings}
    if Weight.OVER in weights:
        return Verdict.OVER
    if missing or Weight.OPEN in weights:
        return Verdict.OPEN
    return Verdict.TIGHT if Weight.TIGHT in weights else Verdict.CLEAR


def _work(one: Draft) -> tuple[Worked | None, Worked | None, Case, tuple[Finding, ...]]:
    """Worst and nominal corner, the case with its pulses in, and what to say of it."""
    if not one.case.channels:
        return None, None, one.case, ()
    try:
        middle = nominal(one.case)
        swing = swing_of(one.case)
        if swing is None:
            return worst(one.case), middle, one.case, ()
        hottest, found = worked_swing(swing, one.part.ref, one.part.key)
    except ValueError as error:
        message = f"an operating point is outside what its figures cover: {error}"
        return None, None, one.case, (kinds.OUT_OF_TABLE.found(one.part.ref, message, key=one.part.key),)
    return hottest, middle, swing.peak, found


def _judged(one: Draft, hottest: Worked, settings: Settings) -> list[Finding]:
    """Findings on a worked case. On a lower bound of the load only what more load cannot mend is told."""
    found = [
        *ratings.junction_findings(one, hottest, settings.policy),
        *ratings.electrical_findings(one, settings.policy),
        *ratings.power_findings(one, hottest),
    ]
    if not one.is_complete and one.part.topology is Topology.SHUNT:
        # a shunt element gets cooler with more load
        found = [finding for finding in found if finding.weight is not Weight.OVER]
    return found


def _room(case: Case, part: Part, settings: Settings) -> tuple[Headroom | None, float | None, float | None]:
    rating: Evidence | None = part.channels[0].figures.get("output_current_max")
    rated = rating.span.low if rating else None
    allowed = rated * settings.policy.current_fraction if rated is not None else None
    stops = part.channels[0].figures.get("current_limit")
    ends = [amps for amps in (rated, stops.span.low if stops else None) if amps is not None]
    room, greatest = headroom(case, min(ends, default=None), allowed)
    return room, greatest, rated


def _input(wirings: tuple[Wiring, ...]) -> Input | None:
    for wiring in wirings:
        if wiring.input_net is not None:
            volts = wiring.vin.span if wiring.vin else None
            return Input(wiring.input_net, wiring.input_rail or wiring.input_net, volts)
    return None


def _output(wiring: Wiring, one: Draft, number: int) -> Output:
    load = one.loads[number] if number < len(one.loads) else None
    return Output(
        wiring.channel.name,
        wiring.output_net or "",
        wiring.output_rail or "",
        wiring.vout.span if wiring.vout else None,
        load.total if load is not None and not wiring.is_off else None,
    )
