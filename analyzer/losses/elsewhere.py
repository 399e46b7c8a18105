"""What of a converter's loss is outside the part: in its inductor and in an external rectifier.

Taken out of the part only as far as it is certain to be there; what is not known stays in the part, the safe side.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from analyzer.evidence import Evidence, Grade
from analyzer.losses.base import End, Figures, low
from analyzer.quantity import Span
from analyzer.rail import Wiring

OPPOSITE = {End.SEVERE: End.MILD, End.MILD: End.SEVERE, End.NOMINAL: End.NOMINAL}
"""End for losses outside where they do not relieve the part but add to the input current."""

_Found = tuple[tuple[str, Span] | None, tuple[Evidence, ...]]
_Find = Callable[[Wiring, str], _Found]
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

    def over(self, other: Shares) -> Shares:
        """These, and of the other those that are not known here."""
        return Shares(self.inductor or other.inductor, self.diode or other.diode)

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


def outsides(wiring: Wiring) -> Outsides:
    """The inductors and rectifiers on this board: by their own values, else by what rule or settings give for them."""
    return _both(wiring, _on_board)


def outsides_measured(wiring: Wiring, efficiency: Evidence) -> Outsides:
    """The inductors and rectifiers whose losses are in an efficiency, and so may be taken out of the part's heat.

    A rule's efficiency was measured with the inductor of the data sheet: what that one lost is out of the part
    whatever inductor this board has, and a worse one here cools nothing. So only what the same rule says of it
    counts. An efficiency that the settings state for this board has this board's parts in it.
    """
    if efficiency.grade is Grade.STATED:
        return _both(wiring, _on_board)
    return _both(wiring, _by_rule)


def _both(wiring: Wiring, find: _Find) -> Outsides:
    coil, found = find(wiring, "inductor")
    # a synchronous part has its rectifier inside; a diode beside it carries next to nothing
    if Figures(wiring.channel).has("low_side_resistance"):
        return Outsides(coil, None, found)
    diode, more = find(wiring, "diode")
    return Outsides(coil, diode, (*found, *more))


def _on_board(wiring: Wiring, role: str) -> _Found:
    parts = [part for part in wiring.outside if part.role == role]
    known = [figure for part in parts if (figure := part.resistance if role == "inductor" else part.drop) is not None]
    if parts and len(known) == len(parts):
        names = ", ".join(part.ref for part in parts)
        spans = [evidence.span for evidence in known]
        return (names, _side_by_side(spans) if role == "inductor" else _least(spans)), tuple(known)
    return _given(wiring, role)


def _by_rule(wiring: Wiring, role: str) -> _Found:
    figure = wiring.channel.figures.get(_FIGURES[role])
    if figure is None or figure.grade is Grade.STATED:
        return None, ()
    found, used = _given(wiring, role)
    return (f"the {role} measured with", found[1]) if found else None, used


def _given(wiring: Wiring, role: str) -> _Found:
    figure = wiring.channel.figures.get(_FIGURES[role])
    if figure is None:
        return None, ()
    parts = [part.ref for part in wiring.outside if part.role == role]
    span = _side_by_side([figure.span] * max(1, len(parts))) if role == "inductor" else figure.span
    return (", ".join(parts) or {"diode": "rectifier"}.get(role, role), span), (figure,)


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


def outside_notes(wiring: Wiring, board: Outsides, measured: Outsides | None = None) -> tuple[str, ...]:
    """What is not known of the parts outside, and on which side that errs.

    Args:
        wiring: The channel.
        board: What is known of them on this board.
        measured: What of them is taken out of an efficiency; None where the heat is summed from loss terms.
    """
    synchronous = Figures(wiring.channel).has("low_side_resistance")
    found = []
    for part in wiring.outside:
        if part.role not in _FIGURES or (part.role == "diode" and synchronous):
            continue
        if measured is not None and getattr(measured, part.role) is None:
            found.append(f"loss of the {part.role} ({part.ref} here) left in the part: the efficiency names none")
        elif measured is None and getattr(board, part.role) is None:
            # by loss terms only the input current lacks what is lost outside
            found.append(f"loss of {part.role} {part.ref} not known: missing in its input current")
    return tuple(found)
