"""Numbers from which a spreadsheet can work an entry out again, by one formula for all topologies.

At fixed voltages the heat of every model without tables is a polynomial in the load, P = k0 + k1·I + k2·I². The three
coefficients are taken from the engine's own losses at the worst corner and checked at a fourth load. Keys:

    closed_form    1 if the formula holds, else 0: then the cells keep the engine's values
    k0, k1, k2     [W], [W/A], [W/A²]
    load           load of the first channel at the worst corner [A]
    i0, i1, i2     coefficients of the current taken from the input rail, [A], [A/A], [A/A²]
    theta_solid    part of θ that altitude does not touch [K/W]
    theta_air      part that it does, at sea level [K/W]
    exponent_free  1 if the entry's own surroundings are the board's (no neighbour, no measured spot)
    rise_extra     kelvin of neighbours on top of ambient and enclosure rise
"""

from __future__ import annotations

from analyzer.heat.case import Case, Chosen, Worked
from analyzer.losses.base import End, Point

_AGREEMENT = 1e-9


def live_numbers(case: Case, worst: Worked, rise_extra: float) -> dict[str, float]:
    """The numbers for a worked case; {} where nothing was worked out."""
    if not worst.chosen:
        return {}
    (first, *others) = worst.chosen
    found = {"load": first.point.iout, "closed_form": 0.0, "rise_extra": rise_extra}
    path = case.path
    if path is None or not path.is_linear or path.measured is not None:
        return found
    found |= {"theta_solid": path.solid.high, "theta_air": path.air.high}
    if any(one.case.model.heats for one in worst.chosen) or first.case.model.loads or first.case.model.own_load:
        return found
    coefficients = _polynomial(first)
    if coefficients is None:
        return found
    k0, k1, k2 = coefficients
    k0 += sum(one.loss.watts for one in others)
    return {**found, "closed_form": 1.0, "k0": k0, "k1": k1, "k2": k2}


def _polynomial(chosen: Chosen) -> tuple[float, float, float] | None:
    point, model = chosen.point, chosen.case.model
    step = point.iout or 0.1

    def heat(amps: float) -> float:
        return model.at(Point(point.vin, point.vout, amps, point.junction), End.SEVERE).watts

    try:
        k0, at_one, at_two, at_three = heat(0.0), heat(step), heat(2 * step), heat(3 * step)
    except ValueError:
        return None
    k2 = (at_two - 2 * at_one + k0) / (2 * step * step)
    k1 = (at_one - k0) / step - k2 * step
    if abs(k2) * step * step <= 1e-12 * max(abs(at_one), 1e-12):
        k2, k1 = 0.0, (at_one - k0) / step
    expected = k0 + k1 * 3 * step + k2 * 9 * step * step
    if abs(expected - at_three) > _AGREEMENT * max(1.0, abs(at_three)):
        return None
    return k0, k1, k2
