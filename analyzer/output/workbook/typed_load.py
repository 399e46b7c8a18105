"""The load that three typed cells mean: low, nominal and high, as numbers or as text with a unit."""

from __future__ import annotations

from dataclasses import dataclass

from analyzer.grammar import parse, parse_load
from analyzer.load import Pulse
from analyzer.quantity import Dimension, Span


@dataclass(frozen=True, slots=True)
class TypedLoad:
    """What a part takes: a current [A], or a power [W] where `is_power`; `pulse` for currents that come and go."""

    span: Span
    pulse: Pulse | None = None
    is_power: bool = False


def load_of(cells: tuple[object, object, object]) -> TypedLoad:
    """The load of three cells, of which at least one is filled.

    Numbers are amperes, text has its unit; a text alone may be a range, a pulse or a power.

    Raises:
        ValueError: If a cell is not in the grammar, is negative, or the three do not rise.
    """
    given = [cell for cell in cells if cell is not None]
    only = given[0] if len(given) == 1 else None
    load = _one_text(only) if isinstance(only, str) else TypedLoad(_three(cells))
    least = [load.span.low, *((load.pulse.peak.low, load.pulse.rest.low) if load.pulse else ())]
    if min(least) < 0:
        raise ValueError(f"a {'power' if load.is_power else 'current'} that a part takes cannot be negative")
    return load


def _one_text(text: str) -> TypedLoad:
    try:
        return TypedLoad(*parse_load(text))
    except ValueError as no_current:
        try:
            return TypedLoad(parse(text, Dimension.POWER), is_power=True)
        except ValueError:
            raise no_current from None


def _three(cells: tuple[object, object, object]) -> Span:
    """The span of three cells: an empty end is the next known value, an empty middle the mean of the ends."""
    low, nominal, high = (_amps(cell) for cell in cells)
    known = [value for value in (low, nominal, high) if value is not None]
    low = known[0] if low is None else low
    high = known[-1] if high is None else high
    nominal = low + (high - low) / 2 if nominal is None else nominal
    if not low <= nominal <= high:
        raise ValueError(f"low, nominal and high must rise: {low:g}, {nominal:g}, {high:g} A")
    return Span(low, nominal, high)


def _amps(value: object) -> float | None:
    if value is None:
        return None
    if isinstance(value, bool) or not isinstance(value, (int, float, str)):
        raise ValueError(f"'{value}' is no current; type amperes as a number, or text such as 120 mA")
    if isinstance(value, str):
        span = parse(value, Dimension.CURRENT)
        if not span.is_exact:
            raise ValueError(f"'{value}' is a range: type it alone, or one value in each cell")
        return span.nominal
    return float(value)
