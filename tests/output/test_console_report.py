"""The console: every line in its width, words before colour, nothing of a file's text obeyed by the terminal."""

from __future__ import annotations

import io
from dataclasses import replace

import pytest
from conftest import ROOT

from analyzer.audit import audit
from analyzer.ledger import Ledger
from analyzer.output.console import print_ledger, report, safe, summary_line, wants_colour


@pytest.fixture(scope="module")
def ledger() -> Ledger:
    return audit(ROOT / "fixture_boards" / "lane_lamp").ledger


@pytest.mark.parametrize("width", [40, 80, 120])
def test_no_line_is_wider_than_the_terminal(ledger: Ledger, width: int) -> None:
    lines = report(ledger, width)
    assert max(len(line) for line in lines) <= width
    assert lines[0].startswith("open  U1 QXL2133-3.3 +3V3:")
    assert lines[-1].endswith("1 missing current")


def test_worst_come_first_and_the_summary_last(ledger: Ledger) -> None:
    heads = [line.split()[:2] for line in report(ledger, 300, brief=True)]
    assert heads == [["open", "U1"], ["tight", "U101"], ["tight", "U201"], ["lane_lamp:", "3"]]


def test_each_finding_has_its_remedy_and_each_gap_its_headroom(ledger: Ledger) -> None:
    text = "\n".join(report(ledger, 200))
    assert "tight U101: junction 101 °C at the worst corner, less than the required margin below 125 °C" in text
    assert "→ Gain margin as listed under Remedies, or measure the board." in text
    assert "+3V3, U1 has room for 24.4 mA (over at 33.6 mA, junction)" in text


def test_no_regulators_and_an_incomplete_drawing_are_said_first(ledger: Ledger) -> None:
    empty = replace(ledger, entries=(), findings=(), gaps=(), loads={}, complete=False)
    lines = report(empty, 100)
    assert lines[0] == "INCOMPLETE: part of the drawing could not be read; no part can be clear."
    assert lines[1] == "NO REGULATORS FOUND on this board: nothing was budgeted."
    assert lines[-1] == "lane_lamp: 0 budgets: 0 over, 0 open, 0 tight, 0 clear; 0 missing currents"


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("\x1b[31mred\x1b[0m", "\\x1b[31mred\\x1b[0m"),
        ("a\nb\tc\r", "a\\x0ab\\x09c\\x0d"),
        ("\x9b2J \x7f", "\\x9b2J \\x7f"),
        ("[red]+5V[/red] θ µ", "[red]+5V[/red] θ µ"),
    ],
)
def test_control_characters_are_shown_and_not_obeyed(text: str, shown: str) -> None:
    assert safe(text) == shown


def test_hostile_names_reach_no_terminal(ledger: Ledger) -> None:
    entry = replace(ledger.entries[0], part="\x1b]0;owned\x07[/] [bold]", ref="U\x1b[2J")
    text = "\n".join(report(replace(ledger, entries=(entry,), board="b\x1bc"), 80))
    assert "\x1b" not in text
    assert "\x07" not in text


class Terminal(io.StringIO):
    """A stream that says it is a terminal."""

    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize(
    ("stream", "variables", "colour"),
    [
        (Terminal(), {}, True),
        (Terminal(), {"NO_COLOR": "1"}, False),
        (Terminal(), {"NO_COLOR": ""}, True),
        (Terminal(), {"TERM": "dumb"}, False),
        (io.StringIO(), {}, False),
    ],
)
def test_colour_only_on_a_terminal_that_wants_it(
    monkeypatch: pytest.MonkeyPatch, stream: io.StringIO, variables: dict[str, str], colour: bool
) -> None:
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "xterm")
    for name, value in variables.items():
        monkeypatch.setenv(name, value)
    assert wants_colour(stream) is colour


def test_colour_adds_nothing_but_colour(ledger: Ledger, monkeypatch: pytest.MonkeyPatch) -> None:
    import re

    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.setenv("COLUMNS", "80")
    coloured, plain = Terminal(), io.StringIO()
    print_ledger(ledger, coloured)
    print_ledger(ledger, plain)
    assert "\x1b[" in coloured.getvalue()
    assert re.sub(r"\x1b\[[0-9;]*m", "", coloured.getvalue()) == plain.getvalue()


def test_waived_findings_are_counted(ledger: Ledger) -> None:
    assert summary_line(ledger, 2).endswith("; 2 findings waived")
