"""Value texts of symbols: the shapes seen on real boards, with what they mean."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analyzer.component_value import component_value
from analyzer.quantity import Dimension

R, C, L = Dimension.RESISTANCE, Dimension.CAPACITANCE, Dimension.INDUCTANCE


@pytest.mark.parametrize(
    ("text", "magnitude", "dimension"),
    [
        ("10", 10, None),
        ("0", 0, None),
        ("0R", 0, R),
        ("10k", 1e4, R),
        ("10K", 1e4, R),
        ("9.42k", 9420, R),
        ("4,7K", 4700, R),
        ("4K7", 4700, R),
        ("47K3", 47300, R),
        ("4M7", 4.7e6, R),
        ("R47", 0.47, R),
        ("4R7", 4.7, R),
        ("470R", 470, R),
        ("0R01", 0.01, R),
        ("R005", 0.005, R),
        ("9M", 9e6, None),
        ("1k5", 1500, R),
        ("100kR", 1e5, R),
        ("22k1R", 22100, R),
        ("10 kΩ", 1e4, R),
        ("10 k\u2126", 1e4, R),
        ("4.7 k", 4700, R),
        ("0.1 ohm", 0.1, R),
        ("5mΩ", 0.005, R),
        ("R_0R_0402", 0, R),
        ("R_2k_0402", 2000, R),
        ("R_5R6_0402", 5.6, R),
        ("10k/R0402", 1e4, R),
        ("R0402/10k", 1e4, R),
        ("33R 0402", 33, R),
        ("10k_NTC", 1e4, R),
        ("600R@100MHz", 600, R),
        ("1R5 2 W", 1.5, R),
        ("9nF", 9e-9, C),
        ("9.9uF", 9.9e-6, C),
        ("9.9µF", 9.9e-6, C),
        ("1UF", 1e-6, C),
        ("100NF", 1e-7, C),
        ("C_100n_0402", 1e-7, None),
        ("C_2u2_0402", 2.2e-6, None),
        ("4n7", 4.7e-9, None),
        ("1u0", 1e-6, None),
        ("100nF/50V/10%/X7R/C0402", 1e-7, C),
        ("22uF 10V", 2.2e-5, C),
        ("2,2uH", 2.2e-6, L),
        ("2.2 uH", 2.2e-6, L),
        ("1.0uH/4.2A", 1e-6, L),
    ],
)
def test_magnitude_and_dimension(text, magnitude, dimension):
    value = component_value(text)
    assert value.magnitude == pytest.approx(magnitude, rel=1e-12)
    assert value.dimension is dimension
    assert not value.is_unfitted


@pytest.mark.parametrize(
    ("text", "tolerance"),
    [
        ("8.06k+-1%", 0.01),
        ("8.06k±1%", 0.01),
        ("49.9R/1%/R0402", 0.01),
        ("0.02+-1%", 0.01),
        ("0.02 +/- 1 %", 0.01),
        ("100kR 1%", 0.01),
        ("22k1R 0.1%", 0.001),
        ("1.27k/1%/62.5mW/R0402", 0.01),
        ("10K-1%", 0.01),
        ("0.51 (1%)", 0.01),
        ("10k 0,5%", 0.005),
        ("4K7J", 0.05),
        ("4K7K", 0.10),
        ("10KF", None),
        ("10k", None),
    ],
)
def test_tolerance(text, tolerance):
    value = component_value(text)
    assert (value.tolerance if value else None) == tolerance


def test_series_resistance_of_an_inductor():
    value = component_value("1.0uH/4.2A/DCR=35mR/IND-4x4")
    assert (value.magnitude, value.dimension, value.dcr) == (1e-6, L, 0.035)
    assert component_value("4.7uH 3A DCR 0.02R").dcr == 0.02
    assert component_value("4.7uH 3A").dcr is None


@pytest.mark.parametrize(
    ("text", "magnitude"),
    [
        ("NA(10k/R0402)", 1e4),
        ("NA/R0402", None),
        ("DNP", None),
        ("DNF", None),
        ("N.C.", None),
        ("nc", None),
        ("N/A", None),
        ("not fitted", None),
        ("10k DNP", 1e4),
        ("100n_DNP", 1e-7),
        ("4.7k (DNP)", 4700),
        ("DNP 10k", 1e4),
    ],
)
def test_not_fitted(text, magnitude):
    value = component_value(text)
    assert value.is_unfitted
    assert value.magnitude == magnitude


@pytest.mark.parametrize(
    "text",
    [
        *("", "22OnF", "470ns", "1,000", "3V3", "5V", "1N4148", "2N7002", "LM1117-3.3", "BLM18PG221SN1", "NTC", "MAX"),
        *(
            "NCP15",
            "NFM18",
            "NP0",
            "F10",
            "350mA",
            "100 mA",
            "5 V",
            "100 MHz",
            "1206",
            "100J",
            "1MF",
            "1MOHM",
            "TBD",
            "?",
        ),
    ],
)
def test_what_is_no_value_is_left_alone(text):
    assert component_value(text) is None


@given(st.integers(min_value=1, max_value=999), st.integers(min_value=0, max_value=99), st.sampled_from("RkM"))
def test_letter_for_the_point(whole, part, letter):
    exponent = {"R": 0, "k": 3, "M": 6}[letter]
    value = component_value(f"{whole}{letter}{part:02d}")
    assert value.magnitude == pytest.approx((whole + part / 100) * 10**exponent, rel=1e-12)
    assert value.dimension is R


@given(st.text(max_size=40))
def test_any_text_is_understood_or_left_alone(text):
    value = component_value(text)
    assert value is None or value.magnitude is None or value.magnitude >= 0
