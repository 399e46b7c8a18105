"""A user's own parts table with result columns added: a copy, matched by reference, everything else as it was."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from analyzer.errors import Fault, InputError
from analyzer.findings.base import Verdict
from analyzer.ledger import Entry, Ledger
from analyzer.output.atomic import write_bytes
from analyzer.reading.parts_table import SYNONYMS, decoded, separator_of, spread_refs

HEADS = ("Dissipation [W]", "Junction [°C]", "Margin [K]", "Verdict", "Missing current")
_RISKY = ("=", "+", "-", "@", "\t", "\r")
"""First characters that spreadsheets take for a formula in CSV files (OWASP)."""

_COMMA, _POINT = re.compile(r"-?\d+,\d+"), re.compile(r"-?\d+\.\d+")


def annotate(source: Path, ledger: Ledger) -> Path:
    """Write a copy of a parts table with columns for dissipation, junction, margin, verdict and missing currents.

    Args:
        source: The user's `.xlsx` or `.csv`.
        ledger: The ledger.

    Returns:
        The copy: NAME.heat.xlsx or NAME.heat.csv beside the table.

    Raises:
        InputError: If the table cannot be read or has no column of references.
        OutputError: If the copy cannot be written.
    """
    target = source.with_name(f"{source.stem}.heat{source.suffix}")
    results = {entry.ref: entry for entry in reversed(ledger.entries)}
    gaps = {gap.ref for gap in ledger.gaps}
    data = _xlsx(source, results, gaps) if source.suffix.lower() == ".xlsx" else _csv(source, results, gaps)
    write_bytes(target, data)
    return target


def _xlsx(source: Path, results: Mapping[str, Entry], gaps: set[str]) -> bytes:
    from analyzer.output.workbook.archive_check import check_archive

    check_archive(source)
    import openpyxl

    try:
        book = openpyxl.load_workbook(source)
    except Exception as error:  # openpyxl raises many kinds for a damaged file
        raise InputError(Fault("is no readable workbook", str(source))) from error
    found = False
    for sheet in book.worksheets:
        place = _head(sheet.iter_rows(min_row=1, max_row=20, values_only=True))
        if place is None:
            continue
        found = True
        row, column = place
        first = sheet.max_column + 1
        for offset, head in enumerate(HEADS):
            _write(sheet.cell(row + 1, first + offset), head)
        for line in range(row + 2, sheet.max_row + 1):
            refs = spread_refs(str(sheet.cell(line, column + 1).value or ""))
            for offset, value in enumerate(_result(refs, results, gaps)):
                if value is not None:
                    _write(sheet.cell(line, first + offset), value)
    if not found:
        raise _no_refs(source)
    buffer = io.BytesIO()
    book.save(buffer)
    return buffer.getvalue()


def _write(cell: Any, value: object) -> None:
    cell.value = value
    if isinstance(value, str):
        # text stays text, whatever it begins with
        cell.data_type = "s"


def _csv(source: Path, results: Mapping[str, Entry], gaps: set[str]) -> bytes:
    text, encoding = decoded(source)
    separator = separator_of(text)
    rows = list(csv.reader(io.StringIO(text, newline=""), delimiter=separator))
    place = _head(tuple(row) for row in rows[:20])
    if place is None:
        raise _no_refs(source)
    head, column = place
    width = max(map(len, rows))
    comma = separator != "," and _has_decimal_commas(rows)
    for number, row in enumerate(rows):
        if number < head or not any(row):
            continue
        # programs leave out empty cells at the end of a row
        row += [""] * (width - len(row))
        refs = spread_refs(row[column])
        results_here = _result(refs, results, gaps)
        row += HEADS if number == head else ["" if one is None else _csv_cell(one, comma=comma) for one in results_here]
    buffer = io.StringIO()
    ending = "\r\n" if "\r\n" in text else "\n"
    csv.writer(buffer, delimiter=separator, lineterminator=ending).writerows(rows)
    return buffer.getvalue().encode(encoding, errors="replace")


def _has_decimal_commas(rows: list[list[str]]) -> bool:
    """Whether the table's own numbers have decimal commas: a spreadsheet that wrote them reads 1.371 as 1371."""
    cells = [cell.strip() for row in rows for cell in row]
    return any(map(_COMMA.fullmatch, cells)) and not any(map(_POINT.fullmatch, cells))


def _csv_cell(value: object, *, comma: bool) -> str:
    if isinstance(value, float):
        number = f"{value:.4g}"
        return number.replace(".", ",") if comma else number
    text = str(value)
    return "'" + text if text.startswith(_RISKY) else text


def _head(rows: Any) -> tuple[int, int] | None:
    for number, row in enumerate(rows):
        for column, cell in enumerate(row):
            if isinstance(cell, str) and " ".join(cell.lower().split()) in SYNONYMS["ref"]:
                return number, column
    return None


def _no_refs(source: Path) -> InputError:
    remedy = "Head the column of references with 'Reference' or 'Designator'."
    return InputError(Fault("has no column of references", str(source), remedy=remedy))


def _result(refs: tuple[str, ...], results: Mapping[str, Entry], gaps: set[str]) -> tuple[object, ...]:
    """Result cells of one row; of grouped parts the hottest."""
    mine = [results[ref] for ref in refs if ref in results]
    missing = ", ".join(ref for ref in refs if ref in gaps) or None
    if not mine:
        return (None, None, None, None, missing)
    order = list(Verdict)
    entry = min(mine, key=lambda one: (order.index(one.verdict), one.margin if one.margin is not None else 1e9))
    worst = entry.worst
    word = entry.verdict.value if entry.fitted else "not fitted"
    watts, junction = (worst.watts, worst.junction) if worst else (None, None)
    return (watts, junction, entry.margin, word, missing)
