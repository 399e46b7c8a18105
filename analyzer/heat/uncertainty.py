"""Chance of exceeding the limit: a seeded Monte-Carlo run beside the worst case, never in its place.

Each input is drawn from a triangular distribution over (low, nominal, high), independently; the figures of the part are
drawn together between their mild and severe ends. The distribution is an assumption and is printed as one.
"""

from __future__ import annotations

import random
from collections.abc import Callable

from analyzer.heat.case import Case, ChannelCase
from analyzer.losses.base import End, Point
from analyzer.quantity import Span

SAMPLES = 10_000
DISTRIBUTION = "triangular over (low, nominal, high), inputs independent"


def chance(case: Case, seed: int, samples: int = SAMPLES) -> tuple[float, float, float] | None:
    """(chance of exceeding the limit, 5 % and 95 % junction [°C]); None where the case cannot be worked out.

    Args:
        case: The case.
        seed: Of the random numbers: the same seed gives the same result.
        samples: How many.
    """
    if case.path is None or case.limit is None or not case.channels:
        return None
    draw = random.Random(seed).random  # noqa: S311  no secret depends on it
    try:
        junctions = sorted(_sample(case, draw) for _ in range(samples))
    except ValueError:
        return None
    over = sum(1 for junction in junctions if junction > case.limit) / samples
    return over, junctions[int(0.05 * samples)], junctions[int(0.95 * samples)]


def _sample(case: Case, draw: Callable[[], float]) -> float:
    assert case.path is not None
    junction = base = _triangular(case.ambient, draw)
    share = draw() + draw() - 1.0
    picked = [(one, *_point(one, draw)) for one in case.channels]
    path = case.path
    solid, air = _triangular(path.solid, draw), _triangular(path.air, draw)
    calm, thin = case.thin_air
    factor = calm + (thin - calm) * draw()
    if path.measured is not None:
        base = _triangular(path.measured.span, draw)
    heats = any(one.model.heats for one in case.channels)
    for _ in range(12 if heats else 1):
        watts = sum(_heat(one, vin, vout, load, junction, share) for one, vin, vout, load in picked)
        theta = solid + factor * air
        if path.sink is not None:
            theta = path.theta(factor, watts)
        junction = base + theta * watts
    return junction


def _point(one: ChannelCase, draw: Callable[[], float]) -> tuple[float, float, float]:
    return _triangular(one.vin, draw), _triangular(one.vout, draw), _triangular(one.load, draw)


def _heat(one: ChannelCase, vin: float, vout: float, load: float, junction: float, share: float) -> float:
    """Heat with the part's figures a `share` of the way from nominal to severe (or, negative, to mild)."""
    point = Point(vin, vout, load, junction)
    nominal = one.model.at(point, End.NOMINAL).watts
    end = one.model.at(point, End.SEVERE if share > 0 else End.MILD).watts
    return nominal + abs(share) * (end - nominal)


def _triangular(span: Span, draw: Callable[[], float]) -> float:
    """A sample by the inverse of the triangular distribution's integral."""
    low, peak, high = span.low, span.nominal, span.high
    if low == high:
        return low
    u, split = draw(), (peak - low) / (high - low)
    if u < split:
        return float(low + ((high - low) * (peak - low) * u) ** 0.5)
    return float(high - ((high - low) * (high - peak) * (1 - u)) ** 0.5)
