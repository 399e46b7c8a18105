"""The tree of currents with the loss models' own input currents, worked by hand.

Tree rule (physics of energy balance): a linear part takes its load and its ground current, a switching one
Pout / (η · Vin), most at the lowest input voltage.
"""

from __future__ import annotations

from dataclasses import replace

import pytest
from draws_kit import RULES, chip, circuit, evidence, rails, vreg, wire

from analyzer.draws import find_loads
from analyzer.quantity import Span
from analyzer.rule import Topology
from analyzer.settings import Settings


def at(wiring, vin, vout):
    return replace(wiring, vin=evidence(vin, "V"), vout=evidence(vout, "V"))


def test_linear_below_a_buck():
    u1, u2 = vreg("U1", "VIN", "+5V"), vreg("U2", "+5V", "+3V3")
    buck = at(wire(u1, "VIN", "+5V", Topology.BUCK, efficiency=Span(0.85, 0.9, 0.92)), Span(9, 12, 15), Span.exact(5))
    linear = at(wire(u2, "+5V", "+3V3", quiescent=Span(0.001, 0.002, 0.005)), Span.exact(5), Span.exact(3.3))
    board = circuit(
        u1, u2, chip("U3", "+3V3", fields={"I_load": "100/150 mA"}), chip("U4", "+5V", fields={"I_load": "0.4 A"})
    )
    known = rails({"VIN": Span(9, 12, 15), "+5V": 5, "+3V3": 3.3}, [buck, linear])
    found = find_loads(board, (buck.part, linear.part), known, Settings(), RULES)
    five = found.by_rail["+5V"].total
    assert five.nominal == pytest.approx(0.4 + 0.1 + 0.002)
    assert five.high == pytest.approx(0.4 + 0.15 + 0.005)
    vin = found.by_rail["VIN"].total
    assert vin.high == pytest.approx(0.555 * 5 / (0.83 * 9), rel=1e-6)  # 2 points lower when hot
    assert vin.nominal == pytest.approx(0.502 * 5 / (0.9 * 12), rel=1e-6)
    assert found.input_amps["/U1", ""].span == vin
    assert {finding.name for finding in found.findings} == set()


def test_control_supply_of_a_two_supply_part():
    u1 = vreg("U1", "+1V8", "+1V2")
    wiring = at(
        wire(u1, "+1V8", "+1V2", Topology.LINEAR_TWO_SUPPLY, control_ratio=Span(50, 60, 70)),
        Span.exact(1.8),
        Span.exact(1.2),
    )
    wiring = replace(wiring, control_rail="+3V3", vcontrol=evidence(3.3, "V"))
    board = circuit(u1, chip("U2", "+1V2", fields={"I_load": "0.6 A"}))
    known = rails({"+1V8": 1.8, "+3V3": 3.3, "+1V2": 1.2}, [wiring])
    found = find_loads(board, (wiring.part,), known, Settings(), RULES)
    assert found.by_rail["+1V8"].total.nominal == pytest.approx(0.6)
    assert found.by_rail["+3V3"].total.corners == pytest.approx((0.6 / 70, 0.6 / 60, 0.6 / 50))


def test_without_figures_the_rail_above_stays_unknown():
    u1 = vreg("U1", "VIN", "+5V")
    buck = at(wire(u1, "VIN", "+5V", Topology.BUCK), Span.exact(12), Span.exact(5))
    board = circuit(u1, chip("U2", "+5V", fields={"I_load": "0.4 A"}))
    found = find_loads(board, (buck.part,), rails({"VIN": 12, "+5V": 5}, [buck]), Settings(), RULES)
    assert found.by_rail["+5V"].total == Span.exact(0.4)
    assert found.by_rail["VIN"].total is None
    assert [gap.why for gap in found.by_rail["VIN"].gaps] == [
        "load of U1 not known: what it takes from its input cannot be computed"
    ]
