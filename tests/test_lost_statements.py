"""What somebody stated and the tool cannot place is in no budget: then no budget may be called clear.

The board is the fixture of which U1 and U2 are clear while every statement finds its place.
"""

from __future__ import annotations

import shutil
from dataclasses import replace
from pathlib import Path

import pytest

from analyzer.audit import Audit, audit
from analyzer.evidence import Evidence, Grade
from analyzer.findings.base import Verdict
from analyzer.quantity import Span
from analyzer.settings import StatedDraw

LOST = {
    '[draws]\n"@+3V33" = "900 mA"': ("draw-on-unknown-rail", "900 mA is stated on +3V33, but there is no such rail"),
    '[draws]\n"@GND" = "900 mA"': ("draw-on-unknown-rail", "900 mA is stated on GND, but there is no such rail"),
    '[draws]\n"U33" = "900 mA"': ("draw-for-unknown-part", "900 mA is stated for U33, but there is no such part"),
    '[draws]\n"U33@+3V3" = { watts = "1 W" }': (
        "draw-for-unknown-part",
        "1.00 W is stated for U33, but there is no such part",
    ),
    '[draws]\n"C1@+3V33" = "900 mA"': (
        "draw-on-unknown-rail",
        "900 mA is stated on +3V33, but there is no such rail",
    ),
    '[parts.U22]\ntheta_ja = "500 K/W"': ("statement-without-part", "[parts.U22]: no part has this reference"),
    '[parts.R1]\nvin = "30 V"': ("statement-unused", "[parts.R1]: R1 is not recognised as a regulator or passage"),
    '[[coupling]]\nref = "U22"\nby = "U5"\ntheta = "30 K/W"': (
        "coupling-without-part",
        "[[coupling]] of U22 and U5: no part has the reference U22",
    ),
    '[links]\n"R99" = true': ("link-without-part", "link 'R99': no part has this reference"),
}


def closed(tmp_path: Path, fixture_boards: Path, lines: str = "", supplies: str = "") -> Audit:
    board = Path(shutil.copytree(fixture_boards / "seedling_bench", tmp_path / "seedling_bench"))
    file = board / "heatledger.toml"
    text = file.read_text(encoding="utf-8")
    file.write_text(text.replace("[supplies]", f"[supplies]\n{supplies}") + "\n" + lines + "\n", encoding="utf-8")
    return audit(board)


def verdicts(result: Audit) -> dict[str, Verdict]:
    return {entry.ref: entry.verdict for entry in result.ledger.entries}


def test_with_every_statement_placed_two_are_clear(tmp_path: Path, fixture_boards: Path) -> None:
    found = verdicts(closed(tmp_path, fixture_boards, '[draws]\n"@+3V3" = "1 mA"'))
    assert found == {"U1": "clear", "U2": "clear", "U5": "over"}


@pytest.mark.parametrize("lines", LOST)
def test_a_statement_that_finds_no_place_holds_every_budget(lines: str, tmp_path: Path, fixture_boards: Path) -> None:
    result = closed(tmp_path, fixture_boards, lines)
    name, message = LOST[lines]
    assert [(f.name, f.message) for f in result.ledger.findings if f.name == name] == [(name, message)]
    assert verdicts(result) == {"U1": "open", "U2": "open", "U5": "over"}
    assert all(f"{name}: {message}" in entry.missing for entry in result.ledger.entries)


def test_a_supply_of_a_misspelt_net_holds_every_budget(tmp_path: Path, fixture_boards: Path) -> None:
    result = closed(tmp_path, fixture_boards, supplies='"+24VV" = "28 V"')
    assert verdicts(result) == {"U1": "open", "U2": "open", "U5": "over"}


def test_a_current_typed_for_a_part_that_is_gone_holds_every_budget(tmp_path: Path, fixture_boards: Path) -> None:
    amps = Evidence("load current", Span.exact(0.3), "A", "audit.xlsx, sheet Currents, row 9", Grade.STATED)
    typed = StatedDraw("U77", "+3V3", amps, key="/0b5b/gone")
    result = audit(fixture_boards / "seedling_bench", adjust=lambda known: replace(known, draws=(*known.draws, typed)))
    assert verdicts(result) == {"U1": "open", "U2": "open", "U5": "over"}


def test_a_load_stated_on_the_regulator_itself_opens_it_and_what_feeds_it(tmp_path: Path, fixture_boards: Path) -> None:
    # U2 makes +3V3 from +5V, which U1 makes
    result = closed(tmp_path, fixture_boards, '[draws]\n"U2" = "300 mA"')
    assert verdicts(result) == {"U1": "open", "U2": "open", "U5": "over"}
    gaps = {(gap.ref, gap.rail): gap.why for gap in result.ledger.gaps}
    assert gaps["U2", "+3V3"] == "its stated current cannot be used (draw-on-regulator)"


def test_a_current_for_a_part_that_is_not_fitted_is_told_and_not_counted(tmp_path: Path, fixture_boards: Path) -> None:
    board = closed(tmp_path, fixture_boards)
    (ref, *_) = [one.ref for one in board.circuit.components if not one.fitted and one.ref.startswith("R")]
    result = closed(tmp_path / "again", fixture_boards, f'[draws]\n"{ref}@+3V3" = "200 mA"')
    (note,) = [finding for finding in result.ledger.findings if finding.name == "draw-for-unfitted-part"]
    assert note.message == f"200 mA is stated for {ref}, which is not fitted"
    assert verdicts(result) == {"U1": "clear", "U2": "clear", "U5": "over"}
