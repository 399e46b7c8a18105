"""Published worked examples of θ, junction and limits, to their printed digits; the source stands beside each.

Each goes through the whole budget where the example is one of a regulator in air; the others through the one formula
they show. Printed answers known to be misprints stand at the end: the code must not follow them.
"""

from __future__ import annotations

import math
import sys
from pathlib import Path

import pytest

from analyzer.heat import transient
from analyzer.heat.altitude import multiplier, pressure_ratio
from analyzer.heat.path.sink import correction, needed_sink
from analyzer.ledger import Entry
from analyzer.quantity import Span
from analyzer.rule import ThermalFigure, Topology
from analyzer.settings import PartStatement

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "heat"))

from heat_kit import Bench, number


def remedy(entry: Entry, kind: str, name: str) -> float:
    return next(one.numbers[name] for one in entry.remedies if one.kind == kind)


def linear(vin: float, vout: float, iout: float, iq: float, ta: float, limit: float, theta: float = 40.0) -> Entry:
    bench = Bench(
        vin=Span.exact(vin),
        vout=Span.exact(vout),
        draws=((Span.exact(iout), None),),
        figures={"quiescent": iq, "junction_max": limit + 10.0},  # the house policy takes 10 K off again
        theta=theta,
    )
    return bench.in_air(ta).entry()


def junction(entry: Entry) -> float:
    assert entry.worst is not None
    assert entry.worst.junction is not None
    return entry.worst.junction


def test_e1_theta_that_would_pass() -> None:
    # Infineon TLE42994 DS Rev1.2 p30: 0.452 W, RthJA at most 55.3 K/W
    entry = linear(13.5, 5.0, 0.050, 0.002, 125.0, 150.0)
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(0.452, abs=0.0005)
    assert remedy(entry, "θ needed", "k_per_w") == pytest.approx(55.3, abs=0.05)


def test_e2_rise() -> None:
    # Microchip MCP1726 DS p19: 3.3 V + 10 %, 0.975 · 2.5 V, 1 A, 41 °C/W, 70 °C: 1.192 W and 48.8 K (truncated)
    entry = linear(3.63, 2.4375, 1.0, 0.0, 70.0, 125.0, theta=41.0)
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(1.192, abs=0.001)
    assert junction(entry) - 70.0 == pytest.approx(48.8, abs=0.15)


@pytest.mark.parametrize(("ta", "theta"), [(40, 209), (50, 184), (60, 160), (75, 123)])
def test_e4_theta_by_ambient(ta: float, theta: float) -> None:
    # Micrel MIC5209 DS p10-11
    entry = linear(3.6, 2.375, 0.320, 0.004, ta, 125.0)
    assert remedy(entry, "θ needed", "k_per_w") == pytest.approx(theta, abs=0.6)


@pytest.mark.parametrize(("ta", "theta"), [(40, 201), (50, 176), (60, 152), (75, 115)])
def test_e4_sink_for_sot223(ta: float, theta: float) -> None:
    # the same pages: θSA for SOT-223 with θJC 8
    assert needed_sink(125.0, ta, 0.4064, 8.0, 0.0) == pytest.approx(theta, abs=0.8)


def test_e5_junction_of_a_two_supply_part() -> None:
    # LT3085 DS p16: 360 mW · 73 °C/W above 50 °C is 76 °C
    from analyzer.losses.linear import two_supply_heat

    assert 50.0 + 73.0 * two_supply_heat(1.575, 3.63, 0.9, 0.5, 0.5 / 60) == pytest.approx(76.0, abs=0.5)


def test_e7_theta_of_a_three_ampere_part() -> None:
    # TI TPS75825 SLVS330D: 2.4 W, RthJA at most 29 K/W
    assert remedy(linear(3.3, 2.5, 3.0, 0.0, 55.0, 125.0), "θ needed", "k_per_w") == pytest.approx(29.0, abs=0.5)


def test_e8_theta_of_a_one_ampere_part() -> None:
    # TI TPS72525 SLVS341E p14: 800 mW, 87.5 °C/W
    assert remedy(linear(3.3, 2.5, 1.0, 0.0, 55.0, 125.0), "θ needed", "k_per_w") == pytest.approx(87.5, abs=0.05)


def test_e9_theta_measured_by_shutdown() -> None:
    # TI LMR10515 SNVS728C p15: shutdown (165 °C) reached at 140 °C with 213 mW: 117 °C/W; then 125 °C at 100 °C
    theta = (165.0 - 140.0) / 0.213
    assert theta == pytest.approx(117.0, abs=0.5)
    bench = Bench(
        topology=Topology.BUCK,
        vin=Span.exact(5.0),
        vout=Span.exact(3.3),
        draws=((Span.exact(1.0), None),),
        figures={"efficiency": 3.3 / (3.3 + 0.213), "junction_max": 135.0},
        statement=PartStatement(theta_ja=number(theta, "K/W")),
    )
    assert remedy(bench.in_air(40.0).entry(), "greatest ambient", "celsius") == pytest.approx(100.0, abs=0.5)


@pytest.mark.parametrize(
    ("source", "amps", "ohms", "theta", "ta", "watts", "celsius", "tolerance"),
    [
        ("E10 LTC3406 DS p11, dropout", 0.6, 0.52, 250.0, 70.0, 0.1872, 116.8, 0.05),
        ("E11 LTC3616 DS p23, dropout", 6.0, 0.035, 38.0, 70.0, 1.26, 118.0, 0.5),
    ],
)
def test_e10_e11_a_buck_fully_on_is_a_switch(
    source: str, amps: float, ohms: float, theta: float, ta: float, watts: float, celsius: float, tolerance: float
) -> None:
    bench = Bench(
        topology=Topology.LOAD_SWITCH,
        vout=Span.exact(5.0),
        draws=((Span.exact(amps), None),),
        figures={"on_resistance": ohms, "junction_max": 125.0},
        theta=theta,
    )
    entry = bench.in_air(ta).entry()
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(watts, rel=0.004), source
    assert junction(entry) == pytest.approx(celsius, abs=tolerance), source


def test_e14_theta_of_a_buck_by_efficiency() -> None:
    # TI SNVA951 section 9: 24 -> 3.3 V, 3 A, 85 % hot: 1.7 W in all, 1.57 W after the inductor, 85 °C, θJA <= 25 °C/W
    bench = Bench(
        topology=Topology.BUCK,
        vin=Span.exact(24.0),
        draws=((Span.exact(3.0), None),),
        figures={"efficiency": 0.85, "junction_max": 135.0},
        theta=24.0,
    )
    entry = bench.in_air(85.0).entry()
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(1.747, abs=0.0005)
    # the source takes 0.17 W of inductor out first (25.5); left in the part the budget is the stricter
    assert remedy(entry, "θ needed", "k_per_w") == pytest.approx(22.9, abs=0.05)


def test_e15_junction_of_a_buck() -> None:
    # ST B5973D DocID14117 p28: 0.93 W, 42 °C/W, 70 °C: 110 °C, rounded up from 109.1
    from analyzer.losses import terms

    watts = terms.conduction(2.0, 0.4, 0.3) + terms.switching(12.0, 2.0, 250e3, 70e-9, 70e-9) + 12.0 * 2.5e-3
    assert watts == pytest.approx(0.93, abs=0.005)
    assert 70.0 + 42.0 * watts == pytest.approx(109.06, abs=0.1)


def test_e16_modules() -> None:
    # LMZ10503 SNVS641I p13: 0.56 W implied, 85 -> 125 °C, θJC 1.9: θCA 69.5; LMZ21700: 0.43 W: at most 93 °C/W
    assert needed_sink(125.0, 85.0, 0.5602, 1.9, 0.0) == pytest.approx(69.5, abs=0.05)
    bench = Bench(
        topology=Topology.MODULE,
        vin=Span.exact(17.0),
        vout=Span.exact(5.0),
        draws=((Span.exact(0.65), None),),
        figures={"efficiency": 3.25 / 3.68, "junction_max": 135.0},
    )
    assert remedy(bench.in_air(85.0).entry(), "θ needed", "k_per_w") == pytest.approx(93.0, abs=0.05)


def test_e17_charge_pump() -> None:
    # TI LT1054 SLVS033G p15: 940 mW · 130 °C/W = 122 K
    from analyzer.losses.charge_pump import pump_heat

    assert 130.0 * pump_heat(12.0, 5.0, 0.1, 1.0, 0.2 * 0.1) == pytest.approx(122.0, abs=0.5)


def test_e18_greatest_ambient_of_a_double_switch() -> None:
    # TI TPS22968 10.2.2.3: 2 x 4 A, 27 mΩ, 62.5 °C/W, 125 °C: 71 °C
    bench = Bench(
        topology=Topology.LOAD_SWITCH,
        vout=Span.exact(5.0),
        draws=((Span.exact(8.0), None),),
        figures={"on_resistance": 0.027, "pass_channels": 2.0, "junction_max": 135.0},
        theta=62.5,
    )
    assert remedy(bench.in_air(25.0).entry(), "greatest ambient", "celsius") == pytest.approx(71.0, abs=0.05)


def test_e19_pulse_by_normalised_transient_resistance() -> None:
    # onsemi 2N5190 design note: 50 W, r(t) 0.27, θJC 3.12: 42.2 K (42.1 computed)
    # a one-stage network that has risen to 27 % within the pulse of 0.5 ms
    network = ((3.12, -0.5e-3 / math.log(1 - 0.27)),)
    assert 50.0 * transient.impedance(network, 0.5e-3) == pytest.approx(42.2, abs=0.1)


@pytest.mark.parametrize(("theta", "watts"), [(333, 0.300), (250, 0.400), (165, 0.606)])
def test_e20_greatest_power(theta: float, watts: float) -> None:
    # Richtek RT9193T p9, JESD51-3 board, 125 - 25 °C: the load that just passes makes this heat
    entry = linear(6.0, 5.0, 0.01, 0.0, 25.0, 125.0, theta=theta)
    assert entry.greatest_load == pytest.approx(watts, abs=0.0006)  # 1 V across the part


def test_e21_greatest_power_of_sot23() -> None:
    # onsemi SOT-23 note: 150 - 25 °C, 556 °C/W: 225 mW
    assert linear(6.0, 5.0, 0.01, 0.0, 25.0, 150.0, theta=556.0).greatest_load == pytest.approx(0.225, abs=0.0005)


@pytest.mark.parametrize(("ta", "watts"), [(85.0, 1.0), (25.0, 2.5)])
def test_e22_allowed_heat_and_input(ta: float, watts: float) -> None:
    # Nisshinbo FAQ 029: 125 °C, 40 °C/W; at 1.5 A and 1.2 V out the input may be 1.2 + 2.5/1.5 V at 25 °C
    entry = linear(2.0, 1.2, 1.5, 0.0, ta, 125.0, theta=40.0)
    allowed = remedy(entry, "greatest input", "volts")
    assert (allowed - 1.2) * 1.5 == pytest.approx(watts, abs=0.001)


@pytest.mark.parametrize(("kelvin", "theta"), [(332, 68), (339, 81.2), (380, 164.3)])
def test_e24_theta_from_a_simulated_temperature(kelvin: float, theta: float) -> None:
    # Infineon "Package and Thermal Information SOT223-4-2": 0.5 W, 298 K
    bench = Bench(vin=Span.exact(6.0), vout=Span.exact(5.0), draws=((Span.exact(0.5), None),), theta=theta)
    assert junction(bench.in_air(298 - 273.15).entry()) + 273.15 == pytest.approx(kelvin, abs=0.5)


def test_e26_two_dice_in_one_package() -> None:
    # ST VNQ830 Doc 7390 table 16: Tj1 = RthA P1 + RthC P2 + Tamb, and RthB (P1 + P2) where P1 = P2
    from analyzer.heat.coupling import rise

    own, mutual, watts, ta = 60.0, 40.0, 0.7, 25.0
    one = ta + own * watts + rise({"U2": mutual}, {"U2": watts})
    assert one == pytest.approx(ta + (own + mutual) / 2 * (2 * watts))


# ---- published tables ----

FOOTPRINT = tuple((r, r * c) for r, c in ((0.8, 6e-5), (1.6, 5e-4), (4.5, 0.03), (24, 0.16), (0.1, 1000), (100, 0.5)))
TWO_CM2 = tuple((r, r * c) for r, c in ((0.8, 6e-5), (1.6, 5e-4), (4.5, 0.03), (24, 0.16), (0.1, 1000), (45, 2)))
"""ST VNN1NV04P-E Doc 15586 table 5 (SOT-223, 58 x 58 x 2 mm FR-4, 35 µm): footprint alone, and 2 cm² of copper."""


@pytest.mark.parametrize(
    ("network", "seconds", "zth"),
    [
        (FOOTPRINT, 1e-3, 1.98),
        (FOOTPRINT, 10e-3, 2.80),
        (FOOTPRINT, 0.1, 5.57),
        (FOOTPRINT, 1.0, 14.38),
        (FOOTPRINT, 10.0, 47.26),
        (FOOTPRINT, 100.0, 117.4),
        (TWO_CM2, 1e-3, 1.98),
        (TWO_CM2, 10e-3, 2.79),
        (TWO_CM2, 0.1, 5.42),
        (TWO_CM2, 1.0, 12.90),
        (TWO_CM2, 10.0, 33.87),
        (TWO_CM2, 100.0, 61.15),
    ],
)
def test_foster_impedance_of_the_published_network(network: transient.Foster, seconds: float, zth: float) -> None:
    assert transient.impedance(network, seconds) == pytest.approx(zth, rel=0.001, abs=0.0051)


@pytest.mark.parametrize(
    ("watts", "on", "period", "peak", "valley", "average", "steady"),
    [
        (2, 0.1, 1, 35.09, 24.10, 26.20, 262),
        (2, 0.01, 0.1, 30.92, 25.38, 26.20, 262),
        (5, 1, 100, 73.46, 1.58, 6.55, 655),
        (1, 10, 20, 84.28, 46.72, 65.50, 131),
    ],
)
def test_foster_pulse_train(
    watts: float, on: float, period: float, peak: float, valley: float, average: float, steady: float
) -> None:
    # exact sums of the geometric series over the footprint network
    assert transient.periodic_peak(FOOTPRINT, watts, on, period) == pytest.approx(peak, rel=0.001)
    assert transient.periodic_valley(FOOTPRINT, watts, on, period) == pytest.approx(valley, rel=0.001, abs=0.005)
    assert watts * on / period * transient.steady(FOOTPRINT) == pytest.approx(average, rel=0.001)
    assert watts * transient.steady(FOOTPRINT) == pytest.approx(steady, rel=0.001)


@pytest.mark.parametrize(("rise", "factor"), [(70, 1.017), (60, 1.057), (50, 1.106), (40, 1.170), (30, 1.257)])
def test_natural_convection_correction_of_sinks(rise: float, factor: float) -> None:
    # Aavid's published correction of θSA, rated at 75 K rise
    assert correction(rise) == pytest.approx(factor, rel=0.001)


@pytest.mark.outside
@pytest.mark.parametrize("feet", [0, 3000, 5000, 7000, 8347, 10000, 15000, 20000])
@pytest.mark.parametrize("exponent", [0.5, 0.7, 0.8, 1.0])
def test_altitude_against_the_standard_atmosphere(feet: float, exponent: float) -> None:
    # US Standard Atmosphere 1976 as computed by the PyPI package fluids
    from fluids.atmosphere import ATMOSPHERE_1976

    metres = feet * 0.3048
    ratio = ATMOSPHERE_1976(metres).P / ATMOSPHERE_1976(0.0).P
    assert pressure_ratio(metres) == pytest.approx(ratio, rel=0.002)
    assert multiplier(metres, exponent) == pytest.approx(ratio**-exponent, rel=0.01)


# ---- misprints: what a formula gives, and what was printed ----


def test_misprints_are_not_followed() -> None:
    # Nisshinbo FAQ 029 prints 1.68 V of drop and an input of 2.88 V; 2.5 W / 1.5 A is 1.667 V
    allowed = remedy(linear(2.0, 1.2, 1.5, 0.0, 25.0, 125.0, theta=40.0), "greatest input", "volts")
    assert allowed == pytest.approx(2.8667, abs=0.0001)
    # Microchip TC1262 DS21373C p4 prints VIN,max 4.6 V for what is 4.534 V
    entry = linear(3.63, 2.6865, 0.275, 0.0, 95.0, 125.0, theta=59.0)
    assert remedy(entry, "greatest input", "volts") == pytest.approx(4.534, abs=0.002)
    # PAM3112 p8: 315 mW at 250 °C/W above a case temperature of 40 °C is printed as a junction of 118.75 °C
    measured = PartStatement(case_measured=number(40.0, "°C"))
    figure = ThermalFigure("SOT-23-5", "test", theta_ja=number(250.0, "K/W"), psi_jt=number(21.0, "K/W"))
    bench = Bench(
        vin=Span.exact(4.15),
        vout=Span.exact(1.0),
        draws=((Span.exact(0.1), None),),
        thermal=(figure,),
        statement=measured,
    )
    assert junction(bench.entry()) == pytest.approx(40.0 + 21.0 * 0.315)
    # Power Supply Cookbook p17 prints an insulator of 65 °C/W, and 84.4 °C that only 0.65 °C/W can have led to
    chain = PartStatement(heat_sink=tuple(number(value, "K/W") for value in (3.0, 65.0, 10.0)))  # type: ignore[arg-type]
    bench = Bench(vin=Span.exact(7.0), vout=Span.exact(5.0), draws=((Span.exact(1.0), None),), statement=chain)
    assert junction(bench.in_air(25.0).entry()) > 25.0 + 2.0 * 78.0
