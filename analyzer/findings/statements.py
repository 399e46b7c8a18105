"""Findings about what a person stated and nothing on the board answers to."""

from __future__ import annotations

from analyzer.findings import currents, rails
from analyzer.findings.base import Finding, FindingKind, Weight

STATEMENT_WITHOUT_PART = FindingKind(
    "statement-without-part",
    Weight.OPEN,
    "The settings state something about a part that this board does not have; which part was meant is not known.",
    "Correct the reference in `[parts]`, or remove the statement.",
)
STATEMENT_UNUSED = FindingKind(
    "statement-unused",
    Weight.OPEN,
    "The settings state figures of a part that is not recognised as a regulator or passage, so nothing uses them.",
    "Correct the reference in `[parts]`, or say what the part is with rule or identity.",
)
COUPLING_WITHOUT_PART = FindingKind(
    "coupling-without-part",
    Weight.OPEN,
    "A heat coupling in the settings names a part that this board does not have.",
    "Correct the reference in `[[coupling]]`, or remove the entry.",
)

_LOST = frozenset(
    kind.name
    for kind in (
        STATEMENT_WITHOUT_PART,
        STATEMENT_UNUSED,
        COUPLING_WITHOUT_PART,
        currents.DRAW_FOR_UNKNOWN_PART,
        currents.DRAW_FOR_DOUBLED_REFERENCE,
        currents.DRAW_ON_UNKNOWN_RAIL,
        currents.DRAW_WITHOUT_RAIL,
        currents.DRAW_ON_REGULATOR,
        currents.DRAW_NOT_UNDERSTOOD,
        currents.DRAW_NEGATIVE,
        currents.DRAW_POWER_WITHOUT_VOLTAGE,
        rails.SUPPLY_WITHOUT_NET,
        rails.LINK_WITHOUT_PART,
        rails.SHARES_INCOMPLETE,
    )
)


def may_be_anyones(finding: Finding) -> bool:
    """Whether this is a lost statement of which nobody can say whose budget it belongs to.

    Somebody stated a current, a voltage or a figure, and it is not in any budget: every budget may be the one that
    lacks it, so none may be called clear.
    """
    return finding.name in _LOST and not finding.key


__all__ = ["COUPLING_WITHOUT_PART", "STATEMENT_UNUSED", "STATEMENT_WITHOUT_PART", "may_be_anyones"]
