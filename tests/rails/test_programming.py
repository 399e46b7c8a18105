"""What a resistor at a part's SET pin programs."""

from __future__ import annotations

import pytest
from rails_bench import circuit, figure, part, recognised, rulebook

from analyzer.circuit import Component
from analyzer.quantity import Span
from analyzer.rail import Wiring
from analyzer.rails import find_rails
from analyzer.rule import Role, Topology
from analyzer.settings import Settings


def charger(*others: Component) -> Wiring:
    pins = {
        "1 VIN power_in": "VBUS",
        "2 GND power_in": "GND",
        "3 BAT power_out": "BATT",
        "4 PROG passive": "PROG",
    }
    figures = {"charge_gain": figure(Span(980.0, 1000.0, 1020.0), "V"), "battery_low": figure(2.9, "V")}
    roles = {Role.INPUT: "1", Role.GROUND: "2", Role.OUTPUT: "3", Role.SET: "4"}
    known = recognised(part("U1", "XCH", pins), Topology.CHARGER, volts=4.2, figures=figures, roles=roles)
    usb = part("J1", "USB", {"1 VBUS": "VBUS", "2 GND": "GND"})
    cell = part("BT1", "cell", {"1 +": "BATT", "2 -": "GND"})
    board = circuit(known.component, usb, cell, *others)
    (wiring,) = find_rails(board, (known,), rulebook(), Settings()).wirings
    return wiring


def test_a_programming_resistor_sets_the_charge_current() -> None:
    found = charger(part("R1", "2k 1%", "PROG GND")).channel.figures["charge_current"]
    assert found.span.corners == pytest.approx((980 / 2020, 0.5, 1020 / 1980))
    assert (found.source, found.formula) == ("U1 SET resistor", "1.00 kV / 2.00 kΩ")


def test_a_charge_current_that_nothing_plain_sets_is_not_known() -> None:
    for others in (
        (),
        (part("R1", "2k", "PROG GPIO"), part("U2", "MCU", {"1 P1 output": "GPIO", "2 VSS power_in": "GND"})),
    ):
        wiring = charger(*others)
        assert "charge_current" not in wiring.channel.figures
        assert wiring.why_open
