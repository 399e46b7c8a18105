"""Converters known by their efficiency only: buck-boost, inverting, and closed modules; and controllers."""

from __future__ import annotations

from analyzer.losses import efficiency
from analyzer.losses.base import End, Figures, Loss, LossModel, Point, lacking, outside
from analyzer.losses.buck import interior_voltages
from analyzer.rail import Wiring
from analyzer.wording import show


def build(wiring: Wiring) -> LossModel:
    """Model of a converter from its efficiency.

    A four-switch part has a loss maximum where input and output are about equal (from memory), so the output voltage
    itself is among the input voltages tried.
    """
    if not efficiency.is_given(wiring.channel):
        return lacking("efficiency")

    def at(point: Point, end: End) -> Loss:
        if point.vin <= 0:
            raise ValueError("a converter needs a positive input voltage")
        found = efficiency.at_point(wiring.channel, point, end)
        iin = point.vout * point.iout / found / point.vin
        # the coil of an inverting stage carries input and output current, the one of a module is inside it
        parts = efficiency.shares(wiring, end, iin + point.iout, point.iout)
        return efficiency.loss_from_efficiency(point, found, point.vin, parts)

    def interior(low: float, high: float, vout: float, iout: float) -> tuple[float, ...]:
        grid = interior_voltages(low, high, vout, iout)
        return (*grid, vout) if low < vout < high else grid

    table = wiring.channel.efficiency_map
    knots = {x for x, _, _ in table.points} if table else set()
    figures = Figures(wiring.channel)
    return LossModel(
        at,
        efficiency.evidence(wiring.channel),
        notes=efficiency.outside_notes(wiring),
        interior=interior,
        loads=tuple(sorted({*knots, *figures.knots("efficiency")})),
        heats=figures.has("efficiency_hot_loss"),
    )


def build_controller(wiring: Wiring) -> LossModel:
    """Model of a controller: most of the loss is in the external transistors, which are listed."""
    figures = Figures(wiring.channel)
    lacks = [] if efficiency.is_given(wiring.channel) else ["efficiency of the whole converter"]
    if not figures.has("quiescent"):
        lacks.append("quiescent current")
    if lacks:
        return lacking(*lacks)

    def at(point: Point, end: End) -> Loss:
        found = efficiency.at_point(wiring.channel, point, end)
        power = point.vout * point.iout
        own = point.vin * figures.high("quiescent", end)
        if figures.has("gate_charge", "switching_frequency"):
            gate = figures.high("gate_voltage", end, default=point.vin)
            own += figures.high("gate_charge", end) * gate * figures.high("switching_frequency", end)
        total = efficiency.total_loss(power, found)
        names = [ref for ref, *_ in outside(wiring, "transistor")] or ["external transistors"]
        rest = max(0.0, total - own)
        return Loss(
            own,
            (power + max(total, own)) / point.vin,
            ((", ".join(names) + " and the other parts outside", rest),),
            (("control and gate drive", own),),
            lambda: f"{show(point.vin, 'V')} · {show(own / point.vin, 'A')} (another {show(rest, 'W')} outside)",
        )

    used = (*efficiency.evidence(wiring.channel), *figures.used("quiescent", "gate_charge", "switching_frequency"))
    return LossModel(at, used, interior=interior_voltages)
