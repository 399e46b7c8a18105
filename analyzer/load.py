"""Loads: who draws how much from which rail, and who has not said so. `analyzer.draws` finds them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from analyzer.evidence import Evidence
from analyzer.findings.base import Finding
from analyzer.quantity import ZERO, Span, total


@dataclass(frozen=True, slots=True)
class Pulse:
    """A load that comes and goes: `peak` for `on_seconds` in every `period_seconds`, `rest` in between.

    `period_seconds` is None for a single pulse.
    """

    peak: Span
    on_seconds: float
    period_seconds: float | None = None
    rest: Span = ZERO


@dataclass(frozen=True, slots=True)
class Draw:
    """A current that a part takes from a rail.

    Attributes:
        ref: Reference of the part.
        key: Its identity; "" for a draw declared without a part.
        rail: The rail.
        amps: The current [A]; for a pulsed draw its time average.
        kind: "stated", "ruled", "computed" (resistors, LEDs) or "regulator" (what a regulator below takes).
        pulse: For pulsed draws, their shape.
    """

    ref: str
    key: str
    rail: str
    amps: Evidence
    kind: str
    pulse: Pulse | None = None


def joined_pulse(draws: Iterable[Draw]) -> Pulse | None:
    """The draws of one rail as one pulse: all peaks together, for the longest of their times; None if all are steady.

    That they meet is the worst case, as nothing is known of their phases.
    """
    steady: list[Span] = []
    pulses: list[Pulse] = []
    for draw in draws:
        if draw.pulse:
            pulses.append(draw.pulse)
        else:
            steady.append(draw.amps.span)
    if not pulses:
        return None
    on = max(pulse.on_seconds for pulse in pulses)
    period = min((pulse.period_seconds for pulse in pulses if pulse.period_seconds), default=None)
    peak = total([*steady, *(pulse.peak for pulse in pulses)])
    rest = total([*steady, *(pulse.rest for pulse in pulses)])
    return Pulse(peak, on, period if period is None else max(period, on), rest)


@dataclass(frozen=True, slots=True)
class Gap:
    """A part that should have a draw on a rail and has none.

    Attributes:
        ref: Reference.
        key: Identity.
        rail: Rail it hangs on.
        value: Its value, for the reader.
        sheet: Human sheet path.
        why: Why no current is known ("no current stated", "load of U3 not known", ...).
        suggestions: Currents found in notes near it, with their place; never used until accepted.
        follows: True where only rails below it have gaps: closing those closes it.
    """

    ref: str
    key: str
    rail: str
    value: str
    sheet: str
    why: str = "no current stated"
    suggestions: tuple[str, ...] = ()
    follows: bool = False


@dataclass(frozen=True, slots=True)
class RailLoad:
    """What hangs on one rail.

    Attributes:
        rail: The rail.
        draws: Known draws, in natural order of reference.
        gaps: Parts without a draw.
        known: Sum of the known draws: a lower bound while there are gaps.
    """

    rail: str
    draws: tuple[Draw, ...]
    gaps: tuple[Gap, ...]
    known: Span

    @property
    def is_complete(self) -> bool:
        """Whether every part that should have a draw has one."""
        return not self.gaps

    @property
    def total(self) -> Span | None:
        """The load, None while anything on the rail is unknown."""
        return self.known if self.is_complete else None


@dataclass(frozen=True)
class Loads:
    """The load of every rail, by rail name, and what the annotations themselves gave to report."""

    by_rail: Mapping[str, RailLoad]
    findings: tuple[Finding, ...] = ()
    input_amps: Mapping[tuple[str, str], Evidence] = field(default_factory=dict)
    """(part key, channel) → current taken from its input rail, where known."""

    possible: tuple[Gap, ...] = ()
    """Parts that may draw without a supply pin to show it (connectors with signals, transistors); no gaps."""

    @property
    def gaps(self) -> tuple[Gap, ...]:
        """All gaps, rail by rail."""
        return tuple(gap for load in self.by_rail.values() for gap in load.gaps)
