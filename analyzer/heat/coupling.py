"""Heat from neighbours: superposition dTi = Σ Rij · Pj, and, as information only, how a copper plane spreads heat.

Sources: ST VNQ830 Doc 7390 Table 16 (Tj1 = RthA · P1 + RthC · P2 + Tamb); the plate by Malhammar's Bessel method.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping

from analyzer.settings import Coupling


def neighbours(ref: str, pairs: Iterable[Coupling]) -> dict[str, float]:
    """Greatest K/W by neighbour of `ref`; a pair counts both ways (Rij = Rji)."""
    found: dict[str, float] = {}
    for pair in pairs:
        other = pair.by if pair.ref == ref else pair.ref if pair.by == ref else None
        if other is not None and pair.theta is not None:
            found[other] = max(found.get(other, 0.0), pair.theta.span.high)
    return found


def by_distance(ref: str, pairs: Iterable[Coupling]) -> dict[str, float]:
    """Least distance [m] by neighbour of `ref` where only a distance is stated."""
    found: dict[str, float] = {}
    for pair in pairs:
        other = pair.by if pair.ref == ref else pair.ref if pair.by == ref else None
        if other is not None and pair.theta is None and pair.distance is not None:
            found[other] = min(found.get(other, math.inf), pair.distance.span.low)
    return found


ONE_PLANE = 385.0 * 35e-6 + 0.8 * 1.5e-3
"""kt [W/K] of one 35 µm copper plane on 1.5 mm of FR-4 (k 0.8 W/mK in its plane)."""

SOURCE_RADIUS = 1.5e-3
BOTH_FACES = 20.0
"""Heat transfer of both faces together [W/(m²·K)] that fits published board data."""


def plane_estimate(distance: float) -> float:
    """K/W at a distance [m] from a small part on a board with one copper plane: information only."""
    return plate_spreading(max(distance, SOURCE_RADIUS), SOURCE_RADIUS, ONE_PLANE, BOTH_FACES)


def rise(thetas: Mapping[str, float], watts: Mapping[str, float]) -> float:
    """Rise [K] at a part from its neighbours' heat.

    Raises:
        KeyError: If the heat of a neighbour is not known.
    """
    return math.fsum(theta * watts[ref] for ref, theta in thetas.items())


def plate_spreading(radius: float, source_radius: float, conductance: float, film: float) -> float:
    """K/W at a distance on an infinite thin plate cooled on both faces: K0(mr) / (2π·kt·m·r1·K1(m·r1)).

    Information only: vias and traces make real boards worse than a plate.

    Args:
        radius: Distance from the middle of the source [m], at least `source_radius`.
        source_radius: Radius of the source r1 [m], positive.
        conductance: kt = Σ k·t of the layers [W/K], positive.
        film: Heat transfer of both faces together [W/(m²·K)], positive; 20 fits published board data.
    """
    if not 0 < source_radius <= radius or min(conductance, film) <= 0:
        raise ValueError("needs positive figures and a distance outside the source")
    m = math.sqrt(film / conductance)
    return bessel_k(0, m * radius) / (2 * math.pi * conductance * m * source_radius * bessel_k(1, m * source_radius))


def bessel_k(order: int, x: float) -> float:
    """Modified Bessel function of the second kind K0 or K1, by its integral ∫ e^(−x·cosh t) · cosh(n·t) dt from 0.

    Source: Abramowitz and Stegun 9.6.24; the trapezium rule converges exponentially for it.

    Raises:
        ValueError: For x outside 1e-6 … 700.
    """
    if not 1e-6 <= x <= 700:
        raise ValueError("x lies outside 1e-6 to 700")
    step, total, t = 0.01, 0.5 * math.exp(-x), 0.01
    while True:
        # beyond the last term worth adding the integrand falls faster than any power
        exponent = x * math.cosh(t)
        if exponent > 745:
            return step * total
        total += math.exp(-exponent) * math.cosh(order * t)
        t += step
