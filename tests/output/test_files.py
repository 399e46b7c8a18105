"""Files: complete or absent, never over an input; tables annotated as copies; settings merged with their comments."""

from __future__ import annotations

import errno
import os
import zipfile
from pathlib import Path

import openpyxl
import pytest
from conftest import ROOT
from openpyxl.styles import Font

from analyzer.audit import audit
from analyzer.errors import InputError, OutputError
from analyzer.ledger import Ledger
from analyzer.output.annotate import annotate
from analyzer.output.atomic import refuse_inputs, write_bytes, write_text
from analyzer.output.settings_merge import merged
from analyzer.output.workbook.layout import cell, plain

HEADS = ["Dissipation [W]", "Junction [°C]", "Margin [K]", "Verdict", "Missing current"]


def test_a_file_is_written_whole_and_nothing_else_is_left(tmp_path: Path) -> None:
    file = tmp_path / "a.json"
    write_text(file, "old")
    os.chmod(file, 0o640)
    write_text(file, "näw")
    assert file.read_text(encoding="utf-8") == "näw"
    assert file.stat().st_mode & 0o777 == 0o640
    assert [path.name for path in tmp_path.iterdir()] == ["a.json"]


@pytest.mark.parametrize(
    ("number", "what"),
    [(errno.ENOSPC, "No space left on device"), (errno.EACCES, "Permission denied"), (errno.EBUSY, "busy")],
)
def test_a_failed_write_leaves_the_old_file_whole(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, number: int, what: str
) -> None:
    file = tmp_path / "a.xlsx"
    write_bytes(file, b"old")

    def fails(*_: object) -> None:
        raise OSError(number, os.strerror(number))

    monkeypatch.setattr(os, "replace" if number != errno.ENOSPC else "fsync", fails)
    with pytest.raises(OutputError, match=what) as refused:
        write_bytes(file, b"new")
    assert refused.value.exit_status == 4
    assert file.read_bytes() == b"old"
    assert [path.name for path in tmp_path.iterdir()] == ["a.xlsx"]


def test_a_missing_folder_is_said_so(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="its folder does not exist"):
        write_text(tmp_path / "no" / "a", "")


def test_an_output_that_is_an_input_is_refused_by_whatever_name(tmp_path: Path) -> None:
    board = tmp_path / "a.kicad_sch"
    board.write_text("x", encoding="utf-8")
    (tmp_path / "link").symlink_to(board)
    os.link(board, tmp_path / "hard")
    for output in (board, tmp_path / "link", tmp_path / "hard", tmp_path / "." / "a.kicad_sch"):
        with pytest.raises(OutputError, match="is an input of this run"):
            refuse_inputs([output], [board])
    with pytest.raises(OutputError, match="asked for twice"):
        refuse_inputs([tmp_path / "o", tmp_path / "o"], [board])
    with pytest.raises(OutputError, match="is a folder"):
        refuse_inputs([tmp_path], [board])
    refuse_inputs([tmp_path / "o"], [board])


@pytest.fixture(scope="module")
def ledger() -> Ledger:
    return audit(ROOT / "fixture_boards" / "lane_lamp").ledger


def test_a_users_workbook_keeps_everything_and_gets_five_columns(ledger: Ledger, tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for row in (
        ["Our parts", None, None],
        ["Designator", "Price", "Sum"],
        ["U101, U201", 0.5, "=B3*2"],
        ["U1", 0.3, "=B4"],
        ["U2", 2, ""],
    ):
        sheet.append(row)
    sheet["A2"].font = Font(bold=True, name="Courier New")
    sheet.column_dimensions["A"].width = 33
    book.create_sheet("Notes")["A1"] = "keep"
    source = tmp_path / "parts.xlsx"
    book.save(source)
    before = source.read_bytes()
    target = annotate(source, ledger)
    assert target == tmp_path / "parts.heat.xlsx"
    assert source.read_bytes() == before
    copy = openpyxl.load_workbook(target)
    ws = copy.worksheets[0]
    assert copy.sheetnames == ["Sheet", "Notes"]
    assert (ws["A2"].font.b, ws["A2"].font.name, ws.column_dimensions["A"].width) == (True, "Courier New", 33)
    assert ws["C3"].value == "=B3*2"
    assert [c.value for c in ws[2]][3:] == [
        "Dissipation [W]",
        "Junction [°C]",
        "Margin [K]",
        "Verdict",
        "Missing current",
    ]
    grouped = [c.value for c in ws[3]][3:]
    # worked by hand in EXPECTED.md: 443.751 mW, 100.825 °C, margin 14.175 K
    assert grouped[:3] == pytest.approx([0.443751, 100.825, 14.175], abs=1e-3)
    assert grouped[3:] == ["tight", None]
    assert [c.value for c in ws[4]][6:] == ["open", "U1"]
    assert [c.value for c in ws[5]][3:] == [None, None, None, None, "U2"]


@pytest.mark.parametrize(("separator", "encoding"), [(";", "utf-8-sig"), (",", "utf-8"), ("\t", "cp1252")])
def test_a_users_csv_keeps_its_separator_and_encoding(
    ledger: Ledger, tmp_path: Path, separator: str, encoding: str
) -> None:
    source = tmp_path / "parts.csv"
    lines = [["Reference", "Größe"], ["U101", "ä"], ["R9", "=cmd"]]
    source.write_bytes("\r\n".join(separator.join(line) for line in lines).encode(encoding))
    text = annotate(source, ledger).read_bytes().decode(encoding)
    rows = [line.split(separator) for line in text.splitlines()]
    assert rows[0] == [
        "Reference",
        "Größe",
        "Dissipation [W]",
        "Junction [°C]",
        "Margin [K]",
        "Verdict",
        "Missing current",
    ]
    assert rows[1] == ["U101", "ä", "0.4438", "100.8", "14.17", "tight", ""]
    assert rows[2][:2] == ["R9", "=cmd"]


def test_short_rows_of_a_csv_are_filled_before_the_results(ledger: Ledger, tmp_path: Path) -> None:
    source = tmp_path / "parts.csv"
    source.write_text("our parts\nRef,Value,Note\nU101\n\nU2,x\n", encoding="utf-8")
    lines = annotate(source, ledger).read_text(encoding="utf-8").splitlines()
    assert lines[0] == "our parts"
    assert [line.split(",")[6:] for line in lines[2:]] == [["tight", ""], [], ["", "U2"]]


def test_a_table_without_references_is_refused(ledger: Ledger, tmp_path: Path) -> None:
    source = tmp_path / "parts.csv"
    source.write_text("Name,Price\nx,1\n", encoding="utf-8")
    with pytest.raises(InputError, match="has no column of references"):
        annotate(source, ledger)
    assert sorted(path.name for path in tmp_path.iterdir()) == ["parts.csv"]


SETTINGS = """# our board
[site]
ambient = "40 °C"   # summer

[draws]             # measured in May
"U3" = "10 mA"      # old figure
U4 = '5 mA'
# end of draws

[rules]
files = ["r.toml"]
"""


def test_a_merge_changes_the_lines_it_must_and_keeps_every_comment() -> None:
    assert merged(SETTINGS, {"U3": "12 mA", "U9@+5V": "80..150 mA"}) == SETTINGS.replace(
        '"U3" = "10 mA"      # old figure\nU4 = \'5 mA\'\n',
        '"U3" = "12 mA"      # old figure\nU4 = \'5 mA\'\n"U9@+5V" = "80..150 mA"\n',
    )


def test_a_merge_adds_the_table_where_there_is_none() -> None:
    assert merged("", {"U3": "1 A"}) == '[draws]\n"U3" = "1 A"\n'
    assert merged("[site]\r\n", {"U3": "1 A"}) == '[site]\r\n\r\n[draws]\r\n"U3" = "1 A"\r\n'


def test_a_merge_that_would_not_read_back_is_refused() -> None:
    with pytest.raises(ValueError, match="cannot be merged line by line"):
        merged('draws = { U3 = "1 A" }\n', {"U3": "2 A"})


@pytest.mark.parametrize(
    ("text", "shown"),
    [("=1+1", "=1+1"), ("a\x00b\x1b", "a␀b␛"), ("x\x85y", "x�y"), ("\ud800", "�"), ("line\nbreak", "line\nbreak")],
)
def test_cells_hold_text_as_it_is_but_for_what_no_cell_can_hold(text: str, shown: str) -> None:
    assert plain(text) == shown


def test_long_text_is_cut_visibly() -> None:
    assert len(plain("x" * 40_000)) == 32_767
    assert plain("x" * 40_000).endswith("x…")
    assert plain("x" * 32_767) == "x" * 32_767
    # a character of two units is not cut in half: 16,383 of them would fit, and one gives way to the mark
    assert plain("🌡" * 16_384) == "🌡" * 16_383 + "…"


def test_references_follow_the_letters_of_spreadsheets() -> None:
    assert [cell(0, 0), cell(4, 25), cell(9, 26), cell(0, 701), cell(0, 702)] == [
        "$A$1",
        "$Z$5",
        "$AA$10",
        "$ZZ$1",
        "$AAA$1",
    ]


def test_tables_that_are_no_workbook_are_refused_and_nothing_written(ledger: Ledger, tmp_path: Path) -> None:
    damaged, headless = tmp_path / "damaged.xlsx", tmp_path / "headless.xlsx"
    with zipfile.ZipFile(damaged, "w") as archive:
        archive.writestr("[Content_Types].xml", "<Types/>")
    openpyxl.Workbook().save(headless)
    (tmp_path / "other.xlsx").write_bytes(b"PK\x05\x06" + b"\0" * 18)
    for name, message in (
        ("damaged", "is no readable workbook"),
        ("headless", "has no column of references"),
        ("other", "is a ZIP archive but no workbook"),
        ("absent", "does not exist"),
    ):
        with pytest.raises(InputError, match=message):
            annotate(tmp_path / f"{name}.xlsx", ledger)
    (tmp_path / "folder.xlsx").mkdir()
    with pytest.raises(InputError, match=r"cannot be read \(Is a directory\)"):
        annotate(tmp_path / "folder.xlsx", ledger)
    assert not list(tmp_path.glob("*.heat.xlsx"))
