"""Currents that somebody stated: in symbol fields, in the settings, in a workbook.

Fields are read by their exact names (`I_load`, or `I_load@RAIL` for parts on several rails); a field such as
"Current" is a rating on every board ever seen and is never read.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from analyzer.circuit import Component, natural_key
from analyzer.draws.board import Board
from analyzer.draws.consumers import Consumer
from analyzer.evidence import Evidence, Grade
from analyzer.findings import currents as kinds
from analyzer.findings.base import Finding
from analyzer.grammar import parse, parse_load
from analyzer.load import Draw, Pulse
from analyzer.quantity import Dimension, Span
from analyzer.settings import Settings, StatedDraw
from analyzer.wording import show, show_span

_BLANK = frozenset({"", "~", "-"})
"""Texts of a field that a template left empty."""


@dataclass(frozen=True)
class Stated:
    """What the statements gave: draws, one for each (part, rail), and findings."""

    draws: tuple[Draw, ...]
    findings: tuple[Finding, ...]


def stated_draws(board: Board, consumers: Iterable[Consumer], settings: Settings) -> Stated:
    """All stated draws, settings before fields."""
    reader = _Reader(board, consumers)
    for statement in settings.draws:
        reader.settle(statement, from_field=False)
    for component in board.circuit.components:
        if component.fitted:
            for statement in _fields(component, settings.draw_fields, reader.findings):
                reader.settle(statement, from_field=True)
    found = sorted(reader.draws.values(), key=lambda draw: (natural_key(draw.ref), natural_key(draw.rail), draw.key))
    return Stated(tuple(found), tuple(reader.findings))


def _fields(component: Component, names: tuple[str, ...], findings: list[Finding]) -> Iterable[StatedDraw]:
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
            findings.append(kinds.DRAW_NOT_UNDERSTOOD.found(component.ref, message, source, key=component.key))
            continue
        if min(span.low for span in (amps, watts, pulse.peak if pulse else None) if span) < 0:
            message = f"{component.ref} field {name} states {text.strip()}"
            findings.append(kinds.DRAW_NEGATIVE.found(component.ref, message, source, key=component.key))
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


class _Reader:
    """Settles statements one by one: whose they are, on which rail, and which of two wins."""

    def __init__(self, board: Board, consumers: Iterable[Consumer]) -> None:
        self.draws: dict[tuple[str, str], Draw] = {}
        self.findings: list[Finding] = []
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
            if component is None or not component.fitted:
                return
            if component.key in self._board.regulators:
                message = f"{_told(statement)} for {component.ref}, which is a regulator or passage"
                self._report(
                    kinds.DRAW_ON_REGULATOR.found(statement.ref, message, _where(statement), key=component.key)
                )
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
            self._report(kinds.DRAW_FOR_DOUBLED_REFERENCE.found(statement.ref, message, where))
        else:
            message = f"{_told(statement)} for {statement.ref}, but there is no such part"
            self._report(kinds.DRAW_FOR_UNKNOWN_PART.found(statement.ref, message, where))
        return None

    def _rail(self, statement: StatedDraw, component: Component | None) -> str | None:
        where = _where(statement)
        if statement.rail:
            rail = self._named(statement.rail)
            if rail is None:
                subject = statement.ref or statement.rail
                message = f"{_told(statement)} on {statement.rail}, but there is no such rail"
                self._report(kinds.DRAW_ON_UNKNOWN_RAIL.found(subject, message, where))
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
        self._report(kinds.DRAW_WITHOUT_RAIL.found(component.ref, message, where, key=component.key))
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
            self._report(kinds.DRAW_POWER_WITHOUT_VOLTAGE.found(subject, message, _where(statement), key=key))
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
            self.draws[place] = draw if draw.amps.span.high > before.amps.span.high else before
        # else the settings, read first, win over the drawing
        kept = self.draws[place]
        message = (
            f"{draw.ref or 'a load'} on {draw.rail}: {show_span(before.amps.span, 'A')} ({before.amps.source}) and "
            f"{show_span(draw.amps.span, 'A')} ({draw.amps.source}); {show_span(kept.amps.span, 'A')} is used"
        )
        self._report(kinds.DRAW_STATED_TWICE.found(draw.ref or draw.rail, message, draw.amps.source, key=draw.key))

    def _report(self, finding: Finding) -> None:
        self.findings.append(finding)


def _amps(watts: Evidence, volts: Evidence) -> Evidence:
    """I = P/V at the rail's own corners."""
    ends = sorted(abs(end) for end in (volts.span.low, volts.span.high))
    nominal = abs(volts.span.nominal)
    span = Span(watts.span.low / ends[1], watts.span.nominal / nominal, watts.span.high / ends[0])
    formula = f"I = P/V = {show(watts.span.nominal, 'W')} / {show(nominal, 'V')}"
    return Evidence("load current", span, "A", watts.source, Grade.STATED, formula, (watts, volts))


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
    return replace(one, amps=amps, pulse=one.pulse or other.pulse)


def _where(statement: StatedDraw) -> str:
    given = statement.amps or statement.watts
    return given.source if given else ""


def _told(statement: StatedDraw) -> str:
    if statement.amps:
        return f"{show_span(statement.amps.span, 'A')} is stated"
    return f"{show_span(statement.watts.span, 'W')} is stated" if statement.watts else "nothing is stated"
