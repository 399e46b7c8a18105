"""The release gate: a waiver accepts exactly what it names, and nothing that is missing ever passes."""

from __future__ import annotations

from datetime import date

import pytest

from analyzer.evidence import Grade
from analyzer.findings.base import Finding, Verdict, Weight
from analyzer.gate import judge
from analyzer.ledger import Entry, Ledger
from analyzer.settings import Waiver

TODAY = date(2026, 12, 1)


def finding(name: str, weight: Weight, subject: str) -> Finding:
    return Finding(name, weight, subject, "message", "remedy", key=f"/{subject}")


def entry(ref: str, verdict: Verdict, *findings: Finding, fitted: bool = True) -> Entry:
    return Entry(
        key=f"/{ref}",
        ref=ref,
        sheet="/",
        part="X",
        value="X",
        kind="linear",
        fitted=fitted,
        rule=None,
        package=None,
        input=None,
        outputs=(),
        nominal=None,
        worst=None,
        limit=None,
        data_sheet_limit=None,
        policy_limit=None,
        tight_above=None,
        headroom=None,
        greatest_load=None,
        rated_load=None,
        verdict=verdict,
        missing=(),
        grade=Grade.STATED,
        findings=findings,
    )


def ledger(*entries: Entry, more: tuple[Finding, ...] = (), complete: bool = True) -> Ledger:
    found = (*more, *(finding for one in entries for finding in one.findings))
    return Ledger("b", (), (), entries, (), {}, (), found, complete=complete)


@pytest.mark.parametrize(
    ("verdict", "level", "status"),
    [
        (Verdict.OVER, "over", 5),
        (Verdict.OVER, "never", 0),
        (Verdict.TIGHT, "over", 0),
        (Verdict.TIGHT, "tight", 5),
        (Verdict.OPEN, "over", 0),
        (Verdict.OPEN, "tight", 0),
        (Verdict.OPEN, "open", 5),
        (Verdict.TIGHT, "open", 5),
        (Verdict.CLEAR, "open", 0),
    ],
)
def test_each_level_stops_at_its_verdicts_and_the_ones_before(verdict: Verdict, level: str, status: int) -> None:
    assert judge(ledger(entry("U1", verdict)), (), level, TODAY).status == status


def test_an_unfitted_part_never_fails_the_gate() -> None:
    assert judge(ledger(entry("U1", Verdict.OPEN, fitted=False)), (), "open", TODAY).status == 0


def test_an_incomplete_drawing_is_status_3_at_every_level() -> None:
    for level in ("over", "tight", "open", "never"):
        assert judge(ledger(entry("U1", Verdict.OVER), complete=False), (), level, TODAY).status == 3


def test_a_waiver_accepts_its_finding_and_with_it_the_verdict() -> None:
    over = finding("junction-over", Weight.OVER, "U1")
    gate = judge(
        ledger(entry("U1", Verdict.OVER, over)), [Waiver("junction-over", "U1", "bench test 12")], "over", TODAY
    )
    assert gate.status == 0
    assert [(waived.subject, waiver.reason) for waived, waiver in gate.waived] == [("U1", "bench test 12")]
    assert gate.standing == ()


def test_a_waiver_hides_neither_another_finding_nor_another_part() -> None:
    first = finding("junction-over", Weight.OVER, "U1")
    other_kind = finding("dropout-lost", Weight.OVER, "U1")
    other_part = finding("junction-over", Weight.OVER, "U2")
    book = ledger(entry("U1", Verdict.OVER, first, other_kind), entry("U2", Verdict.OVER, other_part))
    gate = judge(book, [Waiver("junction-over", "U1", "r")], "over", TODAY)
    assert gate.standing == (other_kind, other_part)
    assert gate.status == 5


def test_a_waiver_by_identity_reaches_only_that_part() -> None:
    over = finding("junction-over", Weight.OVER, "U1")
    assert (
        judge(ledger(entry("U1", Verdict.OVER, over)), [Waiver("junction-over", "/U1", "r")], "over", TODAY).status == 0
    )
    assert (
        judge(ledger(entry("U1", Verdict.OVER, over)), [Waiver("junction-over", "/U", "r")], "over", TODAY).status == 5
    )


def test_an_expired_waiver_accepts_nothing_and_says_so() -> None:
    over = finding("junction-over", Weight.OVER, "U1")
    book = ledger(entry("U1", Verdict.OVER, over))
    ended = judge(book, [Waiver("junction-over", "U1", "r", expires="2026-11-30")], "over", TODAY)
    assert ended.status == 5
    assert [note.name for note in ended.standing] == ["junction-over", "waiver-expired"]
    last_day = judge(book, [Waiver("junction-over", "U1", "r", expires="2026-12-01")], "over", TODAY)
    assert last_day.status == 0


def test_a_waiver_without_its_finding_is_reported_as_stale() -> None:
    gate = judge(ledger(entry("U1", Verdict.CLEAR)), [Waiver("junction-over", "U9", "r")], "over", TODAY)
    assert [note.message for note in gate.standing] == ["the waiver of junction-over on U9 matches no finding"]
    assert gate.status == 0


def test_a_verdict_without_a_finding_behind_it_still_fails() -> None:
    note = finding("name-disagrees", Weight.NOTE, "U1")
    gate = judge(ledger(entry("U1", Verdict.OVER, note)), [Waiver("name-disagrees", "U1", "r")], "over", TODAY)
    assert gate.status == 5


def test_a_board_level_finding_fails_at_its_own_weight() -> None:
    loop = finding("circular-feed", Weight.OPEN, "+5V")
    assert judge(ledger(more=(loop,)), (), "open", TODAY).status == 5
    assert judge(ledger(more=(loop,)), (), "tight", TODAY).status == 0
