"""Outputs behind parts: where each topology's input and output are, and at which voltage."""

from __future__ import annotations

import pytest
from rails_bench import circuit, figure, part, recognised, rulebook

from analyzer.circuit import Component
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.rail import Rails, Wiring
from analyzer.rails import find_rails
from analyzer.rule import Role, Topology
from analyzer.settings import Settings

J12 = part("J1", "Conn", {"1 Pin_1": "+12V", "2 Pin_2": "GND"})
J5 = part("J2", "Conn", {"1 Pin_1": "+5V", "2 Pin_2": "GND"})
TOP = part("R1", "31k6 0.1%", "VO FB")
BOTTOM = part("R2", "10k 0.1%", "FB GND")
COUT = part("C1", "10u", "VO GND")


def find(part_: Part, *others: Component, settings: Settings | None = None) -> Rails:
    board = circuit(part_.component, *others)
    return find_rails(board, (part_,), rulebook(), settings or Settings())


def only(rails: Rails) -> Wiring:
    (wiring,) = rails.wirings
    return wiring


def nominal(wiring: Wiring) -> float | None:
    return wiring.vout.span.nominal if wiring.vout else None


def test_buck_through_inductor_shunt_and_zero_ohm() -> None:
    chip = part(
        "U1",
        "XB1",
        {
            "1 VIN power_in": "+12V",
            "2 GND power_in": "GND",
            "3 SW output": "SW",
            "4 FB input": "FB",
            "5 EN input": "+12V",
            "6 BST passive": "BST",
            "7 NC no_connect": "+12V",
        },
    )
    rails = find(
        recognised(chip, Topology.BUCK, reference=0.8),
        J12,
        part("L1", "1.0uH/4.2A/DCR=35mR/0420", "SW VO"),
        part("C9", "100n", "BST SW"),
        TOP,
        BOTTOM,
        COUT,
        part("R3", "0R", "VO +3V3"),
        part("U2", "MCU", {"1 VDD power_in": "+3V3", "2 VSS power_in": "GND"}),
    )
    wiring = only(rails)
    assert (wiring.input_rail, wiring.output_net, wiring.output_rail) == ("+12V", "VO", "+3V3")
    assert wiring.through == ("R3",)
    (coil,) = wiring.outside
    assert (coil.ref, coil.role) == ("L1", "inductor")
    assert coil.resistance is not None
    assert coil.resistance.span.nominal == pytest.approx(0.035)
    assert nominal(wiring) == pytest.approx(3.328)
    feed = rails.by_name["+3V3"].feeds[0]
    assert (feed.ref, feed.kind, feed.from_rail, feed.through) == ("U1", "regulator", "+12V", ("L1", "R3"))


def test_switch_node_on_a_pin_named_out() -> None:
    # the 2574..2596 style: OUT is the switch node, the diode is outside
    chip = part(
        "U1", "XB2", {"1 VIN power_in": "+12V", "2 OUT power_out": "SW", "3 GND power_in": "GND", "4 FB input": "VO"}
    )
    rails = find(
        recognised(chip, Topology.BUCK, volts=5.0),
        J12,
        part("L1", "33uH", "SW VO"),
        part("D1", "SS34", {"1 K": "SW", "2 A": "GND"}, lib_id="Device:D_Schottky"),
        COUT,
    )
    wiring = only(rails)
    assert wiring.output_net == "VO"
    assert nominal(wiring) == 5.0
    assert [(outside.ref, outside.role) for outside in wiring.outside] == [("L1", "inductor"), ("D1", "diode")]


def test_buck_wired_as_inverter() -> None:
    # the chip's ground pin is the negative rail; the inductor returns to ground
    chip = part(
        "U1", "XB3", {"1 VIN power_in": "+12V", "2 GND power_in": "VN", "3 SW output": "SW", "4 FB input": "FB"}
    )
    rails = find(
        recognised(chip, Topology.BUCK, reference=0.8),
        J12,
        part("L1", "10uH", "SW GND"),
        part("R1", "42k2 0.1%", "GND FB"),
        part("R2", "10k 0.1%", "FB VN"),
        part("C1", "22u", "GND VN"),
    )
    wiring = only(rails)
    assert wiring.output_rail == wiring.ground_rail == "VN"
    assert nominal(wiring) == pytest.approx(-0.8 * 5.22)
    # the chip sees input and output in series
    assert wiring.vin is not None
    assert wiring.vin.span.nominal == pytest.approx(12 + 0.8 * 5.22)
    assert rails.by_name["GND"].is_ground
    assert not rails.by_name["VN"].is_ground


def test_ground_pin_on_a_negative_rail_does_not_make_it_ground() -> None:
    chip = part("U9", "OPAMP", {"1 V+ power_in": "+12V", "2 V- power_in": "-9V", "3 GND power_in": "-9V"})
    other = part("U1", "XL", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 VOUT power_out": "+5V"})
    rails = find(recognised(other, Topology.LINEAR, volts=5.0), chip, J12, part("C1", "1u", "-9V GND"))
    assert [rail.name for rail in rails.rails if rail.is_ground] == ["GND"]
    assert rails.by_name["-9V"].volts is not None
    assert rails.by_name["-9V"].volts.span.corners == pytest.approx((-9.45, -9.0, -8.55))


def test_boost_with_diode_takes_its_input_from_the_inductor() -> None:
    chip = part(
        "U1", "XU1", {"1 VIN power_in": "+3V3", "2 GND power_in": "GND", "3 SW output": "SW", "4 FB input": "FB"}
    )
    rails = find(
        recognised(chip, Topology.BOOST, reference=1.25),
        part("J1", "Conn", {"1 Pin_1": "VSYS_5V", "2 Pin_2": "GND"}),
        part("C5", "1u", "+3V3 GND"),
        part("L1", "4u7", "VSYS_5V SW"),
        part("D1", "SS14", {"1 K": "VO", "2 A": "SW"}, lib_id="Device:D_Schottky"),
        part("R1", "86k6 1%", "VO FB"),
        part("R2", "10k 1%", "FB GND"),
        COUT,
    )
    wiring = only(rails)
    assert (wiring.input_rail, wiring.output_net) == ("VSYS_5V", "VO")
    assert nominal(wiring) == pytest.approx(1.25 * 9.66)
    assert {outside.role for outside in wiring.outside} == {"inductor", "diode"}
    assert [feed.ref for feed in rails.by_name["VO"].feeds] == ["U1"]


def test_synchronous_boost_without_vin_pin() -> None:
    chip = part("U1", "XU2", {"1 SW input": "SW", "2 GND power_in": "GND", "3 VOUT power_out": "VO"})
    rails = find(
        recognised(chip, Topology.BOOST, volts=5.0),
        part("BT1", "LiPo", {"1 + passive": "VBATT_3V7", "2 - passive": "GND"}),
        part("L1", "2u2", "VBATT_3V7 SW"),
        COUT,
    )
    wiring = only(rails)
    assert (wiring.input_rail, wiring.output_rail, nominal(wiring)) == ("VBATT_3V7", "VO", 5.0)


def test_inverting_converter_with_diode() -> None:
    chip = part(
        "U1", "XI1", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 SW output": "SW", "4 FB input": "FB"}
    )
    rails = find(
        recognised(chip, Topology.INVERTING, reference=1.25, sign=-1),
        J12,
        part("L1", "10uH", "SW GND"),
        part("D1", "SS14", {"1 K": "SW", "2 A": "VNEG"}, lib_id="Device:D_Schottky"),
        part("R1", "30k 1%", "VNEG FB"),
        part("R2", "10k 1%", "FB GND"),
        part("C1", "10u", "VNEG GND"),
    )
    wiring = only(rails)
    assert wiring.output_net == "VNEG"
    assert nominal(wiring) == pytest.approx(-5.0)


def test_isolated_module_with_its_own_primary_ground() -> None:
    chip = part(
        "PS1",
        "XM48-12",
        {"1 +VIN power_in": "PD_48V", "2 GND power_in": "GNDD", "3 +VOUT power_out": "+12V", "4 0V power_out": "GND"},
    )
    rails = find(
        recognised(chip, Topology.MODULE, volts=12.0), part("C1", "1u", "PD_48V GNDD"), part("C2", "1u", "+12V GND")
    )
    wiring = only(rails)
    assert (wiring.input_rail, wiring.output_rail) == ("PD_48V", "+12V")
    assert wiring.vin is not None
    assert wiring.vin.span.nominal == pytest.approx(48.0)


def test_controller_lists_its_transistors() -> None:
    chip = part(
        "U1",
        "XC1",
        {
            "1 VIN power_in": "+12V",
            "2 GND power_in": "GND",
            "3 HG output": "HG",
            "4 LG output": "LG",
            "5 SW passive": "SW",
            "6 FB input": "FB",
        },
    )
    rails = find(
        recognised(chip, Topology.CONTROLLER, reference=0.8),
        J12,
        part("Q1", "N1", {"1 G": "HGR", "2 S": "SW", "3 D": "+12V"}, lib_id="Device:Q_NMOS_GSD"),
        part("Q2", "N2", {"1 G": "LG", "2 S": "GND", "3 D": "SW"}, lib_id="Device:Q_NMOS_GSD"),
        part("R9", "2R2", "HG HGR"),
        part("L1", "4u7", "SW VO"),
        TOP,
        BOTTOM,
        COUT,
    )
    wiring = only(rails)
    assert wiring.output_net == "VO"
    assert nominal(wiring) == pytest.approx(3.328)
    roles = {outside.ref: outside.role for outside in wiring.outside}
    assert roles == {"L1": "inductor", "Q1": "transistor", "Q2": "transistor"}
    assert [feed.ref for feed in rails.by_name["VO"].feeds] == ["U1"]


def test_several_channels_and_one_strapped_off() -> None:
    chip = part(
        "U1",
        "XP3",
        {
            "1 PVIN1 power_in": "+5V",
            "2 PVIN2 power_in": "GND",
            "3 LX1 output": "LX1",
            "4 LX2 output": "unconnected-(U1-LX2)",
            "5 FB1 input": "FB1",
            "6 FB2 input": "GND",
            "7 GND power_in": "GND",
            "8 EN2 input": "GND",
        },
    )
    channels = {
        "1": {Role.INPUT: "1", Role.SWITCH: "3", Role.FEEDBACK: "5", Role.GROUND: "7"},
        "2": {Role.INPUT: "2", Role.SWITCH: "4", Role.FEEDBACK: "6", Role.GROUND: "7", Role.ENABLE: "8"},
    }
    rails = find(
        recognised(chip, Topology.BUCK, reference=0.6, channels=channels),
        J5,
        part("L1", "1uH", "LX1 V1"),
        part("R1", "10k 1%", "V1 FB1"),
        part("R2", "10k 1%", "FB1 GND"),
        part("C1", "10u", "V1 GND"),
    )
    on, off = rails.wirings
    assert (on.is_off, nominal(on)) == (False, pytest.approx(1.2))
    assert off.is_off
    assert (off.vin, off.vout, off.output_rail) == (None, None, None)
    assert "GND" not in {feed.from_rail for rail in rails.rails for feed in rail.feeds}


def test_enable_sense_and_unconnected_pins_on_rails_are_neither_input_nor_output() -> None:
    chip = part(
        "U1",
        "XL9",
        {
            "1 OUT power_out": "+3V3",
            "2 NC no_connect": "+3V3",
            "3 GND power_in": "GND",
            "4 EN input": "+12V",
            "5 NC no_connect": "+5V",
            "6 IN power_in": "+5V",
            "7 SNS input": "+3V3",
        },
    )
    wiring = only(find(recognised(chip, Topology.LINEAR, volts=3.3), J5, J12))
    assert (wiring.input_rail, wiring.output_rail) == ("+5V", "+3V3")


def test_floating_adjustable_regulator() -> None:
    chip = part("U1", "XA1", {"1 ADJ input": "ADJ", "2 VO power_out": "VO", "3 VI power_in": "+12V"})
    rails = find(
        recognised(
            chip,
            Topology.LINEAR_FLOATING,
            reference=1.25,
            across="upper",
            figures={"feedback_current": figure(50e-6, "A")},
        ),
        J12,
        part("R1", "1k2 0.1%", "VO ADJ"),
        part("R2", "3k6 0.1%", "ADJ GND"),
        COUT,
    )
    # reference/physics.md 3.3: 5.18 V with 50 µA
    assert nominal(only(rails)) == pytest.approx(5.18)


def test_set_current_through_a_resistor() -> None:
    chip = part("U1", "XS1", {"1 SET input": "SET", "2 VOUT power_out": "VO", "3 VIN power_in": "+5V"})
    rails = find(
        recognised(chip, Topology.LINEAR, figures={"set_current": figure(10e-6, "A")}),
        J5,
        part("R1", "330k 1%", "SET GND"),
        COUT,
    )
    volts = only(rails).vout
    assert volts is not None
    assert volts.span.corners == pytest.approx((3.267, 3.3, 3.333))


def test_negative_linear_regulator() -> None:
    chip = part("U1", "XN9", {"1 GND power_in": "GND", "2 VI power_in": "-12V", "3 VO power_out": "VN"})
    rails = find(
        recognised(chip, Topology.LINEAR, volts=-5.0, sign=-1),
        part("J1", "Conn", {"1 Pin_1": "-12V", "2 Pin_2": "GND"}),
        part("C1", "1u", "VN GND"),
    )
    wiring = only(rails)
    assert nominal(wiring) == -5.0
    assert wiring.vin is not None
    assert wiring.vin.span.nominal == -12.0


def test_inverting_charge_pump_follows_its_input() -> None:
    chip = part(
        "U1",
        "XCP",
        {
            "1 VIN power_in": "+5V",
            "2 GND power_in": "GND",
            "3 VOUT power_out": "VN",
            "4 C+ passive": "A",
            "5 C- passive": "B",
        },
    )
    rails = find(
        recognised(chip, Topology.CHARGE_PUMP, sign=-1, figures={"gain": figure(-1.0, "1")}),
        J5,
        part("C1", "1u", "VN GND"),
        part("C2", "1u", "A B"),
    )
    volts = only(rails).vout
    assert volts is not None
    assert volts.span.corners == pytest.approx((-5.25, -5.0, -4.75))


def test_negative_shunt_reference() -> None:
    chip = part("U1", "XR10", {"1 K passive": "GND", "2 A passive": "VREF-10"})
    rails = find(
        recognised(chip, Topology.SHUNT, volts=10.0, roles={Role.OUTPUT: "2", Role.GROUND: "1"}),
        part("J1", "Conn", {"1 Pin_1": "-12V", "2 Pin_2": "GND"}),
        part("C5", "1u", "-12V GND"),
        part("R1", "2k2", "-12V VREF-10"),
    )
    wiring = only(rails)
    assert (wiring.input_rail, wiring.output_rail, nominal(wiring)) == ("-12V", "VREF-10", -10.0)
    assert not [finding for finding in rails.findings if finding.name == "name-disagrees"]


def test_charger_makes_a_battery_rail() -> None:
    chip = part("U1", "XCH", {"1 VDD power_in": "VBUS", "2 VSS power_in": "GND", "3 VBAT power_out": "BATT"})
    rails = find(
        recognised(chip, Topology.CHARGER, volts=4.2),
        part("J1", "USB", {"1 VBUS": "VBUS", "2 GND": "GND"}),
        part("BT1", "cell", {"1 +": "BATT", "2 -": "GND"}),
        part("C1", "1u", "BATT GND"),
    )
    assert nominal(only(rails)) == 4.2
    rail = rails.by_name["BATT"]
    assert rail.volts is not None
    assert rail.volts.span.corners == (3.0, 4.2, 4.2)
    assert [(feed.ref, feed.kind) for feed in rail.feeds] == [("BT1", "battery"), ("U1", "regulator")]


def test_unfitted_regulator_feeds_nothing() -> None:
    chip = part("U1", "XL", {"1 VIN power_in": "+5V", "2 GND power_in": "GND", "3 VOUT power_out": "VX"}, fitted=False)
    rails = find(recognised(chip, Topology.LINEAR, volts=1.8), J5, part("C1", "1u", "VX GND"))
    wiring = only(rails)
    assert (wiring.input_rail, wiring.output_net) == ("+5V", "VX")
    assert rails.by_name["VX"].feeds == ()


def test_adjustable_output_is_a_span_with_its_reason() -> None:
    chip = part(
        "U1", "XL7", {"1 IN power_in": "+12V", "2 GND power_in": "GND", "3 OUT power_out": "VO", "4 FB input": "FB"}
    )
    dac = part("U2", "DAC", {"1 VDD power_in": "+3V3", "2 GND power_in": "GND", "3 VOUT output": "VDAC"})
    rails = find(
        recognised(chip, Topology.LINEAR, reference=1.204),
        J12,
        dac,
        part("C9", "1u", "+3V3 GND"),
        part("R1", "59k 0.0%", "VO FB"),
        part("R2", "24k3 0.0%", "FB GND"),
        part("R3", "49k9 0.0%", "VDAC FB"),
        COUT,
    )
    volts = only(rails).vout
    assert volts is not None

    def output(drive: float) -> float:
        return 1.204 + 59 * (1.204 / 24.3 + (1.204 - drive) / 49.9)

    # +3V3 is known by name only, 3.3 V ±5 %
    assert volts.span.low == pytest.approx(output(3.465), rel=1e-9)
    assert volts.span.high == pytest.approx(output(0.0), rel=1e-9)
    assert [finding.subject for finding in rails.findings if finding.name == "adjustable-output"] == ["U1"]


def test_reference_tolerance_of_a_rule_is_a_corner() -> None:
    chip = part(
        "U1", "XB1", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 SW output": "SW", "4 FB input": "FB"}
    )
    rails = find(
        recognised(chip, Topology.BUCK, reference=Span.around(0.8, 0.01)),
        J12,
        part("L1", "1u", "SW VO"),
        part("R1", "31k6 1%", "VO FB"),
        part("R2", "10k 1%", "FB GND"),
        COUT,
    )
    volts = only(rails).vout
    assert volts is not None
    assert [round(corner, 3) for corner in volts.span.corners] == [3.245, 3.328, 3.413]


def test_adjustable_part_without_ground_pin_needs_no_rule_for_its_convention() -> None:
    # 1.25 V between OUT and ADJ, 120 Ω above 56 Ω: 1.25·(1 + 56/120); the other way round it would be 3.93 V
    chip = part("U1", "XADJ", {"1 ADJ input": "ADJ", "2 VO power_out": "VO", "3 VI power_in": "+5V"})
    rails = find(
        recognised(chip, Topology.LINEAR, reference=1.25),
        J5,
        part("R1", "120R 1%", "VO ADJ"),
        part("R2", "56R 1%", "ADJ GND"),
        COUT,
    )
    assert nominal(only(rails)) == pytest.approx(1.8333, abs=1e-4)


def test_power_input_comes_before_control_and_bypass_pins() -> None:
    chip = part(
        "U1",
        "XB",
        {
            "1 VCC power_in": "VCCBYP",
            "2 AVIN power_in": "AVIN",
            "3 PVIN power_in": "+12V",
            "4 GND power_in": "GND",
            "5 SW output": "SW",
        },
    )
    rails = find(
        recognised(chip, Topology.BUCK, volts=5.0, roles={Role.INPUT: "1,2,3", Role.SWITCH: "5", Role.GROUND: "4"}),
        J12,
        part("C8", "1u", "VCCBYP GND"),
        part("R8", "10R", "+12V AVIN"),
        part("C9", "1u", "AVIN GND"),
        part("L1", "10u", "SW VO"),
        COUT,
    )
    assert only(rails).input_rail == "+12V"


def test_pin_of_another_chip_that_may_drive_the_divider_leaves_it_open() -> None:
    chip = part(
        "U1", "XL7", {"1 IN power_in": "+12V", "2 GND power_in": "GND", "3 OUT power_out": "VO", "4 FB input": "FB"}
    )
    other = part("U2", "X", {"1 A unspecified": "TRIM", "2 B unspecified": "N2", "3 C unspecified": "N3"})
    rails = find(
        recognised(chip, Topology.LINEAR, reference=0.8), J12, other, TOP, BOTTOM, COUT, part("R3", "47k", "TRIM FB")
    )
    assert only(rails).vout is None
    assert any("U2" in why for why in only(rails).why_open)


@pytest.mark.parametrize(
    ("value", "fields"), [("4u7 DCR=20mR", {}), ("4u7", {"DCR": "20mΩ"}), ("4u7", {"DCR max": "0.02R"})]
)
def test_inductor_resistance_from_value_or_field(value: str, fields: dict[str, str]) -> None:
    chip = part("U1", "XB", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 SW output": "SW"})
    coil = part("L1", value, "SW VO", fields=fields)
    (outside,) = only(find(recognised(chip, Topology.BUCK, volts=5.0), J12, coil, COUT)).outside
    assert outside.resistance is not None
    assert outside.resistance.span.nominal == pytest.approx(0.02)


def test_regulator_between_a_negative_rail_and_ground() -> None:
    # its ground pin is -12 V, its input is ground: 5 V above -12 V is -7 V
    chip = part("U1", "XL5", {"1 VIN power_in": "GND", "2 GND power_in": "-12V", "3 VOUT power_out": "VM"})
    rails = find(
        recognised(chip, Topology.LINEAR, volts=5.0),
        part("J1", "Conn", {"1 Pin_1": "-12V", "2 Pin_2": "GND"}),
        part("C1", "1u", "VM -12V"),
        settings=Settings(supplies={"-12V": figure(-12.0)}),
    )
    wiring = only(rails)
    assert not wiring.is_off
    assert (wiring.input_rail, wiring.ground_rail) == ("GND", "-12V")
    assert wiring.vin is not None
    assert wiring.vin.span.nominal == 12.0
    assert nominal(wiring) == -7.0


def test_doubled_references_do_not_mix_a_link_with_a_divider() -> None:
    # an unannotated board: every resistor is "R?", one of them a 0 Ω link
    from dataclasses import replace

    chip = part(
        "U1", "XB", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 SW output": "SW", "4 FB input": "FB"}
    )
    resistors = [
        replace(part(f"R{number}", value, nets), ref="R?")
        for number, (value, nets) in enumerate((("0R", "VO +X"), ("10k 1%", "VO FB"), ("10k 1%", "FB GND")), start=1)
    ]
    rails = find(recognised(chip, Topology.BUCK, reference=0.8), J12, part("L1", "1u", "SW VO"), COUT, *resistors)
    assert nominal(only(rails)) == pytest.approx(1.6)


def test_sign_read_from_words_gives_way_to_the_rails_name() -> None:
    # recognised by pins only, its sign misread from "4.2V-18V"
    chip = part(
        "U1", "XB", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 SW output": "SW", "4 FB input": "FB"}
    )
    rails = find(
        recognised(chip, Topology.BUCK, reference=0.8, sign=-1),
        J12,
        part("L1", "1u", "SW +3V3"),
        part("R1", "31k6 1%", "+3V3 FB"),
        BOTTOM,
        part("C1", "10u", "+3V3 GND"),
    )
    assert nominal(only(rails)) == pytest.approx(3.328)
