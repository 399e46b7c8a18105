"""How the sheets look on paper: what a reader must find there, row by row, and nothing cut."""

from __future__ import annotations

import hashlib
import zipfile
from dataclasses import replace
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from conftest import ROOT
from test_workbook_round_trip import rows, type_in
from xlsxwriter.worksheet import Worksheet

from analyzer.audit import Audit, audit
from analyzer.circuit import InputFile
from analyzer.errors import InputError
from analyzer.output.workbook import write_workbook
from analyzer.output.workbook.layout import lines_of
from analyzer.output.workbook.typed_reading import read_typed

BOARDS = ROOT / "fixture_boards"


@pytest.fixture(scope="module")
def lamp() -> Audit:
    return audit(BOARDS / "lane_lamp")


@pytest.fixture
def book(lamp: Audit, tmp_path: Path) -> Any:
    write_workbook(tmp_path / "lamp.xlsx", lamp.ledger, lamp.settings)
    return openpyxl.load_workbook(tmp_path / "lamp.xlsx")


@pytest.mark.parametrize(
    ("text", "width", "lines"),
    [
        ("", 10, 1),
        ("ten chars.", 10, 1),
        ("ten chars. and", 10, 2),
        ("aaaa bbbb cccc", 9, 2),
        ("aaaa bbbbb cccc", 9, 3),
        ("/Power/DC{slash}DC/MAIN_BUS", 9, 3),
        ("on /Power/DC{slash}DC/MAIN_BUS", 9, 4),
        ("abcdefghij kl", 10, 2),
    ],
)
def test_lines_are_counted_as_spreadsheets_break_them(text: str, width: int, lines: int) -> None:
    assert lines_of(text, width) == lines


def test_every_sheet_prints_across_a_page_with_heads_and_footer(book: Any) -> None:
    titles = "Summary|Settings|Regulators|Rails|Currents|Remedies|Evidence|Findings|Not understood|Charts"
    assert book.sheetnames == titles.split("|")
    for sheet in book:
        assert (sheet.page_setup.orientation, sheet.page_setup.paperSize) == ("landscape", 9)
        assert sheet.sheet_properties.pageSetUpPr.fitToPage
        # absent is 1, the default: a chart cut by a page break cannot be read
        assert sheet.page_setup.fitToHeight == (None if sheet.title == "Charts" else 0)
        assert sheet.print_title_rows == (None if sheet.title == "Summary" else "$4:$4")
        assert sheet.oddFooter.center.text == "&A"
        assert sheet.oddFooter.right.text == "Page &P of &N"


def test_the_footers_hash_changes_with_any_input(lamp: Audit, tmp_path: Path) -> None:
    file, found = tmp_path / "a&b.xlsx", []
    last = lamp.ledger.inputs[-1]
    for inputs in (lamp.ledger.inputs, (*lamp.ledger.inputs[:-1], InputFile(last.path, "0" * 64)), ()):
        write_workbook(file, replace(lamp.ledger, inputs=inputs), lamp.settings)
        found.append(openpyxl.load_workbook(file)["Rails"].oddFooter.left.text)
    told = "".join(f"{one.sha256}  {one.path}\n" for one in lamp.ledger.inputs)
    digest = hashlib.sha256(told.encode()).hexdigest()
    # an ampersand begins a code in a footer and is doubled
    assert found[0] == f"a&&b.xlsx  inputs {digest[:12]}"
    assert found[1] != found[0]
    assert found[2] == "a&&b.xlsx  no inputs"
    write_workbook(file, lamp.ledger, lamp.settings)
    cells = {row[1].value: row[2].value for row in openpyxl.load_workbook(file)["Summary"].iter_rows()}
    assert cells["all of them together, as in the footer"] == digest
    assert cells[last.path] == last.sha256


def test_the_summary_says_what_could_not_be_read_and_that_nothing_was_found(lamp: Audit, tmp_path: Path) -> None:
    empty = replace(lamp.ledger, entries=(), complete=False, gaps=(), loads={}, rails=(), findings=())
    write_workbook(tmp_path / "empty.xlsx", empty, lamp.settings)
    told = {
        row[0].value: row[1].value for row in openpyxl.load_workbook(tmp_path / "empty.xlsx")["Summary"].iter_rows()
    }
    assert told["INCOMPLETE"] == "part of the drawing could not be read; no part can be clear"
    assert told["NO REGULATORS FOUND"] == "nothing was budgeted"
    assert told["Worst part"] == "none known"


def test_a_diode_in_the_feed_is_no_regulator(book: Any) -> None:
    sheet = book["Currents"]
    kinds = [(row[0].value, row[1].value, row[3].value) for row in sheet.iter_rows(min_row=5)]
    assert kinds[:3] == [("+12V_IN", "D1", "passage"), ("+12V_IN", "D1", "gap below"), ("+12V", "U1", "regulator")]


def test_missing_figures_are_short_where_a_row_would_fill_the_page(lamp: Audit, tmp_path: Path) -> None:
    file = tmp_path / "lamp.xlsx"
    long = "efficiency, or for its loss terms: " + ", ".join(f"figure {n} of the part" for n in range(30))
    first, *others = lamp.ledger.entries
    ledger = replace(lamp.ledger, entries=(replace(first, missing=(long, "junction limit", "θJA")), *others))
    write_workbook(file, ledger, lamp.settings)
    sheet = openpyxl.load_workbook(file)["Regulators"]
    (told,) = [row["Missing"] for row in rows(file, "Regulators") if row["Part"] == first.ref]
    assert told.endswith(" … (and 2 more, see Findings)")
    assert len(told) < 125
    assert sheet.row_dimensions[5].height <= 3 * 15


def test_settings_have_no_units_to_mistake_for_figures_and_say_how_to_type(lamp: Audit, tmp_path: Path) -> None:
    file = tmp_path / "lamp.xlsx"
    write_workbook(file, lamp.ledger, lamp.settings)
    units = {row["Name in formulas"]: row["Unit"] for row in rows(file, "Settings") if row["Name in formulas"]}
    assert [name for name, unit in units.items() if unit is None][:3] == [
        "Altitude_exponent",
        "Policy_factor",
        "Policy_current",
    ]
    (cap,) = [row for row in rows(file, "Settings") if row["Name in formulas"] == "Policy_cap"]
    assert (cap["Value"], cap["Source"]) == (
        1000,
        "policy house: house policy; no greatest temperature, for which 1000 stands",
    )
    type_in(file, "Settings", "Value", "half", Setting="Policy limit: fraction of rating")
    type_in(file, "Settings", "Value", "60 °C", Setting="Ambient, highest")
    with pytest.raises(InputError) as refused:
        read_typed(file)
    assert [fault.remedy for fault in refused.value.faults] == ["Type it in °C, without the unit.", "Type a number."]


def test_evidence_of_a_class_has_no_figures(lamp: Audit, tmp_path: Path) -> None:
    write_workbook(tmp_path / "lamp.xlsx", lamp.ledger, lamp.settings)
    classes = [
        row for row in rows(tmp_path / "lamp.xlsx", "Evidence") if str(row["Quantity"]).startswith("board class")
    ]
    assert len(classes) == 3
    assert {(row["Low"], row["Nominal"], row["High"], row["Unit"]) for row in classes} == {(None,) * 4}


def chart_texts(file: Path) -> list[str]:
    with zipfile.ZipFile(file) as archive:
        names = sorted(name for name in archive.namelist() if name.startswith("xl/charts/chart"))
        return [archive.read(name).decode("utf-8") for name in names]


def test_charts_follow_the_sheets_and_differ_without_colour(lamp: Audit, tmp_path: Path) -> None:
    file = tmp_path / "lamp.xlsx"
    write_workbook(file, lamp.ledger, lamp.settings)
    junction, heat, margins = chart_texts(file)
    for text, parts in (
        (junction, ("Regulators!$P$5:$P$7", "Regulators!$O$5:$O$7", "Regulators!$R$5:$R$7", 'prstDash val="dash"')),
        (heat, ("Regulators!$K$5:$K$7", "Heat at the worst corner [W]")),
        (margins, ("Charts!$A$5:$A$14", "Charts!$B$5:$B$14", "Charts!$C$5:$C$14", "Charts!$D$5:$D$14")),
    ):
        assert [part for part in parts if part not in text] == []
    # each line has its own marker, and all but the solid one their own dashes
    assert [mark for mark in ("circle", "square", "triangle") if f'symbol val="{mark}"' in margins] == [
        "circle",
        "square",
        "triangle",
    ]
    assert ('prstDash val="dash"' in margins, 'prstDash val="sysDot"' in margins) == (True, True)
    sheet = openpyxl.load_workbook(file, data_only=True)["Charts"]
    assert [cell.value for cell in sheet[4]][:4] == [
        "Ambient [°C]",
        "U1: margin [K]",
        "U101: margin [K]",
        "U201: margin [K]",
    ]
    # at 60 °C EXPECTED.md has 14.175 K for U101, and a kelvin of ambient is one of margin
    assert [sheet.cell(row, 3).value for row in (5, 11, 14)] == pytest.approx([74.175, 14.175, -15.825], abs=1e-3)


def test_with_nothing_to_draw_the_charts_sheet_says_so(lamp: Audit, tmp_path: Path) -> None:
    bare = tuple(replace(entry, worst=None, nominal=None, live={}) for entry in lamp.ledger.entries)
    file = tmp_path / "bare.xlsx"
    write_workbook(file, replace(lamp.ledger, entries=bare), lamp.settings)
    sheet = openpyxl.load_workbook(file)["Charts"]
    assert [cell.value for row in sheet.iter_rows() for cell in row if cell.value is not None] == [
        "Charts",
        "No part's margin is a formula: where input, load or θ is missing there is nothing to draw.",
    ]
    assert chart_texts(file) == []


def test_a_part_with_a_junction_and_no_formula_is_drawn_without_a_line(lamp: Audit, tmp_path: Path) -> None:
    tables = tuple(replace(entry, live={**entry.live, "closed_form": 0.0}) for entry in lamp.ledger.entries)
    file = tmp_path / "tables.xlsx"
    write_workbook(file, replace(lamp.ledger, entries=tables), lamp.settings)
    assert len(chart_texts(file)) == 2


def test_remedies_and_unknown_parts_have_their_rows(lamp: Audit, tmp_path: Path) -> None:
    file = tmp_path / "lamp.xlsx"
    one = next(entry for entry in lamp.ledger.entries if entry.ref == "U101")
    told = ("U9 QZ7: pins: input, output and ground or adjust", "=U8 QZ8: its description says power-mux")
    ledger = replace(lamp.ledger, entries=(replace(one, chance=(0.0123, 61.04, 99.96)),), not_understood=told)
    write_workbook(file, ledger, lamp.settings)
    found = [(row["Kind"], row["What the numbers say (none is a promise)"]) for row in rows(file, "Remedies")]
    # by hand: (60 − 20) K of ambient, and 92 K/W times what the nominal input or load spares, as in EXPECTED.md
    assert found[-4:] == [
        ("sensitivity", "ambient at its nominal instead of its worst lowers the junction by 40.0 K"),
        ("sensitivity", "input voltage at its nominal instead of its worst lowers the junction by 15.6 K"),
        ("sensitivity", "load at its nominal instead of its worst lowers the junction by 8.0 K"),
        (
            "uncertainty",
            "chance of exceeding the limit 1.2%; junction 61.0 to 100.0 °C (5 to 95 %), triangular over each span, "
            "inputs independent",
        ),
    ]
    assert [row["Part and why"] for row in rows(file, "Not understood")] == list(told)


def test_a_file_of_somebody_else_is_kept_beside_the_new_one(lamp: Audit, tmp_path: Path) -> None:
    file = tmp_path / "lamp.xlsx"
    openpyxl.Workbook().save(file)
    other = file.read_bytes()
    assert write_workbook(file, lamp.ledger, lamp.settings) is False
    assert (tmp_path / "lamp.previous.xlsx").read_bytes() == other
    assert openpyxl.load_workbook(file).sheetnames[0] == "Summary"


@pytest.mark.parametrize(("epoch", "day"), [("1788480000", (2026, 9, 4)), ("soon", (1980, 1, 1))])
def test_the_files_date_is_the_builds_or_a_fixed_one(
    lamp: Audit, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, epoch: str, day: tuple[int, int, int]
) -> None:
    monkeypatch.setenv("SOURCE_DATE_EPOCH", epoch)
    write_workbook(tmp_path / "lamp.xlsx", lamp.ledger, lamp.settings)
    created = openpyxl.load_workbook(tmp_path / "lamp.xlsx").properties.created
    assert created is not None
    assert (created.year, created.month, created.day) == day


def test_formulas_are_written_as_the_library_itself_would(
    lamp: Audit, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    one, two = tmp_path / "one" / "lamp.xlsx", tmp_path / "two" / "lamp.xlsx"
    one.parent.mkdir()
    two.parent.mkdir()
    write_workbook(one, lamp.ledger, lamp.settings)
    monkeypatch.setattr("analyzer.output.workbook.worksheet.PlainWorksheet", Worksheet)
    write_workbook(two, lamp.ledger, lamp.settings)
    assert one.read_bytes() == two.read_bytes()
