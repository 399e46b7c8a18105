"""Currents in notes: suggestions, never values."""

from __future__ import annotations

import pytest
from draws_kit import chip, circuit, loads, one_regulator, rails, vreg, wire

from analyzer.circuit import Note, Place
from analyzer.quantity import Span


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

    def test_a_part_named_by_its_reference_is_the_only_one_meant(self):
        # beside U1, from which a note without a name would be for all of +3V3
        text = "U3: up to 30 mA asleep"
        found = self.suggestions(text)
        assert found == {"U2": (), "U3": (f'"{text}" (board.kicad_sch sheet / at (10, 0) mm)',)}
        # of its rails only the one the note names
        assert self.suggestions("U3 on 3V3: 30 mA")["U3"] == ()

    def test_too_far_or_on_another_sheet(self):
        assert self.suggestions("200 mA", x=150.0)["U2"] == ()
        assert self.suggestions("200 mA", sheet="/other/")["U2"] == ()

    def test_never_a_value(self):
        board, known = one_regulator(chip("U2", "+3V3"))
        noted = circuit(*board.components, notes=[Note("+3V3: 100 mA", Place("b", "/", 0.0, 0.0))])
        assert loads(noted, known).by_rail["+3V3"].total is None
        assert loads(noted, known).by_rail["+3V3"].known == Span.exact(0.0)
