"""Currents stated in fields and settings: whose they are, on which rail, which of two wins."""

from __future__ import annotations

from dataclasses import replace

import pytest
from draws_kit import chip, circuit, evidence, linear, loads, names, one_regulator, part, rails, stated, vreg, wire

from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.settings import Settings


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


class TestLostStatements:
    """What cannot be used stays a gap where its part is known, and carries no identity where it is not."""

    def test_unreadable_field_of_a_connector_is_a_gap_though_connectors_need_none(self):
        jack = part(
            "J2", [("1", "Pin_1", "passive", "+3V3"), ("2", "Pin_2", "passive", "SIG")], fields={"I_load": "1 a"}
        )
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "20 mA"}), jack)
        found = loads(board, known)
        assert found.by_rail["+3V3"].total is None
        (lost,) = found.by_rail["+3V3"].gaps
        assert (lost.ref, lost.why) == ("J2", "its stated current cannot be used (draw-not-understood)")
        assert next(one for one in found.findings if one.name == "draw-not-understood").key == "/J2"

    def test_where_every_rail_of_the_part_has_its_current_nobody_knows_where_it_belongs(self):
        fields = {"I_load@+3V3": "20 mA", "I_load@+5V": "5 mA", "I_load": "900 mA"}
        found = loads(*one_regulator(chip("U2", "+3V3", "+5V", fields=fields)))
        (lost,) = found.findings
        assert (lost.name, lost.key) == ("draw-without-rail", "")

    def test_power_on_a_rail_of_unknown_voltage_without_a_part(self):
        board, known = one_regulator(volts=None)
        found = loads(board, known, Settings(draws=(stated("", watts=0.3, rail="+3V3", source="toml"),)))
        gaps = {gap.ref: gap.why for gap in found.by_rail["+3V3"].gaps}
        assert gaps["@+3V3"] == "its stated current cannot be used (draw-power-without-voltage)"


class TestPulsesTogether:
    def test_two_nets_of_one_rail_peak_together(self):
        u1 = vreg("U1", "+5V", "+3V3")
        fields = {"I_load@+3V3": "2 A for 5 ms every 100 ms", "I_load@VDDA": "500 mA"}
        u2 = chip("U2", "+3V3", "VDDA", fields=fields)
        known = rails({"+5V": 5, "+3V3": 3.3}, [wire(u1, "+5V", "+3V3")], {"+3V3": ("+3V3", "VDDA")})
        (draw,) = loads(circuit(u1, u2), known).by_rail["+3V3"].draws
        assert draw.amps.span.nominal == pytest.approx(0.6)  # 2 A · 5 % and 0.5 A
        assert draw.pulse == Pulse(Span.exact(2.5), 0.005, 0.1, Span.exact(0.5))

    def test_of_a_pulse_and_a_steady_current_that_contradict_the_peak_counts_as_steady(self):
        board, known = one_regulator(chip("U2", "+3V3"))
        pulsed = replace(stated("U2", 0.1, "+3V3"), pulse=Pulse(Span.exact(2.0), 0.005, 0.1))
        for pair in ((stated("U2", 0.2), pulsed), (pulsed, stated("U2", 0.2))):
            found = loads(board, known, Settings(draws=pair))
            (draw,) = found.by_rail["+3V3"].draws
            assert (draw.amps.span, draw.pulse) == (Span.exact(2.0), None)

    def test_a_peak_that_the_part_above_cannot_carry_leaves_the_rail_above_open(self):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "2 A for 5 ms every 100 ms"}))

        def takes(_wiring, amps):
            return None if amps.high > 1 else evidence(amps)

        found = loads(board, known, takes=takes)
        assert found.by_rail["+3V3"].total.nominal == pytest.approx(0.1)
        assert found.by_rail["+5V"].total is None
        assert found.by_rail["+5V"].gaps[0].why == (
            "load of U1 not known: what it takes while +3V3 is pulsed cannot be computed"
        )
