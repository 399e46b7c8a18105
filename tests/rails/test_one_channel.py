"""What one channel cannot be: pins on several rails, or a share of the load that leaves the rest to nobody."""

from __future__ import annotations

from dataclasses import replace

import pytest
from rails_bench import circuit, part, recognised, rulebook

from analyzer.circuit import Component
from analyzer.part import Part
from analyzer.rail import Rails
from analyzer.rails import find_rails
from analyzer.rule import Role, Topology
from analyzer.settings import PartStatement, Settings

J12 = part("J1", "Conn", {"1 Pin_1": "+12V", "2 Pin_2": "GND"})


def find(part_: Part, *others: Component, settings: Settings | None = None) -> Rails:
    return find_rails(circuit(part_.component, *others), (part_,), rulebook(), settings or Settings())


@pytest.mark.parametrize(
    ("share", "message"), [(0.4, "feeds of +5V carry 0.4 of it: U1 0.4"), (0.0, "feeds of +5V carry 0 of it: U1 0")]
)
def test_shares_that_leave_part_of_the_load_to_nobody(share: float, message: str) -> None:
    chip = part("U1", "XL5", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 VOUT power_out": "+5V"})
    known, taker = recognised(chip, Topology.LINEAR, volts=5.0), part("C1", "1u", "+5V GND")
    rails = find(known, J12, taker, settings=Settings(parts={"U1": PartStatement(share=share)}))
    assert [one.message for one in rails.findings if one.name == "shares-incomplete"] == [message]
    assert not [one for one in find(known, J12, taker).findings if one.name == "shares-incomplete"]


@pytest.mark.parametrize(
    ("pins", "why"),
    [
        ({"1 VIN power_in": "+12V", "4 VOUT1 power_out": "+5V", "5 VOUT2 power_out": "+5VB"}, "output pins on several"),
        ({"1 VIN1 power_in": "+12V", "4 VIN2 power_in": "+24V", "5 VOUT power_out": "+5V"}, "input pins on several"),
    ],
)
def test_pins_of_one_channel_on_several_rails_leave_it_open(pins: dict[str, str], why: str) -> None:
    chip = part("U1", "XL5", {**pins, "2 GND power_in": "GND"})
    takers = [
        part("C1", "1u", "+5V GND"),
        part("U2", "MCU", {"1 VDD power_in": "+5VB", "2 VSS power_in": "GND"}),
        part("J3", "Conn", {"1 Pin_1": "+24V", "2 Pin_2": "GND"}),
    ]
    roles = {
        Role.INPUT: ",".join(key[0] for key in pins if "VIN" in key),
        Role.OUTPUT: ",".join(key[0] for key in pins if "VOUT" in key),
        Role.GROUND: "2",
    }
    known = recognised(chip, Topology.LINEAR, volts=5.0, roles=roles)
    assert why in " ".join(find(known, J12, *takers).wirings[0].why_open)


@pytest.mark.parametrize(("name", "corners"), [("DCR", (0.035, 0.035, 0.035)), ("DCR(max)", (0.0, 0.035, 0.035))])
def test_a_greatest_resistance_of_an_inductor_says_nothing_of_the_least(
    name: str, corners: tuple[float, float, float]
) -> None:
    pins = {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 SW output": "SW"}
    known = recognised(part("U1", "XB1", pins), Topology.BUCK, volts=5.0)
    coil = replace(part("L1", "10uH", "SW +5V"), fields={name: "35 mΩ"})
    (wiring,) = find(known, J12, coil, part("C1", "1u", "+5V GND")).wirings
    (inductor,) = [one for one in wiring.outside if one.role == "inductor"]
    assert inductor.resistance is not None
    assert inductor.resistance.span.corners == corners
