"""The combined workbook of an archive: every cell of it, with figures worked by hand in the boards' EXPECTED.md."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from conftest import ROOT

from analyzer.archive.work import Job, Outcome, work
from analyzer.errors import OutputError
from analyzer.output.workbook.combined import write_combined

BOARDS = ROOT / "fixture_boards"
BROKEN = Outcome("=broken\x1b[2J/x", 3, fault="x.kicad_sch: NUL byte at byte 3.\nThe file is damaged")


@pytest.fixture(scope="module")
def outcomes(tmp_path_factory: pytest.TempPathFactory) -> list[Outcome]:
    """Of the lamp and the bench, as the archive's workers give them."""
    out = tmp_path_factory.mktemp("out")
    found = [work(Job(BOARDS / name, f"{name}/{name}", out / name)) for name in ("seedling_bench", "lane_lamp")]
    assert [outcome.fault for outcome in found] == ["", ""]
    return found


def ledgers(outcomes: list[Outcome]) -> list[tuple[Outcome, dict[str, Any]]]:
    return [(one, json.loads(Path(one.ledger_file).read_text(encoding="utf-8"))) for one in outcomes]


def sheets(file: Path) -> dict[str, list[tuple[Any, ...]]]:
    book = openpyxl.load_workbook(file)
    return {sheet.title: [tuple(cell.value for cell in row) for row in sheet.iter_rows()] for sheet in book}


def near(*row: object) -> tuple[object, ...]:
    """A row whose numbers were worked by hand to five digits or three decimals."""
    return tuple(pytest.approx(cell, rel=2e-5, abs=6e-4) if isinstance(cell, float) else cell for cell in row)


def test_every_cell_of_the_combined_workbook(outcomes: list[Outcome], tmp_path: Path) -> None:
    file = tmp_path / "archive.xlsx"
    write_combined(file, [BROKEN, *outcomes], ledgers(outcomes), ["lane_lamp U1 /: clear, was open", "=1+1"])
    found = sheets(file)
    assert list(found) == ["Boards", "Entries", "Gaps", "Changes"]
    bench, lamp = "seedling_bench/seedling_bench", "lane_lamp/lane_lamp"
    heads = "Board|Worst margin [K]|Bound|Part|Over|Open|Tight|Clear|Gaps|Exit status|Fault"
    fault = "x.kicad_sch: NUL byte at byte 3.\nThe file is damaged"
    assert found["Boards"] == [
        tuple(heads.split("|")),
        ("=broken␛[2J/x", None, None, None, 0, 0, 0, 0, 0, 3, fault),
        near(bench, -94.626, None, "U5", 1, 0, 0, 2, 0, 5, None),
        # what U1 of the lamp may carry is not known, but the lamp's smallest margin is of a part with all its currents
        near(lamp, 14.175, None, "U101", 0, 1, 2, 0, 1, 0, None),
    ]
    heads = "Board|Part|Sheet|Part number|Kind|Rail|Heat worst [W]|θ [K/W]|Air [°C]|Junction worst [°C]|Limit [°C]"
    channel = ("QXL2150-5.0", "linear")
    assert found["Entries"] == [
        (*heads.split("|"), "Margin [K]", "Bound", "Verdict", "Grade"),
        # 110, 130 and 95 K/W with the multiplier of 450 m, 1.038251
        near(
            bench,
            "U5",
            "/",
            "QXA40",
            "linear-floating",
            "+12V",
            1.371413,
            114.20761,
            53,
            209.626,
            115,
            -94.626,
            None,
            "over",
            "derived",
        ),
        near(
            bench,
            "U2",
            "/",
            "QXL2133-3.3",
            "linear",
            "+3V3",
            0.149418,
            134.97263,
            53,
            73.167,
            115,
            41.833,
            None,
            "clear",
            "derived",
        ),
        near(
            bench,
            "U1",
            "/",
            "QXB2405",
            "buck",
            "+5V",
            0.156032,
            98.633845,
            53,
            68.390,
            115,
            46.610,
            None,
            "clear",
            "presumed",
        ),
        near(
            lamp,
            "U1",
            "/",
            "QXL2133-3.3",
            "linear",
            "+3V3",
            0.001501,
            130,
            60,
            60.195,
            115,
            54.805,
            "at most",
            "open",
            "presumed",
        ),
        near(
            lamp,
            "U101",
            "/Left/",
            *channel,
            "/Left/V5",
            0.443751,
            92,
            60,
            100.825,
            115,
            14.175,
            None,
            "tight",
            "presumed",
        ),
        near(
            lamp,
            "U201",
            "/Right/",
            *channel,
            "/Right/V5",
            0.443751,
            92,
            60,
            100.825,
            115,
            14.175,
            None,
            "tight",
            "presumed",
        ),
    ]
    # the gaps that somebody must close, and not those of D1 and U1 that close with them
    assert found["Gaps"] == [("Board", "Part", "Value", "Sheet", "Rail"), (lamp, "U2", "LAMP-CTL", "/", "+3V3")]
    assert found["Changes"] == [("Change",), ("lane_lamp U1 /: clear, was open",), ("=1+1",)]
    cells = [cell for sheet in openpyxl.load_workbook(file) for row in sheet.iter_rows() for cell in row]
    assert {cell.data_type for cell in cells} == {"s", "n"}


def test_it_prints_with_heads_and_filters_on_every_sheet(outcomes: list[Outcome], tmp_path: Path) -> None:
    file = tmp_path / "archive.xlsx"
    write_combined(file, outcomes, ledgers(outcomes), [])
    book = openpyxl.load_workbook(file)
    setup = {
        sheet.title: (sheet.page_setup.orientation, sheet.page_setup.fitToHeight, sheet.print_title_rows)
        for sheet in book
    }
    assert set(setup.values()) == {("landscape", 0, "$1:$1")}
    assert [sheet.auto_filter.ref for sheet in book] == ["A1:K3", "A1:O7", "A1:E2", "A1:A2"]
    assert [sheet.freeze_panes for sheet in book] == ["B2"] * 4
    formats = {cell.value: book["Entries"].cell(2, cell.column).number_format for cell in book["Entries"][1]}
    assert (formats["Heat worst [W]"], formats["Margin [K]"]) == ("0.0000", "0.0")


def test_the_same_archive_gives_the_same_bytes_and_no_boards_a_workbook_too(
    outcomes: list[Outcome], tmp_path: Path
) -> None:
    one, two = tmp_path / "one.xlsx", tmp_path / "two.xlsx"
    for file in (one, two):
        write_combined(file, outcomes, ledgers(outcomes), [])
    assert one.read_bytes() == two.read_bytes()
    write_combined(one, [], [], [])
    assert [len(rows) for rows in sheets(one).values()] == [1, 1, 1, 1]


def test_parts_not_fitted_and_without_a_budget_have_their_row(outcomes: list[Outcome], tmp_path: Path) -> None:
    ((bench, document), _) = ledgers(outcomes)
    fitted = document["entries"][0]
    unfitted = fitted | {"fitted": False, "ref": "U7"}
    nothing = dict.fromkeys(
        ("dissipation_watts", "theta_k_per_w", "ambient_celsius", "junction_celsius", "limit_celsius", "margin_kelvin")
    )
    unknown = fitted | nothing | {"ref": "U8", "missing": ["input voltage"], "verdict": "open"}
    file = tmp_path / "archive.xlsx"
    write_combined(
        file, [replace(bench, worst_is_bound=True)], [(bench, document | {"entries": [unfitted, unknown]})], []
    )
    found = sheets(file)
    assert found["Boards"][1][:4] == near(bench.label, -94.626, "at most", "U5")
    assert [(row[1], row[6:]) for row in found["Entries"][1:]] == [
        ("U7", near(1.371413, 114.20761, 53, 209.626, 115, -94.626, None, "not fitted", "derived")),
        ("U8", (*[None] * 7, "open", "derived")),
    ]


def test_a_folder_that_is_not_there_is_told(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="its folder does not exist"):
        write_combined(tmp_path / "no" / "archive.xlsx", [], [], [])
