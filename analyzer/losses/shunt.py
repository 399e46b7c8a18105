"""Shunt regulators, shunt references and Zener diodes behind a resistor: hottest without load."""

from __future__ import annotations

from analyzer.losses.base import End, Figures, Loss, LossModel, Point, amps, high, lacking, low, outside, volts
from analyzer.quantity import Span
from analyzer.rail import Wiring
from analyzer.wording import show


def shunt_heat(vin: float, vout: float, resistance: float, iout: float) -> float:
    """Heat [W] of a shunt element: Vz · [(Vin − Vz)/R − Iload], never negative.

    Args:
        vin: Voltage before the resistor [V].
        vout: Shunt voltage [V].
        resistance: Series resistor [Ω], positive.
        iout: Load [A]; the worst one is the smallest.

    Source: the textbook Zener circuit; with Ka references the cathode voltage takes the place of Vz.
    """
    if resistance <= 0 or min(vin, vout, iout) < 0:
        raise ValueError("needs a positive resistor and magnitudes")
    return vout * max(0.0, (vin - vout) / resistance - iout)


def resistor_heat(vin: float, vout: float, resistance: float) -> float:
    """Heat [W] of the series resistor: (Vin − Vz)² / R."""
    if resistance <= 0:
        raise ValueError("needs a positive resistor")
    return (vin - vout) ** 2 / resistance


def build(wiring: Wiring) -> LossModel:
    """Model of a shunt element with its series resistor."""
    figures = Figures(wiring.channel)
    resistors = [(ref, r, found) for ref, r, _, found in outside(wiring, "resistor")]
    known = [r for _, r, _ in resistors if r is not None]
    if not known or len(known) < len(resistors):
        return lacking("series resistor of the shunt regulator")
    ref = ", ".join(ref for ref, _, _ in resistors)
    evidence = tuple(one for _, _, found in resistors for one in found)
    resistance = Span(*(1 / sum(1 / value for value in ends) for ends in zip(*(r.corners for r in known), strict=True)))

    def at(point: Point, end: End) -> Loss:
        ohms = low(resistance, end)
        watts = shunt_heat(point.vin, point.vout, ohms, point.iout)
        supplied = max(0.0, (point.vin - point.vout) / ohms)
        least = figures.high("minimum_cathode_current", end, default=0.0)
        # what heats most, a small resistor, is not what starves the element: a large one
        spare = min(supplied, max(0.0, (point.vin - point.vout) / high(resistance, end)))
        return Loss(
            watts,
            supplied,
            ((ref, resistor_heat(point.vin, point.vout, ohms)),),
            (("shunt current", watts),),
            lambda: (
                f"{volts(point.vout)} · (({volts(point.vin)} − {volts(point.vout)}) / {show(ohms, 'Ω')}"
                f" − {amps(point.iout)})"
            ),
            regulating=spare >= point.iout + least,
        )

    def interior_outputs(least: float, most: float, vin: float, iout: float) -> tuple[float, ...]:
        """Vz · ((Vin − Vz)/R − I) is greatest at Vz = (Vin − I · R)/2."""
        peak = (vin - iout * resistance.low) / 2
        return (peak,) if least < peak < most else ()

    return LossModel(at, (*evidence, *figures.used("minimum_cathode_current")), interior_outputs=interior_outputs)
