"""Every physical function outside its range raises, and inside gives numbers worked by hand."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from analyzer.heat import altitude, coupling, transient
from analyzer.heat.path import board, sink
from analyzer.losses import boost, buck, charge_pump, efficiency, passage, terms
from analyzer.quantity import Span

OUTSIDE: dict[str, Callable[[], object]] = {
    "above 11 km": lambda: altitude.pressure_ratio(11_001.0),
    "below the lowest land": lambda: altitude.pressure_ratio(-501.0),
    "a negative exponent": lambda: altitude.multiplier(0.0, -0.1),
    "an exponent above 2": lambda: altitude.multiplier(0.0, 2.1),
    "a distance inside the source": lambda: coupling.plate_spreading(0.001, 0.0015, 0.01, 20.0),
    "a plate without film": lambda: coupling.plate_spreading(0.01, 0.0015, 0.01, 0.0),
    "Bessel near 0": lambda: coupling.bessel_k(0, 1e-7),
    "Bessel far out": lambda: coupling.bessel_k(0, 701.0),
    "a board without thickness": lambda: board.effective_conductivity([(35e-6, 1.0)], 0.0),
    "more than full copper": lambda: board.effective_conductivity([(35e-6, 1.1)], 1.6e-3),
    "a sink without rise": lambda: sink.correction(0.0),
    "a negative sink": lambda: sink.natural_factor(-1.0, 1.0),
    "a sink for no heat": lambda: sink.needed_sink(125.0, 40.0, 0.0, 1.0, 1.0),
    "a via without drill": lambda: sink.via_resistance(1.6e-3, 0.0, 25e-6),
    "an empty network": lambda: transient.impedance([], 1.0),
    "a stage without time": lambda: transient.steady([(1.0, 0.0)]),
    "a negative time": lambda: transient.impedance([(1.0, 1.0)], -1.0),
    "a pulse beyond its period": lambda: transient.periodic_peak([(1.0, 1.0)], 1.0, 2.0, 1.0),
    "a valley without period": lambda: transient.periodic_valley([(1.0, 1.0)], 1.0, 0.0, 0.0),
    "a negative duty input": lambda: terms.buck_duty(-1.0, 1.0),
    "a buck's diode at no input": lambda: buck.least_off_time(0.0, 1.0, 0.9),
    "a buck's diode at no efficiency": lambda: buck.least_off_time(5.0, 1.0, 0.0),
    "a boost without input": lambda: boost.boost_input_current(1.0, 0.9, 0.0),
    "an efficiency above 1": lambda: efficiency.total_loss(1.0, 1.1),
    "a negative power": lambda: efficiency.total_loss(-1.0, 0.9),
    "a pump above its gain": lambda: charge_pump.pump_heat(5.0, 5.1, 0.1, 1.0, 0.0),
    "a switch of no channels": lambda: passage.switch_heat(1.0, 0.1, 0.0),
    "a negative leakage": lambda: passage.leakage_heat(1.0, -1e-6, 25.0),
    "a span without numbers": lambda: Span(0.0, math.nan, 1.0),
    "an infinite span": lambda: Span(0.0, 1.0, math.inf),
    "a span out of order": lambda: Span(1.0, 0.0, 2.0),
}


@pytest.mark.parametrize("what", OUTSIDE)
def test_outside_its_range_a_function_raises(what: str) -> None:
    with pytest.raises(ValueError, match=r"\w{3}"):
        OUTSIDE[what]()


def test_conductivity_of_boards() -> None:
    # two full 35 µm planes on 1.6 mm of board, and one at a tenth: FIDES takes 15 W/(m·K) as the limit
    assert board.effective_conductivity([(35e-6, 1.0), (35e-6, 1.0)], 1.6e-3) == pytest.approx(16.84, abs=0.005)
    assert board.effective_conductivity([(35e-6, 0.1)], 1.6e-3) == pytest.approx(0.842, abs=0.0005)


def test_a_plated_via() -> None:
    # 1.6 mm long, 0.3 mm drill, 25 µm of copper: 1.6e-3 / (385 · π · 0.3e-3 · 25e-6)
    assert sink.via_resistance(1.6e-3, 0.3e-3, 25e-6) == pytest.approx(176.4, abs=0.05)


def test_a_sink_at_its_own_rise() -> None:
    # Aavid: 1.257 at 30 K; at 75 K and above the catalogue figure; without heat or sink nothing changes
    assert sink.correction(30.0) == pytest.approx(1.257, abs=0.0005)
    assert sink.correction(90.0) == 1.0
    # 10 K/W catalogued carries 3 W: θ = 10 · (75/(θ · 3))^0.25 gives 12.01 K/W at 36.0 K
    found = sink.natural_factor(10.0, 3.0)
    assert found == pytest.approx(10.0 * (75.0 / (found * 3.0)) ** 0.25)
    assert found == pytest.approx(12.01, abs=0.005)
    assert sink.natural_factor(10.0, 0.0) == 10.0
    assert sink.natural_factor(0.0, 3.0) == 0.0
    # (125 − 40)/5 − 2 − 1
    assert sink.needed_sink(125.0, 40.0, 5.0, 2.0, 1.0) == pytest.approx(14.0)


def test_no_credit_below_the_sea() -> None:
    assert altitude.multiplier(-400.0, 0.7) == 1.0
