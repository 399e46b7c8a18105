"""What a finding is. Each stage's kinds of finding stand in the module named after the stage."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Verdict(StrEnum):
    """The word at the end of each budget, worst first as a release gate sees it."""

    OVER = "over"
    """A limit is exceeded."""
    OPEN = "open"
    """The budget cannot be closed: something it needs is missing."""
    TIGHT = "tight"
    """Inside the limit, outside the required margin."""
    CLEAR = "clear"
    """Inside the limit with the required margin, on complete evidence."""


class Weight(StrEnum):
    """How much a finding weighs: the verdict it stands for, or a note that changes no verdict."""

    OVER = "over"
    OPEN = "open"
    TIGHT = "tight"
    NOTE = "note"


@dataclass(frozen=True, slots=True)
class Finding:
    """Something a person should look at.

    Attributes:
        name: Stable name of the kind, lower case with hyphens; waivers and reports key on it.
        weight: How much it weighs.
        subject: The part (reference), rail or file it is about.
        message: What was found, one sentence with the numbers in it.
        remedy: What to do about it.
        where: File, sheet and place, or rule file and entry.
        key: Identity of the part concerned (sheet path and uuid), "" for rails and files.
    """

    name: str
    weight: Weight
    subject: str
    message: str
    remedy: str
    where: str = ""
    key: str = ""


@dataclass(frozen=True, slots=True)
class FindingKind:
    """A kind of finding: one definition, from which findings, the list in the guide and waiver checks follow.

    Attributes:
        name: Stable name, lower case with hyphens.
        weight: How much such a finding weighs.
        meaning: What it means, one or two sentences for the guide.
        remedy: What to do about it, one sentence.
    """

    name: str
    weight: Weight
    meaning: str
    remedy: str

    def found(self, subject: str, message: str, where: str = "", *, key: str = "", remedy: str = "") -> Finding:
        """A finding of this kind about `subject`."""
        return Finding(self.name, self.weight, subject, message, remedy or self.remedy, where, key)
