"""The console report: one line a regulator, worst first, then findings, gaps by rail, and a summary line last.

The same plain lines go to a terminal and into a pipe; on a terminal the verdict word is coloured too, never instead.
"""

from __future__ import annotations

import os
import shutil
import textwrap
from collections.abc import Iterable, Iterator
from typing import TextIO

from analyzer.cli import CAUTION
from analyzer.findings.base import Finding, Verdict, Weight
from analyzer.ledger import Entry, Ledger
from analyzer.load import Gap
from analyzer.wording import show, show_span

COLOURS = {"over": "bold red", "tight": "yellow", "open": "bold blue", "clear": "green"}
NARROW = 60
PIPED_WIDTH = 80


def print_ledger(ledger: Ledger, stream: TextIO, *, waived: int = 0, brief: bool = False) -> None:
    """Print the report to `stream`, in colour where it is a terminal that wants it."""
    colour = wants_colour(stream)
    width = shutil.get_terminal_size((PIPED_WIDTH, 24)).columns if stream.isatty() else _asked_width()
    lines = report(ledger, width, waived=waived, brief=brief)
    if not colour:
        for line in lines:
            stream.write(line + "\n")
        return
    from rich.console import Console
    from rich.text import Text

    console = Console(file=stream, highlight=False, markup=False, emoji=False, soft_wrap=True)
    for line in lines:
        text = Text(line)
        word = line.split(" ", 1)[0]
        if word in COLOURS:
            text.stylize(COLOURS[word], 0, len(word))
        console.print(text)


def wants_colour(stream: TextIO) -> bool:
    """Whether to use colour: a terminal, neither NO_COLOR nor a dumb one (no-color.org)."""
    return stream.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def _asked_width() -> int:
    columns = os.environ.get("COLUMNS", "")
    return max(20, int(columns)) if columns.isdecimal() else PIPED_WIDTH


def report(ledger: Ledger, width: int, *, waived: int = 0, brief: bool = False) -> list[str]:
    """The lines of the report, each at most `width` characters where words allow."""
    lines: list[str] = []
    regulators = [entry for entry in ledger.entries if entry.fitted]
    if not ledger.complete:
        lines += _wrapped("INCOMPLETE: part of the drawing could not be read; no part can be clear.", width)
    if not regulators:
        lines += _wrapped("NO REGULATORS FOUND on this board: nothing was budgeted.", width)
    for entry in regulators:
        lines += entry_lines(entry, width)
    unfitted = [entry.ref for entry in ledger.entries if not entry.fitted]
    if unfitted:
        lines += _wrapped(f"not fitted: {', '.join(unfitted)}", width)
    if not brief:
        lines += _finding_lines(ledger.findings, width)
        lines += gap_lines(ledger, width)
        lines += ["", *_wrapped(CAUTION, width)]
    lines += (
        ["", *_wrapped(summary_line(ledger, waived), width)] if not brief else _wrapped(summary_line(ledger), width)
    )
    return [safe(line) for line in lines]


def entry_lines(entry: Entry, width: int) -> list[str]:
    """One line for a part: verdict, who, junction against limit, margin; continued where the width asks for it."""
    output = next((one for one in entry.outputs if one.rail), None)
    rail = f" {output.rail}" if output else ""
    figures = _figures(entry)
    line = f"{entry.verdict.value:<5} {entry.ref} {entry.part}{rail}: {figures}"
    if entry.verdict is Verdict.OPEN and entry.missing:
        line += f"; missing: {entry.missing[0]}"
        if len(entry.missing) > 1:
            line += f" (and {len(entry.missing) - 1} more)"
    return _wrapped(line, width)


def _figures(entry: Entry) -> str:
    worst = entry.worst
    if worst is None or worst.junction is None:
        return _allowed(entry) or "not budgeted"
    least, most = ("at least ", "at most ") if entry.is_bound else ("", "")
    text = f"{least}{show(worst.watts, 'W')}, junction {least}{show(worst.junction, '°C')}"
    if entry.limit is not None and entry.margin is not None:
        text += f" of {show(entry.limit, '°C')}, margin {most}{entry.margin:+.1f} K"
    if entry.headroom is not None and entry.verdict is not Verdict.OPEN:
        text += f", headroom {show(entry.headroom.over, 'A')}"
    elif allowed := _allowed(entry):
        text += f"; {allowed}"
    return f"{text} [{entry.grade.value}]"


def _allowed(entry: Entry) -> str:
    """What the junction alone allows as load, against the part's own rating."""
    if entry.greatest_load is None:
        return ""
    rated = f", rated {show(entry.rated_load, 'A')}" if entry.rated_load is not None else ""
    return f"junction allows {show(entry.greatest_load, 'A')}{rated}"


def _finding_lines(findings: Iterable[Finding], width: int) -> Iterator[str]:
    shown = [finding for finding in findings if finding.name != "budget-open"]
    if shown:
        yield ""
        yield "findings"
    for finding in shown:
        weight = "note" if finding.weight is Weight.NOTE else finding.weight.value
        message = finding.message.removeprefix(f"{finding.subject}: ")
        yield from _wrapped(f"{weight:<5} {finding.subject}: {message} ({finding.name})", width)
        if finding.weight is not Weight.NOTE:
            yield from _wrapped(f"      → {finding.remedy}", width, indent="        ")


def gap_lines(ledger: Ledger, width: int) -> Iterator[str]:
    """Missing currents by rail, with how much room the rail's regulator has left."""
    by_rail: dict[str, list[Gap]] = {}
    for gap in roots(ledger.gaps):
        by_rail.setdefault(gap.rail, []).append(gap)
    if by_rail:
        yield ""
        yield "missing currents, by rail"
    for rail, gaps in by_rail.items():
        load = ledger.loads.get(rail)
        known = f", known {show_span(load.known, 'A')}" if load and load.draws else ""
        yield from _wrapped(f"  {rail}{known}{_room(ledger, rail)}", width, indent="    ")
        names = ", ".join(f"{gap.ref} {gap.value}".strip() for gap in gaps)
        yield from _wrapped(f"    {names}", width, indent="    ")
        for suggestion, refs in _suggestions(gaps).items():
            whom = "" if suggestion.startswith(f"for all of {rail}:") else f" for {', '.join(refs)}"
            yield from _wrapped(f"    note{whom}: {suggestion}", width, indent="      ")


def roots(gaps: Iterable[Gap]) -> list[Gap]:
    """Gaps that somebody must close; those that only follow from gaps on rails below close with them."""
    return [gap for gap in gaps if not gap.follows]


def _suggestions(gaps: Iterable[Gap]) -> dict[str, list[str]]:
    """Each suggestion once, with the parts it stands beside."""
    found: dict[str, list[str]] = {}
    for gap in gaps:
        for suggestion in gap.suggestions:
            found.setdefault(suggestion, []).append(gap.ref)
    return found


def _room(ledger: Ledger, rail: str) -> str:
    for entry in ledger.entries:
        if entry.fitted and entry.headroom is not None and any(output.rail == rail for output in entry.outputs):
            room = entry.headroom
            over = f"over at {show(room.over, 'A')}, {room.bounded_by}"
            return f", {entry.ref} has room for {show(room.tight, 'A')} ({over})"
    return ""


def summary_line(ledger: Ledger, waived: int = 0) -> str:
    """The last line: how many parts have which verdict."""
    fitted = sum(1 for entry in ledger.entries if entry.fitted)
    counts = ", ".join(f"{ledger.count(verdict)} {verdict.value}" for verdict in Verdict)
    gaps = _counted(len(roots(ledger.gaps)), "missing current")
    text = f"{ledger.board}: {_counted(fitted, 'budget')}: {counts}; {gaps}"
    return f"{text}; {waived} findings waived" if waived else text


def _counted(number: int, what: str) -> str:
    return f"{number} {what}" if number == 1 else f"{number} {what}s"


def _wrapped(text: str, width: int, indent: str = "      ") -> list[str]:
    return textwrap.wrap(
        safe(text),
        max(width, 20),
        subsequent_indent=indent if width >= NARROW else "  ",
        break_long_words=False,
        break_on_hyphens=False,
        drop_whitespace=True,
        replace_whitespace=False,
    ) or [""]


def safe(text: str) -> str:
    """Text from files without control characters: no escape sequence of theirs reaches the terminal."""
    return "".join(c if c >= " " and not "\x7f" <= c <= "\x9f" else f"\\x{ord(c):02x}" for c in text)
