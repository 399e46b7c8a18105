"""The matcher against Python's own shell patterns and regular expressions, and against time."""

from __future__ import annotations

import fnmatch
import re
import time

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analyzer.recognise.pattern import core, glob, match
from analyzer.rule import Pattern

LETTERS = "AB1"
SHELL = st.text(LETTERS + "*?", max_size=12)
TEXT = st.text(LETTERS, max_size=14)


@given(SHELL, TEXT)
def test_glob_equals_pythons_shell_patterns(pattern: str, text: str) -> None:
    assert glob(pattern, text) == fnmatch.fnmatchcase(text, pattern)


@given(SHELL, TEXT)
def test_what_matches_contains_the_patterns_core(pattern: str, text: str) -> None:
    if glob(pattern, text):
        assert core(pattern) in text


@given(st.text("AB", max_size=3), st.text("AB*", max_size=4), st.text("AB12", max_size=10))
def test_tenths_with_fixed_ends_equal_a_regular_expression(head: str, tail: str, text: str) -> None:
    expression = re.escape(head) + r"(\d\d)(?!\d)" + tail.replace("*", ".*")
    expected = re.fullmatch(expression, text)
    hit = match(Pattern(head + "{code}" + tail, "tenths"), text)
    assert (hit.code if hit else None) == (expected[1] if expected else None)


@given(st.text("AB", min_size=1, max_size=7), st.sampled_from(["12", "123"]))
def test_maker_is_one_to_five_letters(maker: str, number: str) -> None:
    hit = match(Pattern("{maker}12*"), maker + number)
    assert (hit is not None) == (len(maker) <= 5)


@pytest.mark.parametrize(
    ("decode", "text", "volts"),
    [
        ("volts", "QX77-5", 5.0),
        ("volts", "QX77-12", 12.0),
        ("volts", "QX77-3.3", 3.3),
        ("decimal", "QX77-1.85", 1.85),
        ("decimal", "QX77-5", None),
        ("tenths", "QX77-33", 3.3),
        ("tenths", "QX77-330", None),
        ("hundredths", "QX77-125", 1.25),
        ("hundredths", "QX77-12", None),
        ("dashed", "QX77-3-3", 3.3),
        ("letter", "QX77-1V8", 1.8),
    ],
)
def test_each_decode(decode: str, text: str, volts: float | None) -> None:
    hit = match(Pattern("QX77-{code}", decode), text)
    assert (hit.volts if hit else None) == volts


def test_table_reads_letters() -> None:
    pattern = Pattern("QX9{code}*", "table", {"X": 5.0, "Y": 3.3})
    assert [match(pattern, text).volts for text in ("QX9X", "QX9YTR")] == [5.0, 3.3]  # type: ignore[union-attr]
    assert match(pattern, "QX9Z") is None


def test_codes_outside_the_list_do_not_match() -> None:
    pattern = Pattern("{maker}9{code}*", "volts", codes=("05", "12"))
    assert match(pattern, "QX905CT").volts == 5.0  # type: ignore[union-attr]
    assert match(pattern, "QX933CT") is None


def test_a_number_is_never_cut_short() -> None:
    assert match(Pattern("{maker}77{code}*", "tenths"), "QX77335") is None


def test_makers_restrict() -> None:
    pattern = Pattern("{maker}55*")
    assert match(pattern, "QX55", ("QX",)) is not None
    assert match(pattern, "QY55", ("QX",)) is None


def test_many_stars_cannot_hang() -> None:
    hostile = "*A" * 38 + "*{code}" + "B"
    started = time.perf_counter()
    assert match(Pattern(hostile, "tenths"), "A" * 199) is None
    assert match(Pattern(hostile, "tenths"), "A1" * 100) is None
    assert time.perf_counter() - started < 2
