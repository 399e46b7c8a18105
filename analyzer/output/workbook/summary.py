"""The Summary sheet: verdict counts, the worst part, inputs with hashes, cautions, review and sign-off."""

from __future__ import annotations

import hashlib

from analyzer import __version__
from analyzer.cli import CAUTION
from analyzer.findings.base import Verdict
from analyzer.ledger import Ledger
from analyzer.output.ledger_json import summary
from analyzer.output.workbook.layout import FIRST_ROW, SIGN_OFF, Book, letter
from analyzer.output.workbook.regulators import PLACES, RERUN
from analyzer.output.workbook.typed import Typed

CAUTIONS = (
    "θJA depends on the board: ±20 % of the rise at best with a matching board class, ±40 % with generic figures.",
    "Thermal shutdown is no limit to design to. Hot parts can burn: guard accessible ones.",
    "Currents that nobody stated are missing, not zero: a budget with a missing current is open.",
)
_WORDS = {
    Verdict.OVER: "a limit is exceeded",
    Verdict.OPEN: "cannot be closed: something is missing",
    Verdict.TIGHT: "inside the limit, outside the required margin",
    Verdict.CLEAR: "inside the limit with the required margin, on complete evidence",
}
_RERUN_WORDS = "something typed since waits for an audit with --currents; no formula can follow it"


WIDTHS = (22.0, 44.0, 72.0)


def digest(ledger: Ledger) -> str:
    """One hash over the names and hashes of all inputs: it changes with any of them."""
    told = "".join(f"{file.sha256}  {file.path}\n" for file in ledger.inputs)
    return hashlib.sha256(told.encode("utf-8", "surrogateescape")).hexdigest()


def write(book: Book, ledger: Ledger, typed: Typed) -> None:
    """Write the sheet; the verdict counts follow the Regulators sheet."""
    sheet = book.sheet("Summary", f"Thermal budgets: {ledger.board}", CAUTION, ())
    raw = sheet.raw
    for number, width in enumerate(WIDTHS):
        raw.set_column(number, number, width)
    row = 3

    def put(label: str, value: object, more: object = None) -> None:
        nonlocal row
        sheet.put(row, 0, label, "label")
        sheet.put(row, 1, value, "wrap" if isinstance(value, str) else "plain")
        sheet.put(row, 2, more, "wrap")
        row += 1

    if not ledger.complete:
        put("INCOMPLETE", "part of the drawing could not be read; no part can be clear")
    if not any(entry.fitted for entry in ledger.entries):
        put("NO REGULATORS FOUND", "nothing was budgeted")
    column = letter(PLACES["Verdict"])
    last = FIRST_ROW + max(len(ledger.entries), 1)
    first_count = row
    waiting = sum(1 for entry in ledger.entries if entry.fitted) if typed.waits else 0
    counts = [(verdict.value, 0 if waiting else ledger.count(verdict), _WORDS[verdict]) for verdict in Verdict]
    for word, count, meaning in (*counts, (RERUN, waiting, _RERUN_WORDS)):
        sheet.put(row, 0, word, "label")
        formula = f'=COUNTIF(Regulators!{column}${FIRST_ROW + 1}:{column}${last},"{word}")'
        raw.write_formula(row, 1, formula, book.form("count"), count)
        sheet.put(row, 2, meaning, "wrap")
        row += 1
    sheet.verdict_colours(first_count, row - 1, 0)
    facts = summary(ledger)
    margin = facts["worst_margin_kelvin"]
    most = "at most " if facts["worst_is_bound"] else ""
    put(
        "Worst part",
        facts["worst_part"] or "none known",
        "" if margin is None else f"margin {most}{margin:+.1f} K as audited",
    )
    put("Missing currents", facts["gaps"])
    put("heatledger", __version__)
    row += 1
    sheet.put(row, 0, "Cautions", "label")
    for caution in CAUTIONS:
        # no wrapping: the text goes on over the empty cells beside it
        sheet.put(row, 1, caution, "text")
        row += 1
    row += 1
    sheet.put(row, 0, "Review and sign-off", "title")
    row += 1
    for label in SIGN_OFF:
        sheet.put(row, 0, label, "label")
        sheet.put(row, 1, typed.sign_off.get(label), "note")
        row += 1
    row += 1
    sheet.put(row, 0, "Inputs read, with their SHA-256", "title")
    row += 1
    sheet.put(row, 1, "all of them together, as in the footer", "text")
    sheet.put(row, 2, digest(ledger), "text")
    row += 1
    for file in ledger.inputs:
        sheet.put(row, 1, file.path, "wrap")
        sheet.put(row, 2, file.sha256, "text")
        row += 1
    raw.print_area(0, 0, row, 2)
