"""Converters known by their efficiency only: buck-boost, inverting, and closed modules; and controllers."""

from __future__ import annotations

from analyzer.losses import efficiency
from analyzer.losses.base import End, Figures, Loss, LossModel, Point, lacking, outside
from analyzer.losses.buck import interior_voltages
from analyzer.losses.by_efficiency import Around, model_by_efficiency
from analyzer.losses.terms import gate_drive
from analyzer.rail import Wiring
from analyzer.rule import Topology
from analyzer.wording import show


def least_coil_current(wiring: Wiring, vin: float, vout: float, iout: float, iin: float) -> float:
    """Smallest current [A] that the inductor of a converter can carry, so that not too much is taken out of the part.

    One inductor of an inverting stage carries Iout/(1 − D), which is at least Iout · (1 + |Vout|/Vin) (charge balance).
    The one of a four-switch part carries the larger of input and output current, but those of other stages that step
    both ways, and of inverting stages with two inductors, carry either: the smaller one is certain.

    Args:
        wiring: The channel.
        vin: Input voltage [V], positive.
        vout: Magnitude of the output voltage [V].
        iout: Load [A].
        iin: Input current [A].
    """
    if vin <= 0 or min(vout, iout, iin) < 0:
        raise ValueError("needs a positive input voltage and no negative magnitude")
    coils = sum(part.role == "inductor" for part in wiring.outside)
    if wiring.channel.topology is Topology.INVERTING and coils <= 1:
        return iout * (1 + vout / vin)
    return min(iin, iout)


def build(wiring: Wiring) -> LossModel:
    """Model of a converter from its efficiency.

    A four-switch part has a loss maximum where input and output are about equal (from memory), so the output voltage
    itself is among the input voltages tried.
    """
    if not efficiency.is_given(wiring.channel):
        return lacking("efficiency")

    def at(point: Point, end: End, found: float, around: Around) -> Loss:
        if point.vin <= 0:
            raise ValueError("a converter needs a positive input voltage")
        iin = point.vout * point.iout / found / point.vin
        coil = least_coil_current(wiring, point.vin, point.vout, point.iout, iin)
        parts = around.shares(end, coil, point.iout)
        return efficiency.loss_from_efficiency(wiring.channel, point, end, found, point.vin, *parts)

    def interior(low: float, high: float, vout: float, iout: float) -> tuple[float, ...]:
        grid = interior_voltages(low, high, vout, iout)
        return (*grid, vout) if low < vout < high else grid

    return model_by_efficiency(wiring, at, interior, is_closed=wiring.channel.topology is Topology.MODULE)


def build_controller(wiring: Wiring) -> LossModel:
    """Model of a controller: most of the loss is in the external transistors, which are listed.

    Its own heat is Vin · (Iq + Qg · f): what drives the gates comes from the input through a regulator inside
    (common practice, and the safe side where a separate supply drives them).
    """
    figures = Figures(wiring.channel)
    lacks = [] if efficiency.is_given(wiring.channel) else ["efficiency of the whole converter"]
    if not figures.has("quiescent"):
        lacks.append("quiescent current")
    if not figures.has("gate_charge", "switching_frequency"):
        lacks.append(
            "gate charge and switching frequency (a charge of 0 where the quiescent current includes the drive)"
        )
    if lacks:
        return lacking(*lacks)

    def at(point: Point, end: End) -> Loss:
        found = efficiency.at_point(wiring.channel, point, end)
        power = point.vout * point.iout
        if point.vin <= 0:
            raise ValueError("a controller needs a positive input voltage")
        own = point.vin * figures.high("quiescent", end)
        gate = max(point.vin, figures.high("gate_voltage", end, default=0.0))
        own += gate_drive(figures.high("gate_charge", end), gate, figures.high("switching_frequency", end))
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

    used = (*efficiency.evidence(wiring.channel), *figures.used("gate_charge", "switching_frequency", "gate_voltage"))
    loads = efficiency.load_knots(wiring.channel)
    return LossModel(
        at,
        used,
        notes=efficiency.notes(wiring.channel),
        interior=interior_voltages,
        loads=loads,
        heats=figures.has("efficiency_hot_loss"),
    )
