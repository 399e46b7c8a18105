"""Building a workbook from its sheets, and putting it in the place of an earlier one without losing anything."""

from __future__ import annotations

import datetime
import io
import os
from dataclasses import replace
from pathlib import Path

from analyzer.errors import Fault, InputError, OutputError
from analyzer.ledger import Ledger
from analyzer.output.atomic import write_bytes
from analyzer.output.workbook import charts, currents, lists, regulators, settings_sheet, summary
from analyzer.output.workbook.layout import Book
from analyzer.output.workbook.plan import plan
from analyzer.output.workbook.typed import NOTHING, Typed
from analyzer.output.workbook.typed_reading import read_typed
from analyzer.settings import Settings


def write(file: Path, ledger: Ledger, settings: Settings, typed: Typed | None) -> bool:
    """Write the workbook; an earlier file is kept as NAME.previous.xlsx."""
    standing = file.read_bytes() if file.is_file() else None
    before = _typed_before(file) if standing is not None else NOTHING
    if typed is None:
        typed = before
    elif lost := list(typed.lacks(before)):
        more = f" and {len(lost) - 1} more" if len(lost) > 1 else ""
        what = f"holds what was typed for {lost[0]}{more}, and {typed.file} does not"
        remedy = f"Give it with --currents {file.name}, or write the workbook under another name; nothing was lost."
        raise OutputError(Fault(what, str(file), remedy=remedy))
    data = build(ledger, settings, typed, file.name)
    if standing is not None and standing != data:
        write_bytes(file.with_name(f"{file.stem}.previous{file.suffix}"), standing)
    write_bytes(file, data)
    return typed.waits


def _typed_before(file: Path) -> Typed:
    """What was typed into the file about to be replaced; a file that is none of ours is only kept."""
    try:
        return replace(read_typed(file), applied=False)
    except InputError:
        return NOTHING


def build(ledger: Ledger, settings: Settings, typed: Typed, name: str) -> bytes:
    """The workbook's bytes; the same for the same input."""
    import xlsxwriter

    from analyzer.output.workbook.worksheet import PlainWorksheet

    buffer = io.BytesIO()
    options = {"in_memory": True, "strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
    raw = xlsxwriter.Workbook(buffer, options)
    raw.set_properties({"title": f"Thermal budgets: {ledger.board}"[:250], "created": _created()})
    # spreadsheets work the sheet out anew when they open it, so that edits made elsewhere cannot leave stale values
    raw.set_calc_mode("auto")
    inputs = f"inputs {summary.digest(ledger)[:12]}" if ledger.inputs else "no inputs"
    book = Book(raw, _footer(f"{name}  {inputs}"), PlainWorksheet)
    rows = plan(ledger, typed)
    summary.write(book, ledger, typed)
    settings_sheet.write(book, ledger, settings, typed, len(rows.lines))
    regulators.write(book, ledger, rows, typed)
    currents.write_rails(book, ledger, rows)
    currents.write_currents(book, ledger, rows, typed)
    lists.write_remedies(book, ledger)
    lists.write_evidence(book, ledger)
    lists.write_findings(book, ledger, typed.answers)
    lists.write_not_understood(book, ledger)
    charts.write(book, ledger, rows)
    raw.close()
    return buffer.getvalue()


def _footer(text: str) -> str:
    """Footer text: "&" starts a code there and is doubled; the whole footer may hold 255 characters."""
    return text.replace("&", "&&")[:120]


def _created() -> datetime.datetime:
    epoch = os.environ.get("SOURCE_DATE_EPOCH", "")
    if epoch.isdecimal():
        return datetime.datetime.fromtimestamp(int(epoch), datetime.UTC).replace(tzinfo=None)
    return datetime.datetime(1980, 1, 1)
