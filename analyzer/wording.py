"""How quantities are written for people: engineering prefixes, a fixed number of digits, no locale."""

from __future__ import annotations

from decimal import ROUND_HALF_EVEN, Decimal

from analyzer.quantity import Dimension, Span
from analyzer.units import EVERYDAY

_PREFIXES = {-12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G"}
_PREFIXED_UNITS = frozenset({"A", "V", "W", "Ω", "F", "H", "Hz", "C", "s"})


def show(value: float, unit: str, digits: int = 3) -> str:
    """A value with its SI unit, as "120 mA", "3.30 V", "118 °C" or "62.0 K/W".

    Only units that people write with prefixes get one; ratios (unit "1") are shown as percent; lengths below a metre
    and areas are shown in mm and mm².

    Args:
        value: Value in `unit`.
        unit: SI unit as in `Evidence.unit`.
        digits: Significant digits; digits before the point are never replaced by zeros.
    """
    value, unit = _readable(value, unit)
    if abs(value) >= 1e15 or 0 < abs(value) < 1e-15:
        return f"{value:.{digits}g} {unit}".rstrip()  # beyond what is ever written out in full
    number = Decimal(repr(value))
    if unit not in _PREFIXED_UNITS or not number:
        return f"{_rounded(number, digits)} {unit}".rstrip()
    # the prefix follows the rounded number, so that 0.9999 A is 1.00 A and not 1000 mA
    first = _significant(number, digits).adjusted()
    exponent = min(max(first // 3 * 3, -12), 9)
    units = EVERYDAY[Dimension(unit)]
    while _PREFIXES[exponent] + unit not in units:  # nobody writes megaampere
        exponent += 3 if exponent < 0 else -3
    return f"{_placed(number.scaleb(-exponent), digits, first - exponent)} {_PREFIXES[exponent]}{unit}"


def show_span(span: Span, unit: str, digits: int = 3) -> str:
    """A span as "80.0 mA..150 mA, nominal 115 mA", or as one value where it has no spread that `digits` can show."""
    low, nominal, high = (show(value, unit, digits) for value in span.corners)
    if low == high:
        return nominal
    return f"{low}..{high}" if nominal in (low, high) else f"{low}..{high}, nominal {nominal}"


def _readable(value: float, unit: str) -> tuple[float, str]:
    number = Decimal(repr(value))
    match unit:
        case "1":
            return float(number * 100), "%"
        case "m²":
            return float(number * 1_000_000), "mm²"
        case "m" if abs(value) < 1 and value:
            return float(number * 1000), "mm"
    return value, unit


def _significant(number: Decimal, digits: int) -> Decimal:
    return number.quantize(Decimal(1).scaleb(number.adjusted() - digits + 1), ROUND_HALF_EVEN)


def _rounded(number: Decimal, digits: int) -> str:
    if not number:
        return "0"
    return _placed(number, digits, _significant(number, digits).adjusted())


_PLACES = tuple(Decimal(1).scaleb(-places) for places in range(30))


def _placed(number: Decimal, digits: int, first: int) -> str:
    """The number with `digits` significant digits, the first of them at the power of ten `first`."""
    places = max(digits - 1 - first, 0)
    unit = _PLACES[places] if places < len(_PLACES) else Decimal(1).scaleb(-places)
    return f"{number.quantize(unit, ROUND_HALF_EVEN):f}"
