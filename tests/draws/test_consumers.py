"""Which parts need a current on which rail."""

from __future__ import annotations

import pytest
from draws_kit import chip, loads, names, one_regulator, part

from analyzer.quantity import Span


class TestWhoIsAConsumer:
    def kind(self, *components):
        found = loads(*one_regulator(*components))
        return [g.ref for g in found.by_rail["+3V3"].gaps if g.ref != "U1"], [g.ref for g in found.possible]

    def test_power_pin_of_any_part_but_a_regulator(self):
        addressable = part(
            "D1", [("1", "VDD", "power_in", "+3V3"), ("2", "GND", "power_in", "GND")], lib="LED:Addressable"
        )
        assert self.kind(chip("U2", "+3V3"), chip("Y1", "+3V3"), addressable)[0] == ["D1", "U2", "Y1"]

    def test_one_gap_for_each_rail_not_for_each_pin(self):
        found = loads(*one_regulator(chip("U2", "+3V3", "+3V3", "+3V3", "+5V")))
        assert [(g.ref, g.rail) for g in found.gaps if g.ref == "U2"] == [("U2", "+5V"), ("U2", "+3V3")]

    @pytest.mark.parametrize("name", ["VCC", "VDDIO", "AVDD", "V+", "~{VCC}", "VBAT", "3V3"])
    def test_supply_by_name_where_a_chip_has_no_power_pin(self, name):
        assert self.kind(part("U2", [("1", name, "passive", "+3V3"), ("2", "GND", "passive", "GND")], lib="x:y"))[
            0
        ] == ["U2"]

    @pytest.mark.parametrize("name", ["VREF+", "VCAP_1", "VLX", "VLCD"])
    def test_names_that_draw_nothing_to_speak_of(self, name):
        u2 = part("U2", [("1", name, "power_in", "+3V3"), ("2", "GND", "power_in", "GND")], lib="x:y")
        assert self.kind(u2, chip("U3", "+3V3"))[0] == ["U3"]

    def test_passives_protection_and_crystals_are_none(self):
        assert self.kind(
            part("C1", ["+3V3", "GND"], "100n"),
            part("D1", ["+3V3", "GND"], "SMAJ3.3A"),
            part("TP1", ["+3V3"]),
            part("Y1", ["XIN", "XOUT"], "8MHz"),
            chip("U3", "+3V3"),
        ) == (["U3"], [])

    def test_relay_and_motor_are_sure(self):
        relay = part("K1", ["+3V3", "Net-(K1-A2)"])
        switch = part("Q1", ["GATE", "GND", "Net-(K1-A2)"])
        assert self.kind(relay, switch, part("M1", ["+3V3", "GND"]))[0] == ["K1", "M1"]

    def test_connector_with_signals_is_possible_and_told(self):
        j1 = part("J1", ["+3V3", "GND", "SWDIO"], lib="Connector:Conn_01x03")
        u2 = part(
            "U2",
            [
                ("1", "VDD", "power_in", "+3V3"),
                ("2", "PA13", "bidirectional", "SWDIO"),
                ("3", "GND", "power_in", "GND"),
            ],
            lib="x:y",
            fields={"I_load": "1 mA"},
        )
        found = loads(*one_regulator(j1, u2))
        assert [(g.ref, g.rail) for g in found.possible] == [("J1", "+3V3")]
        assert names(found) == ["possible-loads"]
        assert found.findings[0].message == "J1 on +3V3: counted as taking none"
        assert found.by_rail["+3V3"].total == Span.exact(0.001)

    def test_transistor_whose_gate_alone_is_on_the_rail_takes_nothing(self):
        pins = [("1", "G", "input", "+3V3"), ("2", "S", "passive", "A"), ("3", "D", "passive", "B")]
        assert self.kind(part("Q1", pins), chip("U2", "+3V3")) == (["U2"], [])
        pins = [("1", "G", "input", "A"), ("2", "S", "passive", "+3V3"), ("3", "D", "passive", "B")]
        assert self.kind(part("Q1", pins), chip("U2", "+3V3")) == (["U2"], ["Q1"])

    def test_connector_with_nothing_but_power_is_sure(self):
        assert self.kind(part("J1", ["+3V3", "GND"], lib="Connector:Conn_01x02"), chip("U2", "+3V3"))[0] == ["J1", "U2"]

    def test_connector_with_several_pins_on_a_rail_is_sure(self):
        pins = ["+3V3", "+3V3", "SIG", "GND"]
        sig = part("U3", [("1", "IO", "bidirectional", "SIG"), ("2", "VDD", "power_in", "+3V3")], lib="x:y")
        assert self.kind(part("J1", pins, lib="Connector:Conn_02x02"), sig)[0] == ["J1", "U3"]

    def test_fuse_with_power_pins_is_no_consumer(self):
        f1 = part("F1", [("1", "", "power_in", "+3V3"), ("2", "", "power_out", "OUT")], "1A", "x:FUSE")
        assert self.kind(f1, chip("U2", "+3V3")) == (["U2"], [])

    def test_usb_a_socket_supplies_what_is_plugged_in(self):
        j1 = part("J1", ["+3V3", "D+", "D-", "GND"], lib="Connector:USB_A")
        u2 = part(
            "U2",
            [("1", "VDD", "power_in", "+3V3"), ("2", "DP", "bidirectional", "D+"), ("3", "DM", "bidirectional", "D-")],
            lib="x:y",
        )
        assert self.kind(j1, u2)[0] == ["J1", "U2"]

    def test_connector_on_a_rail_from_outside_is_the_source(self):
        board, known = one_regulator(part("J1", ["+5V", "GND"], lib="Connector:Barrel_Jack"), chip("U2", "+3V3"))
        found = loads(board, known)
        assert [gap.ref for gap in found.by_rail["+5V"].gaps] == ["U1"]

    def test_supply_pin_that_no_rail_reaches(self):
        found = loads(*one_regulator(chip("U2", "VCORE")))
        assert names(found) == ["supply-pin-unfed"]
        assert found.findings[0].message == "VCORE feeds U2 pin 1 (VDD1), but no rail reaches it"
