"""The closed grammar in which people write quantities: numbers, ranges, typical and maximum, tolerances, pulses.

Nothing outside the grammar is read: a comma, a missing or misspelt unit, a word or a sign such as "<" is refused with
the reason, because every lenient reading of such text is wrong for somebody. Values of schematic symbols, where other
habits rule, are read by `analyzer.component_value`.

    120 mA               exact
    80..150 mA           range; nominal is the middle (also 80–150 mA, 80-150 mA, 80 mA to 0.15 A)
    100/150 mA           typical / maximum; low is the typical value
    10/20/35 mA          minimum / typical / maximum
    3.3 V ±2 %           nominal with tolerance, relative or in the unit itself
    ±2 %, ±0.02          ratios only: the size of a tolerance, 0.02
    2 A for 5 ms every 100 ms           periodic pulse (loads only), with "else 50 mA" for the time between
    2 A for 5 ms                        single pulse
"""

from __future__ import annotations

import re
from decimal import Decimal
from typing import Any

from analyzer import limits
from analyzer.load import Pulse
from analyzer.quantity import ZERO, Dimension, Span
from analyzer.units import EVERYDAY

_NUMBER = r"[+\-]?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+\-]?[0-9]{1,2})?"
_NUMBER_AT = re.compile(_NUMBER)
_SEPARATOR_AT = re.compile(r"\s*(\.{2,3}|…|–|—|/|-|\bto\b)\s*")
_TOLERANCE = re.compile(r"\s*(?:±|\+/-|\+-)\s*")
_PULSE = re.compile(
    r"(?P<peak>.+?)\s+for\s+(?P<on>.+?)(?:\s+every\s+(?P<period>.+?))?(?:,?\s+else\s+(?P<rest>.+))?", re.DOTALL
)
# one spelling each for micro, ohm, minus and the spaces that word processors put before units
_SPELLINGS = str.maketrans("\u03bc\u2126\u2212\u00a0\u202f", "\u00b5\u03a9-  ")

_NAMES = {
    Dimension.CURRENT: "current",
    Dimension.VOLTAGE: "voltage",
    Dimension.POWER: "power",
    Dimension.RESISTANCE: "resistance",
    Dimension.CAPACITANCE: "capacitance",
    Dimension.INDUCTANCE: "inductance",
    Dimension.FREQUENCY: "frequency",
    Dimension.CHARGE: "charge",
    Dimension.TIME: "time",
    Dimension.LENGTH: "length",
    Dimension.AREA: "area",
    Dimension.SPEED: "speed",
    Dimension.TEMPERATURE: "temperature",
    Dimension.TEMPERATURE_DIFFERENCE: "temperature difference",
    Dimension.THERMAL_RESISTANCE: "thermal resistance",
    Dimension.THERMAL_CONDUCTIVITY: "thermal conductivity",
    Dimension.RATIO: "ratio",
    Dimension.PER_KELVIN: "temperature coefficient",
}


def parse(text: str, dimension: Dimension) -> Span:
    """A quantity of a known dimension, in the SI unit used inside (`Dimension`'s value).

    Raises:
        ValueError: If the text is not in the grammar; the message quotes it and says why.
    """
    clean = _clean(text)
    head, *tolerances = _TOLERANCE.split(clean)
    if len(tolerances) > 1:
        raise ValueError(f"'{text}': more than one tolerance")
    if tolerances and not head:
        return _bare_tolerance(text, tolerances[0], dimension)
    span = _span(text, head, dimension)
    return _with_tolerance(text, span, tolerances[0], dimension) if tolerances else span


def parse_load(text: str) -> tuple[Span, Pulse | None]:
    """A load current [A]: steady, or pulsed.

    Returns:
        The current, for pulsed loads its time average, and the shape of the pulse or None. The average of a single
        pulse is the current outside it.

    Raises:
        ValueError: If the text is not in the grammar.
    """
    pulsed = _PULSE.fullmatch(_clean(text))
    if pulsed is None:
        return parse(text, Dimension.CURRENT), None
    peak = parse(pulsed["peak"], Dimension.CURRENT)
    rest = parse(pulsed["rest"], Dimension.CURRENT) if pulsed["rest"] else ZERO
    on = _exact_time(pulsed["on"])
    if pulsed["period"] is None:
        return rest, Pulse(peak, on, None, rest)
    period = _exact_time(pulsed["period"])
    if on > period:
        raise ValueError(f"'{text}': a pulse of {on:g} s does not fit into a period of {period:g} s")
    duty = on / period
    return peak.scaled(duty) + rest.scaled(1 - duty), Pulse(peak, on, period, rest)


def _clean(text: str) -> str:
    if len(text) > limits.QUANTITY_LENGTH:
        raise ValueError(f"'{text[:30]}…': too long for a quantity")
    clean = text.strip().translate(_SPELLINGS)
    if not clean:
        raise ValueError("empty text where a quantity is expected")
    if re.search(r"[0-9],|,[0-9]", clean):
        raise ValueError(
            f"'{text}': a comma may be a decimal sign or separate thousands; write a point or nothing: 1.5 or 1500"
        )
    if sign := re.search(r"[<>≤≥~≈]", clean):
        raise ValueError(f"'{text}': '{sign[0]}' gives no number to calculate with; write a range, as 80..150 mA")
    return clean


def _span(text: str, clean: str, dimension: Dimension) -> Span:
    numbers, units, separators = _pieces(text, clean, dimension)
    for i in range(len(units) - 2, -1, -1):  # a unit holds for the numbers before it that have none
        units[i] = units[i] or units[i + 1]
    values = [_scale(text, number, unit, dimension) for number, unit in zip(numbers, units, strict=True)]
    match separators:
        case []:
            return Span.exact(values[0])
        case ["/"]:
            return _ordered(text, "typical", "maximum", values[0], values[0], values[1])
        case ["/", "/"]:
            return _ordered(text, "minimum, typical", "maximum", *values)
        case [separator] if separator != "/":
            _ordered(text, "lower end", "upper end", values[0], values[0], values[1])
            return Span.between(*values)
    raise ValueError(
        f"'{text}': not a range (80..150), typical/maximum (100/150) or minimum/typical/maximum (10/20/35)"
    )


def _pieces(text: str, clean: str, dimension: Dimension) -> tuple[list[str], list[str], list[str]]:
    """Numbers, units (may be empty) and separators, in order of writing."""
    numbers: list[str] = []
    units: list[str] = []
    separators: list[str] = []
    at = 0
    while True:
        number = _NUMBER_AT.match(clean, at)
        if number is None:
            raise ValueError(f"'{text}': {'no number in it' if not numbers else 'a number is missing'}")
        numbers.append(number[0])
        unit, separator, at = _unit_and_separator(clean, number.end())
        units.append(unit)
        if not separator:
            break
        if separator == "-" and (numbers[-1].startswith("-") or clean.startswith("-", at)):
            raise ValueError(f"'{text}': a hyphen cannot separate negative numbers; write -20..55")
        separators.append(separator)
    if not units[-1] and dimension is not Dimension.RATIO:
        raise ValueError(f"'{text}': no unit; write for example {numbers[-1]} {_example(dimension)}")
    return numbers, units, separators


def _unit_and_separator(clean: str, at: int) -> tuple[str, str, int]:
    """The unit from `at` on, the separator after it ("" at the end of the text), and where the next number starts."""
    for found in _SEPARATOR_AT.finditer(clean, at):
        # a separator inside a unit (K/W, W/m-K) is followed by a letter, one between numbers by a number
        if _NUMBER_AT.match(clean, found.end()):
            return clean[at : found.start()].strip(), found[1], found.end()
    return clean[at:].strip(), "", len(clean)


def _scale(text: str, number: str, unit: str, dimension: Dimension) -> float:
    table = EVERYDAY[dimension]
    factor = table.get(_micro(unit))
    if factor is None and dimension is Dimension.RATIO and not unit:
        factor = Decimal(1)
    if factor is not None:
        return float(Decimal(number) * factor)
    if near := [known for known in table if known.casefold() == unit.casefold()]:
        raise ValueError(f"'{text}': '{unit}' is not a unit; capitals matter: {' or '.join(near)}")
    return _beyond_table(text, float(number), unit, dimension)


def _micro(unit: str) -> str:
    return "µ" + unit[1:] if unit.startswith("u") else unit


def _beyond_table(text: str, number: float, unit: str, dimension: Dimension) -> float:
    """Conversion by pint, which gets a number and a unit, never a text to parse for numbers."""
    refused = ValueError(f"'{text}': '{unit}' is not a unit of {_NAMES[dimension]}, as {_example(dimension)} is")
    if not re.fullmatch(r"[A-Za-zµ°Ω]+(?:[/*·][A-Za-zµ°Ω]+)?", unit):
        raise refused
    import pint

    try:
        registry: Any = pint.application_registry
        inside = _PINT_UNITS.get(dimension, dimension.value)
        return float(registry.Quantity(number, unit).to(inside).magnitude)
    except Exception as error:  # pint raises many kinds for a text that is no unit
        raise refused from error


_PINT_UNITS = {
    Dimension.RESISTANCE: "ohm",
    Dimension.AREA: "m**2",
    Dimension.TEMPERATURE: "degC",
    Dimension.TEMPERATURE_DIFFERENCE: "delta_degC",
    Dimension.THERMAL_RESISTANCE: "delta_degC/W",
    Dimension.THERMAL_CONDUCTIVITY: "W/m/K",
    Dimension.RATIO: "dimensionless",
    Dimension.PER_KELVIN: "1/K",
}


def _bare_tolerance(text: str, size: str, dimension: Dimension) -> Span:
    if dimension is not Dimension.RATIO:
        raise ValueError(f"'{text}': a tolerance without a value")
    return _span(text, size, dimension)


def _with_tolerance(text: str, span: Span, size: str, dimension: Dimension) -> Span:
    if not span.is_exact:
        raise ValueError(f"'{text}': a tolerance on a range")
    if size.rstrip().endswith("%") and dimension is not Dimension.RATIO:
        return Span.around(span.nominal, _positive(text, _span(text, size, Dimension.RATIO)))
    spread = _positive(text, _span(text, size, _difference(dimension)))
    return Span(span.nominal - spread, span.nominal, span.nominal + spread)


def _difference(dimension: Dimension) -> Dimension:
    return Dimension.TEMPERATURE_DIFFERENCE if dimension is Dimension.TEMPERATURE else dimension


def _positive(text: str, spread: Span) -> float:
    if not spread.is_exact or spread.nominal < 0:
        raise ValueError(f"'{text}': a tolerance is one positive number")
    return spread.nominal


def _ordered(text: str, first: str, last: str, low: float, nominal: float, high: float) -> Span:
    if not low <= nominal <= high:
        raise ValueError(f"'{text}': {first} must not exceed {last}")
    return Span(low, nominal, high)


def _exact_time(text: str) -> float:
    span = parse(text, Dimension.TIME)
    if not span.is_exact or span.nominal <= 0:
        raise ValueError(f"'{text}': a pulse needs one positive time")
    return span.nominal


def _example(dimension: Dimension) -> str:
    return "mA" if dimension is Dimension.CURRENT else "%" if dimension is Dimension.RATIO else dimension.value
