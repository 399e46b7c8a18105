"""What fuzzing found, each find as a test of its own."""

from __future__ import annotations

import zipfile
from pathlib import Path

import openpyxl
import pytest

from analyzer.audit import audit
from analyzer.errors import InputError
from analyzer.output.workbook import write_workbook
from analyzer.output.workbook.typed_reading import read_typed
from analyzer.reading.parts_table import read_table


def damaged(path: Path, sheet: str) -> Path:
    """The workbook with the XML of one sheet cut in the middle."""
    broken = path.with_name("broken.xlsx")
    with zipfile.ZipFile(path) as archive, zipfile.ZipFile(broken, "w") as made:
        for name in archive.namelist():
            data = archive.read(name)
            made.writestr(name, data[: len(data) // 2] if name == f"xl/worksheets/{sheet}.xml" else data)
    return broken


def test_a_damaged_sheet_of_a_workbook_of_ours(tmp_path: Path, fixture_boards: Path) -> None:
    result = audit(fixture_boards / "lane_lamp")
    write_workbook(tmp_path / "w.xlsx", result.ledger, result.settings)
    with zipfile.ZipFile(tmp_path / "w.xlsx") as archive:
        assert b"Currents" in archive.read("xl/workbook.xml")
    with pytest.raises(InputError, match="is no readable workbook"):
        read_typed(damaged(tmp_path / "w.xlsx", "sheet5"))


def test_a_damaged_sheet_of_a_parts_table(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    assert book.active is not None
    for number in range(50):
        book.active.append([f"U{number}", "5 V"])
    book.save(tmp_path / "t.xlsx")
    with pytest.raises(InputError, match="is no readable workbook"):
        read_table(damaged(tmp_path / "t.xlsx", "sheet1"))
