"""LibreOffice works every formula of the workbooks out anew: stored values stripped first, then edited cells.

The oracle is outside the project: what the spreadsheet computes must be what the engine computed.
"""

from __future__ import annotations

import re
import shutil
import subprocess
import zipfile
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from conftest import ROOT, need

from analyzer.audit import audit
from analyzer.output.workbook import write_workbook
from analyzer.output.workbook.typed_reading import read_typed

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
    return recalculated_all([file], folder)[0]


def recalculated_all(files: Iterable[Path], folder: Path) -> list[Path]:
    """The same for several workbooks in one run of the program."""
    out = folder / "out"
    stripped = [_stripped(file, folder / f"stripped_{file.name}") for file in files]
    profile = f"-env:UserInstallation=file://{folder}/profile"
    command = [str(need("soffice")), profile, "--headless", "--convert-to", "xlsx", "--outdir", str(out)]
    subprocess.run([*command, *map(str, stripped)], check=True, capture_output=True, timeout=300)
    return [out / file.name for file in stripped]


def _stripped(file: Path, copy: Path) -> Path:
    with zipfile.ZipFile(file) as source, zipfile.ZipFile(copy, "w", zipfile.ZIP_DEFLATED) as target:
        for name in source.namelist():
            data = source.read(name)
            if name.startswith("xl/worksheets/sheet"):
                data = _STORED.sub(r"\1>\2", data.decode("utf-8")).encode("utf-8")
            target.writestr(name, data)
    return copy


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


NEW = ("Type low [A]", "Type nominal [A]", "Type high [A]")


def verdicts(cells: Mapping[tuple[str, str], Any]) -> dict[str, Any]:
    """Part → verdict on the Regulators sheet, whose columns A and T they are."""
    return {cells["Regulators", f"A{row}"]: cells["Regulators", f"T{row}"] for row in (5, 6, 7)}


def current(file: Path, part: str, rail: str, column: str) -> tuple[str, str]:
    return ("Currents", place(file, "Currents", column, Rail=rail, Part=part))


def setting(file: Path, name: str) -> tuple[str, str]:
    return ("Settings", place(file, "Settings", "Value", **{"Name in formulas": name}))


def test_what_no_formula_can_read_leaves_no_verdict_standing(tmp_path: Path) -> None:
    """Before a re-run a typed text counts nothing, so a gap that it fills must not look closed."""
    lamp, bench = written("lane_lamp", tmp_path), written("seedling_bench", tmp_path)
    theta = ("Regulators", place(bench, "Regulators", "θ at sea level [K/W]", Part="U5"))
    low, nominal, high = NEW
    cases: dict[str, tuple[Path, dict[tuple[str, str], Any]]] = {
        "text in a gap": (lamp, {current(lamp, "U2", "+3V3", nominal): "500 mA"}),
        "text over a stated current": (bench, {current(bench, "U3", "+3V3", high): "5 A"}),
        "text beside a number": (
            bench,
            {current(bench, "U3", "+3V3", low): "1 mA", current(bench, "U3", "+3V3", high): 0.002},
        ),
        "negative": (bench, {current(bench, "U6", "+12V", high): -0.09}),
        "setting emptied": (bench, {setting(bench, "Ambient_high"): None}),
        "setting as text": (bench, {setting(bench, "Ambient_high"): "60 °C"}),
        "nominal above the highest": (bench, {setting(bench, "Ambient_nominal"): 80}),
        "θ emptied": (bench, {theta: None}),
        "falling": (
            bench,
            {current(bench, "U3", "+3V3", nominal): 0.5, current(bench, "U3", "+3V3", high): 0.001},
        ),
        "number in a gap": (lamp, {current(lamp, "U2", "+3V3", nominal): 0.5}),
        "number on a regulator": (bench, {current(bench, "U2", "+5V", high): 0.0001}),
    }
    files = []
    for number, (file, edits) in enumerate(cases.values()):
        files.append(edited(file, edits).rename(tmp_path / f"case{number}.xlsx"))
    found = dict(zip(cases, map(values, recalculated_all(files, tmp_path)), strict=True))
    everywhere = [name for name in cases if set(verdicts(found[name]).values()) == {"re-run"}]
    assert everywhere == [
        "text in a gap",
        "text over a stated current",
        "text beside a number",
        "negative",
        "setting emptied",
        "setting as text",
        "nominal above the highest",
    ]
    assert verdicts(found["θ emptied"]) == {"U5": "re-run", "U2": "clear", "U1": "clear"}
    # by hand for U2 with EXPECTED.md: (5.136 − 3.2505) V · 0.509 A · 135 K/W = 129.5 K above 53 °C, limit 115 °C
    assert verdicts(found["falling"])["U2"] == "over"
    assert verdicts(found["number in a gap"])["U1"] == "over"
    # what a regulator takes follows from its output; EXPECTED.md has these three verdicts
    assert verdicts(found["number on a regulator"]) == {"U5": "over", "U2": "clear", "U1": "clear"}


def test_after_a_re_run_typed_text_counts_as_the_engine_read_it(tmp_path: Path) -> None:
    """Text, numbers and both together, typed and taken in: the spreadsheet works out what the engine did."""
    file = written("tide_logger", tmp_path)
    low, nominal, high = NEW
    typed = edited(
        file,
        {
            current(file, "U4", "+5V", nominal): "2 mA for 5 ms every 20 ms, else 1 mA",
            current(file, "U4", "-5V", low): "1 mA",
            current(file, "U4", "-5V", nominal): 0.002,
            current(file, "U4", "-5V", high): "0.003 A",
            current(file, "U5", "+5V", high): "30 mW",
        },
    )
    found = read_typed(typed)
    again = audit(ROOT / "fixture_boards" / "tide_logger", adjust=found.applied_to)
    target = tmp_path / "again.xlsx"
    assert write_workbook(target, again.ledger, again.settings, found) is False
    theirs = values(recalculated(target, tmp_path))
    assert differing(formulas(target), values(target), theirs) == []
    assert "re-run" not in verdicts(theirs).values()


def sunk(folder: Path) -> Path:
    """The tide logger with its pump on a heat sink, whose resistance follows its own rise: no formula does."""
    board = Path(shutil.copytree(ROOT / "fixture_boards" / "tide_logger", folder / "tide_logger"))
    settings = board / "heatledger.toml"
    sink = '{ theta_jc = "20 K/W", theta_cs = "1 K/W", theta_sa = "180 K/W" }'
    settings.write_text(settings.read_text(encoding="utf-8") + f"\n[parts.U3]\nheat_sink = {sink}\n", encoding="utf-8")
    return board


def all_typed(board: Path, folder: Path) -> Path:
    """The board with every missing current typed and taken in: three budgets that are clear."""
    result, file = audit(board), folder / "open.xlsx"
    write_workbook(file, result.ledger, result.settings)
    _, nominal, _ = NEW
    typed = edited(
        file,
        {
            current(file, "U4", "+5V", nominal): 0.001,
            current(file, "U4", "-5V", nominal): 0.003,
            current(file, "U5", "+5V", nominal): 0.005,
        },
    )
    found = read_typed(typed)
    again = audit(board, adjust=found.applied_to)
    target = folder / "closed.xlsx"
    write_workbook(target, again.ledger, again.settings, found)
    return target


def test_what_feeds_a_part_that_no_formula_follows_says_re_run_with_it(tmp_path: Path) -> None:
    """The pump U3 is no formula: with more load on -5V nobody may read an old verdict of U2 and U1, which feed it."""
    board = sunk(tmp_path)
    file = all_typed(board, tmp_path)
    _, nominal, _ = NEW
    more, less = (
        edited(file, {current(file, "U4", rail, nominal): amps}).rename(tmp_path / f"{amps}.xlsx")
        for rail, amps in (("-5V", 0.13), ("+5V", 0.002))
    )
    before, pumped, other = map(values, recalculated_all([file, more, less], tmp_path))
    assert verdicts(before) == {"U3": "clear", "U2": "clear", "U1": "clear"}
    assert set(verdicts(pumped).values()) == {"re-run"}
    # the engine's own word for it, after the re-run: all three are over
    fresh = audit(board, adjust=read_typed(more).applied_to).ledger
    assert {entry.ref: entry.verdict.value for entry in fresh.entries} == dict.fromkeys(("U1", "U2", "U3"), "over")
    # a load that formulas follow leaves the pump's budget as it is
    assert verdicts(other) == verdicts(before)


def test_a_part_that_carries_a_share_of_its_rail_takes_its_share(tmp_path: Path) -> None:
    board = Path(shutil.copytree(ROOT / "fixture_boards" / "seedling_bench", tmp_path / "board"))
    settings = board / "heatledger.toml"
    settings.write_text(settings.read_text(encoding="utf-8") + "\n[parts.U2]\nshare = 0.5\n", encoding="utf-8")
    result, file = audit(board), tmp_path / "share.xlsx"
    write_workbook(file, result.ledger, result.settings)
    changed = edited(file, {current(file, "U3", "+3V3", NEW[2]): 0.5}).rename(tmp_path / "changed.xlsx")
    as_written, after = map(values, recalculated_all([file, changed], tmp_path))
    assert differing(formulas(file), values(file), as_written) == []
    # by hand: half of 500 + 9 mA, and the 95 µA it needs itself
    drawn = after["Currents", place(file, "Currents", "Counts as [A]", Rail="+5V", Part="U2")]
    assert drawn == pytest.approx(0.2545 + 95e-6, rel=CLOSE)
