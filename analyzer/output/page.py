"""A Markdown summary for a merge request: counts, a table of budgets, findings that stand."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from analyzer.cli import CAUTION
from analyzer.findings.base import Weight
from analyzer.gate import Gate
from analyzer.ledger import Entry, Ledger
from analyzer.output.atomic import write_text
from analyzer.output.console import safe, summary_line
from analyzer.wording import show

MOST_ROWS = 40


def write_page(file: Path, ledger: Ledger, gate: Gate) -> None:
    """Write the summary."""
    write_text(file, "\n".join(page(ledger, gate)) + "\n")


def page(ledger: Ledger, gate: Gate) -> Iterator[str]:
    """The lines of the summary."""
    yield f"## Thermal budgets: {_escaped(ledger.board)}"
    yield ""
    yield _escaped(summary_line(ledger, len(gate.waived)))
    if not ledger.complete:
        yield ""
        yield "**Incomplete:** part of the drawing could not be read; no part can be clear."
    yield ""
    yield "| verdict | part | rail | heat | junction | limit | margin | grade |"
    yield "|---|---|---|---|---|---|---|---|"
    fitted = [entry for entry in ledger.entries if entry.fitted]
    for entry in fitted[:MOST_ROWS]:
        yield _row(entry)
    if len(fitted) > MOST_ROWS:
        yield ""
        yield f"… and {len(fitted) - MOST_ROWS} more."
    standing = [finding for finding in gate.standing if finding.weight is not Weight.NOTE]
    if standing:
        yield ""
        yield "| weight | about | what | what to do |"
        yield "|---|---|---|---|"
    for finding in standing[:MOST_ROWS]:
        cells = (finding.weight.value, finding.subject, finding.message, finding.remedy)
        yield "| " + " | ".join(_escaped(cell) for cell in cells) + " |"
    if len(standing) > MOST_ROWS:
        yield ""
        yield f"… and {len(standing) - MOST_ROWS} more findings."
    yield ""
    yield f"*{CAUTION}*"


def _row(entry: Entry) -> str:
    worst = entry.worst
    rail = ", ".join(dict.fromkeys(output.rail for output in entry.outputs if output.rail))
    least, most = ("≥ ", "≤ ") if entry.is_bound else ("", "")
    heat = least + show(worst.watts, "W") if worst else ""
    junction = least + show(worst.junction, "°C") if worst and worst.junction is not None else ""
    limit = show(entry.limit, "°C") if entry.limit is not None else ""
    margin = f"{most}{entry.margin:+.1f} K" if entry.margin is not None else ""
    name = f"{entry.ref} {entry.part}"
    cells = (entry.verdict.value, name, rail, heat, junction, limit, margin, entry.grade.value)
    return "| " + " | ".join(_escaped(cell) for cell in cells) + " |"


def _escaped(text: str) -> str:
    """Text that no Markdown reader takes for markup."""
    plain = safe(text).replace("\\", "\\\\")
    for mark in "|*_`<>[]#~":
        plain = plain.replace(mark, "\\" + mark)
    return plain
