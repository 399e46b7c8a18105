"""The trail of one budget: every step in the order of computation, formulas with their numbers put in."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from analyzer.evidence import Evidence, Grade
from analyzer.heat.case import Case
from analyzer.heat.draft import Draft
from analyzer.ledger import Corner, Step
from analyzer.wording import show, show_span


def steps(draft: Draft, case: Case, corners: Iterable[Corner], grade: Grade) -> tuple[Step, ...]:
    """All steps: what was read or presumed first, then each corner worked through, then limit and margin."""
    found = [
        Step("part", "", draft.part.identity, draft.part.evidence, Grade.RULED if draft.part.rule else Grade.PRESUMED)
    ]
    found += _read(draft.evidence)
    found += [Step("assumption", "", note, "loss model", Grade.PRESUMED) for note in draft.notes]
    for corner in corners:
        found += _corner(draft, case, corner, grade)
    if draft.limits is not None:
        limits = draft.limits
        source = limits.evidence.source
        found.append(Step("data sheet limit", "", show(limits.data_sheet, "°C"), source, limits.evidence.grade))
        found.append(Step("policy limit", "", show(limits.policy, "°C"), "margin policy", Grade.RULED))
    found += [Step("missing", "", what, "", Grade.PRESUMED) for what in draft.missing]
    return tuple(found)


def unique(evidence: Iterable[Evidence]) -> Iterator[Evidence]:
    """Every number with all it was computed from, parents first, each once."""
    seen: set[Evidence] = set()
    for top in evidence:
        for one in top.walk():
            if one not in seen:
                seen.add(one)
                yield one


def _read(evidence: Iterable[Evidence]) -> Iterator[Step]:
    for one in unique(evidence):
        note = f" ({one.note})" if one.note else ""
        value = one.note if one.unit == "rank" else show_span(one.span, one.unit) + note
        yield Step(one.quantity, one.formula, value, one.source, one.grade)


def _corner(draft: Draft, case: Case, corner: Corner, grade: Grade) -> Iterator[Step]:
    for point in corner.channels:
        name = f"heat, channel {point.channel}" if point.channel else "heat"
        yield Step(name, point.formula, show(point.watts, "W"), f"{draft.part.topology.value} loss", grade, corner.name)
        for who, watts in point.elsewhere:
            yield Step(f"heat in {who}", "", show(watts, "W"), "outside the part", grade, corner.name)
        yield Step("input current", "", show(point.iin, "A"), "energy balance", grade, corner.name)
    yield Step("air around the part", "", show(corner.ambient, "°C"), _air_words(case), grade, corner.name)
    if corner.theta is None or corner.junction is None or case.path is None:
        return
    thin = case.thin_air[0] if corner.name == "nominal" else case.thin_air[1]
    factor = f", air side × {thin:.3f} for altitude" if thin != 1 else ""
    yield Step("θ", "", show(corner.theta, "K/W"), case.path.words + factor, grade, corner.name)
    formula, why = (
        f"{show(corner.ambient, '°C')} + {show(corner.theta, 'K/W')} · {show(corner.watts, 'W')}",
        "Tj = Ta + θ · P",
    )
    if abs(corner.ambient + corner.theta * corner.watts - corner.junction) > 1e-6 * abs(corner.junction) + 1e-6:
        formula, why = "", "end of the pulse, through the Foster network"
    yield Step("junction", formula, show(corner.junction, "°C"), why, grade, corner.name)


def _air_words(case: Case) -> str:
    if case.path is not None and case.path.measured is not None:
        return "measured temperature"
    return "ambient + enclosure rise + neighbours"
