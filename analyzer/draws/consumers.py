"""Which parts draw from which rail, whether or not anybody has said how much.

Sure consumers, one for each (part, rail): a pin of type "power input" that is neither ground nor a regulator's input;
a supply-named pin of another type on a chip that has no such pin; relays, motors, sounders and the like; a connector
that carries nothing but power, that has several pins on a rail (single ones are there for reference, several for
current), or that supplies by its very kind. They are gaps until a current is known.

Possible ones: connectors with one pin on a rail beside signals, transistors, chips whose rail pins have other names.
Their own list: each is named, none holds up a verdict, unless a rail has nothing else that could draw from it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from analyzer.circuit import Component, Pin, plain_name
from analyzer.draws.board import Board
from analyzer.draws.kinds import (
    PASSIVE,
    SURE_LOADS,
    TWO_PINS,
    carries_nothing,
    is_connector,
    is_led,
    is_outlet,
    named_ground,
    named_supply,
    takes_supply,
)
from analyzer.rails.kinds import Kind, letters


@dataclass(frozen=True, slots=True)
class Consumer:
    """A part that draws from a rail.

    Attributes:
        component: The part.
        rail: Name of the rail.
        pins: Its pins that draw from this rail.
        through: Reference of the part between the rail and the pins, "" if there is none.
        is_sure: False for a part that only may draw.
    """

    component: Component
    rail: str
    pins: tuple[Pin, ...]
    through: str = ""
    is_sure: bool = True


def find_consumers(board: Board) -> tuple[Consumer, ...]:
    """All consumers, in natural order of reference, then in pin order."""
    found: list[Consumer] = []
    for component in board.fitted:
        if component.key not in board.regulators and component.ref not in board.passages:
            found += _of(board, component)
    return tuple(consumer for consumer in found if (consumer.component.ref, consumer.rail) not in board.feeders)


def unfed_supplies(board: Board) -> Iterable[tuple[Component, Pin]]:
    """Supply pins on a named net that no rail reaches."""
    for component in board.fitted:
        if component.key in board.regulators or is_connector(component, board.kind(component)):
            continue
        for pin in component.pins:
            net = board.circuit.net_by_name.get(pin.net)
            if net is None or not net.is_named or board.rail(pin.net):
                continue
            if takes_supply(pin) and not named_ground(pin) and not board.supplying(pin):
                yield component, pin


def _of(board: Board, component: Component) -> list[Consumer]:
    kind = board.kind(component)
    if is_connector(component, kind):
        return _connector(board, component)
    if kind in TWO_PINS and len(component.pins) <= 2:
        return []  # even where a symbol gives a fuse or bead power pins
    powered = [pin for pin in component.pins if pin.kind == "power_in"]
    if found := _by_rail(board, component, (pin for pin in powered if takes_supply(pin))):
        # references and the like are on a rail of their own at times: then they may be all that draws there
        return found + _others(_by_rail(board, component, powered), found)
    if kind in PASSIVE or carries_nothing(component, kind) or is_led(component, kind):
        return []
    if not powered and (found := _by_rail(board, component, (p for p in component.pins if named_supply(component, p)))):
        return found
    return _on_rails(board, component, is_sure=not powered and letters(component.ref) in SURE_LOADS)


def _others(all_of_them: Iterable[Consumer], found: Iterable[Consumer]) -> list[Consumer]:
    rails = {consumer.rail for consumer in found}
    return [replace(consumer, is_sure=False) for consumer in all_of_them if consumer.rail not in rails]


def _by_rail(board: Board, component: Component, pins: Iterable[Pin]) -> list[Consumer]:
    at: dict[str, tuple[list[Pin], str]] = {}
    for pin in pins:
        for rail, through in board.supplying(pin):
            at.setdefault(rail, ([], through))[0].append(pin)
    return [Consumer(component, rail, tuple(pins), through) for rail, (pins, through) in at.items()]


def _on_rails(board: Board, component: Component, *, is_sure: bool) -> list[Consumer]:
    at: dict[str, list[Pin]] = {}
    for pin in component.pins:
        rail = board.live_rail(pin.net)
        if rail and pin.kind not in ("no_connect", "power_out") and not _is_gate(board, component, pin):
            at.setdefault(rail.name, []).append(pin)
    if len(at) == 1 and is_sure and len({pin.net for pin in component.pins}) == 1:
        return []  # both ends on one net: no current
    return [Consumer(component, rail, tuple(pins), is_sure=is_sure) for rail, pins in at.items()]


def _is_gate(board: Board, component: Component, pin: Pin) -> bool:
    return board.kind(component) is Kind.TRANSISTOR and plain_name(pin.name).upper() in ("G", "GATE", "B", "BASE")


def _connector(board: Board, component: Component) -> list[Consumer]:
    wired = [pin for pin in component.pins if pin.kind != "no_connect" and _is_wired(board, pin)]
    only_power = all(board.rail(pin.net) for pin in wired) and len({board.rails.of_net[p.net] for p in wired}) > 1
    is_sure = only_power or is_outlet(component)
    # on a rail that nothing on the board makes, a connector is the source rather than a load
    return [
        replace(consumer, is_sure=is_sure or len(consumer.pins) > 1)
        for consumer in _on_rails(board, component, is_sure=False)
        if consumer.rail in board.made_here
    ]


def _is_wired(board: Board, pin: Pin) -> bool:
    return len(board.circuit.on_net.get(pin.net, ())) > 1 or board.rail(pin.net) is not None
