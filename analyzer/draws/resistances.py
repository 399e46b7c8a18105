"""The resistors of a board as the network sees them, and the nets that links make one node."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

from analyzer.circuit import Component, Pin
from analyzer.component_value import component_value
from analyzer.draws.board import Board
from analyzer.draws.kinds import JOINING, letters
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Dimension, Span
from analyzer.settings import Settings

_RESISTOR_LETTERS = frozenset({"R", "RS", "RSH"})


@dataclass(frozen=True, slots=True, eq=False)
class Resistor:
    """A fitted resistor with a value.

    Attributes:
        component: The part.
        a: Node at its first pin.
        b: Node at its second pin.
        ohms: Resistance with its tolerance [Ω].
    """

    component: Component
    a: str
    b: str
    ohms: Evidence


@dataclass(frozen=True)
class Resistances:
    """All resistors between different nodes.

    Attributes:
        resistors: Those with a value above zero.
        not_understood: Those whose value text says no resistance.
        node: Net → node; nets joined by links share one. A node on a rail has the rail's name behind "rail ".
        nets: Node → its nets, rails left out.
    """

    resistors: tuple[Resistor, ...]
    not_understood: tuple[Component, ...]
    node: Mapping[str, str]
    nets: Mapping[str, tuple[str, ...]]

    @cached_property
    def keys(self) -> frozenset[str]:
        """Keys of the resistors."""
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
    pairs: list[tuple[Component, float | None, float | None]] = []
    joined = _Nodes(board)
    for component in board.fitted:
        kind = letters(component.ref)
        if len(component.pins) != 2 or component.key in board.regulators:
            continue
        if kind in _RESISTOR_LETTERS:
            value = component_value(component.value)
            usable = value and value.dimension in (None, Dimension.RESISTANCE) and not value.is_unfitted
            ohms = value.magnitude if value and usable else None
            pairs.append((component, ohms, value.tolerance if value else None))
            joins = ohms == 0
        else:
            joins = kind in JOINING and not (kind in ("JP", "SJ") and "open" in component.lib_id.casefold())
        if settings.links.get(component.ref, joins):
            joined.join(component.pins[0].net, component.pins[1].net)
    found: list[Resistor] = []
    unknown: list[Component] = []
    for component, ohms, tolerance in pairs:
        a, b = (joined.node(pin.net) for pin in component.pins)
        if a == b or ohms == 0 or settings.links.get(component.ref):
            continue
        if ohms is None:
            unknown.append(component)
        else:
            found.append(Resistor(component, a, b, _resistance(component, ohms, tolerance, settings)))
    return Resistances(tuple(found), tuple(unknown), joined.nodes(), joined.members())


def _resistance(component: Component, ohms: float, tolerance: float | None, settings: Settings) -> Evidence:
    default = settings.resistor_tolerance
    spread = default.span.high if tolerance is None else tolerance
    return Evidence(
        f"resistance of {component.ref}",
        Span.around(ohms, spread),
        "Ω",
        f"{component.place}, {component.ref} value '{component.value}'",
        Grade.STATED,
        parents=(default,) if tolerance is None else (),
        note="tolerance not stated in the value" if tolerance is None else "",
    )


class _Nodes:
    """Sets of nets that links make one node."""

    def __init__(self, board: Board) -> None:
        self._board = board
        self._parent: dict[str, str] = {}

    def join(self, one: str, other: str) -> None:
        """Make two nets one node; two rails stay apart, the rails stage has decided about them."""
        a, b = self.node(one), self.node(other)
        if a == b or (is_rail(a) and is_rail(b)):
            return
        if is_rail(b) or (not is_rail(a) and b < a):
            a, b = b, a
        self._parent[b] = a

    def node(self, net: str) -> str:
        """The node of a net."""
        rail = self._board.rail(net)
        name = rail_node(rail.name) if rail else net
        while name in self._parent:
            name = self._parent[name]
        return name

    def nodes(self) -> dict[str, str]:
        """Net → node, for every net of the circuit."""
        return {net.name: self.node(net.name) for net in self._board.circuit.nets}

    def members(self) -> dict[str, tuple[str, ...]]:
        """Node → nets, for nodes that are no rail."""
        found: dict[str, list[str]] = {}
        for net in self._board.circuit.nets:
            node = self.node(net.name)
            if not is_rail(node):
                found.setdefault(node, []).append(net.name)
        return {node: tuple(nets) for node, nets in found.items()}
