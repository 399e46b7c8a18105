"""Mistakes that a naive budget makes, each with the number it would give beside the right one."""

from __future__ import annotations

import pytest
from heat_kit import Bench, names, number

from analyzer.findings.base import Verdict
from analyzer.heat.altitude import multiplier
from analyzer.heat.coupling import plate_spreading
from analyzer.heat.path.sink import natural_factor
from analyzer.ledger import Entry
from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.rule import BoardClass, Curve, ThermalFigure, Topology
from analyzer.settings import Board, PartStatement

EXACT = Span.exact


def junction(entry: Entry) -> float:
    assert entry.worst is not None
    assert entry.worst.junction is not None
    return entry.worst.junction


def test_nominal_in_place_of_the_corner() -> None:
    # 24 V industrial rail 20.4-28.8 V, 5 V -2 %, 50 mA, Iq 5 mA: 1.339 W, not 0.950 W
    bench = Bench(
        vin=Span(20.4, 24.0, 28.8),
        vout=Span(4.9, 5.0, 5.1),
        draws=((EXACT(0.05), None),),
        figures={"quiescent": 0.005, "junction_max": 125.0},
    )
    worst = bench.entry().worst
    assert worst is not None
    assert worst.watts == pytest.approx(1.339, abs=0.0005)
    assert worst.name == "input high, output low"


def test_highest_input_taken_for_the_worst_of_a_buck() -> None:
    # 5 V, 3 A, 500 kHz, 20 ns, Rhs 150 mΩ, Rls 50 mΩ, Iq 1 mA: ideal duty: 1.356 W at 5.5 V, 1.059 W at 28 V, least at
    # 18 V (test_published_losses); with the switches' own drops the duty at 5.5 V is 5.15/5.2, at 28 V 5.15/27.7:
    # 9 · (0.15 · 0.990385 + 0.05 · 0.009615) + 0.0825 + 0.0055 = 1.4293 W and 0.6173 + 0.42 + 0.028 = 1.0653 W
    bench = Bench(
        topology=Topology.BUCK,
        vin=Span(5.5, 18.0, 28.0),
        vout=EXACT(5.0),
        draws=((EXACT(3.0), None),),
        figures={
            "high_side_resistance": 0.15,
            "low_side_resistance": 0.05,
            "switching_frequency": 500e3,
            "rise_time": 10e-9,
            "fall_time": 10e-9,
            "quiescent": 0.001,
            "junction_max": 125.0,
        },
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.nominal is not None
    assert entry.worst.watts == pytest.approx(1.4293, abs=0.0001)
    assert entry.worst.name == "input low"
    assert entry.nominal.watts == pytest.approx(0.9999, abs=0.0001)


@pytest.mark.parametrize(
    ("measured", "celsius"),
    [({"case_measured": number(85.0, "°C")}, 95.5), ({}, 40.0 + 0.5 * 176.9)],
)
def test_psi_and_theta_jc_confused(measured: dict[str, object], celsius: float) -> None:
    # TLV758P DBV, 0.5 W, top measured at 85 °C: ψJT 21.0 gives 95.5 °C; θJC(top) 95.3 would give 132.7 °C.
    # Without a measurement neither has any use.
    figure = ThermalFigure(
        "SOT-23-5",
        "test",
        theta_ja=number(176.9, "K/W"),
        board=BoardClass.HIGH,
        psi_jt=number(21.0, "K/W"),
        theta_jc_top=number(95.3, "K/W"),
    )
    bench = Bench(
        vin=EXACT(4.0),
        vout=EXACT(3.0),
        draws=((EXACT(0.5), None),),
        thermal=(figure,),
        statement=PartStatement(**measured),  # type: ignore[arg-type]
    )
    assert junction(bench.entry()) == pytest.approx(celsius)


def test_high_k_figure_on_a_low_k_board() -> None:
    # TLE42694E, SSOP-14 with pad, 0.5 W at 85 °C: 108.5 °C on 2s2p, 157.5 °C on the footprint alone
    figure = ThermalFigure("TSSOP-EP", "test", theta_ja=number(47.0, "K/W"), board=BoardClass.HIGH)
    bench = Bench(
        vin=EXACT(6.0),
        vout=EXACT(5.0),
        draws=((EXACT(0.5), None),),
        figures={"quiescent": 0.0, "junction_max": 150.0},
        thermal=(figure,),
        package="TSSOP-EP",
    ).in_air(85.0)
    assert junction(bench.entry()) == pytest.approx(108.5)
    low = bench.but(board=Board(board_class=BoardClass.LOW, source="test")).entry()
    assert junction(low) == pytest.approx(157.5, abs=0.2)
    assert low.verdict is Verdict.OVER
    assert "board-class-corrected" in names(low)


def test_the_other_way_no_credit_is_given() -> None:
    figure = ThermalFigure("TSSOP-EP", "test", theta_ja=number(145.0, "K/W"), board=BoardClass.LOW)
    bench = Bench(vin=EXACT(6.0), vout=EXACT(5.0), draws=((EXACT(0.5), None),), thermal=(figure,), package="TSSOP-EP")
    assert junction(bench.entry()) == pytest.approx(40.0 + 72.5)


def test_a_figure_without_class_is_taken_for_high_k() -> None:
    low = Board(board_class=BoardClass.LOW, source="test")
    stated = Bench(board=low, theta_class=BoardClass.HIGH).entry()
    silent = Bench(board=low, theta_class=None).entry()
    assert junction(silent) == junction(stated) == pytest.approx(40.0 + 0.17 * 50.0 * 3.3)


def test_dropout_ignored() -> None:
    # 3.3 V -5 % into a 3.0 V part leaves 135 mV; 250 mV at 0.5 A are needed, though the junction is fine
    bench = Bench(vin=Span(3.135, 3.3, 3.465), vout=EXACT(3.0), draws=((EXACT(0.5), None),)).with_figures(dropout=0.25)
    entry = bench.entry()
    assert junction(entry) < 60.0
    assert "dropout-lost" in names(entry)
    assert entry.verdict is Verdict.OVER


FOOTPRINT = tuple((r, r * c) for r, c in ((0.8, 6e-5), (1.6, 5e-4), (4.5, 0.03), (24, 0.16), (0.1, 1000), (100, 0.5)))


def test_average_power_for_pulses() -> None:
    # 5 W for 1 s every 100 s on the published SOT-223 network: 73.5 K; 6.6 K by the average, 655 K as DC
    pulse = Pulse(EXACT(5.0), 1.0, 100.0)
    figure = ThermalFigure("SOT-223", "test", theta_ja=number(131.0, "K/W"), board=BoardClass.HIGH, foster=FOOTPRINT)
    bench = Bench(vin=EXACT(6.0), vout=EXACT(5.0), draws=((EXACT(0.05), pulse),), thermal=(figure,))
    assert junction(bench.entry()) - 40.0 == pytest.approx(73.46, rel=0.001)
    without = bench.but(
        thermal=(ThermalFigure("SOT-223", "test", theta_ja=number(131.0, "K/W"), board=BoardClass.HIGH),)
    )
    entry = without.entry()
    assert junction(entry) - 40.0 == pytest.approx(655.0)
    assert "pulse-as-steady" in names(entry)


def test_altitude_by_density_or_on_everything() -> None:
    # 10,000 ft: pressure^-0.5 is 1.206 (density of the cold day: 1.164)
    at = multiplier(3048.0, 0.5)
    assert at == pytest.approx(1.206, abs=0.001)
    # sink chain 3 + 1 + 10 K/W: only the last in air, 16.06 K/W and not 16.88
    assert 4.0 + at * 10.0 == pytest.approx(16.06, abs=0.01)
    chain = PartStatement(heat_sink=(number(3.0, "K/W"), number(1.0, "K/W"), number(10.0, "K/W")))
    bench = Bench(vin=EXACT(25.0), vout=EXACT(5.0), draws=((EXACT(1.0), None),), statement=chain)
    ground, high = bench.entry().worst, bench.in_air(altitude=3048.0).entry().worst
    assert ground is not None
    assert high is not None
    # 20 W through 10 K/W is a rise above the 75 K the sink is rated at: no correction
    assert ground.theta == pytest.approx(14.0)
    assert high.theta == pytest.approx(4.0 + 10.0 * multiplier(3048.0, 0.7))


def test_altitude_raises_the_rise_not_the_temperature() -> None:
    # 25 °C and 60 K of rise: 25 + 60 · 1.299 at 10,000 ft with n = 0.7, not 85 · 1.299
    bench = Bench(vin=EXACT(6.0), vout=EXACT(5.0), draws=((EXACT(1.2), None),)).in_air(25.0, 3048.0)
    assert junction(bench.entry()) == pytest.approx(25.0 + 60.0 * 1.299, abs=0.1)


def test_catalogue_figure_of_a_sink_at_a_small_rise() -> None:
    # at 30 K of rise θSA is 26 % worse than at the catalogue's 75 K
    catalogue = 10.0
    watts = 30.0 / (catalogue * 1.257)
    assert natural_factor(catalogue, watts) == pytest.approx(12.57, rel=0.001)


@pytest.mark.parametrize(
    ("millimetres", "one_plane", "two_planes"),
    [(1.5, 32.8, 18.9), (5, 19.9, 12.2), (10, 12.9, 8.4), (20, 6.8, 4.9), (30, 3.9, 3.2), (50, 1.5, 1.5)],
)
def test_a_neighbour_ten_millimetres_away(millimetres: float, one_plane: float, two_planes: float) -> None:
    # 35 µm planes on 1.5 mm of FR-4 (0.8 W/mK in its plane), 20 W/m²K on both faces together, source of 1.5 mm
    for planes, expected in ((1, one_plane), (2, two_planes)):
        spread = planes * 385.0 * 35e-6 + 0.8 * 1.5e-3
        assert plate_spreading(millimetres / 1000, 1.5e-3, spread, 20.0) == pytest.approx(expected, abs=0.06)


def test_cold_on_resistance() -> None:
    # TPS1HB35: 35 mΩ cold, 70 mΩ hot, 4.4 A: 0.68 W or 1.355 W
    bench = Bench(
        topology=Topology.LOAD_SWITCH,
        vout=EXACT(5.0),
        draws=((EXACT(4.4), None),),
        figures={"on_resistance": Span(0.03, 0.035, 0.070), "junction_max": 150.0},
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.nominal is not None
    assert entry.worst.watts == pytest.approx(1.355, abs=0.0005)
    assert entry.nominal.watts == pytest.approx(0.678, abs=0.0005)


def test_highest_output_in_the_heat_of_a_linear_part() -> None:
    # MIC5209: 0.406 W with the lowest output, 0.326 W with the highest
    bench = Bench(
        vin=EXACT(3.6), vout=Span(2.375, 2.5, 2.625), draws=((EXACT(0.32), None),), figures={"quiescent": 0.004}
    )
    worst = bench.entry().worst
    assert worst is not None
    assert worst.watts == pytest.approx(0.406, abs=0.0005)


def test_copper_beyond_its_table_is_not_credited() -> None:
    table = Curve(((0.0, EXACT(164.3)), (300e-6, EXACT(81.2)), (600e-6, EXACT(68.0))), "copper", number(81.2, "K/W"))
    figure = ThermalFigure("SOT-223", "test", theta_ja=number(164.3, "K/W"), board=BoardClass.LOW, copper=table)
    bench = Bench(vin=EXACT(6.0), vout=EXACT(5.0), draws=((EXACT(0.1), None),), thermal=(figure,))
    inside = bench.but(board=Board(pour=number(450e-6, "m²")))
    beyond = bench.but(board=Board(pour=number(2500e-6, "m²")))
    assert junction(inside.entry()) == pytest.approx(40.0 + 7.46)
    assert junction(beyond.entry()) == pytest.approx(40.0 + 16.43)


def test_thermal_shutdown_is_no_limit() -> None:
    # only the limits a data sheet gives count: with none, the budget stays open however cool the part is
    assert Bench(figures={"quiescent": 0.0}).entry().verdict is Verdict.OPEN
