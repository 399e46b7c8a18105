"""Published worked examples of losses, to their printed digits; each names its document. No program is needed."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "losses"))

from losses_kit import curve, model, wiring

from analyzer.losses import terms
from analyzer.losses.base import End, Point
from analyzer.losses.boost import boost_input_current
from analyzer.losses.charge_pump import pump_heat
from analyzer.losses.dispatch import input_current
from analyzer.losses.efficiency import total_loss
from analyzer.losses.linear import pass_heat, two_supply_heat
from analyzer.losses.passage import switch_heat
from analyzer.losses.shunt import shunt_heat
from analyzer.quantity import Span
from analyzer.rule import Topology


@pytest.mark.parametrize(
    ("source", "vin", "vout", "iout", "ground", "printed", "digit"),
    [
        ("Infineon TLE42994 DS Rev 1.2 p. 30", 13.5, 5.0, 0.050, 0.002, 0.452, 0.0005),
        ("Microchip MCP1726 DS p. 19: 3.3 V + 10 %, 0.975 of 2.5 V", 3.63, 2.4375, 1.0, 0.0, 1.192, 0.001),
        ("Microchip TC1262 DS21373C p. 4: 3.3 V + 10 %, 2.7 V - 0.5 %", 3.63, 2.6865, 0.275, 0.0, 0.260, 0.0006),
        ("Micrel MIC5209 DS p. 10: 2.375 V is the least output", 3.6, 2.375, 0.320, 0.004, 0.407, 0.001),
        ("TI TPS75825 SLVS330D", 3.3, 2.5, 3.0, 0.0, 2.4, 0.05),
        ("TI TPS72525 SLVS341E p. 14", 3.3, 2.5, 1.0, 0.0, 0.800, 0.0005),
        ("TSC TS4274 p. 4", 3.3, 2.5, 0.5, 0.011, 0.436, 0.0005),
    ],
)
def test_linear_regulators(
    source: str, vin: float, vout: float, iout: float, ground: float, printed: float, digit: float
) -> None:
    assert pass_heat(vin, vout, iout, ground) == pytest.approx(printed, abs=digit), source


def test_a_two_supply_regulator() -> None:
    # LT3085 DS p. 16: 23 mW + 337 mW = 360 mW with Ictl = Iout / 60
    assert two_supply_heat(1.575, 3.63, 0.9, 0.5, 0.5 / 60) == pytest.approx(0.360, abs=0.0005)
    lt3085 = model(Topology.LINEAR_TWO_SUPPLY, {"control_ratio": 60.0}, vcontrol=3.63)
    found = lt3085.at(Point(1.575, 0.9, 0.5), End.SEVERE)
    assert [watts for _, watts in found.terms] == pytest.approx([0.3375, 0.02275], abs=0.0001)
    assert found.watts == pytest.approx(0.360, abs=0.0005)


@pytest.mark.parametrize(
    ("source", "amps", "ohms", "printed", "digit"),
    [
        ("Linear LTC3406 DS p. 11, in dropout", 0.6, 0.52, 0.1872, 0.00005),
        ("Linear LTC3616 DS p. 23, in dropout", 6.0, 0.035, 1.26, 0.005),
    ],
)
def test_a_buck_in_dropout_is_its_high_side_switch(
    source: str, amps: float, ohms: float, printed: float, digit: float
) -> None:
    assert terms.conduction(amps, ohms, terms.buck_duty(2.7, 2.7)) == pytest.approx(printed, abs=digit), source


def test_an_asynchronous_buck_term_by_term() -> None:
    # TI LMR12015 DS 8.2.1.10.8: 12 V to 3.3 V, 2 A, 2 MHz, D 0.314
    duty = 0.314
    found = {
        "conduction": terms.conduction(2.0, 0.15, duty),
        "switching": terms.switching(12.0, 2.0, 2e6, 0.0, 2 * 10e-9 / 2) * 2,
        "quiescent": 12.0 * 2.4e-3,
        "boost": 8.2e-3 * 4.5,
    }
    assert found["conduction"] == pytest.approx(0.188, abs=0.0006)
    assert found["switching"] == pytest.approx(0.480, abs=0.0005)
    assert found["quiescent"] == pytest.approx(0.029, abs=0.0005)
    assert found["boost"] == pytest.approx(0.037, abs=0.0005)
    inside = sum(found.values())
    assert inside == pytest.approx(0.733, abs=0.0015)
    diode, coil = terms.saturation(2.0, 0.5, 1 - duty), terms.conduction(2.0, 0.020)
    assert diode == pytest.approx(0.686, abs=0.0005)
    assert coil == pytest.approx(0.080, abs=0.0005)
    assert inside + diode + coil == pytest.approx(1.499, abs=0.0015)
    # mistake of booking all of it to the part: it has 49 % of the loss
    assert inside / (inside + diode + coil) == pytest.approx(0.49, abs=0.005)


def test_a_boost_term_by_term() -> None:
    # TI LM2735-Q1 DS 10.3.4.1; its printed efficiency of 86 % is a misprint: the printed losses sum to 87.5 %
    conduction = terms.conduction(1.4, 0.25, 0.623)
    rise, fall = terms.switching(12.0, 1.4, 1.6e6, 6e-9, 0.0), terms.switching(12.0, 1.4, 1.6e6, 0.0, 5e-9)
    quiescent, diode, coil = 5.0 * 4e-3, terms.saturation(0.5, 0.45) + 0.0125, terms.conduction(1.4, 0.075)
    assert conduction == pytest.approx(0.305, abs=0.0006)
    assert rise == pytest.approx(0.080, abs=0.001)
    assert fall == pytest.approx(0.070, abs=0.003)
    assert coil == pytest.approx(0.145, abs=0.0025)
    assert diode == pytest.approx(0.236, abs=0.002)
    total = conduction + rise + fall + quiescent + diode + coil
    assert total == pytest.approx(0.856, abs=0.004)
    assert pytest.approx(0.875, abs=0.0005) == 6.0 / (6.0 + 0.856)
    # the printed "Pcond + Psw = 475 mW" holds only with the quiescent 20 mW in it
    assert conduction + rise + fall + quiescent == pytest.approx(0.475, abs=0.003)
    assert conduction + rise + fall == pytest.approx(0.455, abs=0.003)


def test_a_buck_from_its_efficiency() -> None:
    # TI SNVA951 section 9: LMR33630, 3.3 V at 3 A; 87 % at 25 °C is taken as 85 % at 85 °C: 1.7 W
    assert total_loss(3.3 * 3.0, 0.85) == pytest.approx(1.747, abs=0.0005)
    hot = model(Topology.BUCK, {"efficiency": 0.87, "efficiency_temperature": 25.0, "efficiency_hot_loss": 0.02 / 60})
    assert hot.at(Point(24.0, 3.3, 3.0, 85.0), End.NOMINAL).watts == pytest.approx(1.747, abs=0.0005)
    assert hot.at(Point(24.0, 3.3, 3.0, 25.0), End.NOMINAL).watts == pytest.approx(3.3 * 3 * (1 / 0.87 - 1))


def test_a_bipolar_buck() -> None:
    # ST B5973D DocID14117 Rev 4 p. 28: 12 V, 2 A, D 0.3, 0.4 Ω hot, Tsw 70 ns, 250 kHz, 2.5 mA: 0.93 W
    watts = terms.conduction(2.0, 0.4, 0.3) + terms.switching(12.0, 2.0, 250e3, 70e-9, 70e-9) + 12.0 * 2.5e-3
    assert watts == pytest.approx(0.93, abs=0.005)


def test_a_charge_pump() -> None:
    # TI LT1054 SLVS033G p. 15: 12 V to -5 V at 100 mA, drive 0.2 of the load: 700 + 240 = 940 mW
    assert pump_heat(12.0, 5.0, 0.1, 1.0, 0.2 * 0.1) == pytest.approx(0.940, abs=0.0005)
    lt1054 = model(Topology.CHARGE_PUMP, {"gain": 1.0, "drive_fraction": 0.2}, volts=-5.0)
    found = lt1054.at(Point(12.0, 5.0, 0.1), End.SEVERE)
    assert [watts for _, watts in found.terms] == pytest.approx([0.700, 0.240])


def test_a_dual_load_switch() -> None:
    # TI TPS22968 DS 10.2.2.3: two channels of 4 A, 27 mΩ each: 0.864 W
    assert switch_heat(8.0, 0.027, 2) == pytest.approx(2 * 4.0**2 * 0.027)
    # TI TPS1HB35-Q1: 4.4 A through 70 mΩ hot 1.355 W, through 35 mΩ cold 0.678 W
    hot = model(Topology.LOAD_SWITCH, {"on_resistance": 0.035, "resistance_tempco": 0.01})
    assert hot.at(Point(12.0, 12.0, 4.4, 125.0), End.NOMINAL).watts == pytest.approx(1.355, abs=0.0005)
    assert hot.at(Point(12.0, 12.0, 4.4, 25.0), End.NOMINAL).watts == pytest.approx(0.678, abs=0.0005)


def test_a_zener_is_hottest_without_load() -> None:
    # textbook: 15 V, 5.6 V, 0 to 15 mA, 5 mA of Zener current at least: 470 Ω, 112 mW at no load
    resistor = (15.0 - 5.6) / (0.015 + 0.005)
    assert resistor == pytest.approx(470.0, abs=0.5)
    assert shunt_heat(15.0, 5.6, resistor, 0.0) == pytest.approx(0.112, abs=0.0005)
    assert shunt_heat(15.0, 5.6, resistor, 0.015) == pytest.approx(0.028, abs=0.0005)


@pytest.mark.parametrize(("vin", "watts"), [(5.5, 1.356), (18.0, 0.988), (28.0, 1.059)])
def test_the_worst_input_of_a_buck_may_be_its_lowest(vin: float, watts: float) -> None:
    # 150 mΩ and 50 mΩ, 5 V, 3 A, 500 kHz, 20 ns of edge in all, 1 mA of its own: the minimum lies inside
    duty = terms.buck_duty(vin, 5.0)
    found = terms.conduction(3.0, 0.150, duty) + terms.conduction(3.0, 0.050, 1 - duty)
    found += terms.switching(vin, 3.0, 500e3, 10e-9, 10e-9) + vin * 0.001
    assert found == pytest.approx(watts, abs=0.0006)


@pytest.mark.parametrize(("vin", "watts"), [(5.5, 1.42935), (18.0, 0.99986), (28.0, 1.06533)])
def test_the_duty_of_a_buck_under_load_makes_more_heat_near_dropout(vin: float, watts: float) -> None:
    # the same part; D = (5 + 3 · 0.05)/(Vin − 3 · (0.15 − 0.05)) by volt-seconds: 5.15/5.2, 5.15/17.7, 5.15/27.7
    buck = model(
        Topology.BUCK,
        {
            "high_side_resistance": 0.150,
            "low_side_resistance": 0.050,
            "switching_frequency": 500e3,
            "rise_time": 10e-9,
            "fall_time": 10e-9,
            "quiescent": 0.001,
        },
    )
    assert buck.at(Point(vin, 5.0, 3.0), End.NOMINAL).watts == pytest.approx(watts, abs=0.00001)


def test_a_boost_takes_most_at_its_lowest_input() -> None:
    # 5 V, 0.5 A, 90 %: 0.926 A at 3.0 V, 0.661 A at 4.2 V
    assert boost_input_current(2.5, 0.9, 3.0) == pytest.approx(0.926, abs=0.0005)
    assert boost_input_current(2.5, 0.9, 4.2) == pytest.approx(0.661, abs=0.0005)


def test_what_a_load_costs_the_rail_above() -> None:
    # 1.2 V, 2 A behind an 85 % buck takes 0.565 A from 5 V; behind a linear part it would take all 2 A
    from dataclasses import replace

    from losses_kit import evidence

    buck = replace(wiring(Topology.BUCK, {"efficiency": 0.85}), vin=evidence(5.0), vout=evidence(1.2))
    taken = input_current(buck, Span.exact(2.0))
    assert taken is not None
    assert taken.span.nominal == pytest.approx(0.565, abs=0.0005)
    linear = replace(wiring(Topology.LINEAR, {"quiescent": 0.0}), vin=evidence(5.0), vout=evidence(1.2))
    passed = input_current(linear, Span.exact(2.0))
    assert passed is not None
    assert passed.span.nominal == 2.0


def test_a_corner_instead_of_the_nominal() -> None:
    # 24 V industrial rail to 5 V - 2 %, 50 mA, 5 mA: 0.950 W nominal without Iq, 1.339 W at 28.8 V
    assert pass_heat(24.0, 5.0, 0.050, 0.0) == pytest.approx(0.950, abs=0.0005)
    assert pass_heat(28.8, 4.9, 0.050, 0.005) == pytest.approx(1.339, abs=0.0005)


def test_an_output_in_dropout_is_no_longer_regulated() -> None:
    # 3.3 V - 5 % feeding 3.0 V leaves 135 mV where 250 mV are needed
    ldo = model(Topology.LINEAR, {"quiescent": 0.0, "dropout": 0.250})
    found = ldo.at(Point(3.135, 3.0, 0.5), End.SEVERE)
    assert not found.regulating
    assert found.watts == pytest.approx(0.250 * 0.5)


def test_ground_current_that_rises_with_the_load() -> None:
    # MIC39100 class: 11 mA at 1 A; between the points the table is interpolated, above it nothing is known
    pnp = model(Topology.LINEAR, {}, curves={"ground_current": curve((0.01, 0.0004), (1.0, 0.011))})
    assert pnp.at(Point(5.0, 3.3, 1.0), End.NOMINAL).watts == pytest.approx(1.7 + 5 * 0.011)
    with pytest.raises(ValueError, match="outside the table"):
        pnp.at(Point(5.0, 3.3, 1.1), End.NOMINAL)


def test_misprints_are_not_chased() -> None:
    # SLVA390 prints a DCR of 0.104 Ω with 166.4 mW at 4 A: that needs 10.4 mΩ
    assert terms.conduction(4.0, 0.104) == pytest.approx(1.664)
    assert terms.conduction(4.0, 0.0104) == pytest.approx(0.1664)
    # LM2727 SNVS205D p. 15 prints 0.084 W for an input capacitor with 4.28 A in half of 18 mΩ: it is 0.165 W
    assert terms.conduction(4.28, 0.018 / 2) == pytest.approx(0.165, abs=0.0005)
