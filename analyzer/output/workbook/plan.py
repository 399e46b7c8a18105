"""Which row of which sheet holds what, so that formulas on one sheet can point at another."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from analyzer.evidence import Evidence
from analyzer.ledger import Entry, Ledger
from analyzer.load import Draw, Gap
from analyzer.output.workbook.layout import FIRST_ROW
from analyzer.output.workbook.typed import Typed

CLOSED_KINDS = ("regulator", "passage", "gap below")
"""Kinds of lines on which no current can be stated."""


@dataclass(frozen=True, slots=True)
class Line:
    """One row of the Currents sheet.

    Attributes:
        rail: Its rail.
        ref, key, value, sheet: The part.
        kind: "stated", "ruled", "computed", "regulator", "passage", "gap", "gap below" for a gap that closes with those
            of a rail below, or "gone" for a part not there now.
        amps: The current as evidence, None for a gap.
        gap: The gap, None for a draw.
        follows: Where the current follows the load of a rail below: that rail, and i0 [A], i1 [A/A], i2 [A/A²].
        below: Rails on whose loads the current depends in a way that no formula follows.
    """

    rail: str
    ref: str
    key: str
    value: str
    sheet: str
    kind: str
    amps: Evidence | None
    gap: Gap | None
    follows: tuple[str, tuple[float, float, float]] | None = None
    below: tuple[str, ...] = ()

    @property
    def is_open_to_typing(self) -> bool:
        """Whether a current typed here counts: what a regulator takes follows from what hangs on its output."""
        return self.kind not in CLOSED_KINDS


@dataclass(frozen=True)
class Plan:
    """Rows of the Rails, Currents and Regulators sheets."""

    lines: tuple[Line, ...]
    rail_rows: Mapping[str, int]
    blocks: Mapping[str, tuple[int, int]]
    """Rail → first and last row of its lines on the Currents sheet."""
    entry_rows: Mapping[str, int]


def plan(ledger: Ledger, typed: Typed) -> Plan:
    """The plan for a ledger: rails in tree order, each rail's lines together, entries worst first.

    What was typed for a part or rail that is gone gets a line of kind "gone" at the end: nothing typed is dropped.
    """
    entries = {entry.key: entry for entry in ledger.entries}
    passed: dict[str, list[str]] = {}
    for rail in ledger.rails:
        for feed in rail.feeds:
            if feed.kind == "passage":
                passed.setdefault(feed.ref, []).append(rail.name)
    lines: list[Line] = []
    blocks: dict[str, tuple[int, int]] = {}
    for rail in ledger.rails:
        load = ledger.loads.get(rail.name)
        mine = []
        if load is not None:
            mine += [_draw_line(draw, entries, passed, ledger) for draw in load.draws]
            mine += [_gap_line(gap) for gap in load.gaps]
        if mine:
            blocks[rail.name] = (FIRST_ROW + len(lines), FIRST_ROW + len(lines) + len(mine) - 1)
        lines += mine
    there = {(line.key, line.rail) for line in lines}
    for (key, gone), (ref, value) in typed.parts.items():
        if (key, gone) not in there:
            lines.append(Line(gone, ref, key, value, "", "gone", None, None))
    return Plan(
        tuple(lines),
        {rail.name: FIRST_ROW + number for number, rail in enumerate(ledger.rails)},
        blocks,
        {entry.key: FIRST_ROW + number for number, entry in enumerate(ledger.entries)},
    )


def weighted(rails: Sequence[str], load_of: Callable[[str], float]) -> float:
    """A sum over rails that changes with the load of any of them, and when load moves from one to another."""
    return math.fsum((number + 1) * load_of(rail) for number, rail in enumerate(rails))


def weighted_formula(rails: Sequence[str], rail_rows: Mapping[str, int]) -> str:
    """The same as a formula over the Rails sheet."""
    terms = [f"{number + 1}*Rails!$F${rail_rows[rail] + 1}" for number, rail in enumerate(rails)]
    return "+".join(terms).replace("1*Rails", "Rails", 1) or "0"


def fed_rails(entry: Entry, ledger: Ledger) -> tuple[str, ...]:
    """The rails that an entry feeds and that have a row."""
    known = {rail.name for rail in ledger.rails}
    return tuple(dict.fromkeys(output.rail for output in entry.outputs if output.rail in known))


def known_load(ledger: Ledger) -> Callable[[str], float]:
    """Rail → its known load at the high end [A]."""
    return lambda rail: ledger.loads[rail].known.high if rail in ledger.loads else 0.0


def _draw_line(draw: Draw, entries: Mapping[str, Entry], passed: Mapping[str, Sequence[str]], ledger: Ledger) -> Line:
    entry = entries.get(draw.key) if draw.kind == "regulator" else None
    value, sheet = ledger.names.get(draw.key, ("", ""))
    follows, below = None, tuple[str, ...]()
    if draw.kind == "regulator":
        rails = fed_rails(entry, ledger) if entry else tuple(passed.get(draw.ref, ()))
        follows = _of_entry(entry, rails, ledger) if entry else _of_passage(draw, rails, ledger)
        below = () if follows else rails
    # a diode or switch takes what it passes on, as a regulator takes what it converts; it has no budget of its own
    kind = "passage" if draw.kind == "regulator" and entry is None else draw.kind
    return Line(draw.rail, draw.ref, draw.key, value, sheet, kind, draw.amps, None, follows, below)


Follows = tuple[str, tuple[float, float, float]] | None


def _of_entry(entry: Entry, rails: Sequence[str], ledger: Ledger) -> Follows:
    if len(rails) != 1 or "i1" not in entry.live:
        return None
    shares = {(feed.ref, rail.name): feed.share for rail in ledger.rails for feed in rail.feeds}
    share = shares.get((entry.ref, rails[0]), 1.0)
    return rails[0], (entry.live["i0"], entry.live["i1"] * share, entry.live["i2"] * share**2)


def _of_passage(draw: Draw, rails: Sequence[str], ledger: Ledger) -> Follows:
    """A diode or switch without a budget of its own takes what it passes on, if that is what the engine found."""
    load = ledger.loads.get(rails[0]) if len(rails) == 1 else None
    if load is None or load.known.high != draw.amps.span.high:
        return None
    return rails[0], (0.0, 1.0, 0.0)


def _gap_line(gap: Gap) -> Line:
    kind = "gap below" if gap.follows else "gap"
    return Line(gap.rail, gap.ref, gap.key, gap.value, gap.sheet, kind, None, gap)
