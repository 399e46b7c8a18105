"""LibreOffice works every formula of the workbooks out anew: stored values stripped first, then edited cells.

The oracle is outside the project: what the spreadsheet computes must be what the engine computed.
"""

from __future__ import annotations

import re
import subprocess
import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from conftest import ROOT, need

from analyzer.audit import audit
from analyzer.output.workbook import write_workbook
from analyzer.output.workbook.typed import read_typed

pytestmark = pytest.mark.outside

BOARDS = ("seedling_bench", "lane_lamp", "tide_logger")
CLOSE = 1e-9
_STORED = re.compile(r'(<c [^>]*?)(?: t="str")?>(<f>.*?</f>)<v>.*?</v>')


def written(board: str, folder: Path) -> Path:
    """The workbook of a fixture board."""
    result = audit(ROOT / "fixture_boards" / board)
    file = folder / f"{board}.xlsx"
    write_workbook(file, result.ledger, result.settings)
    return file


def recalculated(file: Path, folder: Path) -> Path:
    """The workbook after LibreOffice has worked out every formula, from a copy without stored results."""
    stripped, out = folder / f"stripped_{file.name}", folder / "out"
    with zipfile.ZipFile(file) as source, zipfile.ZipFile(stripped, "w", zipfile.ZIP_DEFLATED) as target:
        for name in source.namelist():
            data = source.read(name)
            if name.startswith("xl/worksheets/sheet"):
                data = _STORED.sub(r"\1>\2", data.decode("utf-8")).encode("utf-8")
            target.writestr(name, data)
    profile = f"-env:UserInstallation=file://{folder}/profile"
    command = [str(need("soffice")), profile, "--headless", "--convert-to", "xlsx", "--outdir", str(out), str(stripped)]
    subprocess.run(command, check=True, capture_output=True, timeout=180)
    return out / stripped.name


def values(file: Path) -> dict[tuple[str, str], Any]:
    """Every cell's value, empty text as None."""
    book = openpyxl.load_workbook(file, data_only=True)
    return {
        (sheet.title, cell.coordinate): None if cell.value == "" else cell.value
        for sheet in book
        for row in sheet.iter_rows()
        for cell in row
    }


def formulas(file: Path) -> list[tuple[str, str]]:
    """Every cell that holds a formula."""
    book = openpyxl.load_workbook(file)
    return [
        (sheet.title, cell.coordinate)
        for sheet in book
        for row in sheet.iter_rows()
        for cell in row
        if isinstance(cell.value, str) and cell.value.startswith("=")
    ]


def differing(cells: list[tuple[str, str]], ours: Mapping[Any, Any], theirs: Mapping[Any, Any]) -> list[str]:
    """Cells whose two values are not the same text, nor the same number to 1e-9."""
    found = []
    for cell in cells:
        a, b = ours.get(cell), theirs.get(cell)
        both = isinstance(a, (int, float)) and isinstance(b, (int, float))
        if a != b and not (both and abs(a - b) <= CLOSE * max(abs(a), abs(b), 1e-6)):
            found.append(f"{cell}: {a!r} is {b!r}")
    return found


@pytest.mark.parametrize("board", BOARDS)
def test_every_stored_result_is_what_the_spreadsheet_computes(board: str, tmp_path: Path) -> None:
    file = written(board, tmp_path)
    cells = formulas(file)
    assert len(cells) > 60
    theirs = values(recalculated(file, tmp_path))
    assert not [cell for cell in cells if str(theirs.get(cell)).startswith(("#", "Err:"))]
    assert differing(cells, values(file), theirs) == []


def edited(file: Path, edits: Mapping[tuple[str, str], Any]) -> Path:
    """A copy with cells typed into, as a person would."""
    book = openpyxl.load_workbook(file)
    for (sheet, cell), value in edits.items():
        book[sheet][cell] = value
    target = file.with_name(f"edited_{file.name}")
    book.save(target)
    return target


def place(file: Path, sheet: str, column: str, **where: str) -> str:
    """Coordinate of a cell by column head and the texts of other cells in its row."""
    ws = openpyxl.load_workbook(file)[sheet]
    heads = {str(cell.value): cell.column for cell in ws[4]}
    for row in ws.iter_rows(min_row=5):
        if all(str(row[heads[head] - 1].value) == text for head, text in where.items()):
            return str(ws.cell(row[0].row, heads[column]).coordinate)
    raise AssertionError(f"no row {where} on {sheet}")


@pytest.mark.parametrize("board", BOARDS)
def test_edits_recalculate_to_what_a_fresh_engine_run_gives(board: str, tmp_path: Path) -> None:
    file = written(board, tmp_path)
    part, rail, drawer = {
        "seedling_bench": ("U2", "+3V3", "U3"),
        "lane_lamp": ("U1", "+3V3", "U2"),
        "tide_logger": ("U2", "+5V", "U5"),
    }[board]
    edits: dict[tuple[str, str], Any] = {
        ("Settings", place(file, "Settings", "Value", **{"Name in formulas": "Ambient_high"})): 52.5,
        ("Settings", place(file, "Settings", "Value", **{"Name in formulas": "Altitude_high"})): 1850,
        ("Currents", place(file, "Currents", "Type high [A]", Rail=rail, Part=drawer)): 0.021,
        ("Regulators", place(file, "Regulators", "θ at sea level [K/W]", Part=part)): 71.5,
    }
    changed = edited(file, edits)
    theirs = values(recalculated(changed, tmp_path))
    typed = read_typed(changed)
    assert typed.thetas == {part: 71.5}
    fresh = audit(ROOT / "fixture_boards" / board, adjust=typed.applied_to).ledger
    for entry in fresh.entries:
        assert entry.worst is not None
        if theirs["Regulators", place(file, "Regulators", "Model", Part=entry.ref)] == "engine":
            # what no formula follows must not keep a verdict that the edits may have changed
            assert theirs["Regulators", place(file, "Regulators", "Verdict", Part=entry.ref)] == "re-run"
            continue
        columns = {
            "Heat [W]": entry.worst.watts,
            "θ used [K/W]": entry.worst.theta,
            "Air [°C]": entry.worst.ambient,
            "Junction worst [°C]": entry.worst.junction,
            "Margin [K]": entry.margin,
            "Verdict": entry.verdict.value,
        }
        for head, value in columns.items():
            cell = ("Regulators", place(file, "Regulators", head, Part=entry.ref))
            shown = theirs[cell]
            assert shown == (pytest.approx(value, rel=CLOSE) if isinstance(value, float) else value), (entry.ref, head)
    for name, load in fresh.loads.items():
        if name in {rail.name for rail in fresh.rails if not rail.is_ground}:
            shown = theirs["Rails", place(file, "Rails", "Known load high [A]", Rail=name)]
            assert shown == pytest.approx(load.known.high, rel=CLOSE), name


def test_another_board_class_makes_every_verdict_a_matter_of_a_re_run(tmp_path: Path) -> None:
    file = written("seedling_bench", tmp_path)
    cell = place(file, "Settings", "Value", **{"Name in formulas": "Board_class"})
    theirs = values(recalculated(edited(file, {("Settings", cell): "2s2p"}), tmp_path))
    for part in ("U1", "U2", "U5"):
        assert theirs["Regulators", place(file, "Regulators", "Verdict", Part=part)] == "re-run"
