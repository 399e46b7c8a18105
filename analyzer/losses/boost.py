"""Step-up converters, synchronous or with an external rectifier.

Source: TI LM2735 data sheet section 10.3.4.1: Iin = Pout/(η·Vin), Pcond = Iin²·D·Rds, Psw = ½·Vout·Iin·f·(tr+tf).
"""

from __future__ import annotations

from analyzer.losses import efficiency, terms
from analyzer.losses.base import End, Figures, Loss, LossModel, Point, lacking, outside
from analyzer.losses.buck import interior_voltages
from analyzer.rail import Wiring
from analyzer.wording import show

_NEEDED = ("high_side_resistance", "switching_frequency", "rise_time", "fall_time", "quiescent")
_PASSES = 60
_AGREEMENT = 1e-12


def boost_input_current(power_out: float, efficiency_there: float, vin: float) -> float:
    """Input current [A] of a boost: Pout / (η · Vin), largest at the lowest input voltage."""
    if vin <= 0:
        raise ValueError("a boost needs a positive input voltage")
    efficiency.total_loss(power_out, efficiency_there)  # checks their ranges
    return power_out / (efficiency_there * vin)


def build(wiring: Wiring) -> LossModel:
    """Model of a boost: from its efficiency where one is given, else from its loss terms."""
    figures = Figures(wiring.channel)
    if efficiency.is_given(wiring.channel):
        return _from_efficiency(wiring)
    lacks = [key.replace("_", " ") for key in _NEEDED if not figures.has(key)]
    rectified = figures.has("low_side_resistance") or figures.has("diode_drop")
    if not rectified and not any(drop for _, _, drop, _ in outside(wiring, "diode")):
        lacks.append("resistance or drop of the rectifier")
    if lacks:
        return lacking("efficiency, or for its loss terms: " + ", ".join(lacks))
    return _from_terms(wiring, figures)


def _from_efficiency(wiring: Wiring) -> LossModel:
    def at(point: Point, end: End) -> Loss:
        found = efficiency.at_point(wiring.channel, point, end)
        if point.vin <= 0:
            raise ValueError("a boost needs a positive input voltage")
        iin = boost_input_current(point.vout * point.iout, found, point.vin)
        parts = efficiency.shares(wiring, end, iin, point.iout)
        return efficiency.loss_from_efficiency(point, found, point.vin, parts)

    table = wiring.channel.efficiency_map
    knots = {x for x, _, _ in table.points} if table else set()
    return LossModel(
        at,
        efficiency.evidence(wiring.channel),
        notes=efficiency.outside_notes(wiring),
        interior=interior_voltages,
        loads=tuple(sorted({*knots, *Figures(wiring.channel).knots("efficiency")})),
        heats=Figures(wiring.channel).has("efficiency_hot_loss"),
    )


def _from_terms(wiring: Wiring, figures: Figures) -> LossModel:
    def at(point: Point, end: End) -> Loss:
        """The input current is the one at which input power is output power and all losses."""
        if point.vin <= 0:
            raise ValueError("a boost needs a positive input voltage")
        iin = point.vout * point.iout / point.vin
        for _ in range(_PASSES):
            found = _at_current(wiring, figures, point, end, iin)
            if abs(found.iin - iin) <= _AGREEMENT * max(iin, 1e-9):
                return found
            if found.iin > 100 * (point.iout + 1):
                break
            iin = found.iin
        raise ValueError(f"no input current carries {show(point.iout, 'A')} at {show(point.vin, 'V')} in")

    keys = (*_NEEDED, "low_side_resistance", "diode_drop", "inductor_resistance", "resistance_tempco")
    used = (*figures.used(*keys), *(e for part in wiring.outside for e in (part.resistance, part.drop) if e))
    notes = efficiency.outside_notes(wiring)
    return LossModel(at, used, notes=notes, interior=interior_voltages, heats=figures.has("resistance_tempco"))


def _at_current(wiring: Wiring, figures: Figures, point: Point, end: End, iin: float) -> Loss:
    hot = figures.hot(end, point.junction)
    synchronous = figures.has("low_side_resistance")
    drops = [drop for _, _, drop, _ in outside(wiring, "diode") if drop is not None]
    drop = 0.0
    if not synchronous:
        drop = drops[0].nominal if drops else figures.high("diode_drop", end)
    duty = terms.boost_duty(point.vin, point.vout, drop)
    frequency = figures.high("switching_frequency", end)
    rise, fall = figures.high("rise_time", end), figures.high("fall_time", end)
    inside = [
        ("switch", terms.conduction(iin, figures.high("high_side_resistance", end) * hot, duty)),
        ("switching", terms.switching(point.vout, iin, frequency, rise, fall)),
        ("quiescent", point.vin * figures.high("quiescent", end)),
    ]
    elsewhere = list(efficiency.shares(wiring, end, iin, point.iout).items)
    if synchronous:
        rectifier = figures.high("low_side_resistance", end) * hot
        inside.append(("rectifier", terms.conduction(iin, rectifier, 1 - duty)))
    elif not drops:
        elsewhere.append(("rectifier", terms.saturation(point.iout, drop)))
    if figures.has("inductor_resistance"):
        elsewhere.append(("inductor", terms.conduction(iin, figures.high("inductor_resistance", end))))
    watts = sum(value for _, value in inside)
    power = point.vout * point.iout + watts + sum(value for _, value in elsewhere)

    def formula() -> str:
        return " + ".join(f"{name} {show(value, 'W')}" for name, value in inside) + f" at D {duty:.3f}"

    return Loss(watts, power / point.vin, tuple(elsewhere), tuple(inside), formula)
