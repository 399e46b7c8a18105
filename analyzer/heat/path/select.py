"""Which thermal path a part's budget uses, in the order of trust.

Measured temperature > stated heat sink > stated θJA > copper-area or air-speed table > θJA of the rule > pad on stated
copper > generic table.
"""

from __future__ import annotations

from collections.abc import Iterable

from analyzer.circuit import Circuit
from analyzer.evidence import Evidence, Grade
from analyzer.findings import heat as kinds
from analyzer.heat.path.base import ThermalPath, all_air
from analyzer.heat.path.board import correction, design_class
from analyzer.heat.path.pad import pad_path
from analyzer.part import Part
from analyzer.quantity import ZERO, Span
from analyzer.rule import BoardClass, Curve, PackageRule, ThermalFigure
from analyzer.settings import PartStatement, Settings
from analyzer.wording import show


def thermal_path(
    part: Part, circuit: Circuit, settings: Settings, stated: PartStatement, packages: Iterable[PackageRule]
) -> ThermalPath | str:
    """The path, or what is missing for one, in words."""
    design, why = design_class(circuit, settings, stated)
    pour, moves = stated.pour or settings.board.pour, settings.site.air_speed.span.low > 0
    useful = [one for one in part.thermal if one.theta_ja or (one.copper and pour) or (one.air and moves)]
    figure = _closest(useful or part.thermal, design)
    found = _measured(stated, figure)
    if found is None and (stated.case_measured is not None or stated.board_measured is not None):
        # a measured temperature that is left unused would let the budget say less than is known
        return f"{'ψJT' if stated.case_measured is not None else 'ψJB'} for the measured temperature"
    found = found or _sink(stated)
    if found is not None:
        return found
    if stated.theta_ja is not None:
        return _with_foster(all_air(stated.theta_ja, words="θJA stated for this part"), figure)
    if figure is not None:
        table = _copper(figure, stated, settings, design, part) or _air(figure, settings, design, part)
        if table is not None:
            return _with_foster(table, figure)
        if figure.theta_ja is not None:
            return _with_foster(_by_class(part, figure, design, why), figure)
    bottom = next((one.theta_jc_bottom for one in part.thermal if one.theta_jc_bottom), None)
    if bottom is not None and pour is not None and (estimate := pad_path(part, bottom, pour, stated.vias, design)):
        return estimate
    return _generic(part, design, why, packages)


def _closest(figures: Iterable[ThermalFigure], design: BoardClass) -> ThermalFigure | None:
    """The figure of the design's own class, else of the next poorer one, else of a better one; the worse of two."""
    order = list(BoardClass)
    wanted = order.index(design)

    def far(figure: ThermalFigure) -> tuple[int, float]:
        rank = order.index(figure.board or BoardClass.HIGH)
        theta = figure.theta_ja.span.high if figure.theta_ja else 0.0
        return (wanted - rank if rank <= wanted else len(order) + rank - wanted, -theta)

    return min(figures, key=far, default=None)


def _measured(stated: PartStatement, figure: ThermalFigure | None) -> ThermalPath | None:
    """ψJT or ψJB with a measured temperature: the only use these parameters have."""
    for spot, psi, name in (
        (stated.case_measured, figure.psi_jt if figure else None, "ψJT"),
        (stated.board_measured, figure.psi_jb if figure else None, "ψJB"),
    ):
        if spot is not None and psi is not None:
            words = f"{name} above the measured temperature"
            return ThermalPath(psi.span, ZERO, (spot, psi), measured=spot, words=words)
    return None


def _sink(stated: PartStatement) -> ThermalPath | None:
    if stated.heat_sink is None:
        return None
    junction_case, case_sink, sink = stated.heat_sink
    solid = junction_case.span + case_sink.span
    return ThermalPath(
        solid, ZERO, stated.heat_sink, sink=sink.span, words="θJC + θCS + θSA, θSA at the sink's own rise"
    )


def _copper(
    figure: ThermalFigure, stated: PartStatement, settings: Settings, design: BoardClass, part: Part
) -> ThermalPath | None:
    pour = stated.pour or settings.board.pour
    if figure.copper is None or pour is None:
        return None
    measured = figure.board or BoardClass.HIGH
    if measured is BoardClass.HIGH and correction(part.package.family, measured, design) > 1:
        # measured over inner planes that this board has not: the copper alone does not make up for them
        return None
    return _from_table(figure.copper, pour, f"θJA at {pour.span.low * 1e6:.0f} mm² of copper")


def _air(figure: ThermalFigure, settings: Settings, design: BoardClass, part: Part) -> ThermalPath | None:
    speed = settings.site.air_speed
    if figure.air is None or speed.span.low <= 0:
        return None
    factor = correction(part.package.family, figure.board or BoardClass.HIGH, design)
    if factor > 1:
        # no published ratio holds in moving air
        return None
    return _from_table(figure.air, speed, f"θJA at {show(speed.span.low, 'm/s')} of air")


def _from_table(table: Curve, at: Evidence, words: str) -> ThermalPath | None:
    """The table at the poor end of what is stated; None outside it: published tables are not extrapolated."""
    if not table.lowest <= at.span.low <= table.highest:
        return None
    span = table.at(at.span.low)
    theta = Evidence("θJA", span, "K/W", table.evidence.source, table.evidence.grade, words, (table.evidence, at))
    return all_air(theta, words=words)


def _by_class(part: Part, figure: ThermalFigure, design: BoardClass, why: Evidence) -> ThermalPath:
    theta = figure.theta_ja
    if theta is None:
        raise ValueError("the figure has no θJA")
    measured = figure.board or BoardClass.HIGH
    note = "" if figure.board else "board class not stated: taken as high-K"
    factor = correction(part.package.family, measured, design)
    if factor == 1:
        return all_air(theta, why, words=f"θJA ({measured.value}, design {design.value}){'; ' + note if note else ''}")
    corrected = Evidence(
        "θJA corrected for the board class",
        theta.span.scaled(factor),
        "K/W",
        f"published ratio for {part.package.family}: {measured.value} to {design.value}",
        Grade.DERIVED,
        f"{show(theta.span.nominal, 'K/W')} · {factor:.2f}",
        (theta, why),
        note,
    )
    message = (
        f"θJA {show(theta.span.high, 'K/W')} of class {measured.value}{' (presumed)' if note else ''} raised by "
        f"{factor:.2f} for the design's class {design.value}"
    )
    finding = kinds.CLASS_CORRECTED.found(part.ref, message, theta.source, key=part.key)
    return all_air(corrected, findings=(finding,), words=f"θJA {measured.value} → {design.value}")


def _generic(part: Part, design: BoardClass, why: Evidence, packages: Iterable[PackageRule]) -> ThermalPath | str:
    family = part.package.family
    if family is None:
        footprint = part.package.text or "no footprint"
        return f"θJA: package not understood ({footprint})"
    rule = next((one for one in packages if one.family == family), None)
    theta = rule.theta_ja.get(design) if rule else None
    if theta is None:
        return f"θJA: none known for package {family}"
    message = f"θJA {show(theta.span.high, 'K/W')} is the generic figure of {family} on {design.value}, ±40 %"
    finding = kinds.THETA_GENERIC.found(part.ref, message, theta.source, key=part.key)
    generic = Evidence(theta.quantity, theta.span, theta.unit, theta.source, Grade.PRESUMED, note="generic, ±40 %")
    return all_air(generic, why, findings=(finding,), words=f"generic θJA of {family} ({design.value})")


def _with_foster(path: ThermalPath, figure: ThermalFigure | None) -> ThermalPath:
    if figure is None or not figure.foster:
        return path
    span = Span.exact(sum(r for r, _ in figure.foster))
    network = Evidence(
        "Foster network, ΣR", span, "K/W", figure.source, Grade.RULED if figure.verified else Grade.PRESUMED
    )
    return ThermalPath(
        path.solid,
        path.air,
        (*path.evidence, network),
        path.sink,
        path.measured,
        figure.foster,
        path.findings,
        path.words,
    )
