"""Evidence: every number that enters a budget, with its unit, where it came from, and how far to trust it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum

from analyzer.quantity import Span


class Grade(StrEnum):
    """How far a number can be trusted, best first."""

    STATED = "stated"
    """A person said it about this board."""
    RULED = "ruled"
    """A rule file gives it, with a source."""
    DERIVED = "derived"
    """Computed from other evidence."""
    PRESUMED = "presumed"
    """A name, a convention or a generic table suggests it."""

    @property
    def rank(self) -> int:
        """0 for the best grade; larger is worse."""
        return list(Grade).index(self)

    @staticmethod
    def worst(grades: Iterable[Grade]) -> Grade:
        """The worst of several grades: an entry is as good as its weakest number."""
        return max(grades, key=lambda grade: grade.rank)


@dataclass(frozen=True, slots=True)
class Evidence:
    """One number of the budget.

    Attributes:
        quantity: What it is, in the trade's words ("input voltage", "θJA").
        span: Low, nominal and high value in `unit`.
        unit: SI unit as text ("V", "A", "W", "Ω", "°C", "K", "K/W", "m", "s", "m/s", "1").
        source: Where it came from: file, sheet, reference and field; or rule file and entry; or standard;
            or "default". One line, fit for a table cell.
        grade: How far to trust it.
        formula: For computed values, the formula with its numbers put in; else empty.
        parents: The evidence it was computed from, in the order of use.
        note: An assumption or caution that belongs to this number, e.g. "board class not stated".
    """

    quantity: str
    span: Span
    unit: str
    source: str
    grade: Grade
    formula: str = ""
    parents: tuple[Evidence, ...] = ()
    note: str = ""

    @property
    def weakest(self) -> Grade:
        """The worst grade along the whole trail of this number."""
        return Grade.worst([self.grade, *(parent.weakest for parent in self.parents)])

    def walk(self) -> Iterable[Evidence]:
        """This number and all it was computed from, parents first."""
        for parent in self.parents:
            yield from parent.walk()
        yield self
