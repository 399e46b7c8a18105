"""What the reader collects on its way: findings, and whether anything was left out."""

from __future__ import annotations

from dataclasses import dataclass, field

from analyzer.circuit import Place
from analyzer.findings.base import Finding, FindingKind


@dataclass(slots=True)
class Report:
    """A collecting tray, handed from step to step while one project is read.

    Attributes:
        findings: What was found, in the order of reading, without repetitions.
        complete: False as soon as anything could not be read.
    """

    findings: dict[Finding, None] = field(default_factory=dict)
    complete: bool = True

    def add(
        self,
        kind: FindingKind,
        subject: str,
        message: str,
        where: Place | str = "",
        *,
        key: str = "",
        remedy: str = "",
        lost: bool = False,
    ) -> None:
        """Add a finding; `lost` says that something of the drawing is missing now."""
        self.findings[kind.found(subject, message, str(where), key=key, remedy=remedy)] = None
        if lost:
            self.complete = False
