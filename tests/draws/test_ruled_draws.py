"""Supply currents from load rules."""

from __future__ import annotations

from draws_kit import chip, evidence, loads, names, one_regulator, part

from analyzer.quantity import Span
from analyzer.recognise import load_rulebook
from analyzer.rule import LoadRule, Pattern, Rulebook


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
