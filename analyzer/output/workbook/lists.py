"""The plain list sheets: Remedies, Evidence, Findings (with a column for the reviewer's answer), Not understood."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence

from analyzer.findings.base import Finding
from analyzer.ledger import Ledger
from analyzer.output.trail_text import sensitivities
from analyzer.output.workbook.layout import FIRST_ROW, Book, Column, plain
from analyzer.output.workbook.typed import Answered

REMEDY_COLUMNS = (
    Column("Part", 8),
    Column("Verdict", 9),
    Column("Kind", 20),
    Column("What the numbers say (none is a promise)", 100, "wrap"),
)
EVIDENCE_COLUMNS = (
    Column("Part", 8),
    Column("Quantity", 34, "wrap"),
    Column("Low", 13, "plain"),
    Column("Nominal", 13, "plain"),
    Column("High", 13, "plain"),
    Column("Unit", 9),
    Column("Grade", 10),
    Column("Source", 60, "wrap"),
    Column("Formula", 30, "wrap"),
    Column("Note", 34, "wrap"),
)
FINDING_COLUMNS = (
    Column("Weight", 8),
    Column("About", 20, "wrap"),
    Column("Finding", 22, "wrap"),
    Column("What", 56, "wrap"),
    Column("What to do", 44, "wrap"),
    Column("Where", 26, "wrap"),
    Column("Your answer", 28, "wrap"),
    Column("Identity", 12),
)


def write_remedies(book: Book, ledger: Ledger) -> None:
    """Write the Remedies sheet."""
    remark = "Each line holds with everything else as it is."
    sheet = book.sheet("Remedies", "Remedies", remark, REMEDY_COLUMNS)
    row = FIRST_ROW
    for entry in ledger.entries:
        for remedy in entry.remedies:
            sheet.row(row, (entry.ref, entry.verdict.value, remedy.kind, remedy.text))
            row += 1
        for name, kelvin in sensitivities(entry)[:3]:
            text = f"{name} at its nominal instead of its worst lowers the junction by {kelvin:.1f} K"
            sheet.row(row, (entry.ref, entry.verdict.value, "sensitivity", text))
            row += 1
        if entry.chance is not None:
            over, low, high = entry.chance
            text = f"chance of exceeding the limit {over:.1%}; junction {low:.1f} to {high:.1f} °C (5 to 95 %), "
            text += "triangular over each span, inputs independent"
            sheet.row(row, (entry.ref, entry.verdict.value, "uncertainty", text))
            row += 1
    sheet.filter(row - 1)
    if row > FIRST_ROW:
        sheet.verdict_colours(FIRST_ROW, row - 1, 1)


def write_evidence(book: Book, ledger: Ledger) -> None:
    """Write the Evidence sheet: every number that entered a budget."""
    remark = "Grades, best first: stated, ruled, derived, presumed. An entry is as good as its weakest number."
    sheet = book.sheet("Evidence", "Evidence", remark, EVIDENCE_COLUMNS)
    row = FIRST_ROW
    for entry in ledger.entries:
        for one in entry.evidence:
            source = ("" if one.unit == "rank" else one.unit, one.grade.value, one.source, one.formula, one.note)
            # a class has a name and no figures
            figures = (None, None, None) if one.unit == "rank" else one.span.corners
            sheet.row(row, (entry.ref, one.quantity, *figures, *source))
            row += 1
    sheet.filter(row - 1)


def write_findings(book: Book, ledger: Ledger, answers: Mapping[Answered, str]) -> None:
    """Write the Findings sheet.

    Args:
        book: The workbook.
        ledger: The ledger.
        answers: The finding → what a reviewer answered; carried over.
    """
    remark = "Answer in the coloured column; a re-run carries the answers over."
    sheet = book.sheet("Findings", "Findings", remark, FINDING_COLUMNS)
    row = FIRST_ROW
    standing = _answered(ledger.findings, answers)
    for finding, answered in zip(ledger.findings, standing, strict=True):
        where = (finding.message, finding.remedy, finding.where)
        sheet.row(row, (finding.weight.value, finding.subject, finding.name, *where, None, finding.key))
        sheet.put(row, 6, answers[answered] if answered else None, "note")
        row += 1
    for one, answer in answers.items():
        if one not in standing:
            # the matter was mended, but what somebody wrote about it stays
            told = (one.what, "found in an earlier run, not in this one", one.where, None, one.identity)
            sheet.row(row, ("gone", one.subject, one.finding, *told))
            sheet.put(row, 6, answer, "note")
            row += 1
    sheet.filter(row - 1)
    sheet.raw.set_column(7, 7, 12, None, {"level": 1, "hidden": 1})
    sheet.raw.print_area(0, 0, max(row - 1, FIRST_ROW), 6)
    if row > FIRST_ROW:
        sheet.verdict_colours(FIRST_ROW, row - 1, 0)


def _answered(findings: Sequence[Finding], answers: Mapping[Answered, str]) -> list[Answered | None]:
    """The answer that belongs to each finding.

    Wording and place tell findings of one kind about one part apart. Where there was and is only one of them, the
    answer stays with it when its wording changes, as a figure in it does.
    """
    exact = [answered_as(finding) for finding in findings]
    now, before = Counter(one[:3] for one in exact), Counter(one[:3] for one in answers)
    alone = {one[:3]: one for one in answers if before[one[:3]] == 1}
    return [
        one if one in answers else alone.get(one[:3]) if now[one[:3]] == 1 else None  # a guess among several is none
        for one in exact
    ]


def answered_as(finding: Finding) -> Answered:
    """What an answer to the finding is filed under: the texts of its row, as its cells hold them."""
    texts = (finding.name, finding.subject, finding.key, finding.message, finding.where)
    return Answered(*(plain(text).strip() for text in texts))


def write_not_understood(book: Book, ledger: Ledger) -> None:
    """Write the sheet of parts that look like regulators and that no rule knows."""
    remark = (
        "Write a rule for each ('heatledger rules draft' makes one to fill in), or declare that it is no regulator."
    )
    sheet = book.sheet("Not understood", "Not understood", remark, (Column("Part and why", 100, "wrap"),), freeze=0)
    for number, line in enumerate(ledger.not_understood):
        sheet.put(FIRST_ROW + number, 0, line)
    if not ledger.not_understood:
        sheet.put(FIRST_ROW, 0, "nothing: every regulator found has a rule")
