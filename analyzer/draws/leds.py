"""Currents of indicator LEDs: strings of LEDs and resistors from a rail to ground, another rail or a driver.

I = (V − ΣVF) / ΣR. The forward drop is presumed by colour (common practice, at a few milliampere); a string that a
chip or transistor switches has 0 as its low value. A LED fed by a chip or transistor is part of that part's current.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass

from analyzer.circuit import Component, Pin, plain_name
from analyzer.draws.board import Board
from analyzer.draws.drives import Drives
from analyzer.draws.kinds import is_led
from analyzer.draws.resistances import Resistances, Resistor, is_rail, rail_of
from analyzer.draws.resistors import gap
from analyzer.evidence import Evidence, Grade
from analyzer.load import Draw, Gap
from analyzer.quantity import Span, total
from analyzer.wording import show

_DROPS: tuple[tuple[re.Pattern[str], str, Span], ...] = tuple(
    (re.compile(pattern, re.IGNORECASE), colour, span)
    for pattern, colour, span in (
        (r"infra-?red|\bir\b", "infrared", Span(1.1, 1.3, 1.7)),
        (r"\bred\b|\brot\b", "red", Span(1.7, 2.0, 2.5)),
        (r"orange|amber|yellow", "yellow", Span(1.8, 2.1, 2.6)),
        (r"green", "green", Span(1.9, 2.6, 3.5)),
        (r"blue|white|violet|ultraviolet|\buv\b", "blue or white", Span(2.6, 3.1, 3.8)),
    )
)
_ANY = Span(1.6, 2.1, 3.8)
_PIN_COLOURS = {"R": "red", "G": "green", "B": "blue", "W": "white", "Y": "yellow"}
_LONGEST = 16


@dataclass(frozen=True, slots=True, eq=False)
class Junction:
    """One diode of a LED: nodes of anode and cathode, presumed forward drop."""

    component: Component
    anode: str
    cathode: str
    drop: Evidence


@dataclass(frozen=True, slots=True)
class _Walk:
    """One end of a string: what lies on the way, the last node, and how it ends ("rail", "driven", "open")."""

    resistors: tuple[Resistor, ...]
    junctions: tuple[Junction, ...]
    node: str
    end: str


def led_draws(board: Board, network: Resistances) -> tuple[list[Draw], list[Gap], frozenset[str]]:
    """Draws and gaps of LEDs, and the keys of the resistors in their strings."""
    leds = [component for component in board.fitted if is_led(component, board.kind(component))]
    junctions = [junction for component in leds for junction in _junctions(network, component)]
    drives = Drives(board, network, frozenset(component.key for component in leds))
    finder = _Finder(network, junctions, drives)
    draws: list[Draw] = []
    gaps: list[Gap] = []
    claimed: set[str] = set()
    done: set[Junction] = set()
    for junction in junctions:
        if junction in done:
            continue
        up, down = finder.walk(junction, upward=True), finder.walk(junction, upward=False)
        string = (junction, *up.junctions, *down.junctions)
        done.update(string)
        resistors = (*up.resistors, *down.resistors)
        if up.end != "rail" or down.end == "open" or board.rails.by_name[rail_of(up.node)].is_ground:
            continue
        is_shared = any(resistor.component.key in claimed for resistor in resistors)
        claimed.update(resistor.component.key for resistor in resistors)
        if not is_shared:  # LEDs side by side behind one resistor share its current
            _close(board, string, resistors, up, down, draws, gaps)
    return draws, gaps, frozenset(claimed)


class _Finder:
    def __init__(self, network: Resistances, junctions: Iterable[Junction], drives: Drives) -> None:
        self._drives = drives
        self._resistors: dict[str, list[Resistor]] = {}
        for resistor in network.resistors:
            for node in (resistor.a, resistor.b):
                self._resistors.setdefault(node, []).append(resistor)
        self._below: dict[str, list[Junction]] = {}
        self._above: dict[str, list[Junction]] = {}
        for junction in junctions:
            self._below.setdefault(junction.anode, []).append(junction)
            self._above.setdefault(junction.cathode, []).append(junction)

    def walk(self, start: Junction, *, upward: bool) -> _Walk:
        """From a LED towards its supply or away from it, as long as there is one way on."""
        node = start.anode if upward else start.cathode
        resistors: list[Resistor] = []
        junctions: list[Junction] = []
        for _ in range(_LONGEST):
            if is_rail(node):
                return _Walk(tuple(resistors), tuple(junctions), node, "rail")
            if self._drives.at(node):
                return _Walk(tuple(resistors), tuple(junctions), node, "driven")
            ways = [one for one in self._resistors.get(node, ()) if one not in resistors]
            leds = [
                one for one in (self._above if upward else self._below).get(node, ()) if one not in (start, *junctions)
            ]
            if len(ways) + len(leds) != 1:
                break
            if ways:
                resistors.append(ways[0])
                node = ways[0].b if ways[0].a == node else ways[0].a
            else:
                junctions.append(leds[0])
                node = leds[0].anode if upward else leds[0].cathode
        return _Walk(tuple(resistors), tuple(junctions), node, "open")


def _close(
    board: Board,
    string: tuple[Junction, ...],
    resistors: tuple[Resistor, ...],
    up: _Walk,
    down: _Walk,
    draws: list[Draw],
    gaps: list[Gap],
) -> None:
    rail = board.rails.by_name[rail_of(up.node)]
    below = board.rails.by_name[rail_of(down.node)] if down.end == "rail" else None
    component = string[0].component
    if not resistors:
        gaps.append(gap(component, rail.name, "LED current set by its driver, not stated"))
        return
    if rail.volts is None or (below and not below.is_ground and below.volts is None):
        gaps.append(gap(component, rail.name, f"voltage of {rail.name} not known, so neither its LED current"))
        return
    floor = below.volts.span if below and below.volts and not below.is_ground else Span.exact(0.0)
    voltage = rail.volts.span - floor - total([junction.drop.span for junction in string])
    ohms = total([resistor.ohms.span for resistor in resistors])
    low, nominal, high = (
        max(volts, 0.0) / resistance
        for volts, resistance in zip(voltage.corners, (ohms.high, ohms.nominal, ohms.low), strict=True)
    )
    span = Span(0.0 if down.end == "driven" else low, nominal, high)
    if not span.high:
        return
    drop = total([junction.drop.span for junction in string])
    refs = " + ".join(resistor.component.ref for resistor in resistors)
    amps = Evidence(
        f"current of LED {component.ref}",
        span,
        "A",
        f"{component.place}, {component.ref} with {refs}",
        Grade.DERIVED,
        f"I = (V − VF)/R = ({show(rail.volts.span.nominal, 'V')} − {show(drop.nominal, 'V')}) "
        f"/ {show(ohms.nominal, 'Ω')}",
        (rail.volts, *(junction.drop for junction in string), *(resistor.ohms for resistor in resistors)),
        "switched: low value is off" if down.end == "driven" else "",
    )
    draws.append(Draw(component.ref, component.key, rail.name, amps, "computed"))
    if below and below.volts and below.volts.span.nominal < 0:
        draws.append(Draw(component.ref, component.key, below.name, amps, "computed"))


def _junctions(network: Resistances, component: Component) -> list[Junction]:
    """The diodes of a LED; none where the pins do not say which is which."""
    anodes = [pin for pin in component.pins if _is(pin, "A")]
    cathodes = [pin for pin in component.pins if _is(pin, "K") or _is(pin, "C")]
    if len(component.pins) == 2 and not (anodes and cathodes):
        cathodes, anodes = [component.pins[0]], [component.pins[1]]
    if len(anodes) == 1:
        pairs = [(anodes[0], cathode) for cathode in cathodes]
    elif len(cathodes) == 1:
        pairs = [(anode, cathodes[0]) for anode in anodes]
    else:
        by_letter = {plain_name(pin.name)[:1].upper(): pin for pin in cathodes}
        pairs = [(pin, by_letter[first]) for pin in anodes if (first := plain_name(pin.name)[:1].upper()) in by_letter]
    return [
        Junction(component, network.at_pin(anode), network.at_pin(cathode), _drop(component, anode, cathode))
        for anode, cathode in pairs
    ]


def _is(pin: Pin, letter: str) -> bool:
    return bool(re.fullmatch(rf"[RGBWY]?\d?{letter}\d?|{letter}[RGBWY]?\d?", plain_name(pin.name).upper()))


def _drop(component: Component, anode: Pin, cathode: Pin) -> Evidence:
    own = [plain_name(pin.name).upper().strip("AKC0123456789") for pin in (anode, cathode)]
    text = " ".join(
        (
            *(_PIN_COLOURS.get(letter, "") for letter in own),
            component.value.replace("_", " "),
            component.lib_id.rpartition(":")[2].replace("_", " "),
            component.description,
            *component.fields.values(),
        )
    )
    colour, span = next(((name, span) for pattern, name, span in _DROPS if pattern.search(text)), ("not stated", _ANY))
    return Evidence(
        f"forward drop of {component.ref}",
        span,
        "V",
        "LED forward drop by colour, common practice",
        Grade.PRESUMED,
        note=f"colour {colour}",
    )
