"""The draws stage as a whole, on circuits put together by hand."""

from __future__ import annotations

from dataclasses import replace

import pytest
from draws_kit import chip, circuit, evidence, linear, loads, part, rails, vreg, wire

from analyzer.circuit import Note, Place
from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.rail import Feed, Rail, Rails, Wiring
from analyzer.recognise import load_rulebook
from analyzer.rule import LoadRule, Pattern, Rulebook, Topology
from analyzer.settings import Settings, StatedDraw


def names(found):
    return [finding.name for finding in found.findings]


def stated(ref, amps=None, rail="", watts=None, source="heatledger.toml [draws]"):
    def known(value, unit):
        return None if value is None else replace(evidence(value, unit), source=source)

    return StatedDraw(ref, rail, known(amps, "A"), known(watts, "W"))


def one_regulator(*more, volts=3.3, **figures):
    """U1 makes +3V3 from +5V; further parts hang on the rails."""
    u1 = vreg("U1", "+5V", "+3V3")
    return circuit(u1, *more), rails({"+5V": 5.0, "+3V3": volts}, [wire(u1, "+5V", "+3V3", **figures)])


class TestStated:
    def test_field_with_typical_and_maximum(self):
        found = loads(*one_regulator(chip("U2", "+3V3", fields={"I_load": "100/150 mA"})))
        assert found.by_rail["+3V3"].total == Span(0.1, 0.1, 0.15)
        (draw,) = found.by_rail["+3V3"].draws
        assert (draw.ref, draw.kind) == ("U2", "stated")
        assert draw.amps.source == "board.kicad_sch sheet / at (0, 0) mm, U2 field I_load"

    def test_field_per_rail(self):
        u2 = chip("U2", "+3V3", "+5V", fields={"I_load@+3V3": "20 mA", "I_load@+5V": "5 mA"})
        found = loads(*one_regulator(u2))
        assert found.by_rail["+3V3"].total == Span.exact(0.02)
        assert found.by_rail["+5V"].total == Span.exact(0.025)  # its own 5 mA, and 20 mA through U1

    def test_field_without_rail_on_two_rails_is_a_finding_and_both_stay_gaps(self):
        found = loads(*one_regulator(chip("U2", "+3V3", "+5V", fields={"I_load": "20 mA"})))
        assert names(found) == ["draw-without-rail"]
        assert {(gap.ref, gap.rail) for gap in found.gaps} >= {("U2", "+3V3"), ("U2", "+5V")}

    @pytest.mark.parametrize("name", ["Current", "IMax", "Iload_rating", "I load max", "Rating"])
    def test_ratings_are_no_loads(self, name):
        found = loads(*one_regulator(chip("U2", "+3V3", fields={name: "1 A"})))
        assert [gap.ref for gap in found.by_rail["+3V3"].gaps] == ["U2"]
        assert found.by_rail["+3V3"].draws == ()

    def test_malformed_field_is_a_finding_and_a_gap(self):
        found = loads(*one_regulator(chip("U2", "+3V3", fields={"I_load": "120 ma"})))
        assert names(found) == ["draw-not-understood"]
        assert found.findings[0].message == "U2 field I_load: '120 ma': 'ma' is not a unit; capitals matter: mA"
        assert "sheet /" in found.findings[0].where
        assert [gap.ref for gap in found.by_rail["+3V3"].gaps] == ["U2"]

    def test_negative_field(self):
        found = loads(*one_regulator(chip("U2", "+3V3", fields={"I_load": "-20 mA"})))
        assert names(found) == ["draw-negative"]
        assert found.by_rail["+3V3"].total is None

    @pytest.mark.parametrize("blank", ["", "~", " "])
    def test_blank_field_of_a_template_is_a_plain_gap(self, blank):
        found = loads(*one_regulator(chip("U2", "+3V3", fields={"I_load": blank})))
        assert names(found) == []
        assert found.by_rail["+3V3"].total is None

    def test_power_becomes_current_at_the_corners_of_the_rail(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "0.66 W"}), volts=Span(3.0, 3.3, 3.6))
        assert loads(board, known).by_rail["+3V3"].total.corners == pytest.approx((0.66 / 3.6, 0.2, 0.22))

    def test_power_on_a_rail_of_unknown_voltage(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "0.66 W"}), volts=None)
        found = loads(board, known)
        assert names(found) == ["draw-power-without-voltage"]
        assert found.by_rail["+3V3"].total is None

    def test_duty_counts_with_its_average(self):
        found = loads(*one_regulator(chip("U2", "+3V3", fields={"I_load": "2 A for 5 ms every 100 ms"})))
        (draw,) = found.by_rail["+3V3"].draws
        assert draw.pulse == Pulse(Span.exact(2.0), 0.005, 0.1)
        assert found.by_rail["+3V3"].total.nominal == pytest.approx(0.1)

    def test_pulse_shows_on_the_rail_above(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "2 A for 5 ms every 100 ms else 10 mA"}),
            chip("U3", "+3V3", fields={"I_load": "30 mA"}),
        )
        (draw,) = loads(board, known, takes=linear(0.001)).by_rail["+5V"].draws
        assert (draw.pulse.on_seconds, draw.pulse.period_seconds) == (0.005, 0.1)
        assert draw.pulse.peak.nominal == pytest.approx(2.031)
        assert draw.pulse.rest.nominal == pytest.approx(0.041)

    def test_settings_beat_the_field_and_the_difference_is_told(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "100 mA"}))
        found = loads(board, known, Settings(draws=(stated("U2", 0.08),)))
        assert found.by_rail["+3V3"].total == Span.exact(0.08)
        assert names(found) == ["draw-stated-twice"]
        assert "80.0 mA" in found.findings[0].message
        assert "100 mA" in found.findings[0].message

    def test_the_same_current_twice_is_no_finding(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "100 mA"}))
        assert names(loads(board, known, Settings(draws=(stated("U2", 0.1),)))) == []

    def test_two_statements_in_the_settings_take_the_greater(self):
        board, known = one_regulator(chip("U2", "+3V3"))
        found = loads(board, known, Settings(draws=(stated("U2", 0.1), stated("U2", 0.08, "+3V3"))))
        assert found.by_rail["+3V3"].total == Span.exact(0.1)
        assert names(found) == ["draw-stated-twice"]

    def test_two_nets_of_one_rail_add_up(self):
        u1 = vreg("U1", "+5V", "+3V3")
        u2 = chip("U2", "+3V3", "VDDA")
        known = rails({"+5V": 5, "+3V3": 3.3}, [wire(u1, "+5V", "+3V3")], {"+3V3": ("+3V3", "VDDA")})
        found = loads(circuit(u1, u2), known, Settings(draws=(stated("U2", 0.1, "+3V3"), stated("U2", 0.02, "VDDA"))))
        assert found.by_rail["+3V3"].total.nominal == pytest.approx(0.12)

    def test_loads_outside_the_board_add_up(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "100 mA"}))
        outside = (stated("", 0.3, "+3V3", source="one"), stated("", watts=0.33, rail="+3V3", source="two"))
        found = loads(board, known, Settings(draws=outside))
        assert found.by_rail["+3V3"].total.nominal == pytest.approx(0.1 + 0.3 + 0.1)

    def test_unknown_part_rail_and_doubled_reference(self):
        twins = [chip("U2", "+3V3"), chip("U2", "+3V3")]
        board, known = one_regulator(*twins)
        draws = (stated("U9", 0.1), stated("", 0.1, "+9V"), stated("U2", 0.1), stated("", 0.1, "GND"))
        found = loads(board, known, Settings(draws=draws))
        assert names(found) == [
            "draw-for-unknown-part",
            "draw-on-unknown-rail",
            "draw-for-doubled-reference",
            "draw-on-unknown-rail",
        ]
        assert found.by_rail["+3V3"].draws == ()

    def test_draw_on_a_rail_the_part_is_not_on_is_counted_and_told(self):
        board, known = one_regulator(chip("U2", "+3V3"))
        found = loads(board, known, Settings(draws=(stated("U2", 0.1, "+5V"),)))
        assert "draw-off-its-rail" in names(found)
        assert [draw.ref for draw in found.by_rail["+5V"].draws] == ["U2"]
        assert [gap.ref for gap in found.by_rail["+3V3"].gaps] == ["U2"]

    def test_draw_on_a_regulator(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "1 mA"}))
        assert names(loads(board, known, Settings(draws=(stated("U1", 0.1),)))) == ["draw-on-regulator"]

    def test_rail_by_the_last_part_of_its_name(self):
        u1 = vreg("U1", "+5V", "/psu/3V3")
        board = circuit(u1, chip("U2", "/psu/3V3", fields={"I_load@3V3": "20 mA"}))
        found = loads(board, rails({"+5V": 5, "/psu/3V3": 3.3}, [wire(u1, "+5V", "/psu/3V3")]))
        assert found.by_rail["/psu/3V3"].total == Span.exact(0.02)

    def test_unfitted_parts_draw_nothing(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "20 mA"}),
            chip("U3", "+3V3", fields={"I_load": "1 A"}, fitted=False),
            chip("U4", "+3V3", fitted=False),
        )
        assert loads(board, known).by_rail["+3V3"].total == Span.exact(0.02)


class TestUnknownNeverBecomesZero:
    def test_a_gap_below_makes_every_rail_above_incomplete(self):
        u1, u2 = vreg("U1", "VIN", "+5V"), vreg("U2", "+5V", "+3V3")
        board = circuit(u1, u2, chip("U3", "+3V3", fields={"I_load": "40 mA"}), chip("U4", "+3V3"))
        found = loads(
            board, rails({"VIN": 12, "+5V": 5, "+3V3": 3.3}, [wire(u1, "VIN", "+5V"), wire(u2, "+5V", "+3V3")])
        )
        assert all(found.by_rail[rail].total is None for rail in ("VIN", "+5V", "+3V3"))
        assert all(found.by_rail[rail].known.nominal == pytest.approx(0.04) for rail in ("VIN", "+5V", "+3V3"))
        assert [(gap.ref, gap.why) for gap in found.by_rail["+5V"].gaps] == [
            ("U2", "load of U2 not known: +3V3 has gaps")
        ]
        assert found.input_amps == {}

    def test_a_channel_whose_input_current_cannot_be_computed(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "40 mA"}))
        found = loads(board, known, takes=lambda wiring, load: None)
        assert found.by_rail["+3V3"].total == Span.exact(0.04)
        assert found.by_rail["+5V"].total is None
        assert found.input_amps == {}

    def test_an_output_that_leads_to_no_rail(self):
        u1 = vreg("U1", "+5V", "Net-(U1-VOUT)")
        found = loads(circuit(u1), rails({"+5V": 5}, [wire(u1, "+5V", None)]))
        assert found.by_rail["+5V"].total is None

    def test_a_rail_with_nothing_on_it(self):
        found = loads(*one_regulator())
        assert found.by_rail["+3V3"].total is None
        assert [(g.ref, g.why) for g in found.by_rail["+3V3"].gaps] == [
            ("U1", "nothing that draws from this rail was found")
        ]

    def test_a_rail_with_only_a_divider_and_a_connector(self):
        board, known = one_regulator(
            part("R1", ["+3V3", "Net-(R1-Pad2)"], "10k"),
            part("R2", ["Net-(R1-Pad2)", "GND"], "10k"),
            part("J1", [("1", "P1", "passive", "+3V3"), ("2", "P2", "passive", "SIG"), ("3", "P3", "passive", "GND")]),
            part("U3", [("1", "IN", "input", "SIG"), ("2", "GND", "power_in", "GND")]),
        )
        found = loads(board, known)
        assert [gap.ref for gap in found.by_rail["+3V3"].gaps] == ["J1"]
        assert found.by_rail["+3V3"].known.nominal == pytest.approx(3.3 / 20e3)

    def test_a_rail_for_a_regulator_s_own_circuit_is_no_gap(self):
        u1 = part(
            "U1",
            [("1", "VIN", "power_in", "+5V"), ("2", "VOUT", "power_out", "+3V3"), ("3", "VDD", "power_in", "VCC1")],
        )
        wiring = wire(u1, "+5V", "+3V3")
        known = rails({"+5V": 5, "+3V3": 3.3, "VCC1": 5})
        feeds = {"VCC1": (Feed("R1", "passage", "", "+5V"),), "+3V3": (Feed("U1", "regulator", "", "+5V"),)}
        fed = tuple(Rail(r.name, r.nets, r.volts, feeds.get(r.name, r.feeds), (), r.is_ground) for r in known.rails)
        board = circuit(u1, part("R1", ["+5V", "VCC1"], "10"), chip("U2", "+3V3", fields={"I_load": "1 mA"}))
        found = loads(board, Rails(fed, (wiring,), of_net=known.of_net))
        assert found.by_rail["+5V"].total == Span.exact(0.001)

    def test_zero_may_be_stated(self):
        board, known = one_regulator()
        found = loads(board, known, Settings(draws=(stated("", 0.0, "+3V3"),)))
        assert found.by_rail["+3V3"].total == Span.exact(0.0)

    def test_a_resistor_whose_value_is_not_understood(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "1 mA"}), part("R1", ["+3V3", "GND"], "TBD"))
        assert [(gap.ref, gap.why) for gap in loads(board, known).by_rail["+3V3"].gaps] == [
            ("R1", "resistance 'TBD' or its pins are not understood")
        ]

    def test_a_resistor_on_a_rail_of_unknown_voltage(self):
        board, known = one_regulator(part("R1", ["+3V3", "GND"], "330"), volts=None)
        found = loads(board, known)
        assert found.by_rail["+3V3"].total is None
        assert "voltage of +3V3 not known" in found.by_rail["+3V3"].gaps[0].why

    def test_a_part_whose_input_rail_was_not_found(self):
        u1 = vreg("U1", "Net-(FB1-Pad2)", "+3V3")
        board = circuit(
            u1,
            part("FB1", ["+5V", "Net-(FB1-Pad2)"], "600R"),
            chip("U2", "+3V3", fields={"I_load": "1 mA"}),
            chip("U3", "+5V", fields={"I_load": "1 mA"}),
        )
        found = loads(board, rails({"+5V": 5, "+3V3": 3.3}, [wire(u1, None, "+3V3")]))
        assert found.by_rail["+3V3"].total == Span.exact(0.001)
        assert found.by_rail["+5V"].total is None


class TestTree:
    def test_two_feeds_each_carry_the_whole_load(self):
        a, b = vreg("U1", "VA", "+5V"), vreg("U2", "VB", "+5V")
        board = circuit(a, b, chip("U3", "+5V", fields={"I_load": "300 mA"}))
        found = loads(board, rails({"VA": 12, "VB": 9, "+5V": 5}, [wire(a, "VA", "+5V"), wire(b, "VB", "+5V")]))
        assert found.by_rail["VA"].total == found.by_rail["VB"].total == Span.exact(0.3)

    def test_shares(self):
        a, b = vreg("U1", "VA", "+5V"), vreg("U2", "VB", "+5V")
        known = rails({"VA": 12, "VB": 9, "+5V": 5}, [wire(a, "VA", "+5V"), wire(b, "VB", "+5V")])
        five = known.by_name["+5V"]
        feeds = (Feed("U1", "regulator", "", "VA", share=0.7), Feed("U2", "regulator", "", "VB", share=0.3))
        shared = tuple(Rail("+5V", five.nets, five.volts, feeds) if rail is five else rail for rail in known.rails)
        board = circuit(a, b, chip("U3", "+5V", fields={"I_load": "300 mA"}))
        found = loads(board, Rails(shared, known.wirings, of_net=known.of_net))
        assert found.by_rail["VA"].total.nominal == pytest.approx(0.21)
        assert found.by_rail["VB"].total.nominal == pytest.approx(0.09)

    def test_circle_of_feeds(self):
        a, b = vreg("U1", "VA", "VB"), vreg("U2", "VB", "VA")
        board = circuit(a, b, chip("U3", "VB", fields={"I_load": "10 mA"}))
        found = loads(board, rails({"VA": 5, "VB": 5}, [wire(a, "VA", "VB"), wire(b, "VB", "VA")]))
        assert names(found) == ["circular-load"]
        assert found.findings[0].message == "VA → VB → VA, through U1, U2"
        assert found.by_rail["VA"].total is None
        assert found.by_rail["VB"].total is None
        assert found.by_rail["VB"].known == Span.exact(0.01)

    def test_channel_that_is_off_takes_nothing(self):
        u1 = vreg("U1", "+5V", "+3V3")
        on = wire(u1, "+5V", "+3V3")
        off = Wiring(on.part, on.channel, "+5V", "+5V", "+3V3", "+3V3", "GND", is_off=True)
        board = circuit(u1, chip("U2", "+5V", fields={"I_load": "10 mA"}))
        assert loads(board, rails({"+5V": 5, "+3V3": 3.3}, [off])).by_rail["+5V"].total == Span.exact(0.01)

    def test_part_behind_a_filter_resistor_is_a_gap_on_the_rail_above(self):
        board, known = one_regulator(
            part("R1", ["+3V3", "Net-(U2-VDDA)"], "10"),
            part("C1", ["Net-(U2-VDDA)", "GND"], "1u"),
            chip("U2", "Net-(U2-VDDA)"),
        )
        found = loads(board, known)
        assert [(g.ref, g.why) for g in found.by_rail["+3V3"].gaps] == [("U2", "no current stated (fed through R1)")]
        assert found.by_rail["+3V3"].draws == ()

    def test_rail_behind_a_filter_resistor(self):
        u1 = vreg("U1", "+5V", "+3V3")
        known = rails({"+5V": 5, "+3V3": Span(3.2, 3.3, 3.4), "VDDA": Span(3.1, 3.3, 3.5)}, [wire(u1, "+5V", "+3V3")])
        unfed = tuple(Rail("VDDA", ("VDDA",), r.volts) if r.name == "VDDA" else r for r in known.rails)
        board = circuit(u1, part("R1", ["+3V3", "VDDA"], "10"), chip("U2", "VDDA", fields={"I_load": "7 mA"}))
        found = loads(board, Rails(unfed, known.wirings, of_net=known.of_net))
        assert found.by_rail["VDDA"].total == Span.exact(0.007)
        assert found.by_rail["+3V3"].total == Span.exact(0.007)

    def test_load_below_the_minimum(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "1..50 mA"}), minimum_load=0.005)
        found = loads(board, known)
        assert names(found) == ["load-below-minimum"]
        assert found.findings[0].message == "U1 needs 5.00 mA on +3V3, the load may be only 1.00 mA"


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


class TestComputed:
    def current(self, *components, ref="R1", volts=3.3, rail="+3V3", settings=None):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "0 mA"}), *components, volts=volts)
        draws = loads(board, known, settings).by_rail[rail].draws
        return {draw.ref: draw.amps.span for draw in draws}.get(ref)

    def test_resistor_to_ground_with_corners(self):
        span = self.current(part("R1", ["+3V3", "GND"], "33R/5%/R0805"), volts=Span(3.2, 3.3, 3.4))
        assert span.corners == pytest.approx((3.2 / 34.65, 0.1, 3.4 / 31.35))

    def test_default_tolerance_is_an_assumption_on_record(self):
        board, known = one_regulator(part("R1", ["+3V3", "GND"], "33"))
        (draw,) = loads(board, known).by_rail["+3V3"].draws
        assert draw.amps.span.high == pytest.approx(3.3 / (33 * 0.99))
        assert draw.amps.weakest == "presumed"

    def test_divider_with_parallel_and_unfitted_resistors(self):
        span = self.current(
            part("R1", ["+3V3", "FB"], "20k/0.1%"),
            part("R2", ["+3V3", "FB"], "20k/0.1%", fitted=False),
            part("R3", ["FB", "Net-(R3-Pad2)"], "10k/0.1%"),
            part("R4", ["Net-(R3-Pad2)", "GND"], "10k/0.1%"),
            part("R5", ["Net-(R3-Pad2)", "GND"], "10k/0.1%"),
            part("C1", ["+3V3", "FB"], "22p"),
        )
        assert span.nominal == pytest.approx(3.3 / 35e3)

    def test_tap_of_a_divider_at_an_input_carries_nothing(self):
        u3 = part("U3", [("1", "IN", "input", "TAP"), ("2", "GND", "power_in", "GND")])
        span = self.current(part("R1", ["+3V3", "TAP"], "10k"), part("R2", ["TAP", "GND"], "10k"), u3)
        assert span.nominal == pytest.approx(3.3 / 20e3)

    def test_pull_up_from_rest_to_its_worst_state(self):
        u3 = part("U3", [("1", "SDA", "bidirectional", "SDA"), ("2", "GND", "power_in", "GND")])
        span = self.current(part("R1", ["+3V3", "SDA"], "2k2/1%"), u3)
        assert span.corners == pytest.approx((0.0, 0.0, 3.3 / 2178))

    def test_pull_up_at_a_negative_rail_s_chip(self):
        u3 = part(
            "U3", [("1", "OUT", "output", "SIG"), ("2", "V-", "power_in", "-5V"), ("3", "V+", "power_in", "+3V3")]
        )
        u1 = vreg("U1", "+5V", "+3V3")
        board = circuit(u1, u3, part("R1", ["+3V3", "SIG"], "1k/1%"))
        known = rails({"+5V": 5, "+3V3": 3.3, "-5V": -5}, [wire(u1, "+5V", "+3V3")])
        span = {draw.ref: draw.amps.span for draw in loads(board, known).by_rail["+3V3"].draws}["R1"]
        assert span.high == pytest.approx(8.3 / 990)

    def test_between_rails_loads_one_and_never_relieves_the_other_in_the_worst_case(self):
        up = self.current(part("R1", ["+5V", "+3V3"], "100/1%"), rail="+5V")
        assert up.corners == pytest.approx((1.7 / 101, 0.017, 1.7 / 99))
        down = self.current(part("R1", ["+5V", "+3V3"], "100/1%"))
        assert down.nominal == pytest.approx(-0.017)
        assert down.high == 0

    def test_on_a_negative_rail_the_current_counts_positive(self):
        board = circuit(chip("U2", "-12V", fields={"I_load": "5 mA"}), part("R1", ["-12V", "GND"], "1k2/1%"))
        found = loads(board, rails({"-12V": -12}))
        assert found.by_rail["-12V"].total.nominal == pytest.approx(0.015)

    def test_supply_through_a_small_resistor_to_a_connector_is_a_gap_not_a_short(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}),
            part("R1", ["+3V3", "OUT"], "10"),
            part("J1", ["OUT", "GND"], lib="Connector:Conn_01x02"),
        )
        found = loads(board, known)
        assert [(gap.ref, gap.why) for gap in found.by_rail["+3V3"].gaps] == [
            ("R1", "current behind this resistor not stated")
        ]

    def test_heater_switched_by_a_transistor(self):
        span = self.current(part("R1", ["+3V3", "HEAT"], "10/1%"), part("Q1", ["GATE", "GND", "HEAT"]))
        assert span.high == pytest.approx(3.3 / 9.9)

    def test_a_stated_current_replaces_the_computed_one(self):
        board, known = one_regulator(part("R1", ["+3V3", "GND"], "33", fields={"I_load": "90 mA"}))
        assert loads(board, known).by_rail["+3V3"].total == Span.exact(0.09)


class TestLeds:
    def current(self, *components, volts=5.0, ref="D1"):
        u1 = vreg("U1", "VIN", "+5V")
        known = rails({"VIN": 12, "+5V": volts, "+3V3": 3.3}, [wire(u1, "VIN", "+5V")])
        board = circuit(u1, chip("U2", "+5V", fields={"I_load": "0 mA"}), *components)
        found = loads(board, known)
        return {draw.ref: draw for draw in found.by_rail["+5V"].draws}.get(ref), found

    @staticmethod
    def led(ref, cathode, anode, value="RED"):
        return part(ref, [("1", "K", "passive", cathode), ("2", "A", "passive", anode)], value, "Device:LED")

    def test_string_to_ground(self):
        draw, found = self.current(part("R1", ["+5V", "X"], "300/1%"), self.led("D1", "GND", "X"))
        # red: 1.7 to 2.5 V, 2.0 V nominal
        assert draw.amps.span.corners == pytest.approx((2.5 / 303, 3.0 / 300, 3.3 / 297))
        assert draw.amps.weakest == "presumed"
        assert [d.ref for d in found.by_rail["+5V"].draws] == ["D1", "U2"]  # the resistor does not count again

    def test_resistor_below_the_led_and_two_in_series(self):
        draw, _ = self.current(self.led("D1", "A", "+5V"), self.led("D2", "B", "A"), part("R1", ["B", "GND"], "100/1%"))
        assert draw.amps.span.nominal == pytest.approx(1.0 / 100)

    def test_switched_by_a_chip(self):
        u3 = part("U3", [("1", "P0", "output", "DRV"), ("2", "GND", "power_in", "GND")])
        draw, _ = self.current(self.led("D1", "X", "+5V", "green"), part("R1", ["X", "DRV"], "1k/1%"), u3)
        assert draw.amps.span.low == 0
        assert draw.amps.span.nominal == pytest.approx((5 - 2.6) / 1000)

    def test_fed_by_a_chip_is_the_chip_s_current(self):
        u3 = part("U3", [("1", "P0", "output", "DRV"), ("2", "GND", "power_in", "GND")])
        draw, found = self.current(part("R1", ["DRV", "X"], "1k"), self.led("D1", "GND", "X"), u3)
        assert draw is None
        assert found.by_rail["+5V"].total == Span.exact(0.0)

    def test_without_a_resistor_the_current_is_unknown(self):
        u3 = part("U3", [("1", "LED0", "output", "DRV"), ("2", "GND", "power_in", "GND")])
        draw, found = self.current(self.led("D1", "DRV", "+5V"), u3)
        assert draw is None
        assert [(g.ref, g.why) for g in found.by_rail["+5V"].gaps] == [
            ("D1", "LED current set by its driver, not stated")
        ]

    def test_three_colours_behind_three_resistors(self):
        rgb = part(
            "D1",
            [
                ("1", "RK", "passive", "R"),
                ("2", "A", "passive", "+5V"),
                ("3", "GK", "passive", "G"),
                ("4", "BK", "passive", "B"),
            ],
            "RGB",
            "Device:LED_RGB",
        )
        resistors = [part(f"R{n}", [net, "GND"], "1k/1%") for n, net in enumerate("RGB", 1)]
        _, found = self.current(rgb, *resistors)
        assert found.by_rail["+5V"].total.nominal == pytest.approx((3.0 + 2.4 + 1.9) / 1000)

    def test_rail_too_low_for_the_led(self):
        draw, _ = self.current(part("R1", ["+5V", "X"], "300"), self.led("D1", "GND", "X", "blue"), volts=2.0)
        assert draw is None


class TestRuled:
    RULE = LoadRule(
        "blinker", "loads.toml blinker", True, (Pattern("BLK8*"),), (("VDD*", evidence(Span(0.01, 0.01, 0.02))),)
    )

    def test_supply_current_by_part_number(self):
        board, known = one_regulator(chip("U2", "+3V3", value="BLK88"))
        found = loads(board, known, rulebook=Rulebook((), (self.RULE,), (), ()))
        assert found.by_rail["+3V3"].total == Span(0.01, 0.01, 0.02)
        assert [draw.kind for draw in found.by_rail["+3V3"].draws] == ["ruled"]

    def test_part_number_field_beats_the_value(self):
        board, known = one_regulator(chip("U2", "+3V3", value="OTHER", fields={"MPN": "BLK88-X"}))
        assert loads(board, known, rulebook=Rulebook((), (self.RULE,), (), ())).by_rail["+3V3"].is_complete

    def test_stated_beats_ruled(self):
        board, known = one_regulator(chip("U2", "+3V3", value="BLK88", fields={"I_load": "3 mA"}))
        found = loads(board, known, rulebook=Rulebook((), (self.RULE,), (), ()))
        assert found.by_rail["+3V3"].total == Span.exact(0.003)

    def test_two_rules_of_equal_rank(self):
        other = LoadRule("also", "loads.toml also", True, (Pattern("BLK*"),), (("*", evidence(1.0)),))
        board, known = one_regulator(chip("U2", "+3V3", value="BLK88"))
        found = loads(board, known, rulebook=Rulebook((), (self.RULE, other), (), ()))
        assert names(found) == ["load-rules-conflict"]
        assert found.by_rail["+3V3"].total == Span.exact(1.0)

    def test_from_a_user_s_rule_file(self, tmp_path):
        file = tmp_path / "parts.toml"
        file.write_text(
            """
            [[load]]
            name = "dual supply thing"
            source = "BLK88 data sheet, table 5"
            match = [{ pattern = "BLK88*" }]
            supplies = { "VDD1" = "10/20 mA", "VDD2" = "1 mA" }
            """,
            "utf-8",
        )
        board, known = one_regulator(chip("U2", "+3V3", "+5V", value="BLK88-QFN"))
        found = loads(board, known, rulebook=load_rulebook([file]))
        assert found.by_rail["+3V3"].total == Span(0.01, 0.01, 0.02)
        assert [(d.ref, d.kind, d.amps.span.nominal) for d in found.by_rail["+5V"].draws][1] == ("U2", "ruled", 0.001)
        (draw,) = found.by_rail["+3V3"].draws
        assert "BLK88 data sheet, table 5" in draw.amps.source

    def test_rail_the_rule_does_not_cover_stays_a_gap(self):
        board, known = one_regulator(
            part("U2", [("1", "VDD", "power_in", "+3V3"), ("2", "AVCC", "power_in", "+5V")], "BLK88", "x:y")
        )
        found = loads(board, known, rulebook=Rulebook((), (self.RULE,), (), ()))
        assert [(gap.ref, gap.rail) for gap in found.gaps] == [("U2", "+5V")]


class TestNotes:
    @staticmethod
    def suggestions(text, x=10.0, sheet="/"):
        far = Place("board.kicad_sch", "/", 400.0, 400.0)
        u1 = vreg("U1", "+5V", "+3V3")
        board = circuit(
            u1,
            chip("U2", "+3V3", place=far),
            chip("U3", "+1V8", place=far),
            notes=[Note(text, Place("board.kicad_sch", sheet, x, 0.0))],
        )
        u4 = vreg("U4", "+5V", "+1V8")
        known = rails({"+5V": 5, "+3V3": 3.3, "+1V8": 1.8}, [wire(u1, "+5V", "+3V3"), wire(u4, "+5V", "+1V8")])
        return {gap.ref: gap.suggestions for gap in loads(board, known).gaps if gap.ref in ("U2", "U3")}

    def test_a_rail_named(self):
        place = "board.kicad_sch sheet / at (10, 0) mm"
        assert self.suggestions("Imax @ 1V8 = 209 mA") == {
            "U3": (f'for all of +1V8: "Imax @ 1V8 = 209 mA" ({place})',),
            "U2": (),
        }

    @pytest.mark.parametrize(
        "text", ["up to 200mA", "65-100mA", "~99 mA (150 mA max) = 168 mW", "10 mA (estimated)", "0.8W"]
    )
    def test_near_a_regulator(self, text):
        found = self.suggestions(text)
        assert found["U2"][0].startswith(f'for all of +3V3: "{text}"')
        assert found["U3"] == ()

    @pytest.mark.parametrize(
        "text", ["2 A -> B", "see page 3 A", "Amplifier 100", "500 mAh cell", "GPIO 5", "R12A = 4"]
    )
    def test_no_current(self, text):
        assert self.suggestions(text if text != "see page 3 A" else "page A 3")["U2"] == ()

    def test_too_far_or_on_another_sheet(self):
        assert self.suggestions("200 mA", x=150.0)["U2"] == ()
        assert self.suggestions("200 mA", sheet="/other/")["U2"] == ()

    def test_never_a_value(self):
        board, known = one_regulator(chip("U2", "+3V3"))
        noted = circuit(*board.components, notes=[Note("+3V3: 100 mA", Place("b", "/", 0.0, 0.0))])
        assert loads(noted, known).by_rail["+3V3"].total is None
        assert loads(noted, known).by_rail["+3V3"].known == Span.exact(0.0)


def test_an_unrelated_part_changes_nothing():
    board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "10 mA"}), part("R1", ["+3V3", "SIG"], "1k"))
    more = circuit(*board.components, part("R9", ["A", "B"], "1k"), part("U9", [("1", "X", "input", "A")], lib="x:y"))
    assert loads(board, known) == loads(more, known)


def test_names_of_nets_do_not_matter():
    def made(rail):
        u1 = vreg("U1", "+5V", rail)
        more = [
            chip("U2", rail, fields={"I_load": "10 mA"}),
            part("R1", [rail, "T"], "1k"),
            part("R2", ["T", "GND"], "1k"),
        ]
        found = loads(circuit(u1, *more), rails({"+5V": 5, rail: 3.3}, [wire(u1, "+5V", rail)]))
        return found.by_rail["+5V"].total, found.by_rail[rail].total

    assert made("+3V3") == made("/psu/AUX") == made("Net-(U1-VOUT)")


def test_order_of_parts_does_not_matter():
    board, known = one_regulator(
        chip("U2", "+3V3", fields={"I_load": "10 mA"}),
        chip("U10", "+3V3"),
        part("R1", ["+3V3", "GND"], "1k"),
        part("R2", ["+3V3", "SIG"], "1k"),
        part("J1", ["+3V3", "SIG", "GND"], lib="Connector:Conn_01x03"),
    )
    turned = circuit(*reversed(board.components))
    assert loads(board, known) == loads(turned, known)


def test_dropping_resistor_before_a_reference_that_no_rule_knows():
    u2 = part("U2", [("1", "K", "passive", "VREF"), ("2", "A", "passive", "GND")])
    known = rails({"+12V": 12, "VREF": 10})
    unfed = tuple(Rail("VREF", ("VREF",), r.volts) if r.name == "VREF" else r for r in known.rails)
    board = circuit(u2, part("R1", ["+12V", "VREF"], "1k/1%"), chip("U3", "VREF", fields={"I_load": "1 mA"}))
    found = loads(board, Rails(unfed, (), of_net=known.of_net))
    assert found.by_rail["+12V"].total.nominal == pytest.approx(0.002)
    assert found.by_rail["VREF"].total == Span.exact(0.001)


def test_shunt_regulator_s_resistor_is_counted_once():
    u2 = part("U2", [("1", "VOUT", "passive", "VREF"), ("2", "GND", "passive", "GND")])
    shunt = wire(u2, "+12V", "VREF", Topology.SHUNT)
    board = circuit(u2, part("R1", ["+12V", "VREF"], "1k/1%"), chip("U3", "VREF", fields={"I_load": "1 mA"}))
    found = loads(board, rails({"+12V": 12, "VREF": 10}, [shunt]))
    assert found.by_rail["+12V"].total.nominal == pytest.approx(0.002)
    assert found.by_rail["VREF"].total == Span.exact(0.001)


class TestDiscretePassages:
    @staticmethod
    def through(component, volts=4.6):
        """VBUS feeds SYS through one part, SYS feeds U2."""
        known = rails({"VBUS": 5.0, "SYS": volts})
        feed = Feed(component.ref, "passage", "", "VBUS")
        fed = tuple(Rail("SYS", ("SYS",), r.volts, (feed,)) if r.name == "SYS" else r for r in known.rails)
        board = circuit(component, chip("U2", "SYS", fields={"I_load": "250 mA"}))
        return loads(board, Rails(fed, (), of_net=known.of_net))

    def test_diode(self):
        found = self.through(part("D1", [("1", "K", "passive", "SYS"), ("2", "A", "passive", "VBUS")], "SS34"))
        assert found.by_rail["VBUS"].total == Span.exact(0.25)
        assert [(draw.ref, draw.kind) for draw in found.by_rail["VBUS"].draws] == [("D1", "regulator")]

    def test_transistor_is_no_possible_load_of_its_own(self):
        pins = [("1", "G", "passive", "GND"), ("2", "S", "passive", "SYS"), ("3", "D", "passive", "VBUS")]
        found = self.through(part("Q1", pins, "Q_PMOS_GSD"))
        assert found.by_rail["VBUS"].total == Span.exact(0.25)
        assert found.possible == ()

    def test_filter_resistor_is_not_solved_as_a_bleeder(self):
        found = self.through(part("R1", ["VBUS", "SYS"], "2R2"))
        assert found.by_rail["VBUS"].total == Span.exact(0.25)
        assert found.by_rail["SYS"].total == Span.exact(0.25)

    def test_every_input_of_a_multiplexer_carries_the_load(self):
        u1 = part(
            "U1",
            [("1", "VIN", "power_in", "VA"), ("2", "VIN", "power_in", "VB"), ("3", "VOUT", "power_out", "SYS")],
        )
        mux = wire(u1, "VA", "SYS", Topology.POWER_MUX)
        known = rails({"VA": 5, "VB": 5, "SYS": 5}, [mux])
        feeds = (Feed("U1", "passage", "", "VA"), Feed("U1", "passage", "", "VB"))
        fed = tuple(Rail("SYS", ("SYS",), r.volts, feeds) if r.name == "SYS" else r for r in known.rails)
        board = circuit(u1, chip("U2", "SYS", fields={"I_load": "250 mA"}))
        found = loads(board, Rails(fed, (mux,), of_net=known.of_net))
        assert found.by_rail["VA"].total == found.by_rail["VB"].total == Span.exact(0.25)


class TestArraysAndThermistors:
    def test_resistor_whose_value_says_not_fitted(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}),
            part("R1", ["+3V3", "GND"], "DNP"),
            part("R2", ["+3V3", "GND"], "NA(1k)"),
        )
        assert loads(board, known).by_rail["+3V3"].total == Span.exact(0.001)

    def test_resistor_array_pairs(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}),
            part(
                "RN1",
                [
                    (str(n), name, "passive", net)
                    for n, (name, net) in enumerate(
                        [("R1.1", "+3V3"), ("R2.1", "+3V3"), ("R2.2", "GND"), ("R1.2", "GND")], 1
                    )
                ],
                "1k 5%",
                "Device:R_Pack02",
            ),
        )
        refs = [draw.ref for draw in loads(board, known).by_rail["+3V3"].draws]
        assert refs == ["RN1", "RN1", "U2"]
        assert loads(board, known).by_rail["+3V3"].total.nominal == pytest.approx(0.001 + 2 * 0.0033)

    def test_thermistor_counts_hot(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "0 mA"}),
            part("TH1", ["+3V3", "GND"], "10k", "Device:Thermistor_NTC"),
        )
        total = loads(board, known).by_rail["+3V3"].total
        assert total.nominal == pytest.approx(3.3 / 10e3)
        assert total.high == pytest.approx(3.3 / 10e3 * 30)

    def test_potentiometer_across_a_rail(self):
        u3 = part("U3", [("1", "IN", "input", "WIPER"), ("2", "GND", "power_in", "GND")])
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "0 mA"}),
            part("RV1", ["+3V3", "WIPER", "GND"], "10k", "Device:R_Potentiometer"),
            u3,
        )
        total = loads(board, known).by_rail["+3V3"].total
        assert total.corners == pytest.approx((3.3 / 12e3, 3.3 / 10e3, 3.3 / 8e3))

    def test_array_whose_pins_do_not_pair_is_a_gap(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}), part("RN1", ["+3V3", "A", "B"], "10k", "Device:R_Network")
        )
        assert [gap.ref for gap in loads(board, known).by_rail["+3V3"].gaps] == ["RN1"]
