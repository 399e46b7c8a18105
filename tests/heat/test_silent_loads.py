"""A connector counted as taking none is an assumption, and the load that rests on it is presumed."""

from __future__ import annotations

import pytest

from analyzer.evidence import Evidence, Grade
from analyzer.heat.draft import load_evidence
from analyzer.load import Draw, RailLoad
from analyzer.quantity import Span

SPAN = Span(0.1, 0.1, 0.2)
AMPS = Evidence("load current", SPAN, "A", "U3 field I_load", Grade.STATED)
LOAD = RailLoad("+5V", (Draw("U3", "/U3", "+5V", AMPS, "stated"),), (), SPAN)


@pytest.mark.parametrize(
    ("silent", "grade", "note"),
    [
        ("", Grade.DERIVED, ""),
        ("J2 on +5V: counted as taking none", Grade.PRESUMED, "J2 on +5V: counted as taking none"),
    ],
)
def test_the_grade_and_note_of_a_load_tell_what_was_counted_as_nothing(silent: str, grade: Grade, note: str) -> None:
    found = load_evidence(LOAD, SPAN, silent)
    assert (found.grade, found.note, found.span) == (grade, note, SPAN)
