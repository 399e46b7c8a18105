"""`adopt`: currents typed into a workbook become settings; everything else of the file stays as it was, to the byte."""

from __future__ import annotations

import json
import re
import shutil
from pathlib import Path
from typing import Any

import pytest
from conftest import ROOT
from test_workbook_round_trip import type_in

from analyzer.cli import main
from analyzer.output.settings_merge import merged

BOARDS = ROOT / "fixture_boards"
NOMINAL, HIGH = "Type nominal [A]", "Type high [A]"
Edits = dict[tuple[str, str], dict[str, object]]


def board_with(tmp_path: Path, name: str, edits: Edits, settings: bytes | None = None) -> Path:
    """A copy of a fixture board, its settings as these bytes, and a workbook with currents typed into it."""
    board = Path(shutil.copytree(BOARDS / name, tmp_path / name))
    if settings is not None:
        (board / "heatledger.toml").write_bytes(settings)
    assert main(["audit", str(board), "--workbook", str(board / "w.xlsx")]) in (0, 5)
    for (part, rail), cells in edits.items():
        for head, value in cells.items():
            type_in(board / "w.xlsx", "Currents", head, value, Part=part, Rail=rail)
    return board


def ledger(board: Path, *more: str) -> dict[str, Any]:
    """The ledger; a typed current's source reads the same, whether it is a row of the workbook or a key of [draws]."""
    target = board / "out.json"
    assert main(["audit", str(board), "--json", str(target), *more]) in (0, 5)
    text = target.read_text(encoding="utf-8")
    target.unlink()
    text = re.sub(r"w\.xlsx Currents: (U\d) on (\S\w+)", r"typed \1@\2", text)
    text = re.sub(r"heatledger\.toml \[draws(?:\] (U\d@.\w+)|\.(U\d@.\w+)\] watts)", r"typed \1\2", text)
    return {key: value for key, value in json.loads(text).items() if key != "inputs"}


TIDE: Edits = {
    ("U4", "+5V"): {NOMINAL: "2 mA for 5 ms every 20 ms, else 1 mA"},
    ("U4", "-5V"): {"Type low [A]": "1 mA", NOMINAL: 0.002, HIGH: "0.003 A"},
    ("U5", "+5V"): {HIGH: "30..45 mW"},
}
BENCH: Edits = {("U3", "+3V3"): {"Type low [A]": 0.01, HIGH: 1e-05 + 0.02}, ("U6", "+12V"): {NOMINAL: 1e-05}}


@pytest.mark.parametrize(("name", "edits"), [("tide_logger", TIDE), ("seedling_bench", BENCH)])
def test_an_audit_after_adopting_is_the_audit_with_the_workbook(tmp_path: Path, name: str, edits: Edits) -> None:
    board = board_with(tmp_path, name, edits)
    plain = ledger(board)
    typed = ledger(board, "--currents", str(board / "w.xlsx"))
    assert main(["adopt", str(board / "w.xlsx"), str(board)]) == 0
    assert ledger(board) == typed != plain


WINDOWS = (
    b"\xef\xbb\xbf# tide gauge, harbour wall \xe2\x80\xa8 by hand\r\n"
    b'[supplies]\r\n"VBAT" = "3.0/3.7/4.2 V"   # one cell\r\n'
    b'\r\n[rules]\r\nfiles = ["rules.toml"]\r\n\n[draws]  # measured in May\r\n'
    b'"U5" = "4 mA"       # asleep\r\n'
    b"U4@-5V = '1 mA'\t# old\n".replace(b"U4@-5V", b'"U4@-5V"')
    + b"# end of draws\r\n"
    b'[board]\r\nboard_class = "1s"   # two layers, no pour\r\n\r\n# last line, without an end'
)


def test_every_byte_that_is_not_adopted_stays(tmp_path: Path) -> None:
    """CRLF but for two lines, a mark at the start, a Unicode line separator, the last line without an end."""
    board = board_with(tmp_path, "tide_logger", TIDE, WINDOWS)
    assert main(["adopt", str(board / "w.xlsx"), str(board)]) == 0
    expected = WINDOWS.replace(b'"U5" = "4 mA"', b'# "U5" = "4 mA"')
    expected = expected.replace(b"'1 mA'\t# old\n", b'"1 mA / 0.002 A / 0.003 A"\t# old\n')
    added = b'"U5@+5V" = { watts = "30..45 mW" }\r\n"U4@+5V" = "2 mA for 5 ms every 20 ms, else 1 mA"\r\n'
    expected = expected.replace(b"# end of draws", added + b"# end of draws") + b"\r\n"
    assert (board / "heatledger.toml").read_bytes() == expected
    once = ledger(board)
    # a second time changes nothing
    assert main(["adopt", str(board / "w.xlsx"), str(board)]) == 0
    assert (board / "heatledger.toml").read_bytes() == expected
    assert ledger(board) == once == ledger(board, "--currents", str(board / "w.xlsx"))


def test_what_draws_has_no_place_for_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    board = board_with(tmp_path, "tide_logger", {})
    file = board / "w.xlsx"
    before = (board / "heatledger.toml").read_bytes()
    type_in(file, "Settings", "Value", 65, Setting="Ambient, highest")
    type_in(file, "Settings", "Value", "2s2p", Setting="Board class")
    type_in(file, "Regulators", "θ at sea level [K/W]", 71.5, Part="U2")
    capsys.readouterr()
    assert main(["adopt", str(file), str(board)]) == 0
    shown = capsys.readouterr()
    assert shown.out == "no currents were typed into the workbook; nothing changed\n"
    assert shown.err.splitlines() == [
        "not taken over: Ambient_high = 65 of the Settings sheet",
        "not taken over: board class 2s2p of the Settings sheet",
        "not taken over: θ of U2, 71.5 K/W, of the Regulators sheet",
    ]
    assert (board / "heatledger.toml").read_bytes() == before


def test_one_reference_of_two_parts_is_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The workbook knows the two apart by identity; the settings could not."""
    board = board_with(tmp_path, "tide_logger", {("U4", "-5V"): {NOMINAL: 0.001}, ("U5", "+5V"): {NOMINAL: 0.002}})
    type_in(board / "w.xlsx", "Currents", "Part", "U4", Part="U5", Rail="+5V")
    type_in(board / "w.xlsx", "Currents", NOMINAL, 0.003, Part="U4", Rail="+5V", Value="GAUGE-AMP")
    before = (board / "heatledger.toml").read_bytes()
    capsys.readouterr()
    assert main(["adopt", str(board / "w.xlsx"), str(board)]) == 3
    assert "two parts are called U4@+5V" in capsys.readouterr().err
    assert (board / "heatledger.toml").read_bytes() == before


def test_a_board_that_is_not_there_is_refused(tmp_path: Path) -> None:
    board = board_with(tmp_path, "tide_logger", {})
    assert main(["adopt", str(board / "w.xlsx"), str(tmp_path / "no" / "board.kicad_pro")]) == 3


def test_text_that_looks_like_a_table_inside_a_string_is_no_table() -> None:
    text = 'note = """\n[draws]\n"""\n'
    with pytest.raises(ValueError, match="cannot be merged line by line"):
        merged(text, {"U3": "1 A"})
