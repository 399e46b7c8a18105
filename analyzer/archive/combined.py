"""An archive's combined result: `archive.json`, `archive.xlsx` and the console's ranking.

The boards' own ledgers are read back one at a time, so that memory does not grow with the archive.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from analyzer.archive.since import Standing, changes, read_standings
from analyzer.archive.work import Outcome
from analyzer.circuit import natural_key
from analyzer.findings.base import Verdict

SCHEMA = "heatledger/archive-1"


def finish(out: Path, outcomes: list[Outcome], since: Path | None) -> list[str]:
    """Write the combined files into `out` and give the lines of the console report.

    Args:
        out: Folder of the results.
        outcomes: What became of each board, in any order.
        since: An earlier result to compare with, or None.
    """
    from analyzer.output.atomic import write_text
    from analyzer.output.workbook.combined import write_combined

    before = read_standings(since) if since is not None else None
    ranked = rank(outcomes)
    standings: dict[tuple[str, str], Standing] = {}
    for outcome, document in _ledgers(ranked):
        standings |= {
            (outcome.label, f"{entry['ref']} {entry['sheet']}"): Standing(entry["verdict"], entry["margin_kelvin"])
            for entry in document["entries"]
            if entry["fitted"]
        }
    found = list(changes(before, standings)) if before is not None else []
    write_text(out / "archive.json", _json(ranked, standings, [str(change) for change in found]))
    write_combined(out / "archive.xlsx", ranked, _ledgers(ranked), [str(change) for change in found])
    return [*_lines(ranked), *(str(change) for change in found), f"written: {out / 'archive.xlsx'}"]


def rank(outcomes: list[Outcome]) -> list[Outcome]:
    """Boards by worst margin; failed boards first, boards without a closed budget after those with one."""
    return sorted(outcomes, key=_rank_key)


def _rank_key(outcome: Outcome) -> tuple[bool, float, tuple[tuple[int, int | str], ...]]:
    margin = math.inf if outcome.worst_margin is None else outcome.worst_margin
    return (not outcome.fault, margin, natural_key(outcome.label))


def _ledgers(outcomes: list[Outcome]) -> Iterator[tuple[Outcome, dict[str, Any]]]:
    for outcome in outcomes:
        if outcome.ledger_file:
            yield outcome, json.loads(Path(outcome.ledger_file).read_text(encoding="utf-8"))


def _json(ranked: list[Outcome], standings: dict[tuple[str, str], Standing], found: list[str]) -> str:
    document = {
        "schema": SCHEMA,
        "boards": [
            {
                "board": outcome.label,
                "status": outcome.status,
                "counts": dict(outcome.counts),
                "worst_margin_kelvin": outcome.worst_margin,
                "worst_part": outcome.worst_part,
                "worst_is_bound": outcome.worst_is_bound,
                "gaps": outcome.gaps,
                "fault": outcome.fault,
            }
            for outcome in ranked
        ],
        "standings": [
            {"board": board, "part": part, "verdict": standing.verdict, "margin_kelvin": standing.margin}
            for (board, part), standing in standings.items()
        ],
        "changes": found,
    }
    return json.dumps(document, indent=1, ensure_ascii=False) + "\n"


def _lines(ranked: list[Outcome]) -> Iterator[str]:
    for outcome in ranked:
        if outcome.fault:
            yield f"failed  {outcome.label}: {outcome.fault}"
            continue
        most = "at most " if outcome.worst_is_bound else ""
        margin = "no margin"
        if outcome.worst_margin is not None:
            margin = f"{most}{outcome.worst_margin:+.1f} K {outcome.worst_part}"
        words = ", ".join(f"{count} {verdict}" for verdict, count in outcome.counts if count) or "no regulators"
        yield f"{margin:>22}  {outcome.label}: {words}, {outcome.gaps} gaps"
    totals = {verdict.value: 0 for verdict in Verdict}
    for outcome in ranked:
        for verdict, count in outcome.counts:
            totals[verdict] += count
    failed = sum(1 for outcome in ranked if outcome.fault)
    words = ", ".join(f"{count} {verdict}" for verdict, count in totals.items())
    yield f"{len(ranked)} boards, {failed} failed: {words}"
