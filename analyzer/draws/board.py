"""The circuit as the draws stage looks at it: fitted parts, and the rail each pin is on."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from analyzer.circuit import Circuit, Component, Pin
from analyzer.draws.kinds import IN_SERIES
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.rail import Rail, Rails
from analyzer.rails.ground import ground_nets
from analyzer.rails.kinds import Kind
from analyzer.rails.links import Joined, join
from analyzer.settings import Settings


@dataclass(frozen=True)
class Board:
    """A circuit with its parts and rails."""

    circuit: Circuit
    parts: tuple[Part, ...]
    rails: Rails
    settings: Settings

    @cached_property
    def joined(self) -> Joined:
        """All nets as links join them, those of signals too."""
        return join(self.circuit, self.parts, self.settings, ground_nets(self.circuit))

    def kind(self, component: Component) -> Kind:
        """Kind of a component."""
        return self.joined.kinds[component.key]

    @cached_property
    def fitted(self) -> tuple[Component, ...]:
        """Fitted parts that are on the board, in natural order."""
        return tuple(part for part in self.circuit.components if part.fitted and part.on_board)

    @cached_property
    def regulators(self) -> frozenset[str]:
        """Keys of the parts recognised as regulators or passages."""
        return frozenset(part.key for part in self.parts)

    @cached_property
    def passages(self) -> frozenset[str]:
        """References of discrete parts through which rails are fed."""
        return frozenset(feed.ref for rail in self.rails.rails for feed in rail.feeds if feed.kind == "passage")

    @cached_property
    def feeders(self) -> frozenset[tuple[str, str]]:
        """(reference, rail) of everything that feeds a rail."""
        return frozenset((feed.ref, rail.name) for rail in self.rails.rails for feed in rail.feeds if feed.ref)

    @cached_property
    def made_here(self) -> frozenset[str]:
        """Rails that a regulator or passage of this board feeds."""
        kinds = ("regulator", "passage")
        return frozenset(rail.name for rail in self.rails.rails if any(feed.kind in kinds for feed in rail.feeds))

    def rail(self, net: str) -> Rail | None:
        """The rail a net belongs to."""
        name = self.rails.of_net.get(net)
        return self.rails.by_name.get(name) if name else None

    def live_rail(self, net: str) -> Rail | None:
        """The rail a net belongs to unless that is ground."""
        rail = self.rail(net)
        return None if rail is None or rail.is_ground else rail

    def volts(self, net: str) -> Span | None:
        """Voltage of a net that is on a rail: 0 on ground, None where unknown."""
        rail = self.rail(net)
        if rail is None:
            return None
        if rail.is_ground:
            return Span.exact(0.0)
        return rail.volts.span if rail.volts else None

    def rails_at(self, component: Component) -> tuple[str, ...]:
        """Rails a part has any pin on, ground excluded, in pin order."""
        found = (self.live_rail(pin.net) for pin in component.pins)
        return tuple(dict.fromkeys(rail.name for rail in found if rail))

    def supplying(self, pin: Pin) -> tuple[tuple[str, str], ...]:
        """(rail, reference it goes through or "") that a supply pin is fed from.

        A pin on a net that is no rail of its own is fed through the parts between: filter resistors, beads, diodes.
        """
        if self.rail(pin.net):
            rail = self.live_rail(pin.net)
            return ((rail.name, ""),) if rail else ()
        seen = {pin.net}
        level = [(pin.net, "")]
        for _ in range(_SERIES_PARTS):
            level = [
                (net, through or component.ref)
                for origin, through in level
                for component, net in self._beyond(origin)
                if net not in seen and not seen.add(net)  # type: ignore[func-returns-value]
            ]
            found = {rail.name: through for net, through in reversed(level) if (rail := self.live_rail(net))}
            if found:
                return tuple(sorted(found.items()))
            level = [(net, through) for net, through in level if not self.rail(net)]
        return ()

    def _beyond(self, net: str) -> list[tuple[Component, str]]:
        found = []
        for component, pin in self.circuit.on_net.get(net, ()):
            if not component.fitted or self.kind(component) not in IN_SERIES or len(component.pins) != 2:
                continue
            other = component.pins[1] if component.pins[0] is pin else component.pins[0]
            found.append((component, other.net))
        return found


_SERIES_PARTS = 3
"""How many parts in series are looked through between a rail and a supply pin."""
