"""Quantities: the closed grammar, its units against pint, and writing then reading back."""

from __future__ import annotations

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analyzer.grammar import parse, parse_load
from analyzer.load import Pulse
from analyzer.quantity import Dimension, Span
from analyzer.units import EVERYDAY
from analyzer.wording import show, show_span

D = Dimension

# how pint writes what the trade writes otherwise
PINT = {
    "Ω": "ohm",
    "Ohm": "ohm",
    "R": "ohm",
    "k": "kiloohm",
    "M": "megaohm",
    "in": "inch",
    "mil": "thou",
    "lfm": "foot/minute",
    "LFM": "foot/minute",
    "ft/min": "foot/minute",
    "%": "percent",
    "/K": "1/kelvin",
    "1/K": "1/kelvin",
    "/°C": "1/delta_degC",
    "1/°C": "1/delta_degC",
    "W/mK": "W/(m*kelvin)",
    "W/m-K": "W/(m*kelvin)",
    "W/(mK)": "W/(m*kelvin)",
    "W/(m·K)": "W/(m*kelvin)",
    "W/m/K": "W/(m*kelvin)",
    "W/(m*K)": "W/(m*kelvin)",
    "in2": "inch**2",
    "in²": "inch**2",
    "in^2": "inch**2",
}
INSIDE = {
    D.RESISTANCE: "ohm",
    D.AREA: "m**2",
    D.TEMPERATURE: "degC",
    D.TEMPERATURE_DIFFERENCE: "delta_degC",
    D.THERMAL_RESISTANCE: "delta_degC/W",
    D.THERMAL_CONDUCTIVITY: "W/(m*kelvin)",
    D.RATIO: "dimensionless",
    D.PER_KELVIN: "1/delta_degC",
}


def pint_name(unit: str, dimension: Dimension) -> str:
    if unit in PINT:
        return PINT[unit]
    if dimension is D.TEMPERATURE:
        return "degC"
    if dimension is D.RESISTANCE:
        return re.sub(r"(Ω|Ohm|R)$", "ohm", unit)
    name = re.sub(r"℃|degC|°C|(?<![a-z])C(?=/W)", "delta_degC", unit)
    name = re.sub(r"(?<=[a-z%])/K$", "/delta_degC", name)
    if dimension in (D.TEMPERATURE_DIFFERENCE, D.THERMAL_RESISTANCE):
        name = re.sub(r"(?<![a-z_])K", "delta_degC", name).replace("mK", "millikelvin")
    return name.replace("%", "percent").replace("²", "**2").replace("^", "**").replace("m2", "m**2")


@pytest.mark.parametrize(
    ("dimension", "unit"), [(dimension, unit) for dimension, table in EVERYDAY.items() for unit in table]
)
def test_every_unit_of_the_table_against_pint(dimension, unit):
    import pint

    registry = pint.get_application_registry()
    outside = registry.Quantity(3.7, pint_name(unit, dimension)).to(INSIDE.get(dimension, dimension.value))
    inside = parse(f"3.7 {unit}", dimension)
    assert inside.is_exact
    assert inside.nominal == pytest.approx(float(outside.magnitude), rel=1e-12)


@pytest.mark.parametrize("dimension", D)
def test_every_dimension_reads_its_own_unit(dimension):
    unit = "" if dimension is D.RATIO else dimension.value
    assert parse(f"2.5 {unit}", dimension) == Span.exact(2.5)


@pytest.mark.parametrize(
    ("text", "dimension", "corners"),
    [
        ("120 mA", D.CURRENT, (0.12, 0.12, 0.12)),
        ("120mA", D.CURRENT, (0.12, 0.12, 0.12)),
        ("  .5 A ", D.CURRENT, (0.5, 0.5, 0.5)),
        ("1e-3 A", D.CURRENT, (0.001, 0.001, 0.001)),
        ("5 µA", D.CURRENT, (5e-6, 5e-6, 5e-6)),
        ("5 \u03bcA", D.CURRENT, (5e-6, 5e-6, 5e-6)),
        ("5 uA", D.CURRENT, (5e-6, 5e-6, 5e-6)),
        ("80..150 mA", D.CURRENT, (0.08, 0.115, 0.15)),
        ("80…150 mA", D.CURRENT, (0.08, 0.115, 0.15)),
        ("80–150 mA", D.CURRENT, (0.08, 0.115, 0.15)),
        ("80-150mA", D.CURRENT, (0.08, 0.115, 0.15)),
        ("80 mA .. 0.15 A", D.CURRENT, (0.08, 0.115, 0.15)),
        ("80 mA to 0.15 A", D.CURRENT, (0.08, 0.115, 0.15)),
        ("100/150 mA", D.CURRENT, (0.1, 0.1, 0.15)),
        ("10/20/35 mA", D.CURRENT, (0.01, 0.02, 0.035)),
        ("500 µA/1 mA", D.CURRENT, (5e-4, 5e-4, 1e-3)),
        ("3.3 V ±2 %", D.VOLTAGE, (3.234, 3.3, 3.366)),
        ("3.3 V +/- 2%", D.VOLTAGE, (3.234, 3.3, 3.366)),
        ("3.3 V ±0.1 V", D.VOLTAGE, (3.2, 3.3, 3.4)),
        ("-12 V ±5 %", D.VOLTAGE, (-12.6, -12.0, -11.4)),
        ("-12.6..-11.4 V", D.VOLTAGE, (-12.6, -12.0, -11.4)),
        ("−5 V", D.VOLTAGE, (-5, -5, -5)),
        ("11.4..12.6 V", D.VOLTAGE, (11.4, 12.0, 12.6)),
        ("±0.02", D.RATIO, (0.02, 0.02, 0.02)),
        ("±2 %", D.RATIO, (0.02, 0.02, 0.02)),
        ("85 %", D.RATIO, (0.85, 0.85, 0.85)),
        ("0.85", D.RATIO, (0.85, 0.85, 0.85)),
        ("85..92 %", D.RATIO, (0.85, 0.885, 0.92)),
        ("-20..55 °C", D.TEMPERATURE, (-20, 17.5, 55)),
        ("-40 to 85 °C", D.TEMPERATURE, (-40, 22.5, 85)),
        ("40 °C ±5 K", D.TEMPERATURE, (35, 40, 45)),
        ("62 K/W", D.THERMAL_RESISTANCE, (62, 62, 62)),
        ("62 °C/W", D.THERMAL_RESISTANCE, (62, 62, 62)),
        ("50/62 K/W", D.THERMAL_RESISTANCE, (50, 50, 62)),
        ("300 mm2", D.AREA, (3e-4, 3e-4, 3e-4)),
        ("300 mm²", D.AREA, (3e-4, 3e-4, 3e-4)),
        ("1 in²", D.AREA, (0.00064516, 0.00064516, 0.00064516)),
        ("1000 ft", D.LENGTH, (304.8, 304.8, 304.8)),
        ("250 kHz", D.FREQUENCY, (250e3, 250e3, 250e3)),
        ("10 kΩ", D.RESISTANCE, (1e4, 1e4, 1e4)),
        ("35 m\u2126", D.RESISTANCE, (0.035, 0.035, 0.035)),
        # outside the table, by pint
        ("104 °F", D.TEMPERATURE, (40, 40, 40)),
        ("313.15 kelvin", D.TEMPERATURE, (40, 40, 40)),
        ("1 mile", D.LENGTH, (1609.344, 1609.344, 1609.344)),
        ("36 km/hour", D.SPEED, (10, 10, 10)),
    ],
)
def test_accepted(text, dimension, corners):
    assert parse(text, dimension).corners == pytest.approx(corners, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "dimension", "reason"),
    [
        ("120 ma", D.CURRENT, "capitals matter: mA"),
        ("250 KHz", D.FREQUENCY, "capitals matter: kHz"),
        ("3 v", D.VOLTAGE, "capitals matter: V"),
        ("1,500 mA", D.CURRENT, "comma"),
        ("1,5 A", D.CURRENT, "comma"),
        ("62", D.THERMAL_RESISTANCE, "no unit; write for example 62 K/W"),
        ("120", D.CURRENT, "no unit; write for example 120 mA"),
        ("80..150", D.CURRENT, "no unit"),
        ("80 mA..150", D.CURRENT, "no unit"),
        ("120 mA max", D.CURRENT, "not a unit of current"),
        ("120 mA 5", D.CURRENT, "not a unit of current"),
        ("up to 200 mA", D.CURRENT, "no number"),
        ("<1A", D.CURRENT, "'<' gives no number"),
        ("~0.5A", D.CURRENT, "'~' gives no number"),
        (">= 1 A", D.CURRENT, "'>' gives no number"),
        ("nan A", D.CURRENT, "no number"),
        ("inf A", D.CURRENT, "no number"),
        ("1e999 A", D.CURRENT, "not a unit"),
        ("120 MA", D.CURRENT, "capitals matter: mA"),
        ("10k", D.CURRENT, "not a unit of current"),
        ("100 mV", D.CURRENT, "not a unit of current"),
        ("100 mA", D.VOLTAGE, "not a unit of voltage"),
        ("5 C", D.CURRENT, "not a unit of current"),
        ("-20-55 °C", D.TEMPERATURE, "write -20..55"),
        ("150/100 mA", D.CURRENT, "typical must not exceed maximum"),
        ("150..100 mA", D.CURRENT, "lower end must not exceed upper end"),
        ("35/20/10 mA", D.CURRENT, "must not exceed maximum"),
        ("10/20/30/40 mA", D.CURRENT, "not a range"),
        ("1..2/3 mA", D.CURRENT, "not a range"),
        ("1 500 mA", D.CURRENT, "not a unit"),
        ("9**9**9**9 A", D.CURRENT, "not a unit"),
        ("3.3.3 V", D.VOLTAGE, "not a unit"),
        ("3. V", D.VOLTAGE, "not a unit"),
        ("± 2 %", D.VOLTAGE, "a tolerance without a value"),
        ("3.3 V ±2 % ±1 %", D.VOLTAGE, "more than one tolerance"),
        ("1..2 V ±2 %", D.VOLTAGE, "a tolerance on a range"),
        ("3.3 V ±-2 %", D.VOLTAGE, "one positive number"),
        ("3.3 V ±1..2 %", D.VOLTAGE, "one positive number"),
        ("3.3 V ±2", D.VOLTAGE, "no unit"),
        ("", D.CURRENT, "empty"),
        ("-", D.CURRENT, "no number"),
        ("mA", D.CURRENT, "no number"),
        ("٣ mA", D.CURRENT, "no number"),
        ("1" * 200 + " mA", D.CURRENT, "too long"),
        ("__import__('os') A", D.CURRENT, "no number"),
        ("1 dozen*A*s", D.CURRENT, "not a unit of current"),
    ],
)
def test_refused_with_the_reason(text, dimension, reason):
    with pytest.raises(ValueError, match=re.escape(reason)):
        parse(text, dimension)


def test_the_mistakes_of_a_lenient_parser_are_not_made():
    """pint's own text parser reads these as 15 A, 1 A and milli-years (measured, pint 0.25)."""
    for text in ("1,5 A", "<1A", "100 ma"):
        with pytest.raises(ValueError, match=re.escape(text)):
            parse(text, D.CURRENT)
    assert parse("62 °C/W", D.THERMAL_RESISTANCE) == Span.exact(62.0)


def test_everyday_units_never_import_pint():
    import subprocess
    import sys

    code = (
        "import sys; from analyzer.grammar import parse; from analyzer.quantity import Dimension;"
        "parse('62 K/W', Dimension.THERMAL_RESISTANCE); parse('80..150 mA', Dimension.CURRENT);"
        "print('pint' in sys.modules)"
    )
    assert subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout == "False\n"


class TestLoads:
    def test_periodic(self):
        span, pulse = parse_load("2 A for 5 ms every 100 ms")
        assert span.corners == pytest.approx((0.1, 0.1, 0.1))
        assert pulse == Pulse(Span.exact(2.0), 0.005, 0.1)

    def test_periodic_with_rest_and_ranges(self):
        span, pulse = parse_load("1.5/2 A for 5 ms every 100 ms else 40..60 mA")
        assert span.corners == pytest.approx(
            (1.5 * 0.05 + 0.04 * 0.95, 1.5 * 0.05 + 0.05 * 0.95, 2 * 0.05 + 0.06 * 0.95)
        )
        assert pulse.peak == Span(1.5, 1.5, 2.0)

    def test_single(self):
        assert parse_load("2 A for 5 ms else 10 mA") == (
            Span.exact(0.01),
            Pulse(Span.exact(2.0), 0.005, None, Span.exact(0.01)),
        )

    def test_steady(self):
        assert parse_load("120 mA") == (Span.exact(0.12), None)

    @pytest.mark.parametrize(
        ("text", "reason"),
        [
            ("2 A for 5 ms every 1 ms", "does not fit"),
            ("2 A for 5 mA", "not a unit of time"),
            ("2 A for 0 ms every 1 s", "one positive time"),
            ("2 A for 1..5 ms every 1 s", "one positive time"),
            ("2 A every 100 ms", "not a unit of current"),
            ("2 for 5 ms", "no unit"),
        ],
    )
    def test_refused(self, text, reason):
        with pytest.raises(ValueError, match=reason):
            parse_load(text)


_READABLE = [D.CURRENT, D.VOLTAGE, D.POWER, D.RESISTANCE, D.TEMPERATURE, D.THERMAL_RESISTANCE, D.TIME, D.FREQUENCY]


@given(
    st.sampled_from(_READABLE),
    st.floats(min_value=1e-6, max_value=9.99e8),
    st.sampled_from((-1.0, 1.0)),
    st.integers(min_value=3, max_value=9),
)
def test_what_is_shown_reads_back_to_the_digits_shown(dimension, size, sign, digits):
    value = size * sign
    assert parse(show(value, dimension.value, digits), dimension).nominal == pytest.approx(
        value, rel=0.51 * 10 ** (1 - digits)
    )


@given(st.sampled_from(_READABLE), st.lists(st.integers(min_value=-(10**9), max_value=10**9), min_size=2, max_size=2))
def test_ranges_read_back(dimension, ends):
    low, high = (end / 1000 for end in sorted(ends))
    unit = dimension.value
    span = parse(f"{low:.3f}..{high:.3f} {unit}", dimension)
    assert (span.low, span.high) == (low, high)


@given(st.text(max_size=30))
def test_any_text_is_read_or_refused_never_something_else(text):
    try:
        span = parse(text, D.CURRENT)
    except ValueError as error:
        assert str(error)  # noqa: PT017 - the other branch is as good an outcome
    else:
        assert all(map(math.isfinite, span.corners))


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (0.12, "A", "120 mA"),
        (3.3, "V", "3.30 V"),
        (118.0, "°C", "118 °C"),
        (62.0, "K/W", "62.0 K/W"),
        (0.9996, "A", "1.00 A"),
        (0.99949, "A", "999 mA"),
        (1.2345e6, "Hz", "1.23 MHz"),
        (0.855, "1", "85.5 %"),
        (0.0, "A", "0 A"),
        (-12.0, "V", "-12.0 V"),
        (3e-4, "m²", "300 mm²"),
        (0.02, "m", "20.0 mm"),
        (1524.0, "m", "1524 m"),
        (4700.0, "Ω", "4.70 kΩ"),
        (2.2e-6, "H", "2.20 µH"),
        (1234.5, "K/W", "1234 K/W"),
        (0.001, "K/W", "0.00100 K/W"),
    ],
)
def test_shown(value, unit, text):
    assert show(value, unit) == text


def test_spans_shown():
    assert show_span(Span.exact(0.12), "A") == "120 mA"
    assert show_span(Span(0.08, 0.1, 0.15), "A") == "80.0 mA..150 mA, nominal 100 mA"
    assert show_span(Span(0.1, 0.1, 0.15), "A") == "100 mA..150 mA"
    assert show_span(Span(0.1, 0.10001, 0.10002), "A") == "100 mA"


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (1e30, "K", "1e+30 K"),
        (1e-40, "V", "1e-40 V"),
        (-0.09999, "V", "-100 mV"),
        (0.99996, "A", "1.00 A"),
        (9.996, "W", "10.0 W"),
        (1234567.0, "Ω", "1.23 MΩ"),
        (0.0, "A", "0 A"),
    ],
)
def test_numbers_at_the_edges_are_written_out(value: float, unit: str, text: str) -> None:
    assert show(value, unit) == text
