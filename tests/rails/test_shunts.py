"""Shunt regulators: their series resistor, its one supply, and what the budget makes of both."""

from __future__ import annotations

import pytest
from rails_bench import circuit, part, recognised, rulebook

from analyzer.circuit import Component
from analyzer.evidence import Grade
from analyzer.rail import Wiring
from analyzer.rails import find_rails
from analyzer.rule import Role, Topology
from analyzer.settings import Settings

J12 = part("J1", "Conn", {"1 Pin_1": "+12V", "2 Pin_2": "GND"})


def shunt(*others: Component) -> Wiring:
    chip = part("U1", "XS5", {"1 K passive": "VREF", "2 A passive": "GND"})
    known = recognised(chip, Topology.SHUNT, volts=5.0, roles={Role.OUTPUT: "1", Role.GROUND: "2"})
    (wiring,) = find_rails(circuit(chip, J12, *others), (known,), rulebook(), Settings()).wirings
    return wiring


def test_the_series_resistor_is_found_with_its_tolerance() -> None:
    wiring = shunt(part("R1", "1k 2%", "+12V VREF"), part("C1", "100n", "VREF GND"))
    assert (wiring.input_rail, wiring.output_rail, wiring.why_open) == ("+12V", "VREF", ())
    (resistor,) = wiring.outside
    assert (resistor.ref, resistor.role) == ("R1", "resistor")
    assert resistor.resistance is not None
    assert resistor.resistance.span.corners == pytest.approx((980.0, 1000.0, 1020.0))
    assert (resistor.resistance.source, resistor.resistance.grade) == ("R1 Value '1k 2%'", Grade.DERIVED)


def test_resistors_side_by_side_are_all_found() -> None:
    wiring = shunt(part("R1", "1k 1%", "+12V VREF"), part("R2", "2k2", "VREF +12V"))
    assert [(one.ref, one.role) for one in wiring.outside] == [("R1", "resistor"), ("R2", "resistor")]
    second = wiring.outside[1].resistance
    assert second is not None
    assert (second.grade, second.note) == (Grade.PRESUMED, "tolerance presumed")


def test_two_supplies_through_resistors_leave_it_open() -> None:
    j5 = part("J2", "Conn", {"1 Pin_1": "+24V", "2 Pin_2": "GND"})
    wiring = shunt(part("R1", "1k", "+12V VREF"), part("R2", "2k2", "VREF +24V"), j5)
    assert wiring.outside == ()
    assert "fed from several nets" in " ".join(wiring.why_open)
