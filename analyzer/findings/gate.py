"""Findings of the release gate about its own waivers."""

from __future__ import annotations

from analyzer.findings.base import FindingKind, Weight

WAIVER_STALE = FindingKind(
    "waiver-stale",
    Weight.NOTE,
    "A waiver in the settings matches no finding any more: the matter was mended, or the part was renamed.",
    "Remove the waiver, or correct its finding and subject.",
)
WAIVER_EXPIRED = FindingKind(
    "waiver-expired",
    Weight.NOTE,
    "A waiver has passed its expiry date and no longer accepts anything.",
    "Decide again: mend the finding, or renew the waiver with a reason.",
)
