"""The combined workbook of an archive: boards ranked by worst margin, all entries, all gaps.

Rows are written as they are read (constant memory), so each sheet is filled strictly downwards.
"""

from __future__ import annotations

import io
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import Any

from analyzer.archive.work import Outcome
from analyzer.output.atomic import write_bytes
from analyzer.output.workbook.layout import PAPER_A4, Book, Column, Sheet, plain

BOARDS = (
    Column("Board", 40),
    Column("Worst margin [K]", 10, "kelvin"),
    Column("Bound", 9),
    Column("Part", 9),
    Column("Over", 7, "count"),
    Column("Open", 7, "count"),
    Column("Tight", 7, "count"),
    Column("Clear", 7, "count"),
    Column("Gaps", 7, "count"),
    Column("Exit status", 8, "count"),
    Column("Fault", 60, "wrap"),
)
ENTRIES = (
    Column("Board", 34),
    Column("Part", 8),
    Column("Sheet", 12, "wrap"),
    Column("Part number", 18, "wrap"),
    Column("Kind", 12, "wrap"),
    Column("Rail", 16, "wrap"),
    Column("Heat worst [W]", 9, "watts"),
    Column("θ [K/W]", 8, "kelvin"),
    Column("Air [°C]", 8, "kelvin"),
    Column("Junction worst [°C]", 9, "kelvin"),
    Column("Limit [°C]", 8, "kelvin"),
    Column("Margin [K]", 8, "kelvin"),
    Column("Bound", 9),
    Column("Verdict", 10),
    Column("Grade", 10),
)
GAPS = (
    Column("Board", 40),
    Column("Part", 9),
    Column("Value", 28, "wrap"),
    Column("Sheet", 20, "wrap"),
    Column("Rail", 24, "wrap"),
)
CHANGES = (Column("Change", 120, "wrap"),)
AT_MOST = "at most"
"""Beside a margin that something missing can only make smaller."""


def write_combined(
    file: Path, ranked: Sequence[Outcome], ledgers: Iterable[tuple[Outcome, dict[str, Any]]], changes: Sequence[str]
) -> None:
    """Write the combined workbook.

    Args:
        file: Where to.
        ranked: Boards, worst first.
        ledgers: (outcome, its ledger in the machine-readable contract), read lazily in the same order.
        changes: Lines of the comparison with an earlier run.

    Raises:
        OutputError: If the file cannot be written.
    """
    import datetime

    import xlsxwriter

    buffer = io.BytesIO()
    book = xlsxwriter.Workbook(
        buffer, {"constant_memory": True, "strings_to_formulas": False, "strings_to_urls": False}
    )
    # a fixed date keeps the same input at the same bytes
    book.set_properties({"title": "heatledger archive", "created": datetime.datetime(1980, 1, 1)})
    forms = Book(book, "")
    tables = (("Boards", BOARDS), ("Entries", ENTRIES), ("Gaps", GAPS), ("Changes", CHANGES))
    sheets = {name: _Down(forms, name, columns) for name, columns in tables}
    for outcome in ranked:
        counts = dict(outcome.counts)
        words = [counts.get(word, 0) for word in ("over", "open", "tight", "clear")]
        sheets["Boards"].row(
            outcome.label,
            outcome.worst_margin,
            AT_MOST if outcome.worst_is_bound else "",
            outcome.worst_part,
            *words,
            outcome.gaps,
            outcome.status,
            outcome.fault,
        )
    for outcome, document in ledgers:
        for entry in document["entries"]:
            sheets["Entries"].row(outcome.label, *_entry(entry))
        for gap in document["gaps"]:
            if not gap["follows"]:
                sheets["Gaps"].row(outcome.label, gap["ref"], gap["value"], gap["sheet"], gap["rail"])
    for change in changes:
        sheets["Changes"].row(change)
    for sheet in sheets.values():
        sheet.close()
    book.close()
    write_bytes(file, buffer.getvalue())


def _entry(entry: dict[str, Any]) -> Iterator[object]:
    yield from (entry["ref"], entry["sheet"], entry["part"], entry["kind"])
    yield ", ".join(dict.fromkeys(output["rail"] for output in entry["outputs"]))
    yield entry["dissipation_watts"] and entry["dissipation_watts"][1]
    yield from (entry["theta_k_per_w"], entry["ambient_celsius"])
    yield entry["junction_celsius"] and entry["junction_celsius"][1]
    yield from (entry["limit_celsius"], entry["margin_kelvin"])
    yield AT_MOST if entry["missing"] and entry["margin_kelvin"] is not None else ""
    yield entry["verdict"] if entry["fitted"] else "not fitted"
    yield entry["grade"]


class _Down:
    """A worksheet filled row by row; text is always written as text, never as a formula."""

    def __init__(self, forms: Book, name: str, columns: Sequence[Column]) -> None:
        self.forms = forms
        self.columns = columns
        self.last = 0
        self.sheet = forms.book.add_worksheet(name)
        self.sheet.set_landscape()
        self.sheet.set_paper(PAPER_A4)
        self.sheet.fit_to_pages(1, 0)
        self.sheet.repeat_rows(0)
        self.sheet.freeze_panes(1, 1)
        self.sheet.set_footer("&L&F&C&A&RPage &P of &N")
        for number, column in enumerate(columns):
            self.sheet.set_column(number, number, column.width)
            self.sheet.write_string(0, number, column.head, forms.form("head"))

    def row(self, *cells: object) -> None:
        """The next row."""
        self.last += 1
        for number, (column, cell) in enumerate(zip(self.columns, cells, strict=True)):
            form = self.forms.form(column.form)
            if isinstance(cell, (int, float)):
                self.sheet.write_number(self.last, number, cell, form)
            elif cell:
                self.sheet.write_string(self.last, number, plain(str(cell)), form)

    def close(self) -> None:
        """Filters over all rows, and colours that follow the verdict's word."""
        last = max(self.last, 1)
        self.sheet.autofilter(0, 0, last, len(self.columns) - 1)
        for number, column in enumerate(self.columns):
            if column.head == "Verdict":
                Sheet(self.forms, self.sheet, self.columns).verdict_colours(1, last, number)
