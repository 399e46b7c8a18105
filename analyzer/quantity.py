"""Spans: a quantity as (low, nominal, high), carried to the end of every calculation.

Values are SI floats (volt, ampere, watt, ohm, second, metre); temperatures are °C as the trade writes
them, temperature differences K, thermal resistances K/W. Text is read by `analyzer.grammar`.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import StrEnum


@dataclass(frozen=True, slots=True)
class Span:
    """A quantity known to lie between `low` and `high`, most likely near `nominal`.

    Raises:
        ValueError: If a bound is not finite or the order low ≤ nominal ≤ high is broken.
    """

    low: float
    nominal: float
    high: float

    def __post_init__(self) -> None:
        if not (math.isfinite(self.low) and math.isfinite(self.nominal) and math.isfinite(self.high)):
            raise ValueError(f"a span needs finite numbers, not ({self.low}, {self.nominal}, {self.high})")
        if not self.low <= self.nominal <= self.high:
            raise ValueError(f"a span needs low ≤ nominal ≤ high, not ({self.low}, {self.nominal}, {self.high})")

    @classmethod
    def exact(cls, value: float) -> Span:
        """A quantity without any spread."""
        return cls(value, value, value)

    @classmethod
    def between(cls, low: float, high: float) -> Span:
        """A quantity of which only the ends are known; its nominal is the middle."""
        return cls(low, low + (high - low) / 2, high)

    @classmethod
    def around(cls, nominal: float, fraction: float) -> Span:
        """A nominal value with a symmetric relative tolerance (0.05 is ±5 %)."""
        spread = abs(nominal) * fraction
        return cls(nominal - spread, nominal, nominal + spread)

    @classmethod
    def hull(cls, *spans: Span) -> Span:
        """The smallest span that holds all of `spans`; its nominal is the first one's."""
        return cls(min(s.low for s in spans), spans[0].nominal, max(s.high for s in spans))

    @property
    def is_exact(self) -> bool:
        """Whether the span has no spread at all."""
        return self.low == self.high

    @property
    def corners(self) -> tuple[float, float, float]:
        """The three values as a tuple, in the order of the machine-readable contract."""
        return (self.low, self.nominal, self.high)

    def __add__(self, other: Span) -> Span:
        return Span(self.low + other.low, self.nominal + other.nominal, self.high + other.high)

    def __neg__(self) -> Span:
        return Span(-self.high, -self.nominal, -self.low)

    def __sub__(self, other: Span) -> Span:
        return self + -other

    def scaled(self, factor: float) -> Span:
        """The span multiplied by a number of either sign."""
        ends = (self.low * factor, self.high * factor)
        return Span(min(ends), self.nominal * factor, max(ends))

    def overlaps(self, other: Span) -> bool:
        """Whether the two spans share at least one value."""
        return self.low <= other.high and other.low <= self.high


ZERO = Span.exact(0.0)


def total(spans: list[Span]) -> Span:
    """The sum of spans, rounded once at each corner so that the order of the parts cannot show."""
    return Span(math.fsum(s.low for s in spans), math.fsum(s.nominal for s in spans), math.fsum(s.high for s in spans))


class Dimension(StrEnum):
    """What kind of quantity a number is; the value is the SI unit used inside."""

    CURRENT = "A"
    VOLTAGE = "V"
    POWER = "W"
    RESISTANCE = "Ω"
    CAPACITANCE = "F"
    INDUCTANCE = "H"
    FREQUENCY = "Hz"
    CHARGE = "C"
    TIME = "s"
    LENGTH = "m"
    AREA = "m²"
    SPEED = "m/s"
    TEMPERATURE = "°C"
    TEMPERATURE_DIFFERENCE = "K"
    THERMAL_RESISTANCE = "K/W"
    THERMAL_CONDUCTIVITY = "W/(m·K)"
    RATIO = "1"
    PER_KELVIN = "1/K"
