"""What can drive a node: a chip's output, a switch, a transistor, whatever hangs on a connector."""

from __future__ import annotations

from dataclasses import dataclass

from analyzer.circuit import Component, Pin
from analyzer.draws.board import Board
from analyzer.draws.kinds import JOINING, carries_nothing, is_connector
from analyzer.draws.resistances import Resistances

_HIGH_IMPEDANCE = frozenset({"input", "power_in", "no_connect", "unconnected", "free"})
_DRIVES = frozenset({"output", "bidirectional", "tri_state", "open_collector", "open_emitter"})


@dataclass(frozen=True, slots=True)
class Drive:
    """What a node can be pulled to.

    Attributes:
        low: Lowest voltage [V].
        high: Highest voltage [V].
        is_signal: True when only chips and connectors drive it; False with a switch or transistor among them.
    """

    low: float
    high: float
    is_signal: bool


class Drives:
    """Finds what drives a node, once for each node; `skip` are keys of parts that do not count."""

    def __init__(self, board: Board, network: Resistances, skip: frozenset[str] = frozenset()) -> None:
        self._board = board
        self._network = network
        self._skip = skip | network.keys
        self._found: dict[str, Drive | None] = {}

    def at(self, node: str) -> Drive | None:
        """What drives a node, None if it floats."""
        if node not in self._found:
            self._found[node] = self._find(node)
        return self._found[node]

    def _find(self, node: str) -> Drive | None:
        low, high, found, is_signal = 0.0, 0.0, False, True
        for net in self._network.nets.get(node, ()):
            for component, pin in self._board.circuit.on_net.get(net, ()):
                if component.key in self._skip or not _can_drive(self._board, component, pin):
                    continue
                found = True
                if pin.kind not in _DRIVES:
                    is_signal = is_signal and is_connector(component, self._board.kind(component))
                    continue
                for name in self._board.rails_at(component):
                    if volts := self._board.rails.by_name[name].volts:
                        low, high = min(low, volts.span.low), max(high, volts.span.high)
        return Drive(low, high, is_signal) if found else None


def _can_drive(board: Board, component: Component, pin: Pin) -> bool:
    if not component.fitted or pin.kind in _HIGH_IMPEDANCE:
        return False
    if component.key in board.regulators:
        # power-good outputs pull; what a regulator's other pins take is in its own budget
        return pin.kind in _DRIVES and pin.kind != "output"
    kind = board.kind(component)
    return kind not in JOINING and not carries_nothing(component, kind)
