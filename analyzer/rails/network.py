"""The resistive network around a pin: its branches, where it ends, and which of its legs can be switched or driven."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from functools import cached_property
from itertools import pairwise

from analyzer.circuit import Circuit, Component, Pin, natural_key, plain_name
from analyzer.quantity import Span
from analyzer.rails.kinds import Kind, ohms, value_of
from analyzer.rails.links import Groups, Joined, conducts, resistor_pairs
from analyzer.settings import Settings

MOST_NODES = 48
"""A feedback network larger than this is not one: something else was walked into."""


@dataclass(frozen=True, slots=True)
class Resistance:
    """A branch with its tolerance.

    Attributes:
        ref: Reference of the resistor.
        one, other: Groups it joins.
        span: Resistance [Ω].
        tolerance_stated: Whether the part's own texts give the tolerance.
        text: Its value text.
    """

    ref: str
    one: str
    other: str
    span: Span
    tolerance_stated: bool
    text: str


class End(StrEnum):
    """How a leg of the network ends."""

    GROUND = "ground"
    OUTPUT = "output"
    RAIL = "rail"
    DRIVEN = "driven"
    """An output pin of another chip: DAC, PWM, port pin."""
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class Leg:
    """End of one leg.

    Attributes:
        group: The group it ends on.
        end: How.
        ref: Reference of what is there, "" for rails.
    """

    group: str
    end: End
    ref: str = ""


@dataclass(frozen=True, slots=True)
class Switch:
    """A transistor, open jumper or switch in the network: open, or joining one of its pairs of groups."""

    ref: str
    pairs: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class Network:
    """Everything resistive that reaches a pin.

    Attributes:
        tap: Group of the pin.
        resistances: Its fixed resistors.
        trimmers: (reference, end, wiper, end, span) of adjustable ones.
        switches: What may join its nodes.
        legs: Where it ends, by group.
        trouble: What makes it unsolvable, one line each.
    """

    tap: str
    resistances: tuple[Resistance, ...]
    trimmers: tuple[tuple[str, str, str, str, Span], ...] = ()
    switches: tuple[Switch, ...] = ()
    legs: Mapping[str, Leg] = field(default_factory=dict)
    trouble: tuple[str, ...] = ()

    def legs_of(self, end: End) -> tuple[Leg, ...]:
        """Legs that end in a certain way, in order of group."""
        return tuple(self.legs[group] for group in sorted(self.legs) if self.legs[group].end is end)


_TOLERANCE_FIELD = re.compile(r"tol(?:erance)?\.?(?:\s*\(?%\)?)?", re.IGNORECASE)
_PERCENT = re.compile(r"[±+-]*\s*(\d{1,2}(?:[.,]\d{1,3})?)\s*%?")
_DRIVES = frozenset({"output", "bidirectional", "tri_state", "power_out", "open_collector", "open_emitter"})
_SAYS_NOTHING = frozenset({"passive", "unspecified", "free"})
_GATES = frozenset({"G", "GATE", "B", "BASE", "G1", "G2"})


@dataclass(frozen=True)
class Mesh:
    """The circuit's resistors by group, made once for all feedback pins."""

    circuit: Circuit
    joined: Joined
    settings: Settings

    @property
    def groups(self) -> Groups:
        """Groups of nets."""
        return self.joined.groups

    @cached_property
    def members(self) -> Mapping[str, tuple[str, ...]]:
        """Nets of every group, in natural order."""
        found: dict[str, list[str]] = {}
        for net in self.circuit.nets:
            found.setdefault(self.groups.of(net.name), []).append(net.name)
        return {group: tuple(nets) for group, nets in found.items()}

    def pins(self, group: str) -> Iterator[tuple[Component, Pin]]:
        """All pins on a group."""
        for net in self.members.get(group, (group,)):
            yield from self.circuit.on_net.get(net, ())

    @cached_property
    def by_group(self) -> Mapping[str, tuple[tuple[Component, str, str], ...]]:
        """Fitted resistors and trimmers at every group: (part, this group, far group)."""
        linked = {link.key for link in self.joined.links}
        found: dict[str, list[tuple[Component, str, str]]] = {}
        for component in self.circuit.components:
            kind = self.joined.kinds[component.key]
            if kind not in (Kind.RESISTOR, Kind.THERMISTOR) or component.key in linked or not conducts(component, kind):
                continue
            for one, other in resistor_pairs(component):
                near, far = self.groups.of(one), self.groups.of(other)
                if near != far:
                    found.setdefault(near, []).append((component, near, far))
                    found.setdefault(far, []).append((component, far, near))
        return {group: tuple(items) for group, items in found.items()}

    def resistance(self, component: Component, one: str, other: str) -> Resistance | None:
        """A resistor as a branch; None if its value text gives no resistance."""
        value = ohms(component)
        if value is None or value <= 0:
            return None
        tolerance = self._tolerance(component)
        stated = tolerance is not None
        fraction = self.settings.resistor_tolerance.span.high if tolerance is None else tolerance
        return Resistance(component.ref, one, other, Span.around(value, min(fraction, 0.99)), stated, component.value)

    def _tolerance(self, component: Component) -> float | None:
        value = value_of(component)
        if value is not None and value.tolerance is not None:
            return value.tolerance
        for name in sorted(component.fields):
            if _TOLERANCE_FIELD.fullmatch(name.strip()) and (
                found := _PERCENT.fullmatch(component.fields[name].strip())
            ):
                return float(found[1].replace(",", ".")) / 100
        return None


def network_at(
    mesh: Mesh, tap: str, ground: str | None, outputs: frozenset[str], is_rail: Callable[[str], bool], own_key: str
) -> Network:
    """Walk the resistors from a pin to where they end.

    Args:
        mesh: The resistors.
        tap: Group of the pin.
        ground: The part's own ground group.
        outputs: Groups taken as the output.
        is_rail: Whether a group is a supply of its own.
        own_key: The part itself: its own pins end no leg.
    """
    seen = {tap}
    queue = [tap]
    used: set[tuple[str, str, str]] = set()
    resistances: list[Resistance] = []
    trimmers: list[tuple[str, str, str, str, Span]] = []
    legs: dict[str, Leg] = {}
    switches: list[Switch] = []
    met: set[str] = set()
    trouble: list[str] = []
    grounds = mesh.joined.ground | ({ground} if ground else set())

    def arrive(group: str) -> None:
        if group in seen:
            return
        seen.add(group)
        leg = _leg(mesh, group, grounds, outputs, is_rail, own_key, trouble)
        if leg is None:
            queue.append(group)
        else:
            legs[group] = leg

    for group in queue:
        if len(queue) > MOST_NODES:
            trouble.append(f"the network at {tap} is too large to be a divider")
            break
        for component, near, far in mesh.by_group.get(group, ()):
            mark = (component.key, min(near, far), max(near, far))
            if mark in used:
                continue
            used.add(mark)
            branch = mesh.resistance(component, near, far)
            if mesh.joined.kinds[component.key] is Kind.THERMISTOR:
                trouble.append(f"{component.ref} is a thermistor: its resistance varies")
                continue
            if branch is None:
                trouble.append(f"{component.ref} has no readable resistance ('{component.value}')")
                continue
            resistances.append(branch)
            arrive(far)
        for component, pin in mesh.pins(group):
            if component.key in met or component.key == own_key or not component.fitted:
                continue
            kind = mesh.joined.kinds[component.key]
            if kind is Kind.TRIMMER:
                met.add(component.key)
                trimmer = _trimmer(mesh, component)
                if trimmer is None:
                    trouble.append(f"{component.ref} is adjustable and not understood")
                    continue
                trimmers.append(trimmer)
                for end in trimmer[1:4]:
                    arrive(end)
            elif kind in (Kind.JUMPER, Kind.SWITCH, Kind.TRANSISTOR) and not _is_gate(kind, pin):
                met.add(component.key)
                switch = _switch(mesh, component, kind)
                switches.append(switch)
                for pair in switch.pairs:
                    for end in pair:
                        arrive(end)
            elif group == tap and kind is Kind.CHIP and pin.kind in _DRIVES | _SAYS_NOTHING:
                trouble.append(f"{component.ref} may drive the feedback pin itself")
    resistances.sort(key=lambda item: (natural_key(item.ref), item.one, item.other))
    return Network(tap, tuple(resistances), tuple(trimmers), tuple(switches), legs, tuple(dict.fromkeys(trouble)))


def _is_gate(kind: Kind, pin: Pin) -> bool:
    return kind is Kind.TRANSISTOR and plain_name(pin.name).upper() in _GATES


def _switch(mesh: Mesh, component: Component, kind: Kind) -> Switch:
    """The pairs a switch can join: its channel, or neighbouring contacts."""
    groups = [mesh.groups.of(pin.net) for pin in component.pins if not _is_gate(kind, pin)]
    groups = list(dict.fromkeys(groups))
    return Switch(component.ref, tuple(pairwise(groups)))


def _trimmer(mesh: Mesh, component: Component) -> tuple[str, str, str, str, Span] | None:
    value = value_of(component)
    pins = {pin.number: mesh.groups.of(pin.net) for pin in component.pins}
    if value is None or value.magnitude is None or not {"1", "2"} <= set(pins):
        return None
    first, wiper = pins["1"], pins["2"]
    last = pins.get("3", wiper)
    return (component.ref, first, wiper, last, Span.exact(value.magnitude))


def _leg(
    mesh: Mesh,
    group: str,
    grounds: frozenset[str] | set[str],
    outputs: frozenset[str],
    is_rail: Callable[[str], bool],
    own_key: str,
    trouble: list[str],
) -> Leg | None:
    """How a group ends the walk; None if it is an inner node of the network."""
    if group in outputs:
        return Leg(group, End.OUTPUT)
    if group in grounds:
        return Leg(group, End.GROUND)
    if is_rail(group):
        return Leg(group, End.RAIL)
    for component, pin in mesh.pins(group):
        if component.key == own_key or not component.fitted:
            continue
        kind = mesh.joined.kinds[component.key]
        if kind is Kind.CHIP and pin.kind in _DRIVES:
            return Leg(group, End.DRIVEN, component.ref)
        if kind is Kind.CHIP and pin.kind == "power_in":
            return Leg(group, End.RAIL)
        if kind is Kind.CHIP and pin.kind in _SAYS_NOTHING:
            trouble.append(f"the network leads to {component.ref}, whose pin type does not say whether it drives")
            return Leg(group, End.UNKNOWN, component.ref)
        if kind is Kind.CONNECTOR:
            trouble.append(f"the network leads to connector {component.ref}")
            return Leg(group, End.UNKNOWN, component.ref)
        if kind in (Kind.DIODE, Kind.LED, Kind.CLAMP):
            trouble.append(f"the network leads to {component.ref}, which is not resistive")
            return Leg(group, End.UNKNOWN, component.ref)
    return None
