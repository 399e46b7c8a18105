"""What lies between rails: diodes, transistors, switches, filter resistors, recognised passages."""

from __future__ import annotations

import pytest
from rails_bench import circuit, figure, part, recognised, rulebook

from analyzer.circuit import Component
from analyzer.evidence import Evidence, Grade
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.rail import Rails
from analyzer.rails import find_rails
from analyzer.rule import Topology
from analyzer.settings import Settings

SCHOTTKY = "Device:D_Schottky"


def find(*components: Component, parts: tuple[Part, ...] = (), settings: Settings | None = None) -> Rails:
    return find_rails(circuit(*components), parts, rulebook(), settings or Settings())


def consumer(net: str, ref: str = "U9") -> tuple[Component, Component]:
    return (
        part(ref, "MCU", {"1 VDD power_in": net, "2 VSS power_in": "GND", "3 IO bidirectional": f"IO_{ref}"}),
        part(f"C{ref[1:]}", "100n", f"{net} GND"),
    )


def feeds(rails: Rails, name: str) -> list[tuple[str, str, str | None]]:
    return [(feed.ref, feed.kind, feed.from_rail) for feed in rails.by_name[name].feeds]


def corners(rails: Rails, name: str) -> tuple[float, float, float] | None:
    volts = rails.by_name[name].volts
    return volts.span.corners if volts else None


USB = part("J1", "USB-C", {"1 VBUS": "VBUS", "2 GND": "GND"})


def test_schottky_drops_0v2_to_0v5_and_says_so() -> None:
    rails = find(USB, part("D1", "SS14", {"1 K": "VSYS", "2 A": "VBUS"}), *consumer("VSYS"))
    assert feeds(rails, "VSYS") == [("D1", "passage", "VBUS")]
    assert corners(rails, "VSYS") == pytest.approx((4.25, 4.65, 5.05))
    volts = rails.by_name["VSYS"].volts
    assert volts is not None
    assert volts.weakest is Grade.PRESUMED
    assert any("common practice" in evidence.note for evidence in volts.walk())


def test_silicon_diode_drops_0v6_to_1v0() -> None:
    rails = find(USB, part("D1", "1N4148WS", {"1 K": "VSYS", "2 A": "VBUS"}), *consumer("VSYS"))
    assert corners(rails, "VSYS") == pytest.approx((3.75, 4.2, 4.65))


def test_diode_of_unknown_kind_takes_the_wider_span() -> None:
    rails = find(USB, part("D1", "X77", {"1 K": "VSYS", "2 A": "VBUS"}), *consumer("VSYS"))
    assert corners(rails, "VSYS") == pytest.approx((3.75, 4.4, 5.05))


def test_two_diodes_make_the_span_over_both_feeds() -> None:
    rails = find(
        USB,
        part("J2", "DC", {"1 +": "+12V", "2 -": "GND"}),
        part("D1", "SS14", {"1 K": "VSYS", "2 A": "VBUS"}),
        part("D2", "SS14", {"1 K": "VSYS", "2 A": "+12V"}),
        *consumer("VSYS"),
    )
    assert feeds(rails, "VSYS") == [("D1", "passage", "VBUS"), ("D2", "passage", "+12V")]
    assert corners(rails, "VSYS") == pytest.approx((4.25, 4.65, 12.4))
    assert all(feed.share == 1.0 for feed in rails.by_name["VSYS"].feeds)


def test_common_cathode_pair_in_one_package() -> None:
    rails = find(
        USB,
        part("J2", "DC", {"1 +": "+9V", "2 -": "GND"}),
        part("D1", "BAT54C", {"1 A": "VBUS", "2 A": "+9V", "3 K": "VSYS"}),
        *consumer("VSYS"),
    )
    assert feeds(rails, "VSYS") == [("D1", "passage", "+9V"), ("D1", "passage", "VBUS")]


def test_share_from_the_settings() -> None:
    from analyzer.settings import PartStatement

    rails = find(
        USB,
        part("J2", "DC", {"1 +": "+5V", "2 -": "GND"}),
        part("D1", "SS14", {"1 K": "VSYS", "2 A": "VBUS"}),
        part("D2", "SS14", {"1 K": "VSYS", "2 A": "+5V"}),
        *consumer("VSYS"),
        settings=Settings(parts={"D1": PartStatement(share=0.5)}),
    )
    assert [feed.share for feed in rails.by_name["VSYS"].feeds] == [0.5, 1.0]


def test_negative_rail_behind_a_schottky() -> None:
    # current flows out of the rail into the connector; the rail is less negative by the drop
    rails = find(
        part("J1", "Conn", {"1 Pin_1": "Net-(J1-1)", "2 Pin_2": "GND"}),
        part("D1", "30V", {"1 K": "Net-(J1-1)", "2 A": "-12V"}, lib_id=SCHOTTKY),
        *consumer("-12V"),
        settings=Settings(supplies={"Net-(J1-1)": figure(-12.0)}),
    )
    assert feeds(rails, "-12V") == [("D1", "passage", "Net-(J1-1)")]
    assert corners(rails, "-12V") == pytest.approx((-11.8, -11.65, -11.5))


def test_protection_diode_across_a_regulator_is_no_feed() -> None:
    chip = part("U1", "XL", {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 VOUT power_out": "+5V"})
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+12V", "2 -": "GND"}),
        part("D1", "1N4007", {"1 K": "+12V", "2 A": "+5V"}),
        parts=(recognised(chip, Topology.LINEAR, volts=5.0),),
    )
    assert feeds(rails, "+12V") == [("J1", "connector", None)]


def test_clamp_at_a_connector_pin_does_not_feed_the_rail() -> None:
    chip = part("U1", "XL", {"1 VIN power_in": "+5V", "2 GND power_in": "GND", "3 VOUT power_out": "+3V3"})
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+5V", "2 -": "GND"}),
        part("J3", "Header", {"1 Pin_1": "SENSOR", "2 Pin_2": "GND"}),
        part("R1", "1k", "SENSOR ADC0"),
        part("D1", "BAT54", {"1 K": "+3V3", "2 A": "SENSOR"}),
        *consumer("+3V3"),
        parts=(recognised(chip, Topology.LINEAR, volts=3.3),),
    )
    assert feeds(rails, "+3V3") == [("U1", "regulator", "+5V")]


def test_catch_and_bootstrap_diodes_are_no_feeds() -> None:
    chip = part(
        "U1",
        "XB",
        {
            "1 VIN power_in": "+12V",
            "2 GND power_in": "GND",
            "3 SW output": "SW",
            "4 BOOT passive": "BT",
            "5 VCC power_in": "+5V",
        },
    )
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+12V", "2 -": "GND"}),
        part("J2", "DC", {"1 +": "+5V", "2 -": "GND"}),
        part("L1", "10u", "SW +3V3"),
        part("C5", "100n", "BT SW"),
        part("D1", "SS14", {"1 K": "SW", "2 A": "GND"}),
        part("D2", "BAT54", {"1 K": "BT", "2 A": "+5V"}),
        *consumer("+3V3"),
        parts=(recognised(chip, Topology.BUCK, volts=3.3),),
    )
    refs = {feed.ref for rail in rails.rails for feed in rail.feeds}
    assert refs == {"U1", "J1", "J2"}


def pfet(ref: str, gate: str, source: str, drain: str) -> Component:
    return part(ref, "PFET", {"1 G": gate, "2 S": source, "3 D": drain}, lib_id="Device:Q_PMOS_GSD")


def test_reverse_protection_transistor_feeds_from_the_connector() -> None:
    rails = find(
        part("J1", "DC", {"1 +": "VIN_24V", "2 -": "GND"}),
        pfet("Q1", "GND", "VMAIN", "VIN_24V"),
        *consumer("VMAIN"),
    )
    assert feeds(rails, "VMAIN") == [("Q1", "passage", "VIN_24V")]
    assert corners(rails, "VMAIN") == pytest.approx((22.6, 23.95, 25.2))


def test_load_switch_transistor_feeds_away_from_the_regulator() -> None:
    chip = part("U1", "XL", {"1 VIN power_in": "+5V", "2 GND power_in": "GND", "3 VOUT power_out": "+3V3"})
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+5V", "2 -": "GND"}),
        pfet("Q1", "ON", "+3V3", "Net-(Q1-D)"),
        part("J5", "SDcard", {"1 VDD": "Net-(Q1-D)", "2 VSS": "GND"}),
        part("C7", "1u", "Net-(Q1-D) GND"),
        *consumer("+3V3"),
        parts=(recognised(chip, Topology.LINEAR, volts=3.3),),
    )
    assert feeds(rails, "Net-(Q1-D)") == [("Q1", "passage", "+3V3")]
    assert feeds(rails, "+3V3") == [("U1", "regulator", "+5V")]


def test_two_transistors_back_to_back() -> None:
    rails = find(USB, pfet("Q1", "EN1", "MID", "VBUS"), pfet("Q2", "EN1", "MID", "VSYS"), *consumer("VSYS"))
    assert feeds(rails, "VSYS") == [("Q2", "passage", "MID")]
    assert feeds(rails, "MID") == [("Q1", "passage", "VBUS")]
    assert corners(rails, "VSYS") == pytest.approx((4.35, 4.9, 5.25))


def test_level_shifter_transistor_is_no_passage() -> None:
    rails = find(
        USB,
        part("Q1", "BSS138", {"1 G": "+3V3", "2 S": "SDA", "3 D": "SDA_5V"}, lib_id="Device:Q_NMOS_GSD"),
        part("R1", "4k7", "SDA +3V3"),
        part("R2", "4k7", "SDA_5V VBUS"),
        *consumer("+3V3"),
    )
    assert not [feed for rail in rails.rails for feed in rail.feeds if feed.ref == "Q1"]


def test_slide_switch_between_battery_and_rail() -> None:
    rails = find(
        part("BT1", "2xAA", {"1 +": "Net-(BT1-+)", "2 -": "GND"}),
        part("SW1", "SPDT", {"1 A": "Net-(BT1-+)", "2 B": "VSYS_3V0", "3 C": "unconnected-(SW1-C)"}),
        *consumer("VSYS_3V0"),
    )
    assert ("SW1", "passage", "Net-(BT1-+)") in feeds(rails, "VSYS_3V0")


def test_button_to_a_port_pin_is_no_passage() -> None:
    rails = find(USB, part("SW1", "BTN", "VBUS IO_U9"), *consumer("VBUS"))
    assert "IO_U9" not in rails.of_net


def test_filter_resistor_feeds_a_supply_pin() -> None:
    chip = part("U1", "XL", {"1 VIN power_in": "+5V", "2 GND power_in": "GND", "3 VOUT power_out": "+3V3"})
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+5V", "2 -": "GND"}),
        part("R1", "10R", "+3V3 AVDD"),
        *consumer("AVDD"),
        *consumer("+3V3", "U8"),
        parts=(recognised(chip, Topology.LINEAR, volts=3.3),),
    )
    assert feeds(rails, "AVDD") == [("R1", "passage", "+3V3")]


def test_load_switch_with_rule_figures() -> None:
    chip = part("U1", "XLS", {"1 VIN power_in": "+5V", "2 GND power_in": "GND", "3 VOUT power_out": "SW5"})
    figures = {"on_resistance": figure(Span(0.02, 0.025, 0.03), "Ω"), "output_current_max": figure(2.0, "A")}
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+5V", "2 -": "GND"}),
        *consumer("SW5"),
        parts=(recognised(chip, Topology.LOAD_SWITCH, figures=figures),),
    )
    assert feeds(rails, "SW5") == [("U1", "passage", "+5V")]
    # 5 V ±5 % by name, less 0 to 30 mΩ · 2 A
    assert corners(rails, "SW5") == pytest.approx((4.69, 4.97, 5.25))
    (wiring,) = rails.wirings
    assert wiring.vout is not None
    assert wiring.vout.span.corners == corners(rails, "SW5")


def test_multiplexer_is_fed_from_both_inputs() -> None:
    chip = part(
        "U1",
        "XMX",
        {"1 VIN1 power_in": "+5V", "2 VIN2 power_in": "+12V", "3 VOUT power_out": "VM", "4 GND power_in": "GND"},
    )
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+5V", "2 -": "GND"}),
        part("J2", "DC", {"1 +": "+12V", "2 -": "GND"}),
        *consumer("VM"),
        parts=(recognised(chip, Topology.POWER_MUX, figures={"forward_drop": figure(0.1)}),),
    )
    assert feeds(rails, "VM") == [("U1", "passage", "+5V"), ("U1", "passage", "+12V")]
    assert corners(rails, "VM") == pytest.approx((4.65, 4.9, 12.5))
    (wiring,) = rails.wirings
    assert wiring.vin is not None
    assert wiring.vin.span.corners == pytest.approx((4.75, 5.0, 12.6))


def test_unfitted_switch_bypassed_by_a_fitted_zero_ohm() -> None:
    chip = part(
        "U1", "XLS", {"1 VIN power_in": "+5V", "2 GND power_in": "GND", "3 VOUT power_out": "SW5"}, fitted=False
    )
    rails = find(
        chip,
        part("J1", "DC", {"1 +": "+5V", "2 -": "GND"}),
        part("R1", "0R", "+5V SW5"),
        *consumer("SW5"),
        parts=(recognised(chip, Topology.LOAD_SWITCH),),
    )
    assert rails.of_net["+5V"] == rails.of_net["SW5"]
    assert not [finding for finding in rails.findings if finding.name == "bypassed"]


def test_unknown_source_leaves_the_rail_open_with_its_reason() -> None:
    rails = find(
        part("J1", "Jack", {"1 Pin_1": "DC_IN", "2 Pin_2": "GND"}),
        part("D1", "SS14", {"1 K": "VMAIN", "2 A": "DC_IN"}),
        *consumer("VMAIN"),
    )
    rail = rails.by_name["VMAIN"]
    assert rail.volts is None
    assert "DC_IN" in rail.why_open
    assert "J1" in rail.why_open


def test_usb_port_with_power_delivery_is_not_taken_as_5_v() -> None:
    port = part("J1", "USB-C", {"1 VBUS": "VBUS", "2 GND": "GND", "3 CC1": "CC1", "4 CC2": "CC2"})
    sink = part(
        "U5",
        "XPD",
        {"1 CC1 bidirectional": "CC1", "2 CC2 bidirectional": "CC2", "3 VDD power_in": "VBUS", "4 VSS power_in": "GND"},
        description="USB Power Delivery sink controller",
    )
    plain = find(port, *consumer("VBUS"))
    assert corners(plain, "VBUS") == (4.75, 5.0, 5.25)
    rails = find(port, sink, *consumer("VBUS"))
    assert corners(rails, "VBUS") is None
    assert "U5 can negotiate" in rails.by_name["VBUS"].why_open
    stated = Evidence("supply", Span(5.0, 9.0, 9.45), "V", "heatledger.toml [supplies] VBUS", Grade.STATED)
    rails = find(port, sink, *consumer("VBUS"), settings=Settings(supplies={"VBUS": stated}))
    assert corners(rails, "VBUS") == (5.0, 9.0, 9.45)


def bipolar(base: str, collector: str, emitter: str) -> Component:
    return part("Q1", "NPN", {"1 B": base, "2 C": collector, "3 E": emitter}, lib_id="Device:Q_NPN_BCE")


def test_transistor_on_a_zener_is_a_discrete_regulator() -> None:
    zener = part("D1", "BZX84C5V6", {"1 K": "BASE", "2 A": "GND"}, lib_id="Device:D_Zener")
    rails = find(
        part("J1", "DC", {"1 +": "+12V", "2 -": "GND"}),
        bipolar("BASE", "+12V", "VREG"),
        part("R1", "1k", "+12V BASE"),
        zener,
        *consumer("VREG"),
    )
    assert feeds(rails, "VREG") == [("Q1", "passage", "+12V")]
    # 5.6 V ±5 % less 0.5 to 0.9 V
    assert corners(rails, "VREG") == pytest.approx((4.42, 4.9, 5.38))
    assert rails.by_name["VREG"].volts.grade is Grade.PRESUMED  # type: ignore[union-attr]


def test_transistor_held_by_something_unknown_feeds_but_gives_no_voltage() -> None:
    rails = find(part("J1", "DC", {"1 +": "+12V", "2 -": "GND"}), bipolar("IO_U9", "+12V", "VREG"), *consumer("VREG"))
    assert feeds(rails, "VREG") == [("Q1", "passage", "+12V")]
    assert corners(rails, "VREG") is None
    assert "Q1" in rails.by_name["VREG"].why_open


def test_low_side_transistor_is_no_feed() -> None:
    rails = find(part("J1", "DC", {"1 +": "+12V", "2 -": "GND"}), bipolar("IO_U9", "LOADX", "GND"), *consumer("+12V"))
    assert not [feed for rail in rails.rails for feed in rail.feeds if feed.ref == "Q1"]


def test_stated_supply_is_a_feed_of_its_own() -> None:
    rails = find(*consumer("VRAW"), settings=Settings(supplies={"VRAW": figure(7.0)}))
    assert feeds(rails, "VRAW") == [("", "supply", None)]
    assert corners(rails, "VRAW") == (7.0, 7.0, 7.0)


def test_recognised_diode_on_a_negative_rail_feeds_from_its_cathode() -> None:
    diode = part("D1", "SS14", {"1 OUT": "Net-(J1-1)", "2 IN": "-12V"}, lib_id=SCHOTTKY)
    rails = find(
        part("J1", "Conn", {"1 Pin_1": "Net-(J1-1)", "2 Pin_2": "GND"}),
        diode,
        *consumer("-12V"),
        parts=(recognised(diode, Topology.SERIES_DIODE, figures={"forward_drop": figure(Span(0.3, 0.35, 0.4))}),),
        settings=Settings(supplies={"Net-(J1-1)": figure(-12.0)}),
    )
    assert feeds(rails, "-12V") == [("D1", "passage", "Net-(J1-1)")]
    assert corners(rails, "-12V") == pytest.approx((-11.7, -11.65, -11.6))


def test_unrecognised_switch_chip_feeds_by_its_own_description() -> None:
    chip = part(
        "U15",
        "XPD3",
        {"1 EN input": "VUSB", "2 GND power_in": "GND", "3 IN power_in": "VUSB", "4 OUT passive": "+5V"},
        description="Current Limit Switch for USB host port",
    )
    rails = find(part("J1", "USB", {"1 VBUS": "VUSB", "2 G": "GND"}), chip, *consumer("+5V"))
    assert feeds(rails, "+5V") == [("U15", "passage", "VUSB")]
    assert corners(rails, "+5V") == pytest.approx((4.55, 4.95, 5.25))
