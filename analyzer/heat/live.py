"""Numbers from which a spreadsheet can work an entry out again, by one formula for all topologies.

At fixed voltages the heat of every model without tables is a polynomial in the load, P = k0 + k1·I + k2·I². The three
coefficients are taken from the engine's own losses at the worst corner and checked at a fourth load. Keys:

    closed_form    1 if the formula holds, else 0: then the cells keep the engine's values
    k0, k1, k2     [W], [W/A], [W/A²]
    load           load of the first channel at the worst corner [A]
    i0, i1, i2     coefficients of the current taken from the input rail, [A], [A/A], [A/A²]
    theta_solid    part of θ that altitude does not touch [K/W]
    theta_air      part that it does, at sea level [K/W]
    rise_extra     kelvin of neighbours on top of ambient and enclosure rise
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from analyzer.heat.case import Case, Chosen, Worked, hottest_of
from analyzer.losses.base import End, Loss, Point
from analyzer.losses.dispatch import HOT_CELSIUS
from analyzer.quantity import Span
from analyzer.rule import LINEARS

_AGREEMENT = 1e-9
_LEAST = 1e-9
"""Loads [A] below this are none: formulas through them would divide by rounding errors."""


def live_numbers(case: Case, worst: Worked, rise_extra: float, *, steady: bool = True) -> dict[str, float]:
    """The numbers for a worked case; {} where nothing was worked out. Pulsed loads (not `steady`) have no formula."""
    if not worst.chosen:
        return {}
    (first, *others) = worst.chosen
    found = {"load": first.point.iout, "closed_form": 0.0, "rise_extra": rise_extra}
    path = case.path
    if path is None or not path.is_linear or path.measured is not None:
        return found
    found |= {"theta_solid": path.solid.high, "theta_air": path.air.high}
    one = first.case
    if (
        not steady
        or others
        or one.model.heats
        or one.model.loads
        or one.model.own_load
        or first.point.iout != one.load.high
    ):
        return found
    if not _keeps_its_corner(first):
        return found
    coefficients = _polynomial(lambda amps: _at(first, first.point, amps).watts, first.point.iout)
    if coefficients is None:
        return found
    k0, k1, k2 = coefficients
    found |= {"closed_form": 1.0, "k0": k0, "k1": k1, "k2": k2}
    taken = _polynomial(lambda amps: _at(first, _thirstiest(first), amps).iin, first.point.iout)
    if taken is not None:
        found |= {"i0": taken[0], "i1": taken[1], "i2": taken[2]}
    return found


def _keeps_its_corner(first: Chosen) -> bool:
    """Whether the same ends of input and output are the hottest at lower and higher loads too."""
    channel = first.case.wiring.channel
    if channel.topology in LINEARS and "ground_current_dropout" not in channel.figures:
        return True  # heat rises with the input and falls with the output at every load
    step = first.point.iout if first.point.iout > _LEAST else 0.1
    for amps in (step * share for share in (0.5, 1.5, 2.0, 3.0)):
        try:
            there = hottest_of(replace(first.case, load=Span.exact(amps)), first.point.junction)
        except ValueError:
            continue
        same = _at(first, first.point, amps).watts
        if there.loss.watts > same * (1 + _AGREEMENT):
            return False
    return True


def _at(chosen: Chosen, point: Point, amps: float) -> Loss:
    return chosen.case.model.at(Point(point.vin, point.vout, amps, point.junction), End.SEVERE)


def _thirstiest(chosen: Chosen) -> Point:
    """The corner at which the part takes most from its input, as the tree of currents has it."""
    one = chosen.case
    points = [
        Point(vin, vout, one.load.high, HOT_CELSIUS)
        for vin in (one.vin.low, one.vin.high)
        for vout in (one.vout.low, one.vout.high)
    ]
    return max(points, key=lambda point: one.model.at(point, End.SEVERE).iin)


def _polynomial(of: Callable[[float], float], amps: float) -> tuple[float, float, float] | None:
    """Coefficients of a quadratic through three loads, None if a fourth does not lie on it."""
    step = amps if amps > _LEAST else 0.1
    try:
        c0, at_one, at_two, at_three = of(0.0), of(step), of(2 * step), of(3 * step)
    except ValueError:
        return None
    c2 = (at_two - 2 * at_one + c0) / (2 * step * step)
    c1 = (at_one - c0) / step - c2 * step
    if abs(c2) * step * step <= 1e-12 * max(abs(at_one), 1e-12):
        c2, c1 = 0.0, (at_one - c0) / step
    expected = c0 + c1 * 3 * step + c2 * 9 * step * step
    return (c0, c1, c2) if abs(expected - at_three) <= _AGREEMENT * max(1.0, abs(at_three)) else None
