"""Thin air carries less heat: multiplier on the air-side part of a thermal resistance.

The pressure ratio counts, not the density of the cold standard day, for the board meets the same ambient at every
altitude (Belady, IEEE Trans. CPMT-A 19(4), 1996).
"""

from __future__ import annotations

EXPONENTS = {"natural": 0.7, "forced": 0.8, "fan-box": 1.0}
"""Exponent n by cooling mode: laminar natural convection alone would give 0.5; 0.7 leans to the safe side and meets the
common-practice factor at 5,000 ft (1.137); turbulent forced flow 0.8; the air rise of a fan-cooled box 1.0."""

UNCHECKED_ABOVE = 5000.0
"""Altitude [m] above which the model has not been checked."""

HIGHEST = 11_000.0


def pressure_ratio(altitude: float) -> float:
    """Pressure at `altitude` [m] over that at sea level, US Standard Atmosphere 1976: (1 − 2.25577e-5·h)^5.25588.

    Valid from −500 m to 11,000 m.

    Raises:
        ValueError: Outside that range.
    """
    if not -500.0 <= altitude <= HIGHEST:
        raise ValueError(f"the altitude formula holds from -500 m to 11 km, not at {altitude:g} m")
    return float((1.0 - 2.25577e-5 * altitude) ** 5.25588)


def multiplier(altitude: float, exponent: float) -> float:
    """Factor on the air-side resistance: δ^−n, never below 1 (no credit below sea level).

    Args:
        altitude: [m].
        exponent: n, from `EXPONENTS` or the settings; 0 to 2 (above 1 is stricter than any source).
    """
    if not 0.0 <= exponent <= 2.0:
        raise ValueError(f"the exponent lies between 0 and 2, not at {exponent:g}")
    return max(1.0, float(pressure_ratio(altitude) ** -exponent))
