"""The release gate: which findings a person has accepted, and what exit status is left.

A waiver accepts one kind of finding on one part or rail, with a reason; it never touches another finding.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date

from analyzer.findings.base import Finding, Verdict, Weight
from analyzer.findings.gate import WAIVER_EXPIRED, WAIVER_STALE
from analyzer.ledger import Entry, Ledger
from analyzer.settings import Waiver

LEVELS: dict[str, frozenset[str]] = {
    "over": frozenset({"over"}),
    "tight": frozenset({"over", "tight"}),
    "open": frozenset({"over", "tight", "open"}),
    "never": frozenset(),
}
"""What each level of `--fail-on` stops at, each stricter than the one before."""

STATUS_FINDINGS = 5
STATUS_INCOMPLETE = 3


@dataclass(frozen=True, slots=True)
class Gate:
    """What the gate made of a ledger.

    Attributes:
        waived: (finding, waiver) pairs that a person has accepted.
        standing: Findings nobody accepted, heaviest first, stale and expired waivers among them.
        status: The exit status.
    """

    waived: tuple[tuple[Finding, Waiver], ...]
    standing: tuple[Finding, ...]
    status: int


def judge(ledger: Ledger, waivers: Iterable[Waiver], level: str, today: date) -> Gate:
    """Apply waivers and find the exit status.

    Args:
        ledger: The board's result.
        waivers: Accepted findings.
        level: One of `LEVELS`.
        today: The day that expiry dates are compared with.

    Returns:
        The gate's outcome: status 3 when part of the drawing was not read, 5 when a verdict or finding at
        or above the level stands, else 0.
    """
    waived: list[tuple[Finding, Waiver]] = []
    standing = list(ledger.findings)
    notes: list[Finding] = []
    for waiver in waivers:
        where = waiver.where
        label = f"{waiver.finding} on {waiver.subject}"
        if waiver.expires is not None and date.fromisoformat(waiver.expires) < today:
            notes.append(
                WAIVER_EXPIRED.found(waiver.subject, f"the waiver of {label} expired on {waiver.expires}", where)
            )
            continue
        hits = [finding for finding in standing if _accepts(waiver, finding)]
        if not hits:
            notes.append(WAIVER_STALE.found(waiver.subject, f"the waiver of {label} matches no finding", where))
        waived += [(finding, waiver) for finding in hits]
        standing = [finding for finding in standing if finding not in hits]
    stops = LEVELS[level]
    accepted = {finding for finding, _ in waived}
    fails = any(finding.weight.value in stops for finding in standing) or any(
        _stands(entry, stops, accepted) for entry in ledger.entries
    )
    status = STATUS_INCOMPLETE if not ledger.complete else STATUS_FINDINGS if fails else 0
    return Gate(tuple(waived), (*standing, *notes), status)


def _accepts(waiver: Waiver, finding: Finding) -> bool:
    return waiver.finding == finding.name and waiver.subject in (finding.subject, finding.key or finding.subject)


def _stands(entry: Entry, stops: frozenset[str], accepted: set[Finding]) -> bool:
    """Whether the entry's verdict fails the gate: it does unless every finding behind the verdict is accepted."""
    if not entry.fitted or entry.verdict is Verdict.CLEAR or entry.verdict.value not in stops:
        return False
    behind = [finding for finding in entry.findings if finding.weight is Weight(entry.verdict.value)]
    return not behind or any(finding not in accepted for finding in behind)
