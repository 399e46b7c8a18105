"""Single pieces of the loss models and thermal paths, each with a number worked by hand."""

from __future__ import annotations

from dataclasses import replace

import pytest
from losses_kit import evidence, model, wiring

from analyzer.circuit import Circuit
from analyzer.evidence import Grade
from analyzer.heat import transient
from analyzer.heat.path import sink
from analyzer.heat.path.board import correction, design_class
from analyzer.losses.base import End, Point
from analyzer.losses.charger import charger_heat
from analyzer.losses.converter import least_coil_current
from analyzer.losses.dispatch import model_of
from analyzer.quantity import Span
from analyzer.rail import Outside
from analyzer.rule import BoardClass, Topology
from analyzer.settings import Board, PartStatement, Settings

TERMS = {
    "high_side_resistance": 0.1,
    "low_side_resistance": 0.1,
    "switching_frequency": 500e3,
    "rise_time": 1e-8,
    "fall_time": 1e-8,
    "quiescent": 0.001,
}


def terms_of(figures: dict[str, Span | float], point: Point, **more: object) -> dict[str, float]:
    return dict(model(Topology.BUCK, figures, **more).at(point, End.SEVERE).terms)


def test_dead_time_gate_and_bootstrap_of_a_buck() -> None:
    # 500 kHz · 3 A · 0.7 V · 40 ns; 10 nC · 5 V · 500 kHz; 8 mA · 4.5 V
    figures = {
        **TERMS,
        "dead_time": 40e-9,
        "body_diode_drop": 0.7,
        "gate_charge": 10e-9,
        "gate_voltage": 5.0,
        "boost_current": 0.008,
        "boost_voltage": 4.5,
    }
    found = terms_of(figures, Point(12.0, 5.0, 3.0))
    assert found["dead time"] == pytest.approx(0.042)
    assert found["gate drive"] == pytest.approx(0.025)
    assert found["bootstrap"] == pytest.approx(0.036)
    # without a drive voltage of its own the input drives: 10 nC · 12 V · 500 kHz
    del figures["gate_voltage"]
    assert terms_of(figures, Point(12.0, 5.0, 3.0))["gate drive"] == pytest.approx(0.06)


def test_an_inverting_buck_carries_its_load_over_one_minus_its_duty() -> None:
    # 12 V in to −5 V: 17 V across the part, D = 5/17 and the coil carries 1 A / (12/17) = 1.41667 A
    found = terms_of(TERMS, Point(17.0, 5.0, 1.0), inverts=True)
    duty, coil = 5 / 17, 17 / 12
    assert found["high side"] == pytest.approx(0.1 * coil**2 * duty)
    assert found["low side"] == pytest.approx(0.1 * coil**2 * (1 - duty))
    # with an external rectifier of 0.5 V: the switch drops 0.1 Ω · coil, D = 5.5/(17.5 − drop)
    diode = {key: value for key, value in TERMS.items() if key != "low_side_resistance"} | {"diode_drop": 0.5}
    found = terms_of(diode, Point(17.0, 5.0, 1.0), inverts=True)
    duty = 5.5 / (17.5 - 0.1 * 17 / 12)
    assert found["high side"] == pytest.approx(0.1 * duty / (1 - duty) ** 2)


def test_an_inverting_buck_by_a_stated_efficiency_takes_its_coil_out_at_the_coil_s_current() -> None:
    coil = Outside("L1", "inductor", evidence(0.04, "Ω"))
    found = wiring(Topology.BUCK, {"efficiency": 0.8}, outside=(coil,), inverts=True)
    stated = replace(found.channel.figures["efficiency"], grade=Grade.STATED)
    figures = {**found.channel.figures, "efficiency": stated}
    here = model_of(replace(found, channel=replace(found.channel, figures=figures)))
    # 5 W · 0.25, less 0.04 Ω · (17/12 A)²
    assert here.at(Point(17.0, 5.0, 1.0), End.NOMINAL).watts == pytest.approx(1.25 - 0.04 * (17 / 12) ** 2)


def solved_boost(vin: float, vout: float, load: float, drop: float) -> tuple[float, float]:
    """(input current, heat in the part) of a boost with an external diode, by bisection on the power balance."""

    def heat(iin: float) -> float:
        duty = max(1 - vin / (vout + drop), 1 - load / iin)
        return 0.25 * iin**2 * duty + 0.5 * vout * iin * 1.6e6 * 11e-9 + vin * 0.004

    low, high = vout * load / vin, 3 * vout * load / vin
    for _ in range(200):
        middle = (low + high) / 2
        missing = vout * load + heat(middle) + drop * load + 0.075 * middle**2 - vin * middle
        low, high = (middle, high) if missing > 0 else (low, middle)
    return low, heat(low)


def test_a_boost_by_its_terms() -> None:
    # TI LM2735's own example: 5 to 12 V, 0.5 A, 0.25 Ω, 1.6 MHz, 6 and 5 ns, 4 mA, diode 0.45 V, coil 75 mΩ
    figures = {
        "high_side_resistance": 0.25,
        "switching_frequency": 1.6e6,
        "rise_time": 6e-9,
        "fall_time": 5e-9,
        "quiescent": 0.004,
        "diode_drop": 0.45,
        "inductor_resistance": 0.075,
    }
    found = model(Topology.BOOST, figures).at(Point(5.0, 12.0, 0.5), End.SEVERE)
    iin, watts = solved_boost(5.0, 12.0, 0.5, 0.45)
    assert found.iin == pytest.approx(iin)
    assert found.watts == pytest.approx(watts)
    # the data sheet sums 475 mW in the part at 1.4 A
    assert watts == pytest.approx(0.475, abs=0.03)
    bare = {key: value for key, value in figures.items() if key != "diode_drop"}
    assert model(Topology.BOOST, bare).missing == (
        "efficiency, or for its loss terms: resistance or drop of the rectifier",
    )


def test_a_rectifier_that_alone_exceeds_the_loss_contradicts_the_efficiency() -> None:
    # 5 W at 95 % leave 0.263 W; 1 A · 1 V for at least (1 − 5/(0.95 · 20)) of the time
    buck = model(Topology.BUCK, {"efficiency": 0.95, "diode_drop": 1.0})
    with pytest.raises(ValueError, match=r"the diode measured with alone loses 737 mW, the efficiency 0\.950 leaves"):
        buck.at(Point(20.0, 5.0, 1.0), End.SEVERE)
    # nominally it takes all there is, and no more
    assert buck.at(Point(20.0, 5.0, 1.0), End.NOMINAL).watts == 0.0


def test_least_coil_currents() -> None:
    one = Outside("L1", "inductor")
    inverting = wiring(Topology.INVERTING, {"efficiency": 0.8}, outside=(one,))
    two = wiring(Topology.INVERTING, {"efficiency": 0.8}, outside=(one, Outside("L2", "inductor")))
    both = wiring(Topology.BUCK_BOOST, {"efficiency": 0.8}, outside=(one,))
    assert least_coil_current(inverting, 10.0, 5.0, 2.0, 1.2) == pytest.approx(3.0)
    assert least_coil_current(two, 10.0, 5.0, 2.0, 1.2) == pytest.approx(1.2)
    assert least_coil_current(both, 10.0, 5.0, 2.0, 1.2) == pytest.approx(1.2)
    assert least_coil_current(both, 10.0, 5.0, 1.0, 1.2) == pytest.approx(1.0)
    with pytest.raises(ValueError, match="positive input voltage"):
        least_coil_current(both, 0.0, 5.0, 1.0, 1.2)


def test_what_chargers_and_pumps_lack() -> None:
    assert charger_heat(5.0, 3.0, 0.5) == pytest.approx(1.0)
    assert charger_heat(5.0, 3.0, 0.5, 0.01) == pytest.approx(1.05)
    assert model(Topology.CHARGER, {"battery_low": 3.0}).missing == ("charge current",)
    lacks = "battery voltage at which full charge current starts"
    assert model(Topology.CHARGER, {"charge_current": 0.5}).missing == (lacks,)
    assert model(Topology.CHARGE_PUMP, {"quiescent": 0.001, "output_resistance": 10.0}).missing == (
        "gain (2 doubles, 1 inverts)",
    )
    assert model(Topology.CHARGE_PUMP, {"gain": 2.0}, volts=5.0).missing == ("quiescent current",)


@pytest.mark.parametrize(
    ("watts", "on", "period", "valley"),
    [(2.0, 0.1, 1.0, 24.10), (2.0, 0.01, 0.1, 25.38), (5.0, 1.0, 100.0, 1.58), (1.0, 10.0, 20.0, 46.72)],
)
def test_valleys_of_pulse_trains(watts: float, on: float, period: float, valley: float) -> None:
    # ST VND1NV04 Doc 7381 Table 6, footprint: R and C of each stage; valleys computed from it in the reference sheet
    stages = [(0.8, 6e-5), (1.6, 5e-4), (4.5, 0.03), (24.0, 0.16), (0.1, 1000.0), (100.0, 0.5)]
    network = [(r, r * c) for r, c in stages]
    assert transient.periodic_valley(network, watts, on, period) == pytest.approx(valley, abs=0.02)


def test_board_classes_by_copper() -> None:
    def found(pour: float) -> BoardClass:
        board = Board(pour=evidence(pour, "m²"))
        return design_class(Circuit("t", (), ()), Settings(board=board), PartStatement())[0]

    def at_part(pour: float) -> BoardClass:
        statement = PartStatement(pour=evidence(pour, "m²"))
        return design_class(Circuit("t", (), ()), Settings(), statement)[0]

    assert (found(300e-6), found(299e-6)) == (BoardClass.POUR, BoardClass.LOW)
    assert (at_part(300e-6), at_part(299e-6)) == (BoardClass.POUR, BoardClass.LOW)

    def by_conductivity(value: float) -> BoardClass:
        board = Board(conductivity=evidence(value, "W/(m·K)"))
        return design_class(Circuit("t", (), ()), Settings(board=board), PartStatement())[0]

    # FIDES parts boards at 15 W/(m·K)
    assert (by_conductivity(15.0), by_conductivity(14.9)) == (BoardClass.HIGH, BoardClass.LOW)


def test_a_leaded_package_without_a_ratio_of_its_own_takes_the_largest_seen() -> None:
    assert correction("PDIP-8", BoardClass.HIGH, BoardClass.LOW) == 1.65
    assert correction("PDIP-8", BoardClass.HIGH, BoardClass.POUR) == 1.44
    assert correction("PDIP-8", BoardClass.POUR, BoardClass.LOW) == pytest.approx(1.65 / 1.44)
    assert correction("PDIP-8", BoardClass.LOW, BoardClass.HIGH) == 1.0


def test_a_sink_that_carries_one_watt() -> None:
    # θ = (10^4 · 75 / 1)^0.2
    assert sink.natural_factor(10.0, 1.0) == pytest.approx(750_000**0.2)
