"""Preferred numbers against facts of IEC 60063 that the code does not contain as such."""

from __future__ import annotations

import pytest

from analyzer.rails.series import E24, E96, E192, is_preferred


def test_sizes() -> None:
    assert (len(E24), len(set(E96)), len(set(E192))) == (24, 96, 192)


def test_known_members() -> None:
    # E96 between 100 and 121 and at its upper end, as printed in tables of the series (common practice)
    assert E96[:9] == (100, 102, 105, 107, 110, 113, 115, 118, 121)
    assert E96[-3:] == (931, 953, 976)
    assert {101, 104, 988, 920}.issubset(E192)
    assert 919 not in E192


@pytest.mark.parametrize(
    "ohms", [0.0, 10.0, 4700.0, 31600.0, 22100.0, 124.0, 374.0, 93100.0, 147000.0, 33000.0, 0.33, 1e6]
)
def test_made(ohms: float) -> None:
    assert is_preferred(ohms)


@pytest.mark.parametrize("ohms", [31700.0, 12345.0, 1001.0, 26000.0, 9190.0, 4.6e3, -10.0])
def test_not_made(ohms: float) -> None:
    assert not is_preferred(ohms)


def test_e24_differs_from_rounded_powers_at_eight_places() -> None:
    rounded = [round(10 ** (step / 24) * 10) for step in range(24)]
    differing = {made for made, computed in zip(E24, rounded, strict=True) if made != computed}
    assert differing == {27, 30, 33, 36, 39, 43, 47, 82}
