"""Junction limits: the data sheet's and the margin policy's, kept apart. Thermal shutdown is never one."""

from __future__ import annotations

from dataclasses import dataclass

from analyzer.evidence import Evidence, Grade
from analyzer.findings import heat as kinds
from analyzer.findings.base import Finding
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.settings import PartStatement, Policy
from analyzer.wording import show

BELOW_ABSOLUTE = 25.0
"""Kelvin between absolute maximum and greatest operating junction where only the former is given."""


@dataclass(frozen=True, slots=True)
class Limits:
    """Limits of one part's junction [°C].

    Attributes:
        data_sheet: What the data sheet allows, or what was stated in its place.
        policy: What the margin policy allows.
        tight_above: Above this the verdict is tight.
        evidence: The limit as found.
        findings: What to note about it.
    """

    data_sheet: float
    policy: float
    tight_above: float
    evidence: Evidence
    findings: tuple[Finding, ...] = ()

    @property
    def limit(self) -> float:
        """The lower of both."""
        return min(self.data_sheet, self.policy)


def least(part: Part, key: str) -> Evidence | None:
    """The lowest of a rating over the channels of a part: they share the die and the package."""
    found = [channel.figures[key] for channel in part.channels if key in channel.figures]
    return min(found, key=lambda evidence: evidence.span.low, default=None)


def _below(absolute: Evidence) -> Evidence:
    """The operating limit that a bare absolute maximum allows to presume."""
    return Evidence(
        "junction limit",
        Span.exact(absolute.span.low - BELOW_ABSOLUTE),
        "°C",
        "common practice: operation ends 25 K below the absolute maximum, as 125 °C below 150 °C",
        Grade.PRESUMED,
        f"{show(absolute.span.low, '°C')} − {BELOW_ABSOLUTE:g} K",
        (absolute,),
    )


def limits_of(part: Part, stated: PartStatement, policy: Policy) -> Limits | str:
    """The limits of a part, or what is missing, in words."""
    findings: tuple[Finding, ...] = ()
    operating, absolute = least(part, "junction_max"), least(part, "junction_absolute_max")
    found = stated.junction_max or operating
    if found is None:
        found = absolute
        if found is None:
            return "junction limit"
        found = _below(found)
        message = (
            f"only the absolute maximum of {show(found.span.low + BELOW_ABSOLUTE, '°C')} is known: "
            f"{show(found.span.low, '°C')} presumed for operation"
        )
        findings = (kinds.ABSOLUTE_LIMIT.found(part.ref, message, found.source, key=part.key),)
    given = operating or absolute
    if stated.junction_max is not None and given is not None and found.span.low > given.span.low:
        message = f"stated limit {show(found.span.low, '°C')}, the rule gives {show(given.span.low, '°C')}"
        findings = (kinds.LIMIT_RAISED.found(part.ref, message, found.source, key=part.key),)
    rating = found.span.low
    allowed = rating - policy.junction_over
    if policy.junction_factor is not None:
        allowed = min(allowed, rating * policy.junction_factor)
    if policy.junction_cap is not None:
        allowed = min(allowed, policy.junction_cap)
    tight = min(rating - policy.junction_tight, allowed)
    return Limits(rating, allowed, tight, found, findings)
