"""What a person types into a workbook: read back by identity, carried over, never lost."""

from __future__ import annotations

import shutil
import zipfile
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from conftest import ROOT

from analyzer.audit import Audit, audit
from analyzer.errors import InputError
from analyzer.output.ledger_json import as_document
from analyzer.output.workbook import write_workbook
from analyzer.output.workbook.typed import Typed
from analyzer.output.workbook.typed_reading import read_typed
from analyzer.rule import BoardClass

BOARD = ROOT / "fixture_boards" / "tide_logger"


@pytest.fixture(scope="module")
def result() -> Audit:
    return audit(BOARD)


def fresh(result: Audit, folder: Path, name: str = "board.xlsx") -> Path:
    file = folder / name
    write_workbook(file, result.ledger, result.settings)
    return file


def rows(file: Path, sheet: str) -> list[dict[str, Any]]:
    ws = openpyxl.load_workbook(file)[sheet]
    heads = [str(cell.value) for cell in ws[4]]
    return [dict(zip(heads, (cell.value for cell in row), strict=True)) for row in ws.iter_rows(min_row=5)]


def type_in(file: Path, sheet: str, head: str, value: object, **where: str) -> None:
    """Type a value into the cell under a head, in the row with these texts."""
    book = openpyxl.load_workbook(file)
    ws = book[sheet]
    heads = {str(cell.value): cell.column for cell in ws[4]}
    for row in ws.iter_rows(min_row=5):
        if all(str(row[heads[key] - 1].value) == text for key, text in where.items()):
            ws.cell(row[0].row, heads[head]).value = value  # type: ignore[assignment]
            book.save(file)
            return
    raise AssertionError(f"no row with {where}")


@pytest.mark.parametrize(
    ("cells", "span"),
    [
        ((None, 0.12, None), (0.12, 0.12, 0.12)),
        ((None, "120 mA", None), (0.12, 0.12, 0.12)),
        ((None, "80..150 mA", None), (0.08, 0.115, 0.15)),
        ((0.08, None, 0.15), (0.08, 0.115, 0.15)),
        (("80 mA", 0.1, "0.15 A"), (0.08, 0.1, 0.15)),
        ((None, None, 0.2), (0.2, 0.2, 0.2)),
        ((None, "2 A for 5 ms every 100 ms", None), (0.1, 0.1, 0.1)),
    ],
)
def test_currents_are_read_as_numbers_or_with_units(
    result: Audit, tmp_path: Path, cells: tuple[Any, Any, Any], span: tuple[float, float, float]
) -> None:
    file = fresh(result, tmp_path)
    for head, value in zip(("Type low [A]", "Type nominal [A]", "Type high [A]"), cells, strict=True):
        type_in(file, "Currents", head, value, Part="U5", Rail="+5V")
    (draw,) = read_typed(file).draws
    assert draw.amps is not None
    assert (draw.ref, draw.rail, draw.amps.span.corners) == ("U5", "+5V", pytest.approx(span))
    assert draw.amps.source == "board.xlsx Currents: U5 on +5V"


@pytest.mark.parametrize("text", ["120 ma", "1,500 mA", "<1 A", "-5 mA", "lots", "120"])
def test_a_cell_that_cannot_be_read_is_named_and_nothing_guessed(result: Audit, tmp_path: Path, text: str) -> None:
    file = fresh(result, tmp_path)
    type_in(file, "Currents", "Type nominal [A]", text, Part="U5", Rail="+5V")
    with pytest.raises(InputError, match=r"board\.xlsx: Currents!H\d+:J\d+: "):
        read_typed(file)


def test_typed_currents_close_the_budgets_they_were_missing_for(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    for ref, rail, amps in (("U4", "+5V", "4 mA"), ("U4", "-5V", "3 mA"), ("U5", "+5V", "6 mA")):
        type_in(file, "Currents", "Type nominal [A]", amps, Part=ref, Rail=rail)
    typed = read_typed(file)
    again = audit(BOARD, adjust=typed.applied_to)
    assert again.ledger.gaps == ()
    # +5V: 4 + 6 mA, and the pump's 3 mA with its own 0.5 to 1.2 mA
    total = again.ledger.loads["+5V"].total
    assert total is not None
    assert total.corners == pytest.approx((0.0135, 0.0135, 0.0142))


def test_type_audit_write_audit_is_identical(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    type_in(file, "Currents", "Type nominal [A]", "4..9 mA", Part="U5", Rail="+5V")
    type_in(file, "Currents", "Your note", "logger asleep, see notebook 4", Part="U5", Rail="+5V")
    typed = read_typed(file)
    first = audit(BOARD, adjust=typed.applied_to)
    write_workbook(tmp_path / "next.xlsx", first.ledger, first.settings, typed)
    shutil.copy(tmp_path / "next.xlsx", file)
    second_typed = read_typed(file)
    assert second_typed == typed
    second = audit(BOARD, adjust=second_typed.applied_to)
    assert as_document(second.ledger) == as_document(first.ledger)


def test_a_run_over_an_old_workbook_carries_it_over_and_keeps_it_beside(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    type_in(file, "Currents", "Your note", "ask Ida", Part="U5", Rail="+5V")
    old = file.read_bytes()
    write_workbook(file, result.ledger, result.settings)
    assert (tmp_path / "board.previous.xlsx").read_bytes() == old
    assert list(read_typed(file).notes.values()) == ["ask Ida"]


def test_what_was_typed_for_a_part_that_is_gone_is_listed_not_dropped(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    type_in(file, "Currents", "Type nominal [A]", 0.02, Part="U5", Rail="+5V")
    type_in(file, "Currents", "Identity", "/another-part", Part="U5", Rail="+5V")
    write_workbook(file, result.ledger, result.settings)
    (gone,) = [row for row in rows(file, "Currents") if row["Kind"] == "gone"]
    assert (gone["Part"], gone["Rail"], gone["Type nominal [A]"], gone["Identity"]) == (
        "U5",
        "+5V",
        0.02,
        "/another-part",
    )
    assert [draw.key for draw in read_typed(file).draws] == ["/another-part"]


def test_the_same_input_gives_the_same_bytes(result: Audit, tmp_path: Path) -> None:
    one = fresh(result, tmp_path)
    first = one.read_bytes()
    one.unlink()
    again = audit(BOARD)
    write_workbook(one, again.ledger, again.settings)
    assert one.read_bytes() == first


def test_a_file_that_is_no_workbook_of_ours_is_refused_in_one_line(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    book.save(tmp_path / "other.xlsx")
    with pytest.raises(InputError, match="is no workbook of this program: it has no sheet 'Currents'"):
        read_typed(tmp_path / "other.xlsx")
    (tmp_path / "text.xlsx").write_text("a,b", encoding="utf-8")
    with pytest.raises(InputError, match=r"is no \.xlsx workbook"):
        read_typed(tmp_path / "text.xlsx")


def test_a_bomb_is_refused_by_its_directory(tmp_path: Path) -> None:
    file = tmp_path / "bomb.xlsx"
    with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("[Content_Types].xml", "<Types/>")
        archive.writestr("xl/worksheets/sheet1.xml", b"0" * (80 * 1024 * 1024))
    with pytest.raises(InputError, match="would unpack to 80 MB"):
        read_typed(file)
    with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("[Content_Types].xml", "<Types/>")
        archive.writestr("xl/worksheets/sheet1.xml", b"0" * (8 * 1024 * 1024))
    with pytest.raises(InputError, match="as only bombs are"):
        read_typed(file)
    with zipfile.ZipFile(file, "w") as archive:
        for number in range(1001):
            archive.writestr(f"p{number}", "")
    with pytest.raises(InputError, match="holds 1001 parts"):
        read_typed(file)


def test_an_edited_board_class_is_taken_over_and_chooses_other_figures(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    assert result.settings.board.board_class is BoardClass.LOW
    type_in(file, "Settings", "Value", "2s2p", Setting="Board class")
    settings = read_typed(file).applied_to(result.settings)
    assert (settings.board.board_class, settings.board.source) == (BoardClass.HIGH, "board.xlsx Settings sheet")
    type_in(file, "Settings", "Value", "four layers", Setting="Board class")
    with pytest.raises(InputError, match=r"'four layers' is no board class\. Type one of 1s, 1s\+pour, 2s2p\."):
        read_typed(file)


def test_nothing_typed_reads_as_nothing(result: Audit, tmp_path: Path) -> None:
    assert read_typed(fresh(result, tmp_path)) == Typed(file="board.xlsx")
