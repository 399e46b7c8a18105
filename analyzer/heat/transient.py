"""Pulsed heat through a Foster network: Zth(t) = Σ Ri · (1 − e^(−t/τi)).

A Foster network describes the junction only: it cannot be cut at an inner node nor chained to another model.
Source: ST VND1NV04 Doc 7381 p. 19-21; the exact periodic peak follows by summing the geometric series of pulses.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

Foster = Sequence[tuple[float, float]]
"""(R [K/W], τ [s]) of each stage."""


def _checked(network: Foster) -> None:
    if not network or any(r < 0 or tau <= 0 for r, tau in network):
        raise ValueError("a Foster network needs stages with R ≥ 0 and τ > 0")


def impedance(network: Foster, seconds: float) -> float:
    """Zth [K/W] after `seconds` of constant power.

    Raises:
        ValueError: For a negative time or a network that is none.
    """
    _checked(network)
    if seconds < 0:
        raise ValueError("time must not be negative")
    return math.fsum(r * -math.expm1(-seconds / tau) for r, tau in network)


def steady(network: Foster) -> float:
    """Resistance [K/W] after a long time: Σ Ri."""
    _checked(network)
    return math.fsum(r for r, _ in network)


def periodic_peak(network: Foster, power: float, on: float, period: float) -> float:
    """Highest rise [K] of a pulse train in its steady state: P · Σ Ri (1 − e^(−tp/τi)) / (1 − e^(−T/τi)).

    Args:
        network: The Foster network.
        power: Power during the pulse [W].
        on: Pulse length [s], at most the period.
        period: [s], positive.
    """
    _checked(network)
    if not 0 <= on <= period or period <= 0:
        raise ValueError("needs 0 ≤ pulse length ≤ period, and a period")
    return power * math.fsum(r * math.expm1(-on / tau) / math.expm1(-period / tau) for r, tau in network)


def periodic_valley(network: Foster, power: float, on: float, period: float) -> float:
    """Lowest rise [K] of a pulse train in its steady state, just before the next pulse."""
    _checked(network)
    if not 0 <= on <= period or period <= 0:
        raise ValueError("needs 0 ≤ pulse length ≤ period, and a period")
    return power * math.fsum(
        r * math.expm1(-on / tau) / math.expm1(-period / tau) * math.exp(-(period - on) / tau) for r, tau in network
    )


def profile(network: Foster, steps: Iterable[tuple[float, float]], seconds: float) -> float:
    """Rise [K] at a time after any profile of power: T(t) = Σ ΔPk · Zth(t − tk).

    Args:
        network: The Foster network.
        steps: (time [s], power from then on [W]), times rising; the power before the first is 0.
        seconds: Time at which the rise is wanted [s].
    """
    rise, before = [], 0.0
    for start, power in steps:
        if start <= seconds:
            rise.append((power - before) * impedance(network, seconds - start))
        before = power
    return math.fsum(rise)
