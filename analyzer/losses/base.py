"""What every loss model has in common: an operating point in, the losses there out.

Voltages are magnitudes [V], so that negative regulators use the same formulas: `vin` is taken relative to the
part's own ground pin, `vout` relative to board ground. Currents are A, temperatures °C.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from enum import Enum
from itertools import pairwise

from analyzer.evidence import Evidence
from analyzer.part import Channel
from analyzer.quantity import Span
from analyzer.rail import Wiring
from analyzer.wording import show

REFERENCE_CELSIUS = 25.0
"""Temperature at which data sheets state figures unless they say otherwise (common practice)."""


class End(Enum):
    """Which end of each figure's span is taken: the one that makes least heat, the nominal, or the most."""

    MILD = "mild"
    NOMINAL = "nominal"
    SEVERE = "severe"


@dataclass(frozen=True, slots=True)
class Point:
    """An operating point of one channel: voltages [V] and load [A] as magnitudes, junction [°C]."""

    vin: float
    vout: float
    iout: float
    junction: float = REFERENCE_CELSIUS


@dataclass(frozen=True, slots=True)
class Loss:
    """The losses at one point.

    Attributes:
        watts: Heat in the part [W].
        iin: Current from the input rail [A].
        elsewhere: (who, watts) of losses of this channel outside the part.
        terms: (name, watts) that add up to `watts`.
        formula: Gives the formula with its numbers put in; a function, for text costs more than the numbers.
        regulating: False where the input is too low for the output (dropout, or a buck below its output).
    """

    watts: float
    iin: float
    elsewhere: tuple[tuple[str, float], ...] = ()
    terms: tuple[tuple[str, float], ...] = ()
    formula: Callable[[], str] = str
    regulating: bool = True


@dataclass(frozen=True, slots=True)
class LossModel:
    """How one channel turns its operating point into heat.

    Attributes:
        at: The losses at a point, each figure taken at the given end. Raises ValueError outside the range that
            the part's figures cover.
        used: Evidence of every figure it uses.
        missing: Figures it lacks, in words; while there are any, `at` must not be called.
        notes: Assumptions it makes, each on the safe side.
        interior: (low, high, vout, iout) → input voltages inside (low, high) where the heat may have an extremum,
            besides the ends.
        interior_outputs: (low, high, vin, iout) → output voltages inside (low, high) where it may have one.
        loads: Loads inside (low, high) where a table has its knots.
        has_humps: Whether the heat may be greatest between two of `loads`: I · (1/η(I) − 1) of a tabled efficiency is.
        own_load: Load the part itself sets (chargers); None where the rail's draws do.
        iin_needs_voltages: False where the input current follows from the load alone.
        heats: Whether the losses change with the junction temperature.
    """

    at: Callable[[Point, End], Loss]
    used: tuple[Evidence, ...] = ()
    missing: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    interior: Callable[[float, float, float, float], tuple[float, ...]] = field(default=lambda _a, _b, _c, _d: ())
    interior_outputs: Callable[[float, float, float, float], tuple[float, ...]] = field(
        default=lambda _a, _b, _c, _d: ()
    )
    loads: tuple[float, ...] = ()
    has_humps: bool = False
    own_load: Evidence | None = None
    iin_needs_voltages: bool = True
    heats: bool = False


def lacking(*missing: str, notes: tuple[str, ...] = ()) -> LossModel:
    """A model that cannot be used because figures are missing."""

    def at(_point: Point, _end: End) -> Loss:
        raise ValueError("missing: " + ", ".join(missing))

    return LossModel(at, missing=missing, notes=notes)


def high(span: Span, end: End) -> float:
    """The value of a figure that makes the more heat the larger it is."""
    # asked for at every point of every corner: comparing is several times cheaper than a look-up by member
    if end is End.SEVERE:
        return span.high
    return span.nominal if end is End.NOMINAL else span.low


def low(span: Span, end: End) -> float:
    """The value of a figure that makes the more heat the smaller it is (efficiency)."""
    if end is End.SEVERE:
        return span.low
    return span.nominal if end is End.NOMINAL else span.high


@dataclass(frozen=True, slots=True)
class Figures:
    """The figures of a channel, as numbers at the end asked for."""

    channel: Channel

    def has(self, *keys: str) -> bool:
        """Whether all of these figures are given, as a number or a table."""
        return all(key in self.channel.figures or key in self.channel.curves for key in keys)

    def high(self, key: str, end: End, load: float = 0.0, default: float | None = None) -> float:
        """A figure that makes the more heat the larger it is; tables are read at `load`."""
        return high(self._span(key, load, default), end)

    def low(self, key: str, end: End, load: float = 0.0, default: float | None = None) -> float:
        """A figure that makes the more heat the smaller it is; tables are read at `load`."""
        return low(self._span(key, load, default), end)

    def reader(self, key: str, default: float | None = None) -> Callable[[End, float], float]:
        """`high` of one figure with its look-up done once, for what every point of every corner asks."""
        if key in self.channel.curves or (key not in self.channel.figures and default is None):
            return lambda end, load: self.high(key, end, load, default)
        span = self._span(key, 0.0, default)
        return lambda end, _load: high(span, end)

    def _span(self, key: str, load: float, default: float | None) -> Span:
        curve = self.channel.curves.get(key)
        if curve is not None:
            # below its first point a table over the load is held level; above its last nothing is known
            return curve.at(max(load, curve.lowest))
        figure = self.channel.figures.get(key)
        if figure is not None:
            return figure.span
        if default is None:
            raise ValueError(f"{key} is not given")
        return Span.exact(default)

    def used(self, *keys: str) -> tuple[Evidence, ...]:
        """Evidence of those of the figures that are given."""
        channel = self.channel
        return tuple(
            channel.curves[key].evidence if key in channel.curves else channel.figures[key]
            for key in keys
            if key in channel.curves or key in channel.figures
        )

    def knots(self, *keys: str) -> tuple[float, ...]:
        """Loads at which the tables of these figures have their points, and where I · y(I) has a peak between two."""
        curves = [self.channel.curves[key] for key in keys if key in self.channel.curves]
        found = {x for curve in curves for x, _ in curve.points}
        for (x0, one), (x1, other) in (pair for curve in curves for pair in pairwise(curve.points)):
            slope = (other.high - one.high) / (x1 - x0)
            if slope < 0:
                # y = a + b·I falls, so that I · y is greatest at −a/2b
                peak = (one.high - slope * x0) / (-2 * slope)
                found |= {peak} if x0 < peak < x1 else set()
        return tuple(sorted(found))

    def hot(self, end: End, junction: float) -> float:
        """Factor on on-resistances at `junction`: 1 + tempco · (Tj − 25 °C), never below the cold figure."""
        tempco = self.high("resistance_tempco", end, default=0.0)
        return max(1.0, 1.0 + tempco * (junction - REFERENCE_CELSIUS))


def outside(wiring: Wiring, role: str) -> tuple[tuple[str, Span | None, Span | None, tuple[Evidence, ...]], ...]:
    """(reference, resistance, drop, evidence) of the parts with this role in the channel's power path."""
    return tuple(
        (
            part.ref,
            part.resistance.span if part.resistance else None,
            part.drop.span if part.drop else None,
            tuple(evidence for evidence in (part.resistance, part.drop) if evidence),
        )
        for part in wiring.outside
        if part.role == role
    )


def volts(value: float) -> str:
    """A voltage for a formula."""
    return show(value, "V")


def amps(value: float) -> str:
    """A current for a formula."""
    return show(value, "A")
