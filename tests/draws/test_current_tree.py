"""Rails summed from the leaves up, and what stays unknown."""

from __future__ import annotations

import pytest
from draws_kit import chip, circuit, loads, names, one_regulator, part, rails, stated, vreg, wire

from analyzer.quantity import Span
from analyzer.rail import Feed, Rail, Rails, Wiring
from analyzer.rule import Topology
from analyzer.settings import Settings


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
