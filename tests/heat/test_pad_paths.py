"""The path through an exposed pad into stated copper, against the reference sheet's worked figures and by hand."""

from __future__ import annotations

from pathlib import Path

import pytest
from heat_kit import Bench, names, number

from analyzer.errors import InputError
from analyzer.heat.path.pad import ONE_VIA, bessel_i, fin
from analyzer.quantity import Span
from analyzer.rule import BoardClass, ThermalFigure
from analyzer.settings import Board, PartStatement
from analyzer.settings_file import load_settings


@pytest.mark.parametrize(
    ("mm2", "theta"), [(100, 504.7), (300, 176.6), (600, 96.9), (1000, 66.3), (2500, 40.9), (5800, 33.3)]
)
def test_the_fin_of_the_reference_sheet(mm2: float, theta: float) -> None:
    # one 35 µm copper layer on 1.5 mm of FR-4, pad of 2 mm radius, 20 W/(m²·K); isothermal 1000 mm² would say 50
    assert fin(mm2 * 1e-6) == pytest.approx(theta, abs=0.06)


def test_bessel_functions_of_the_first_kind() -> None:
    # Abramowitz and Stegun, table 9.8: e^−1·I0(1) = 0.4657596077, e^−1·I1(1) = 0.2079104154
    assert bessel_i(0, 1.0) == pytest.approx(0.4657596077 * 2.718281828459045, rel=1e-9)
    assert bessel_i(1, 1.0) == pytest.approx(0.2079104154 * 2.718281828459045, rel=1e-9)
    assert (bessel_i(0, 0.0), bessel_i(1, 0.0)) == (1.0, 0.0)


@pytest.mark.parametrize("call", [lambda: fin(0.0), lambda: fin(12e-6), lambda: bessel_i(0, 51.0)])
def test_outside_the_range(call) -> None:
    with pytest.raises(ValueError, match=r"needs positive|outside"):
        call()


def bench(pour: float | None, vias: int | None = None, design: BoardClass = BoardClass.POUR) -> Bench:
    bottom = ThermalFigure("TO-252", "test", theta_jc_bottom=number(Span(1.5, 2.0, 3.0), "K/W"))
    copper = None if pour is None else number(pour * 1e-6, "m²")
    return Bench(
        package="TO-252",
        thermal=(bottom,),
        board=Board(board_class=design, source="test"),
        statement=PartStatement(pour=copper, vias=vias, board_class=design),
    )


def test_pad_vias_and_copper_add_up() -> None:
    entry = bench(600).entry()
    assert entry.worst is not None
    assert entry.worst.theta == pytest.approx(3.0 + 1.35 * 96.9, abs=0.1)
    assert entry.grade == "presumed"
    assert "theta-estimated" in names(entry)
    with_vias = bench(600, 9).entry().worst
    assert with_vias is not None
    assert with_vias.theta == pytest.approx(3.0 + 176.4 / 9 + 1.35 * 96.9, abs=0.1)
    assert pytest.approx(176.4, abs=0.05) == ONE_VIA
    # inner planes: published over model up to 2
    inner = bench(600, design=BoardClass.HIGH).entry().worst
    assert inner is not None
    assert inner.theta == pytest.approx(3.0 + 2 * 96.9, abs=0.1)


@pytest.mark.parametrize("pour", [None, 299.0])
def test_without_enough_copper_there_is_no_estimate(pour: float | None) -> None:
    entry = bench(pour).entry()
    assert entry.worst is not None
    assert entry.worst.theta is None
    assert entry.missing == ("θJA: none known for package TO-252",)


def test_vias_are_stated_by_number(tmp_path: Path) -> None:
    file = tmp_path / "heatledger.toml"
    file.write_text('[parts.U1]\npour = "600 mm²"\nvias = 9\n', encoding="utf-8")
    assert load_settings(file).parts["U1"].vias == 9
    file.write_text("[parts.U1]\nvias = 0\n", encoding="utf-8")
    with pytest.raises(InputError, match=r"\[parts\.U1\] vias: 0 lies outside 1 to 1000"):
        load_settings(file)


def test_altitude_raises_the_board_s_part_only() -> None:
    # δ^−0.7 at 3048 m is 1.299
    entry = bench(600, 9).in_air(40.0, altitude=3048.0).entry()
    assert entry.worst is not None
    assert entry.worst.theta == pytest.approx(3.0 + 176.4 / 9 + 1.299 * 1.35 * 96.9, abs=0.2)


def test_a_published_theta_is_never_undercut() -> None:
    figure = ThermalFigure(
        "TO-252", "test", theta_ja=number(150.0, "K/W"), theta_jc_bottom=number(2.0, "K/W"), board=BoardClass.POUR
    )
    entry = bench(5800).but(thermal=(figure,)).entry()
    assert entry.worst is not None
    assert entry.worst.theta == pytest.approx(150.0)
