"""What of a converter's loss is outside the part: in its inductor and in an external rectifier.

Taken out of the part only as far as it is certain to be there; what is not known stays in the part, the safe side.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from analyzer.evidence import Evidence, Grade
from analyzer.losses.base import End, Figures, low
from analyzer.quantity import Span
from analyzer.rail import Outside, Wiring

OPPOSITE = {End.SEVERE: End.MILD, End.MILD: End.SEVERE, End.NOMINAL: End.NOMINAL}
"""End for losses outside where they do not relieve the part but add to the input current."""

_FIGURES = {"inductor": "inductor_resistance", "diode": "diode_drop"}


@dataclass(frozen=True, slots=True)
class Shares:
    """What of the total loss is outside the part.

    Attributes:
        inductor: (who, watts), None if not known.
        diode: (who, watts), None if not known.
    """

    inductor: tuple[str, float] | None = None
    diode: tuple[str, float] | None = None

    @property
    def items(self) -> tuple[tuple[str, float], ...]:
        """(who, watts) of those known."""
        return tuple(one for one in (self.inductor, self.diode) if one is not None)

    @property
    def watts(self) -> float:
        """Sum of them [W]."""
        return sum(watts for _, watts in self.items)


@dataclass(frozen=True, slots=True)
class Outsides:
    """The parts outside a channel whose figures are known, each kind of them as one.

    Attributes:
        inductor: (who, resistance [Ω]) of its inductors, None if not known.
        diode: (who, drop [V]) of its external rectifiers, None if not known.
        used: Evidence of both.
    """

    inductor: tuple[str, Span] | None
    diode: tuple[str, Span] | None
    used: tuple[Evidence, ...]

    def shares(self, end: End, inductor: float, diode: float) -> Shares:
        """Their losses.

        Args:
            end: The part keeps most heat when the parts outside take least, so `End.SEVERE` takes their small end.
            inductor: Current through the inductor [A].
            diode: Average current through the rectifier [A].
        """
        coil, rectifier = self.inductor, self.diode
        return Shares(
            None if coil is None else (coil[0], inductor * inductor * low(coil[1], end)),
            None if rectifier is None else (rectifier[0], diode * low(rectifier[1], end)),
        )


def outsides(wiring: Wiring, *, from_rule: bool) -> Outsides:
    """The inductors and rectifiers outside.

    Args:
        wiring: The channel.
        from_rule: Whether a figure that a rule gives for them counts. It stands for the data sheet's inductor, not the
            one on this board, so no heat may be taken out of the part on its strength; but it may add to the input
            current. What the settings state of this board counts always.
    """
    figures = Figures(wiring.channel)
    coil, found = _one(wiring, "inductor", lambda part: part.resistance, _side_by_side, from_rule=from_rule)
    # a synchronous part has its rectifier inside; a diode beside it carries next to nothing
    if figures.has("low_side_resistance"):
        return Outsides(coil, None, found)
    diode, more = _one(wiring, "diode", lambda part: part.drop, _least, from_rule=from_rule)
    return Outsides(coil, diode, (*found, *more))


def _one(
    wiring: Wiring,
    role: str,
    figure_of: Callable[[Outside], Evidence | None],
    together: Callable[[list[Span]], Span],
    *,
    from_rule: bool,
) -> tuple[tuple[str, Span] | None, tuple[Evidence, ...]]:
    parts = [part for part in wiring.outside if part.role == role]
    known = [evidence for part in parts if (evidence := figure_of(part)) is not None]
    names = ", ".join(part.ref for part in parts)
    if parts and len(known) == len(parts):
        return (names, together([evidence.span for evidence in known])), tuple(known)
    stated = wiring.channel.figures.get(_FIGURES[role])
    if stated is not None and (from_rule or stated.grade is Grade.STATED):
        return (names or {"diode": "rectifier"}.get(role, role), stated.span), (stated,)
    return None, ()


def _side_by_side(resistances: list[Span]) -> Span:
    """Several inductors are taken as sharing the current, in which they make the least heat."""
    if len(resistances) == 1:
        return resistances[0]

    def joined(values: list[float]) -> float:
        return 0.0 if min(values) <= 0 else 1 / sum(1 / value for value in values)

    return Span(
        joined([one.low for one in resistances]),
        joined([one.nominal for one in resistances]),
        joined([one.high for one in resistances]),
    )


def _least(drops: list[Span]) -> Span:
    """Several rectifiers share the current; each has at least the least drop of them."""
    return Span(min(one.low for one in drops), min(one.nominal for one in drops), max(one.high for one in drops))


def outside_notes(wiring: Wiring, found: Outsides, *, from_rule: bool) -> tuple[str, ...]:
    """What is not known of the parts outside, and on which side that errs."""
    # by loss terms the part's heat is counted by itself, and only the input current lacks what is lost outside
    left = "missing in its input current" if from_rule else "left in the part"
    lost = {"inductor": found.inductor is None, "diode": found.diode is None}
    if Figures(wiring.channel).has("low_side_resistance"):
        lost["diode"] = False
    return tuple(
        f"loss of {part.role} {part.ref} not known: {left}" for part in wiring.outside if lost.get(part.role, False)
    )
