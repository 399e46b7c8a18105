"""Single operating points of passages, pumps, maps and switchers, each worked by hand from its circuit."""

from __future__ import annotations

from dataclasses import replace

import pytest
from losses_kit import curve, efficiency_map, evidence, model, wiring

from analyzer.losses.base import End, Loss, LossModel, Point
from analyzer.losses.dispatch import model_of
from analyzer.quantity import Span
from analyzer.rail import Outside
from analyzer.rule import Topology

ENDS = tuple(End)


def pass_transistor(vin: Span, vout: Span) -> LossModel:
    bare = wiring(Topology.SERIES_TRANSISTOR, {"on_resistance": 0.02})
    return model_of(replace(bare, vin=evidence(vin, "V"), vout=evidence(vout, "V")))


def test_a_pass_transistor_takes_what_input_and_output_differ_by() -> None:
    # 12 V ± 0.5 V to 5 V ± 0.1 V at 1 A: at most (12.5 - 4.9) V · 1 A; its 20 mΩ would make 20 mW
    driven = pass_transistor(Span(11.5, 12.0, 12.5), Span(4.9, 5.0, 5.1))
    found = driven.at(Point(12.5, 4.9, 1.0), End.SEVERE)
    assert found.watts == pytest.approx(7.6)
    # in series with its load: the current that goes in comes out
    assert found.iin == 1.0


def test_a_reverse_protection_transistor_is_a_resistance() -> None:
    same = Span(11.5, 12.0, 12.5)
    assert pass_transistor(same, same).at(Point(12.0, 12.0, 3.0), End.SEVERE).watts == pytest.approx(0.18)


@pytest.mark.parametrize(
    ("amps", "watts"),
    # 20 mV are held up to 20 mV / 5 mΩ = 4 A, above it is a resistance of 5 mΩ; 0.2 mA at 12 V on top
    [(0.0, 0.0024), (2.0, 0.0424), (4.0, 0.0824), (8.0, 0.3224)],
)
def test_an_ideal_diode_holds_its_drop_until_its_resistance_takes_over(amps: float, watts: float) -> None:
    held = model(Topology.IDEAL_DIODE, {"forward_drop": 0.02, "on_resistance": 0.005, "quiescent": 2e-4})
    found = held.at(Point(12.0, 12.0, amps), End.SEVERE)
    assert found.watts == pytest.approx(watts)
    assert found.iin == pytest.approx(amps + 2e-4)


def test_an_ideal_diode_gets_hot_by_its_resistance_and_not_by_its_held_drop() -> None:
    held = model(Topology.IDEAL_DIODE, {"forward_drop": 0.02, "on_resistance": 0.005, "resistance_tempco": 0.004})
    # 5 mΩ · (1 + 0.004 · 100) = 7 mΩ: 2 A make 14 mV, less than the held 20 mV; 8 A make 56 mV
    assert held.at(Point(12.0, 12.0, 2.0, 125.0), End.SEVERE).watts == pytest.approx(0.040)
    assert held.at(Point(12.0, 12.0, 8.0, 125.0), End.SEVERE).watts == pytest.approx(0.448)


def doubler(**figures: Span | float) -> dict[str, Span | float]:
    return {"gain": 2.0, "quiescent": 0.001, **figures}


@pytest.mark.parametrize("end", ENDS)
def test_an_unregulated_pump_loses_what_its_resistance_takes(end: End) -> None:
    # 2 · 3.3 V - 50 mA · 10 Ω = 6.1 V are left: heat (50 mA)² · 10 Ω + 3.3 V · 1 mA; 2 · 50 mA + 1 mA from the input
    pump = model(Topology.CHARGE_PUMP, doubler(output_resistance=10.0))
    found = pump.at(Point(3.3, 6.6, 0.05), end)
    assert found.watts == pytest.approx(0.0283)
    assert found.iin == pytest.approx(0.101)
    # energy: what goes in is 6.1 V · 50 mA and the heat
    assert 3.3 * found.iin == pytest.approx(6.1 * 0.05 + found.watts)


@pytest.mark.parametrize(
    ("vin", "watts", "regulating"),
    [
        # 6.6 V less 1.5 V of sag are enough for 5 V, the rest is (6.6 - 5) V · 50 mA
        (3.3, 0.080 + 0.0033, True),
        # 6.0 V less 1.5 V are 4.5 V: the 5 V are lost, the sag alone is left
        (3.0, 0.075 + 0.0030, False),
    ],
)
def test_a_regulated_pump_sags_where_its_resistance_takes_too_much(vin: float, watts: float, regulating: bool) -> None:
    pump = model(Topology.CHARGE_PUMP, doubler(output_resistance=30.0), volts=5.0)
    found = pump.at(Point(vin, 5.0, 0.05), End.SEVERE)
    assert found.watts == pytest.approx(watts)
    assert found.regulating is regulating


def test_a_pump_that_is_dragged_to_nothing_keeps_all_of_its_input() -> None:
    # 200 mA through 40 Ω would take 8 V of 6.6 V: nothing comes out, 6.6 V · 200 mA stay
    pump = model(Topology.CHARGE_PUMP, doubler(output_resistance=40.0))
    assert pump.at(Point(3.3, 6.6, 0.2), End.SEVERE).watts == pytest.approx(6.6 * 0.2 + 0.0033)


GRID = efficiency_map(
    (0.1, 5.0, 0.80), (0.1, 12.0, 0.70), (1.0, 5.0, 0.90), (1.0, 12.0, 0.84), (3.0, 5.0, 0.86), (3.0, 12.0, 0.82)
)


@pytest.mark.parametrize(
    ("load", "vin", "eta"),
    [
        # the knots themselves, the corners of the grid among them
        (0.1, 5.0, 0.80),
        (0.1, 12.0, 0.70),
        (1.0, 5.0, 0.90),
        (1.0, 12.0, 0.84),
        (3.0, 5.0, 0.86),
        (3.0, 12.0, 0.82),
        # along an edge
        (2.0, 5.0, 0.88),
        (0.1, 8.5, 0.75),
        # 0.25 of the way from 1 A to 3 A, 2/7 of the way from 5 V to 12 V: 0.89 and 0.835 mixed
        (1.5, 7.0, 0.89 * 5 / 7 + 0.835 * 2 / 7),
    ],
)
def test_an_efficiency_map_at_its_knots_edges_and_between(load: float, vin: float, eta: float) -> None:
    buck = model(Topology.BUCK, {}, mapped=GRID)
    assert buck.loads == (0.1, 1.0, 3.0)
    found = buck.at(Point(vin, 3.3, load), End.SEVERE)
    assert found.watts == pytest.approx(3.3 * load * (1 / eta - 1))
    assert found.iin == pytest.approx(3.3 * load / eta / vin)


@pytest.mark.parametrize(("load", "vin"), [(3.0 + 1e-9, 5.0), (1.0, 5.0 - 1e-9), (1.0, 12.0 + 1e-9)])
def test_just_outside_its_edges_an_efficiency_map_says_nothing(load: float, vin: float) -> None:
    with pytest.raises(ValueError, match="does not cover"):
        model(Topology.BUCK, {}, mapped=GRID).at(Point(vin, 3.3, load), End.SEVERE)


TERMS: dict[str, Span | float] = {
    "high_side_resistance": 0.150,
    "low_side_resistance": 0.050,
    "switching_frequency": 500e3,
    "rise_time": 10e-9,
    "fall_time": 10e-9,
    "quiescent": 0.001,
}


def synchronous(coil: Span | None, end: End, vin: float = 12.0) -> Loss:
    outside = (Outside("L1", "inductor", None if coil is None else evidence(coil, "Ω")),)
    return model(Topology.BUCK, TERMS, outside=outside).at(Point(vin, 5.0, 3.0), end)


@pytest.mark.parametrize(
    ("end", "coil_watts"),
    # what heats the part most counts the coil's greatest, for it comes from the input; 3² A² · 18, 20 and 22 mΩ
    [(End.MILD, 0.162), (End.NOMINAL, 0.180), (End.SEVERE, 0.198)],
)
def test_the_coil_of_a_synchronous_buck_costs_input_current(end: End, coil_watts: float) -> None:
    found = synchronous(Span(0.018, 0.020, 0.022), end)
    assert dict(found.elsewhere) == pytest.approx({"L1": coil_watts})
    # energy: 12 V · Iin = 5 V · 3 A and all of the losses
    assert 12.0 * found.iin == pytest.approx(15.0 + found.watts + coil_watts)


@pytest.mark.parametrize("vin", [5.6, 12.0, 28.0])
def test_a_better_coil_does_not_heat_the_part_nor_does_a_worse_one_cool_it(vin: float) -> None:
    good, bad = (synchronous(Span.exact(ohms), End.SEVERE, vin) for ohms in (0.0, 0.2))
    # as loss terms go, the part's switches carry the same 3 A; only a longer on-time may add to it
    assert good.watts <= bad.watts <= 3.0**2 * 0.150 + 0.5 * vin * 3.0 * 500e3 * 20e-9 + vin * 0.001 + 1e-12


def test_a_coil_of_unknown_resistance_is_told() -> None:
    outside = (Outside("L1", "inductor"),)
    told = model(Topology.BUCK, TERMS, outside=outside)
    assert told.notes == ("loss of inductor L1 not known: missing in its input current",)
    assert told.at(Point(12.0, 5.0, 3.0), End.SEVERE).elsewhere == ()


@pytest.mark.parametrize(("end", "watts"), [(End.MILD, 16.0 * 0.020), (End.SEVERE, 16.0 * 0.021)])
def test_a_controller_heats_by_its_own_current_and_by_what_drives_the_gates(end: End, watts: float) -> None:
    # 16 V · (2 … 3 mA + 60 nC · 300 kHz = 18 mA), at any load; all else of the 10 % is outside
    control = model(
        Topology.CONTROLLER,
        {
            "efficiency": 0.9,
            "quiescent": Span(0.002, 0.0025, 0.003),
            "gate_charge": 60e-9,
            "switching_frequency": 300e3,
            "gate_voltage": 5.0,
        },
    )
    for load in (0.0, 1.0, 6.0):
        assert control.at(Point(16.0, 5.0, load), end).watts == pytest.approx(watts)
    loaded = control.at(Point(16.0, 5.0, 6.0), end)
    assert sum(watts_outside for _, watts_outside in loaded.elsewhere) == pytest.approx(30.0 * (1 / 0.9 - 1) - watts)


def test_a_ground_current_table_ends_at_its_last_knot_inclusive() -> None:
    pnp = model(Topology.LINEAR, {}, curves={"ground_current": curve((0.1, 0.002), (0.5, 0.011))})
    assert pnp.at(Point(6.0, 5.0, 0.5), End.SEVERE).watts == pytest.approx(0.5 + 6.0 * 0.011)


def test_below_a_map_s_first_load_the_loss_there_is_held() -> None:
    found = model(Topology.BUCK, {}, mapped=GRID).at(Point(12.0, 3.3, 0.01), End.SEVERE)
    assert found.watts == pytest.approx(3.3 * 0.1 * (1 / 0.70 - 1))
