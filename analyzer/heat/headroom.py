"""How much more load a part can carry: until its verdict turns tight, and until it turns over."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable
from functools import cache, partial

from analyzer.heat.case import Case, ChannelCase, worst
from analyzer.ledger import Headroom
from analyzer.rule import LINEARS

MOST_AMPS = 1000.0
"""No part asked about carries more."""

_PASSES = 200
_AGREEMENT = 1e-13


def junction_at(case: Case, amps: float) -> float:
    """Worst junction [°C] with any load up to this; infinite where there is no rest or the figures end."""
    try:
        worked = worst(case.with_load_up_to(amps))
    except ValueError:
        return math.inf
    return math.inf if worked.runs_away or worked.junction is None else worked.junction


def load_for(case: Case, junction: float, at: Callable[[float], float] | None = None) -> float:
    """Greatest load [A] whose worst junction stays at or below `junction` [°C]; 0 if none does.

    The secant through two points is exact for parts whose heat is linear in the load; what is not linear is narrowed
    down between two bounds. `at` gives the worst junction at a load where it is already at hand.
    """
    heat = at or partial(junction_at, case)
    return _greatest(lambda amps: heat(amps) - junction, max(case.channels[0].load.high, 0.01))


def dropout_load(one: ChannelCase) -> float | None:
    """Greatest load [A] that leaves a linear part its dropout at the lowest input; None where the load is no matter.

    Inverts the table of dropout over load by linear interpolation; above the table nothing is known.
    """
    table = one.wiring.channel.curves.get("dropout")
    left = one.vin.low - one.vout.high
    if table is None or one.wiring.channel.topology not in LINEARS:
        return None
    if table.points[0][1].high > left:
        return 0.0
    for (x0, y0), (x1, y1) in itertools.pairwise(table.points):
        if y1.high > left:
            return x0 + (x1 - x0) * (left - y0.high) / (y1.high - y0.high)
    return table.highest


def _greatest(excess: Callable[[float], float], start: float) -> float:
    """Greatest x ≥ 0 with excess(x) ≤ 0 for a rising function."""
    low, at_low = 0.0, excess(0.0)
    if at_low > 0:
        return 0.0
    high = start
    at_high = excess(high)
    while at_high <= 0:
        low, at_low = high, at_high
        high *= 2
        if high > MOST_AMPS:
            return MOST_AMPS
        at_high = excess(high)
    for turn in range(_PASSES):
        # regula falsi on finite values, with every third step a bisection so that no shape can stall it
        straight = math.isfinite(at_high) and turn % 3 != 2
        middle = low - at_low * (high - low) / (at_high - at_low) if straight else (low + high) / 2
        at_middle = excess(middle)
        if at_middle <= 0:
            low, at_low = middle, at_middle
        else:
            high, at_high = middle, at_middle
        if high - low <= _AGREEMENT * high or -_AGREEMENT <= at_middle <= 0:
            break
    return low


def headroom(case: Case, rated: float | None, allowed: float | None) -> tuple[Headroom | None, float | None]:
    """Further load beyond the known one, and the greatest load the junction limit allows.

    Args:
        case: The part.
        rated: Rated output current [A], None if unknown.
        allowed: Fraction of it that the margin policy allows [A], None if unknown.

    Returns:
        (headroom, greatest load by the junction alone); (None, None) where limits or path are unknown, and for parts
        whose load is their own or that get cooler with load.
    """
    if case.path is None or case.limit is None or case.tight_above is None or not case.channels:
        return None, None
    first = case.channels[0]
    at = cache(partial(junction_at, case))
    start = max(first.load.high, 0.01)
    if first.model.own_load is not None or at(2.0 * start) <= at(start):
        return None, None
    greatest = load_for(case, case.limit, at)
    tight = load_for(case, case.tight_above, at)
    over, bound = greatest, "junction"
    if rated is not None and rated < over:
        over, bound = rated, "rated current"
    regulated = dropout_load(first)
    if regulated is not None and regulated < over:
        over, bound = regulated, "dropout"
    if allowed is not None:
        tight = min(tight, allowed)
    tight = min(tight, over)
    used = first.load.high
    return Headroom(max(0.0, tight - used), max(0.0, over - used), bound), greatest
