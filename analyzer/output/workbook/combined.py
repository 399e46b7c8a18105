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

BOARDS = ("Board", "Worst margin [K]", "Is", "Part", "Over", "Open", "Tight", "Clear", "Gaps", "Status", "Fault")
ENTRIES = (
    "Board",
    "Part",
    "Sheet",
    "Part number",
    "Kind",
    "Rail",
    "Dissipation worst [W]",
    "θ [K/W]",
    "Ambient [°C]",
    "Junction worst [°C]",
    "Limit [°C]",
    "Margin [K]",
    "Verdict",
    "Grade",
)
GAPS = ("Board", "Part", "Value", "Sheet", "Rail")


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
    head = book.add_format({"bold": True, "text_wrap": True, "bottom": 1, "valign": "top"})
    sheets = {}
    for name, columns in (("Boards", BOARDS), ("Entries", ENTRIES), ("Gaps", GAPS), ("Changes", ("Change",))):
        sheet = book.add_worksheet(name)
        sheet.set_landscape()
        sheet.set_paper(9)
        sheet.fit_to_pages(1, 0)
        sheet.repeat_rows(0)
        sheet.freeze_panes(1, 1)
        sheet.set_footer("&L&F&RPage &P of &N")
        sheet.set_column(0, 0, 34)
        sheet.set_column(1, len(columns), 14)
        for column, title in enumerate(columns):
            sheet.write_string(0, column, title, head)
        sheets[name] = _Down(sheet)
    for outcome in ranked:
        counts = dict(outcome.counts)
        words = [counts.get(word, 0) for word in ("over", "open", "tight", "clear")]
        sheets["Boards"].row(
            outcome.label,
            outcome.worst_margin,
            "at most" if outcome.worst_is_bound else "",
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
            sheets["Gaps"].row(outcome.label, gap["ref"], gap["value"], gap["sheet"], gap["rail"])
    for change in changes:
        sheets["Changes"].row(change)
    for name, columns in (("Boards", BOARDS), ("Entries", ENTRIES), ("Gaps", GAPS)):
        sheets[name].sheet.autofilter(0, 0, max(sheets[name].last, 1), len(columns) - 1)
    book.close()
    write_bytes(file, buffer.getvalue())


def _entry(entry: dict[str, Any]) -> Iterator[object]:
    yield from (entry["ref"], entry["sheet"], entry["part"], entry["kind"])
    yield ", ".join(dict.fromkeys(output["rail"] for output in entry["outputs"]))
    yield entry["dissipation_watts"] and entry["dissipation_watts"][1]
    yield from (entry["theta_k_per_w"], entry["ambient_celsius"])
    yield entry["junction_celsius"] and entry["junction_celsius"][1]
    yield from (entry["limit_celsius"], entry["margin_kelvin"])
    yield entry["verdict"] if entry["fitted"] else "not fitted"
    yield entry["grade"]


class _Down:
    """A worksheet filled row by row; text is always written as text, never as a formula."""

    def __init__(self, sheet: Any) -> None:
        self.sheet = sheet
        self.last = 0

    def row(self, *cells: object) -> None:
        self.last += 1
        for column, cell in enumerate(cells):
            if isinstance(cell, (int, float)):
                self.sheet.write_number(self.last, column, cell)
            elif cell:
                self.sheet.write_string(self.last, column, _plain(str(cell)))


def _plain(text: str) -> str:
    # XML has no place for control characters; a cell ends at 32,767 characters
    return "".join(character if character >= " " else "\N{SYMBOL FOR NULL}" for character in text)[:32_767]
