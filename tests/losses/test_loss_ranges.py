"""Physical functions refuse what lies outside their range."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from analyzer.losses import boost, charge_pump, charger, efficiency, linear, passage, shunt, terms

REFUSED: tuple[tuple[Callable[..., float], tuple[float, ...]], ...] = (
    (linear.pass_heat, (3.0, 3.3, 0.1, 0.0)),
    (linear.pass_heat, (5.0, 3.3, -0.1, 0.0)),
    (linear.pass_heat, (5.0, 3.3, 0.1, -1e-3)),
    (linear.short_circuit_heat, (-1.0, 0.5)),
    (linear.two_supply_heat, (1.0, 3.3, 1.2, 0.1, 0.0)),
    (linear.two_supply_heat, (1.5, 1.0, 1.2, 0.1, 0.0)),
    (charge_pump.pump_heat, (5.0, 5.1, 0.1, 1.0, 0.0)),
    (charge_pump.pump_heat, (5.0, 4.0, -0.1, 1.0, 0.0)),
    (charger.charger_heat, (4.0, 4.2, 0.1)),
    (charger.charger_heat, (5.0, 4.2, -0.1)),
    (efficiency.total_loss, (1.0, 0.0)),
    (efficiency.total_loss, (1.0, 1.01)),
    (efficiency.total_loss, (-1.0, 0.9)),
    (boost.boost_input_current, (1.0, 0.9, 0.0)),
    (boost.boost_input_current, (1.0, 1.2, 3.0)),
    (passage.switch_heat, (1.0, -0.1)),
    (passage.switch_heat, (1.0, 0.1, 0.5)),
    (passage.leakage_heat, (-1.0, 1e-6, 25.0)),
    (passage.leakage_heat, (1.0, 1e-6, 25.0, 0.0)),
    (shunt.shunt_heat, (12.0, 5.0, 0.0, 0.0)),
    (shunt.shunt_heat, (12.0, 5.0, 100.0, -0.1)),
    (shunt.resistor_heat, (12.0, 5.0, 0.0)),
    (terms.buck_duty, (-1.0, 3.3)),
    (terms.boost_duty, (-1.0, 3.3)),
    (terms.conduction, (1.0, -0.1)),
    (terms.conduction, (1.0, 0.1, -0.5)),
    (terms.saturation, (-1.0, 0.5)),
    (terms.switching, (5.0, 1.0, -1e5, 1e-9, 1e-9)),
    (terms.dead_time, (1.0, 0.7, 1e6, -1e-9)),
    (terms.gate_drive, (-1e-9, 5.0, 1e6)),
)


@pytest.mark.parametrize(("function", "arguments"), REFUSED)
def test_outside_its_range_a_function_raises(function: Callable[..., float], arguments: tuple[float, ...]) -> None:
    with pytest.raises(ValueError, match=r"."):
        function(*arguments)


def test_leakage_doubles_every_ten_kelvin() -> None:
    # common practice for Schottky diodes, from memory
    assert passage.leakage_heat(20.0, 1e-4, 25.0) == pytest.approx(2e-3)
    assert passage.leakage_heat(20.0, 1e-4, 45.0) == pytest.approx(8e-3)


def test_duties_meet_their_limits() -> None:
    assert terms.buck_duty(5.0, 5.0) == 1.0
    assert terms.buck_duty(4.0, 5.0) == 1.0
    assert terms.boost_duty(12.0, 5.0) == 0.0
    # (3.3 + 0.5) / (12 + 0.5 - 0.3)
    assert terms.buck_duty(12.0, 3.3, 0.5, 0.3) == pytest.approx(0.31147541)
