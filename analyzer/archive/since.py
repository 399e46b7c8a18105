"""What changed since an earlier run: which parts got worse, better, appeared or went."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from analyzer.circuit import natural_key
from analyzer.errors import Fault, InputError
from analyzer.findings.base import Verdict

MARGIN_STEP = 0.5
"""Margins that differ by less [K] are called the same: input files differ by rounding."""


@dataclass(frozen=True, slots=True)
class Standing:
    """One part's verdict and margin in one run."""

    verdict: str
    margin: float | None


Standings = Mapping[tuple[str, str], Standing]
"""(board label, part reference and sheet) → its standing."""


@dataclass(frozen=True, slots=True)
class Change:
    """One part that does not stand as before.

    Attributes:
        how: "worse", "better", "appeared" or "went".
        board: Board label.
        part: Reference and sheet.
        before, after: Standings; None where there is none.
    """

    how: str
    board: str
    part: str
    before: Standing | None
    after: Standing | None

    def __str__(self) -> str:
        whose = f"{self.board} {self.part}".strip()
        return f"{self.how}: {whose}: {_show(self.before)} → {_show(self.after)}"


def standings_of(document: Mapping[str, Any], board: str) -> dict[tuple[str, str], Standing]:
    """Standings of all entries of one ledger in the machine-readable contract."""
    return {
        (board, f"{entry['ref']} {entry['sheet']}"): Standing(entry["verdict"], entry["margin_kelvin"])
        for entry in document["entries"]
        if entry["fitted"]
    }


def read_standings(file: Path) -> dict[tuple[str, str], Standing]:
    """Standings from an earlier result: one board's JSON, or an archive's combined JSON.

    Raises:
        InputError: If the file is not such a result.
    """
    try:
        document = json.loads(file.read_text(encoding="utf-8"))
        if document["schema"] == "heatledger/archive-1":
            return {
                (row["board"], row["part"]): Standing(row["verdict"], row["margin_kelvin"])
                for row in document["standings"]
            }
        return standings_of(document, document["board"])
    except OSError as error:
        raise InputError(Fault(f"cannot be read ({error.strerror})", str(file))) from error
    except (ValueError, KeyError, TypeError) as error:
        remedy = "Give the JSON of an earlier audit."
        raise InputError(Fault("is no earlier result of this program", str(file), remedy=remedy)) from error


def changes(before: Standings, after: Standings) -> Iterator[Change]:
    """What changed, board by board, in natural order."""
    for board, part in sorted({*before, *after}, key=lambda key: (natural_key(key[0]), natural_key(key[1]))):
        old, new = before.get((board, part)), after.get((board, part))
        how = _how(old, new)
        if how:
            yield Change(how, board, part, old, new)


def _how(old: Standing | None, new: Standing | None) -> str:
    if old is None:
        return "appeared"
    if new is None:
        return "went"
    order = [verdict.value for verdict in Verdict]
    rank = order.index(new.verdict) - order.index(old.verdict)
    if rank:
        return "worse" if rank < 0 else "better"
    if old.margin is None or new.margin is None or abs(new.margin - old.margin) < MARGIN_STEP:
        return ""
    return "worse" if new.margin < old.margin else "better"


def _show(standing: Standing | None) -> str:
    if standing is None:
        return "absent"
    return standing.verdict if standing.margin is None else f"{standing.verdict} ({standing.margin:+.1f} K)"
