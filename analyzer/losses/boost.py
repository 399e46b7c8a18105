"""Step-up converters, synchronous or with an external rectifier.

Source: TI LM2735 data sheet section 10.3.4.1: Iin = Pout/(η·Vin), D = 1 − η·Vin/Vout = 1 − Iout/Iin,
Pcond = Iin²·D·Rds, Psw = ½·Vout·Iin·f·(tr+tf).

Where the input is above the output, the switch rests, and coil and rectifier pass the input on to the output.
"""

from __future__ import annotations

import math
from dataclasses import replace

from analyzer.losses import efficiency, terms
from analyzer.losses.base import End, Figures, Loss, LossModel, Point, high, lacking, outside
from analyzer.losses.buck import interior_voltages
from analyzer.losses.by_efficiency import Around, model_by_efficiency
from analyzer.losses.elsewhere import OPPOSITE, Outsides, outside_notes, outsides
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


def passed_on(point: Point) -> tuple[Point, bool]:
    """The point as the output really is, and whether it is regulated: never below the input."""
    if point.vin <= 0:
        raise ValueError("a boost needs a positive input voltage")
    return (point, True) if point.vin <= point.vout else (replace(point, vout=point.vin), False)


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
    def at(point: Point, end: End, found: float, around: Around) -> Loss:
        point, regulating = passed_on(point)
        iin = boost_input_current(point.vout * point.iout, found, point.vin)
        parts = around.shares(end, iin, point.iout)
        loss = efficiency.loss_from_efficiency(wiring.channel, point, end, found, point.vin, *parts)
        return loss if regulating else replace(loss, regulating=False)

    return model_by_efficiency(wiring, at, interior_voltages)


def _from_terms(wiring: Wiring, figures: Figures) -> LossModel:
    others = outsides(wiring)

    def at(point: Point, end: End) -> Loss:
        """The input current is the one at which input power is output power and all losses."""
        point, regulating = passed_on(point)
        # what is lost rises ever faster with the current, so secants from below end at the lower of two solutions
        before, iin = 0.0, point.vout * point.iout / point.vin
        excess_before = _at_current(wiring, figures, others, point, end, before).iin
        for _ in range(_PASSES):
            found = _at_current(wiring, figures, others, point, end, iin)
            excess = found.iin - iin
            if abs(excess) <= _AGREEMENT * max(iin, 1e-9):
                return found if regulating else replace(found, regulating=False)
            slope = (excess - excess_before) / (iin - before) if iin != before else 0.0
            step = -excess / slope if slope < 0 else math.inf
            if iin + step > 100 * (point.iout + 1):
                break
            before, excess_before, iin = iin, excess, iin + step
        raise ValueError(f"no input current carries {show(point.iout, 'A')} at {show(point.vin, 'V')} in")

    used = tuple(dict.fromkeys((*figures.used(*_NEEDED, "low_side_resistance", "resistance_tempco"), *others.used)))
    notes = outside_notes(wiring, others)
    return LossModel(at, used, notes=notes, interior=interior_voltages, heats=figures.has("resistance_tempco"))


def _at_current(wiring: Wiring, figures: Figures, others: Outsides, point: Point, end: End, iin: float) -> Loss:
    hot = figures.hot(end, point.junction)
    synchronous = figures.has("low_side_resistance")
    drops = [drop for _, _, drop, _ in outside(wiring, "diode") if drop is not None]
    drop = 0.0
    if not synchronous:
        drop = max(high(drop, end) for drop in drops) if drops else figures.high("diode_drop", end)
    # every loss on the way lengthens the switch's share of the time
    duty = max(terms.boost_duty(point.vin, point.vout, drop), 1.0 - point.iout / iin if iin > 0 else 0.0)
    if point.vin >= point.vout:
        duty = 0.0
    frequency = figures.high("switching_frequency", end)
    rise, fall = figures.high("rise_time", end), figures.high("fall_time", end)
    inside = [
        ("switch", terms.conduction(iin, figures.high("high_side_resistance", end) * hot, duty)),
        ("switching", terms.switching(point.vout, iin, frequency, rise, fall)),
        ("quiescent", point.vin * figures.high("quiescent", end)),
    ]
    elsewhere = others.shares(OPPOSITE[end], iin, point.iout)
    if synchronous:
        rectifier = figures.high("low_side_resistance", end) * hot
        inside.append(("rectifier", terms.conduction(iin, rectifier, 1 - duty)))
    watts = sum(value for _, value in inside)
    power = point.vout * point.iout + watts + elsewhere.watts

    def formula() -> str:
        return " + ".join(f"{name} {show(value, 'W')}" for name, value in inside) + f" at D {duty:.3f}"

    return Loss(watts, power / point.vin, elsewhere.items, tuple(inside), formula)
