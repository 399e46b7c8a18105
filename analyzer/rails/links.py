"""Links: parts that pass direct current with little or no drop, and the groups of nets they join."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from analyzer.circuit import Circuit, Component, Pin, natural_key, plain_name
from analyzer.part import Part
from analyzer.rails.kinds import Kind, kind_of, ohms, symbol_of, value_of
from analyzer.rule import SWITCHERS, Role
from analyzer.settings import Settings

ZERO_OHMS = 0.011
"""A resistor up to here is a wire: 0 Ω parts are specified as 10 mΩ or less [Ω]."""


@dataclass(frozen=True, slots=True)
class Link:
    """One joint between two nets.

    Attributes:
        ref: Reference of the part.
        one, other: The nets it joins.
        ohms: Resistance in the path [Ω]; 0 where it is negligible.
        key: Identity of the part: references may be doubled.
    """

    ref: str
    one: str
    other: str
    ohms: float = 0.0
    key: str = ""


@dataclass
class Groups:
    """Disjoint sets of nets, built while links are added, read afterwards."""

    parent: dict[str, str] = field(default_factory=dict)

    def of(self, net: str) -> str:
        """Representative of the group of `net`."""
        root = net
        while (up := self.parent.get(root, root)) != root:
            root = up
        while (up := self.parent.get(net, net)) != root:
            self.parent[net] = root
            net = up
        return root

    def join(self, one: str, other: str) -> None:
        """Join two groups; the representative is the alphabetically first net, whatever the order of joining."""
        a, b = self.of(one), self.of(other)
        if a != b:
            self.parent[max(a, b)] = min(a, b)


@dataclass(frozen=True)
class Joined:
    """The circuit's nets joined to groups.

    Attributes:
        groups: The groups.
        links: Every link, in natural order of reference.
        unpaired: References of chokes whose windings could not be told apart.
        kinds: Kind of every component by key.
        ground: Groups that are ground.
        pulsed: Groups that carry pulses: switch and bootstrap nodes.
    """

    groups: Groups
    links: tuple[Link, ...]
    unpaired: tuple[str, ...]
    kinds: Mapping[str, Kind]
    ground: frozenset[str]
    pulsed: frozenset[str] = frozenset()


_SWITCH_PIN = re.compile(
    r"(?:V?SW|LX|VLX\w*|PH|PHASE|L|LS?W|VSW|SWC|SWE|BUCK\w*_?(?:SW|LX)\w*|VSSSMPS|(?:SW|LX)[A-D_]?\d?)"
)
_DRAIN = frozenset({"D", "C", "DRAIN", "COLLECTOR"})
_OPEN_JUMPER = re.compile(r"(?:_|\b)(?:open|NO)(?:_|\b)", re.IGNORECASE)
_CLOSED_JUMPER = re.compile(r"bridged|(?:_|\b)(?:NC|closed|short(?:ed)?)(?:_|\b)", re.IGNORECASE)
_BRIDGED_PINS = re.compile(r"bridged(\d{2,3})", re.IGNORECASE)


def conducts(component: Component, kind: Kind) -> bool:
    """Whether the part is there at all: copper shapes (net ties, bridged solder jumpers) need no fitting."""
    if component.fitted or kind is Kind.NET_TIE:
        return not _value_says_unfitted(component, kind)
    return (
        kind is Kind.JUMPER
        and "solder" in symbol_of(component).casefold()
        and bool(_CLOSED_JUMPER.search(symbol_of(component)))
    )


def _value_says_unfitted(component: Component, kind: Kind) -> bool:
    if kind in (Kind.NET_TIE, Kind.JUMPER):
        return False
    value = value_of(component)
    return value is not None and value.is_unfitted


def is_switch_like(circuit: Circuit, net: str, kinds: Mapping[str, Kind]) -> bool:
    """Whether a net that an inductor is on is pulsed: a chip's switch pin by its name, or a drain without capacitor."""
    if not any(kinds[component.key] in _MAGNETIC for component, _ in circuit.on_net[net]):
        return False
    has_drain = has_capacitor = False
    for component, pin in circuit.on_net[net]:
        kind = kinds[component.key]
        name = plain_name(pin.name).upper()
        if kind is Kind.CHIP and _SWITCH_PIN.fullmatch(name) and len(component.pins) > 3 and component.fitted:
            return True
        has_drain |= kind is Kind.TRANSISTOR and name in _DRAIN and component.fitted
        has_capacitor |= kind is Kind.CAPACITOR and component.fitted
    return has_drain and not has_capacitor


def join(circuit: Circuit, parts: tuple[Part, ...], settings: Settings, ground: frozenset[str]) -> Joined:
    """Find all links and join their nets.

    Args:
        circuit: The circuit.
        parts: Recognised parts: their switch nodes tell a converter's inductor from a filter's.
        settings: For stated links and the greatest shunt.
        ground: Names of ground nets.
    """
    kinds = {component.key: kind_of(component) for component in circuit.components}
    recognised = frozenset(part.key for part in parts)
    plain: list[Link] = []
    magnetic: list[Link] = []
    unpaired: list[str] = []
    for component in circuit.components:
        stated = settings.links.get(component.ref)
        kind = kinds[component.key]
        if component.key in recognised or stated is False or (stated is None and not conducts(component, kind)):
            continue
        pairs = _all_pairs(component) if stated else _pairs(circuit, component, kind, settings, ground)
        if pairs is None:
            unpaired.append(component.ref)
            continue
        resistance = (ohms(component) or 0.0) if kind is Kind.RESISTOR else 0.0
        links = (Link(component.ref, one, other, resistance, component.key) for one, other in pairs if one != other)
        (plain if stated or kind not in _MAGNETIC else magnetic).extend(links)
    groups = Groups()
    for link in plain:
        groups.join(link.one, link.other)
    # a converter's inductor joins nothing, also where a 0 Ω part lies between it and the switch pin
    pulsed = {groups.of(net) for net in _pulsed_nets(circuit, parts, kinds)}
    pulsed.update(groups.of(net.name) for net in circuit.nets if is_switch_like(circuit, net.name, kinds))
    kept = [link for link in magnetic if not pulsed.intersection((groups.of(link.one), groups.of(link.other)))]
    for link in kept:
        groups.join(link.one, link.other)
    everything = sorted((*plain, *kept), key=lambda link: (natural_key(link.ref), link.one, link.other))
    pulsed_now = frozenset(groups.of(net) for net in pulsed)
    return Joined(
        groups, tuple(everything), tuple(unpaired), kinds, frozenset(groups.of(net) for net in ground), pulsed_now
    )


_MAGNETIC = frozenset({Kind.INDUCTOR, Kind.BEAD, Kind.CHOKE})


def _pulsed_nets(circuit: Circuit, parts: tuple[Part, ...], kinds: Mapping[str, Kind]) -> Iterable[str]:
    """Switch and bootstrap nets of recognised parts; of parts without a switch pin, outputs that feed an inductor."""
    for part in parts:
        if not part.component.fitted:
            continue
        for channel in part.channels:
            yield from channel.nets(Role.SWITCH)
            yield from channel.nets(Role.BOOTSTRAP)
            if channel.topology in SWITCHERS and not channel.pins.get(Role.SWITCH):
                yield from (net for net in channel.nets(Role.OUTPUT) if _feeds_inductor(circuit, net, kinds))


def _feeds_inductor(circuit: Circuit, net: str, kinds: Mapping[str, Kind]) -> bool:
    there = {kinds[component.key] for component, _ in circuit.on_net[net] if component.fitted}
    return Kind.INDUCTOR in there and Kind.CAPACITOR not in there


def _pairs(
    circuit: Circuit, component: Component, kind: Kind, settings: Settings, ground: frozenset[str]
) -> list[tuple[str, str]] | None:
    """Net pairs a component joins; None for a choke whose windings cannot be told apart."""
    nets = [pin.net for pin in component.pins]
    if kind is Kind.NET_TIE:
        return _all_pairs(component)
    if kind is Kind.JUMPER:
        return _jumper_pairs(component)
    if kind is Kind.FUSE:
        return [(nets[0], nets[-1])] if len(set(nets)) == 2 else []
    if kind in (Kind.INDUCTOR, Kind.BEAD):
        return _series_pairs(component, ground)
    if kind is Kind.CHOKE:
        return _choke_pairs(component, ground)
    if kind is Kind.RESISTOR:
        return _resistor_pairs(circuit, component, settings, ground)
    return []


def _all_pairs(component: Component) -> list[tuple[str, str]]:
    nets = list(dict.fromkeys(pin.net for pin in component.pins))
    return [(nets[0], net) for net in nets[1:]]


def _series_pairs(component: Component, ground: frozenset[str]) -> list[tuple[str, str]]:
    """An inductor or bead; a feed-through filter has ground pins besides."""
    nets = list(dict.fromkeys(pin.net for pin in component.pins))
    if len(component.pins) == 2:
        return [(nets[0], nets[-1])]
    live = [net for net in nets if net not in ground]
    return [(live[0], live[1])] if len(live) == 2 else []


def _choke_pairs(component: Component, ground: frozenset[str]) -> list[tuple[str, str]] | None:
    pins = component.pins
    by_number = {pin.number: pin for pin in pins}
    digits = re.search(r"_([1-4]{4})(?:_|$)", symbol_of(component))
    if len(pins) == 4 and digits and len(set(digits[1])) == 4 and set(digits[1]) <= set(by_number):
        a, b, c, d = (by_number[digit].net for digit in digits[1])
        return [(a, b), (c, d)]
    if len(pins) != 4:
        return None
    choices = [
        ((pins[0], pins[1]), (pins[2], pins[3])),
        ((pins[0], pins[3]), (pins[1], pins[2])),
        ((pins[0], pins[2]), (pins[1], pins[3])),
    ]
    if re.search(r"L_Coupled|CommonMode", symbol_of(component)):
        return [(one.net, other.net) for one, other in choices[0]]
    fit = [choice for choice in choices if all(_alike(one, other, ground) for one, other in choice)]
    with_return = [
        choice for choice in fit if any(one.net in ground or _is_return(one.net) for pair in choice for one in pair)
    ]
    return [(one.net, other.net) for one, other in with_return[0]] if len(with_return) == 1 else None


def _is_return(net: str) -> bool:
    return bool(re.search(r"(?:GND|RTN|RETURN|-|_N|0V)\w{0,4}$", net.upper()))


def _alike(one: Pin, other: Pin, ground: frozenset[str]) -> bool:
    return (one.net in ground or _is_return(one.net)) == (other.net in ground or _is_return(other.net))


def _jumper_pairs(component: Component) -> list[tuple[str, str]]:
    symbol = symbol_of(component)
    numbers = {pin.number: pin.net for pin in component.pins}
    if found := _BRIDGED_PINS.search(symbol):
        nets = [numbers[digit] for digit in found[1] if digit in numbers]
        return [(nets[0], net) for net in nets[1:]] if nets else []
    texts = f"{symbol} {component.footprint.partition(':')[2]} {component.value}"
    if _CLOSED_JUMPER.search(texts) and not _OPEN_JUMPER.search(f"{symbol} {component.value}"):
        return _all_pairs(component) if len(component.pins) == 2 else []
    return []


def _resistor_pairs(
    circuit: Circuit, component: Component, settings: Settings, ground: frozenset[str]
) -> list[tuple[str, str]]:
    value = ohms(component)
    if value is None or value > settings.shunt_max:
        return []
    pairs = resistor_pairs(component)
    if value <= ZERO_OHMS:
        return pairs
    return [pair for pair in pairs if all(_carries_power(circuit, net, ground) for net in pair)]


def resistor_pairs(component: Component) -> list[tuple[str, str]]:
    """Net pairs of a resistor or resistor array: arrays pair pin "R1.1" with "R1.2", or first with last."""
    pins = component.pins
    if len(pins) == 2:
        return [(pins[0].net, pins[1].net)]
    if len(pins) == 4 and all(
        "SENSE" in pin.name.upper() or pin.name in ("", "~") or pin.name.isdigit() for pin in pins
    ):
        distinct = list(dict.fromkeys(pin.net for pin in pins))
        if len(distinct) == 2:
            return [(distinct[0], distinct[1])]  # a four-terminal shunt with its sense pads
    named: dict[str, list[str]] = {}
    for pin in pins:
        head, dot, _ = pin.name.partition(".")
        if dot:
            named.setdefault(head, []).append(pin.net)
    if named:
        return [(nets[0], nets[1]) for nets in named.values() if len(nets) == 2]
    if len(pins) in (4, 8, 16) and "pack" in f"{component.lib_id} {component.description}".casefold():
        return [(one.net, other.net) for one, other in zip(pins, reversed(pins), strict=True)][: len(pins) // 2]
    return []


def _carries_power(circuit: Circuit, net: str, ground: frozenset[str]) -> bool:
    """Whether a shunt's end is in a power path, not between a switch and ground."""
    if net in ground:
        return True
    return not any(
        plain_name(pin.name).upper() in ("S", "SOURCE", "E", "EMITTER") and component.fitted
        for component, pin in circuit.on_net[net]
    )


def path_between(links: Iterable[Link], start: str, goal: str) -> tuple[str, ...]:
    """References of the links on the shortest way between two nets of a group; empty if they are one net."""
    if start == goal:
        return ()
    neighbours: dict[str, list[Link]] = {}
    for link in links:
        neighbours.setdefault(link.one, []).append(link)
        neighbours.setdefault(link.other, []).append(link)
    came: dict[str, tuple[str, str]] = {start: ("", "")}
    queue = [start]
    for net in queue:
        for link in neighbours.get(net, ()):
            far = link.other if link.one == net else link.one
            if far not in came:
                came[far] = (net, link.ref)
                queue.append(far)
    refs: list[str] = []
    net = goal
    while net != start:
        if net not in came:
            return ()
        net, ref = came[net]
        refs.append(ref)
    return tuple(reversed(refs))
