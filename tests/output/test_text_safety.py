"""Hostile texts of a schematic, from the file through a real audit into every table: text stays text, whatever it is.

First characters that spreadsheets take for formulas are those of OWASP's page "CSV Injection".
"""

from __future__ import annotations

import csv
import io
import re
import shutil
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from conftest import ROOT

from analyzer.audit import audit
from analyzer.cli import main
from analyzer.output.annotate import annotate

LAMP = ROOT / "fixture_boards" / "lane_lamp"
VISIBLE = {
    "\t": "␉",
    "\r": "␍",
    "\x1b": "␛",
    "\x07": "␇",
    "\x7f": "\ufffd",
    "\x9b": "\ufffd",
}
"""What stands for a control character in a cell (Unicode's Control Pictures), by hand."""

HOSTILE = (
    "=1+1",
    "+1+1",
    "-2+3",
    "@SUM(1+1)",
    "=HYPERLINK(0,0)&'x'!A1",
    "\t=1+1",
    "\r=1+1",
    "\x1b]0;owned\x07",
    "\x1b[2J=1",
    "\x9b31m=1",
    "\x7f=cmd",
    "_x003D_1",
    "x005F_=1",
    "＝1+1",
    "{=1}",
    "https://example.invalid/",
    "<b>&amp;=1",
)


def quoted(text: str) -> str:
    """Text as KiCad's files hold it."""
    escapes = {"\\": "\\\\", '"': '\\"', "\n": "\\n", "\r": "\\r", "\t": "\\t"}
    return "".join(escapes.get(character, character) for character in text)


def board_with(folder: Path, text: str) -> Path:
    """The lamp with this text in a rail's name, a part's value, a sheet's name and a note."""
    board = Path(shutil.copytree(LAMP, folder / "lamp"))
    sheet = board / "lane_lamp.kicad_sch"
    drawn = sheet.read_text(encoding="utf-8")
    for before, after in (
        ('"Value" "+3V3"', f'"Value" "{quoted(text)}"'),
        ('"Value" "LAMP-CTL"', f'"Value" "{quoted(text)} ctl"'),
        ('"Sheetname" "Left"', f'"Sheetname" "{quoted(text)} left"'),
        ('(text "U2: up to 30 mA', f'(text "{quoted(text)} U2: up to 30 mA'),
    ):
        assert before in drawn
        drawn = drawn.replace(before, after)
    sheet.write_text(drawn, encoding="utf-8", newline="")
    return board


def sheets_of(board: Path) -> dict[str, dict[str, Any]]:
    """Sheet → coordinate → cell of the workbook that the command writes."""
    file = board / "lamp.xlsx"
    assert main(["audit", str(board), "--workbook", str(file), "--fail-on", "never"]) == 0
    book = openpyxl.load_workbook(file)
    return {
        sheet.title: {cell.coordinate: cell for row in sheet.iter_rows() for cell in row if cell.value is not None}
        for sheet in book
    }


@pytest.fixture(scope="module")
def harmless(tmp_path_factory: pytest.TempPathFactory) -> dict[str, dict[str, Any]]:
    return sheets_of(board_with(tmp_path_factory.mktemp("harmless"), "Q1"))


CONTROL = re.compile(r"[\x00-\x09\x0b-\x1f\x7f-\x9f]")


def patterns(cells: dict[str, Any]) -> dict[str, str]:
    """The formulas of a sheet; the rows they point at depend on the order of the rails' names."""
    return {place: re.sub(r"\d+", "n", cell.value) for place, cell in cells.items() if cell.data_type == "f"}


@pytest.mark.parametrize("text", HOSTILE, ids=ascii)
def test_a_drawings_text_is_text_in_every_cell(
    harmless: dict[str, dict[str, Any]], tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str
) -> None:
    board = board_with(tmp_path, text)
    sheets = sheets_of(board)
    shown = "".join(VISIBLE.get(character, character) for character in text)
    for title, cells in sheets.items():
        assert patterns(cells) == patterns(harmless[title]), title
        for place, cell in cells.items():
            assert cell.data_type in ("f", "n", "s"), (title, place)
            assert cell.hyperlink is None
            if cell.data_type == "s":
                assert not CONTROL.search(cell.value), (title, place)
    # blanks at the ends of names are KiCad's to drop; openpyxl drops the mark of an escaped escape, in our text too
    core = shown.strip("␉␍").replace("x005F_", "")
    told = {title: [str(cell.value) for cell in cells.values()] for title, cells in sheets.items()}
    name = core.replace("/", "{slash}")
    for title, text_there in (
        ("Rails", name),
        ("Currents", f"{core} ctl"),
        ("Currents", f"{core} U2: up to 30 mA"),
        ("Regulators", f"{name} left"),
    ):
        assert any(text_there in value for value in told[title]), (title, text_there)
    screen = capsys.readouterr().out
    assert "U1 QXL2133-3.3" in screen
    assert not CONTROL.search(screen)


def test_a_text_longer_than_a_cell_is_cut_visibly(tmp_path: Path) -> None:
    long = "=" + "x" * 40_000
    cells = sheets_of(board_with(tmp_path, long))
    (name,) = {cell.value for cell in cells["Rails"].values() if str(cell.value).startswith("=x")}
    assert name == "=" + "x" * 32_765 + "…"


REFS = ("=U9", "+U9", "-U9", "@U9")


def hostile_refs(folder: Path, ref: str) -> Path:
    """The lamp, its gap U2 under another reference."""
    board = Path(shutil.copytree(LAMP, folder / "lamp"))
    sheet = board / "lane_lamp.kicad_sch"
    drawn = sheet.read_text(encoding="utf-8")
    sheet.write_text(drawn.replace('"U2"', f'"{quoted(ref)}"'), encoding="utf-8")
    return board


@pytest.mark.parametrize("ref", REFS)
def test_what_is_added_to_a_csv_is_no_formula(tmp_path: Path, ref: str) -> None:
    ledger = audit(hostile_refs(tmp_path, ref)).ledger
    source = tmp_path / "parts.csv"
    rows = [["Ref", "Note"], [ref, "=HYPERLINK(0)"], ["U101", "-"]]
    with source.open("w", encoding="utf-8", newline="") as stream:
        csv.writer(stream).writerows(rows)
    copy = annotate(source, ledger).read_text(encoding="utf-8")
    head, hostile, lamp = csv.reader(io.StringIO(copy, newline=""))
    # the user's own cells are the user's; ours begins with the mark by which spreadsheets keep text
    assert hostile == [ref, "=HYPERLINK(0)", "", "", "", "", f"'{ref}"]
    # by hand in EXPECTED.md: 443.751 mW, 100.825 °C, margin 14.175 K (its last digit is rounded to even)
    assert lamp == ["U101", "-", "0.4438", "100.8", "14.17", "tight", ""]
    assert head[2:] == ["Dissipation [W]", "Junction [°C]", "Margin [K]", "Verdict", "Missing current"]


@pytest.mark.parametrize("ref", REFS)
def test_what_is_added_to_a_workbook_is_text(tmp_path: Path, ref: str) -> None:
    ledger = audit(hostile_refs(tmp_path, ref)).ledger
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.append(["Ref", "Sum"])
    sheet.append([None, "=1+1"])
    sheet["A2"].value = ref
    sheet["A2"].data_type = "s"
    book.save(tmp_path / "parts.xlsx")
    copy = openpyxl.load_workbook(annotate(tmp_path / "parts.xlsx", ledger)).worksheets[0]
    cells = [(cell.value, cell.data_type) for cell in copy[2]]
    assert cells[0] == (ref, "s")
    assert cells[1] == ("=1+1", "f")
    assert cells[-1] == (ref, "s")
