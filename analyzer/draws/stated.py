"""Currents that somebody stated: in symbol fields, in the settings, in a workbook.

Fields are read by their exact names (`I_load`, or `I_load@RAIL` for parts on several rails); a field such as
"Current" is a rating on every board ever seen and is never read.

A statement that cannot be used is never just dropped: it leaves a gap on every rail of its part that nothing else
was stated for, and where it names no part or no rail of this board, its finding keeps every budget open.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from analyzer.circuit import Component, natural_key
from analyzer.draws.board import Board
from analyzer.draws.consumers import Consumer
from analyzer.draws.resistors import gap
from analyzer.evidence import Evidence, Grade
from analyzer.findings import currents as kinds
from analyzer.findings.base import Finding, FindingKind
from analyzer.grammar import parse, parse_load
from analyzer.load import Draw, Gap, Pulse, joined_pulse
from analyzer.quantity import Dimension, Span
from analyzer.settings import Settings, StatedDraw
from analyzer.wording import show, show_span

_BLANK = frozenset({"", "~", "-"})
"""Texts of a field that a template left empty."""


@dataclass(frozen=True)
class Stated:
    """What the statements gave: draws, one for each (part, rail), gaps of statements that were lost, and findings."""

    draws: tuple[Draw, ...]
    gaps: tuple[Gap, ...]
    findings: tuple[Finding, ...]


def stated_draws(board: Board, consumers: Iterable[Consumer], settings: Settings) -> Stated:
    """All stated draws, settings before fields."""
    reader = _Reader(board, consumers)
    for statement in settings.draws:
        reader.settle(statement, from_field=False)
    for component in board.circuit.components:
        if component.fitted:
            for statement in _fields(component, settings.draw_fields, reader):
                reader.settle(statement, from_field=True)
    gaps = tuple(reader.gaps())
    found = sorted(reader.draws.values(), key=lambda draw: (natural_key(draw.ref), natural_key(draw.rail), draw.key))
    return Stated(tuple(found), gaps, tuple(reader.findings))


def _fields(component: Component, names: tuple[str, ...], reader: _Reader) -> Iterable[StatedDraw]:
    wanted = {name.casefold() for name in names}
    for name, text in component.fields.items():
        head, _, rail = name.partition("@")
        if head.strip().casefold() not in wanted or text.strip() in _BLANK:
            continue
        source = f"{component.place}, {component.ref} field {name}"
        try:
            amps, watts, pulse = _load(text)
        except ValueError as error:
            message = f"{component.ref} field {name}: {error}"
            reader.lose(kinds.DRAW_NOT_UNDERSTOOD, component.ref, message, source, component)
            continue
        if min(span.low for span in (amps, watts, pulse.peak if pulse else None) if span) < 0:
            message = f"{component.ref} field {name} states {text.strip()}"
            reader.lose(kinds.DRAW_NEGATIVE, component.ref, message, source, component)
            continue
        current = Evidence("load current", amps, "A", source, Grade.STATED) if amps else None
        power = Evidence("power of the load", watts, "W", source, Grade.STATED) if watts else None
        yield StatedDraw(component.ref, rail.strip(), current, power, pulse, component.key)


def _load(text: str) -> tuple[Span | None, Span | None, Pulse | None]:
    """(current, power, pulse) of a field's text; one of the first two is None."""
    try:
        amps, pulse = parse_load(text)
        return amps, None, pulse
    except ValueError as no_current:
        try:
            return None, parse(text, Dimension.POWER), None
        except ValueError:
            raise no_current from None


@dataclass(frozen=True, slots=True)
class _Lost:
    """A statement that cannot be used, and what is known of whose it is."""

    kind: FindingKind
    subject: str
    message: str
    where: str
    component: Component | None
    rail: str


class _Reader:
    """Settles statements one by one: whose they are, on which rail, and which of two wins."""

    def __init__(self, board: Board, consumers: Iterable[Consumer]) -> None:
        self.draws: dict[tuple[str, str], Draw] = {}
        self.findings: list[Finding] = []
        self._lost: list[_Lost] = []
        self._origin: dict[tuple[str, str], tuple[bool, str]] = {}
        self._board = board
        self._rails: dict[str, list[str]] = {}
        for consumer in sorted(consumers, key=lambda one: not one.is_sure):
            if consumer.is_sure or consumer.component.key not in self._rails:
                self._rails.setdefault(consumer.component.key, []).append(consumer.rail)
        self._possible: dict[str, list[str]] = {}
        for consumer in consumers:
            self._possible.setdefault(consumer.component.key, []).append(consumer.rail)

    def settle(self, statement: StatedDraw, *, from_field: bool) -> None:
        """Turn one statement into a draw, or into a finding that says why not."""
        component: Component | None = None
        if statement.ref:
            component = self._component(statement)
            if component is None:
                return
            if not component.fitted:
                message = f"{_told(statement)} for {component.ref}, which is not fitted"
                self._report(
                    kinds.DRAW_FOR_UNFITTED_PART.found(statement.ref, message, _where(statement), key=component.key)
                )
                return
            if component.key in self._board.regulators:
                message = f"{_told(statement)} for {component.ref}, which is a regulator or passage"
                self.lose(kinds.DRAW_ON_REGULATOR, statement.ref, message, _where(statement), component)
                return
        rail = self._rail(statement, component)
        draw = self._draw(statement, component, rail) if rail else None
        if draw:
            self._keep(draw, statement.rail, from_field)

    def _component(self, statement: StatedDraw) -> Component | None:
        where = _where(statement)
        if statement.key and (found := self._board.circuit.by_key.get(statement.key)):
            return found
        candidates = self._board.circuit.by_ref.get(statement.ref, ())
        if len(candidates) == 1:
            return candidates[0]
        if candidates:
            message = f"{_told(statement)} for {statement.ref}, but {len(candidates)} parts have this reference"
            self.lose(kinds.DRAW_FOR_DOUBLED_REFERENCE, statement.ref, message, where, None)
        else:
            message = f"{_told(statement)} for {statement.ref}, but there is no such part"
            self.lose(kinds.DRAW_FOR_UNKNOWN_PART, statement.ref, message, where, None)
        return None

    def _rail(self, statement: StatedDraw, component: Component | None) -> str | None:
        where = _where(statement)
        if statement.rail:
            rail = self._named(statement.rail)
            if rail is None:
                subject = statement.ref or statement.rail
                message = f"{_told(statement)} on {statement.rail}, but there is no such rail"
                # a part's current may be stated on a rail that it has no pin on, so the part does not tell which
                self.lose(kinds.DRAW_ON_UNKNOWN_RAIL, subject, message, where, None)
            elif component and rail not in self._all_rails(component):
                message = f"{_told(statement)} for {component.ref} on {rail}, but no pin of it is on this rail"
                self._report(kinds.DRAW_OFF_ITS_RAIL.found(component.ref, message, where, key=component.key))
            return rail
        if component is None:
            return None
        rails = self._rails.get(component.key) or list(self._board.rails_at(component))
        if len(rails) == 1:
            return rails[0]
        on = f"is supplied from {', '.join(rails)}" if rails else "is on no rail that was found"
        message = f"{_told(statement)} for {component.ref}, which {on}"
        self.lose(kinds.DRAW_WITHOUT_RAIL, component.ref, message, where, component)
        return None

    def _all_rails(self, component: Component) -> set[str]:
        return {*self._possible.get(component.key, ()), *self._board.rails_at(component)}

    def _named(self, name: str) -> str | None:
        """The live rail of this name, or with a net of this name, or with just one net that ends in it."""
        rails = self._board.rails
        rail = rails.by_name.get(name) or rails.by_name.get(rails.of_net.get(name, ""))
        if rail is None:
            leaves = {rails.of_net[net] for net in rails.of_net if net.rpartition("/")[2] == name.lstrip("/")}
            rail = rails.by_name[leaves.pop()] if len(leaves) == 1 else None
        return None if rail is None or rail.is_ground else rail.name

    def _draw(self, statement: StatedDraw, component: Component | None, rail: str) -> Draw | None:
        key = component.key if component else ""
        if statement.amps:
            return Draw(statement.ref, key, rail, statement.amps, "stated", statement.pulse)
        if statement.watts is None:
            return None
        volts = self._board.rails.by_name[rail].volts
        if volts is None or volts.span.low <= 0 <= volts.span.high:
            subject = statement.ref or rail
            message = f"{_told(statement)} on {rail}, whose voltage is not known"
            self.lose(kinds.DRAW_POWER_WITHOUT_VOLTAGE, subject, message, _where(statement), component, rail)
            return None
        return Draw(statement.ref, key, rail, _amps(statement.watts, volts), "stated")

    def _keep(self, draw: Draw, named: str, from_field: bool) -> None:
        # loads without a part are different loads, whatever rail they share
        place = (draw.key or f"@{draw.amps.source}", draw.rail)
        before = self.draws.get(place)
        if before is None:
            self.draws[place] = draw
            self._origin[place] = (from_field, named)
            return
        if (before.amps.span, before.pulse) == (draw.amps.span, draw.pulse):
            return
        was_field, was_named = self._origin[place]
        if was_field == from_field:
            if named and was_named and named != was_named:
                self.draws[place] = _both(before, draw)  # two nets of one rail, each with a current
                return
            self.draws[place] = _greater(before, draw)
        # else the settings, read first, win over the drawing
        kept = self.draws[place]
        message = (
            f"{draw.ref or 'a load'} on {draw.rail}: {show_span(before.amps.span, 'A')} ({before.amps.source}) and "
            f"{show_span(draw.amps.span, 'A')} ({draw.amps.source}); {show_span(kept.amps.span, 'A')} is used"
        )
        self._report(kinds.DRAW_STATED_TWICE.found(draw.ref or draw.rail, message, draw.amps.source, key=draw.key))

    def lose(
        self, kind: FindingKind, subject: str, message: str, where: str, component: Component | None, rail: str = ""
    ) -> None:
        """Report a statement that cannot be used, and remember whose load it leaves unknown.

        `component` is None where it is not known which part is meant; `rail` is given where only the rail is known.
        """
        self._lost.append(_Lost(kind, subject, message, where, component, rail))

    def gaps(self) -> Iterable[Gap]:
        """What the lost statements leave unknown, once everything is settled; reports them too.

        A part's lost current belongs to those of its rails that nothing else was stated for. If there are none, or no
        part is known, the finding carries no identity and so holds every budget (`analyzer.findings.statements`).
        """
        for lost in self._lost:
            rails = [lost.rail] if lost.rail else self._waiting(lost.component)
            key = lost.component.key if lost.component else ""
            held = key if rails else ""
            self._report(lost.kind.found(lost.subject, lost.message, lost.where, key=held))
            why = f"its stated current cannot be used ({lost.kind.name})"
            for rail in rails:
                if lost.component:
                    yield gap(lost.component, rail, why)
                else:
                    yield Gap(f"@{rail}", f"@{lost.where}", rail, "off-board", "", why)

    def _waiting(self, component: Component | None) -> list[str]:
        if component is None:
            return []
        wirings = [w for w in self._board.rails.wirings if w.part.key == component.key]
        rails = {w.output_rail for w in wirings if w.output_rail} if wirings else self._all_rails(component)
        return sorted((rail for rail in rails if (component.key, rail) not in self.draws), key=natural_key)

    def _report(self, finding: Finding) -> None:
        self.findings.append(finding)


def _amps(watts: Evidence, volts: Evidence) -> Evidence:
    """I = P/V at the rail's own corners."""
    ends = sorted(abs(end) for end in (volts.span.low, volts.span.high))
    nominal = abs(volts.span.nominal)
    span = Span(watts.span.low / ends[1], watts.span.nominal / nominal, watts.span.high / ends[0])
    formula = f"I = P/V = {show(watts.span.nominal, 'W')} / {show(nominal, 'V')}"
    return Evidence("load current", span, "A", watts.source, Grade.STATED, formula, (watts, volts))


def _greater(one: Draw, other: Draw) -> Draw:
    """Of two statements that contradict each other, the heavier; a pulse counts as steady at its peak."""
    steady = [
        replace(draw, amps=replace(draw.amps, span=draw.pulse.peak), pulse=None) if draw.pulse else draw
        for draw in (one, other)
    ]
    return max(steady, key=lambda draw: draw.amps.span.high)


def _both(one: Draw, other: Draw) -> Draw:
    """Two stated currents of one part on one rail as one."""
    amps = Evidence(
        "load current",
        one.amps.span + other.amps.span,
        "A",
        f"{one.amps.source}; {other.amps.source}",
        Grade.STATED,
        f"I = {show(one.amps.span.nominal, 'A')} + {show(other.amps.span.nominal, 'A')}",
        (one.amps, other.amps),
    )
    return replace(one, amps=amps, pulse=joined_pulse((one, other)))


def _where(statement: StatedDraw) -> str:
    given = statement.amps or statement.watts
    return given.source if given else ""


def _told(statement: StatedDraw) -> str:
    if statement.amps:
        return f"{show_span(statement.amps.span, 'A')} is stated"
    return f"{show_span(statement.watts.span, 'W')} is stated" if statement.watts else "nothing is stated"
