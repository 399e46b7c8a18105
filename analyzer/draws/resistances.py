"""The resistors of a board as the network sees them, and the nets that links make one node."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

from analyzer.circuit import Component, Pin
from analyzer.component_value import component_value
from analyzer.draws.board import Board
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Dimension, Span
from analyzer.rails.kinds import Kind
from analyzer.rails.links import resistor_pairs
from analyzer.settings import Settings

_TRIMMER = 0.2
_THERMISTOR = Span(1 / 30, 1.0, 30.0)
"""Resistance of a thermistor over its temperatures, relative to its value at 25 °C (common practice)."""


@dataclass(frozen=True, slots=True, eq=False)
class Resistor:
    """A fitted resistor with a value, or one resistor of an array.

    Attributes:
        component: The part.
        name: Its key; of an array with a number behind it.
        a: Node at its first pin.
        b: Node at its second pin.
        ohms: Resistance with its tolerance [Ω].
    """

    component: Component
    name: str
    a: str
    b: str
    ohms: Evidence


@dataclass(frozen=True)
class Resistances:
    """All resistors between different nodes.

    Attributes:
        resistors: Those with a value above zero.
        not_understood: Those whose value text says no resistance, or whose pins do not pair.
        node: Net → node; nets joined by links share one. A node on a rail has the rail's name behind "rail ".
        nets: Node → its nets, rails left out.
    """

    resistors: tuple[Resistor, ...]
    not_understood: tuple[Component, ...]
    node: Mapping[str, str]
    nets: Mapping[str, tuple[str, ...]]

    @cached_property
    def keys(self) -> frozenset[str]:
        """Keys of the parts."""
        return frozenset(resistor.component.key for resistor in self.resistors)

    def at_pin(self, pin: Pin) -> str:
        """The node a pin is on."""
        return self.node.get(pin.net, pin.net)


_RAIL = "rail "


def is_rail(node: str) -> bool:
    """Whether a node is a rail."""
    return node.startswith(_RAIL)


def rail_of(node: str) -> str:
    """Name of the rail that a rail's node stands for."""
    return node.removeprefix(_RAIL)


def rail_node(rail: str) -> str:
    """Node of a rail."""
    return f"{_RAIL}{rail}"


def find_resistances(board: Board, settings: Settings) -> Resistances:
    """The resistors and nodes of a board."""
    node = {net.name: _node(board, net.name) for net in board.circuit.nets}
    members: dict[str, list[str]] = {}
    for net, at in node.items():
        if not is_rail(at):
            members.setdefault(at, []).append(net)
    found: list[Resistor] = []
    unknown: list[Component] = []
    for component in board.fitted:
        kind = board.kind(component)
        if kind not in (Kind.RESISTOR, Kind.THERMISTOR, Kind.TRIMMER) or component.key in board.regulators:
            continue
        pairs = _ends_of_trimmer(component) if kind is Kind.TRIMMER else resistor_pairs(component)
        value = component_value(component.value)
        if value is not None and value.is_unfitted:
            continue
        usable = value is not None and value.dimension in (None, Dimension.RESISTANCE)
        ends = [(node[one], node[other]) for one, other in pairs if node[one] != node[other]]
        if value is None or not usable or value.magnitude is None or (not pairs and len(component.pins) > 1):
            unknown += [component] if ends or not pairs else []
            continue
        if value.magnitude == 0:
            continue
        ohms = _resistance(component, kind, value.magnitude, value.tolerance, settings)
        many = len(pairs) > 1
        found += [
            Resistor(component, f"{component.key} {n}" if many else component.key, a, b, ohms)
            for n, (a, b) in enumerate(ends, 1)
        ]
    return Resistances(tuple(found), tuple(unknown), node, {at: tuple(nets) for at, nets in members.items()})


def _ends_of_trimmer(component: Component) -> list[tuple[str, str]]:
    """Both ends of a potentiometer's track; what its wiper feeds is not known to take anything."""
    ends = [pin.net for pin in component.pins if pin.number in ("1", "3")]
    return [(ends[0], ends[1])] if len(component.pins) == 3 and len(ends) == 2 else []


def _node(board: Board, net: str) -> str:
    rail = board.rail(net)
    return rail_node(rail.name) if rail else board.joined.groups.of(net)


def _resistance(component: Component, kind: Kind, ohms: float, tolerance: float | None, settings: Settings) -> Evidence:
    default = settings.resistor_tolerance
    source = f"{component.place}, {component.ref} value '{component.value}'"
    name = f"resistance of {component.ref}"
    if kind is Kind.THERMISTOR:
        note = "thermistor over its temperatures, common practice"
        return Evidence(name, _THERMISTOR.scaled(ohms), "Ω", source, Grade.PRESUMED, note=note)
    if kind is Kind.TRIMMER and tolerance is None:
        note = "tolerance of trimmers ±20 %, common practice"
        return Evidence(name, Span.around(ohms, _TRIMMER), "Ω", source, Grade.PRESUMED, note=note)
    if tolerance is None:
        span, note = Span.around(ohms, default.span.high), "tolerance not stated in the value"
        return Evidence(name, span, "Ω", source, Grade.STATED, parents=(default,), note=note)
    return Evidence(name, Span.around(ohms, tolerance), "Ω", source, Grade.STATED)
