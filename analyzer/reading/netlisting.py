"""From joined nodes to named nets."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass

from analyzer.circuit import natural_key
from analyzer.reading.joins import Netting
from analyzer.reading.names import Candidate, Rank, UnitStyle, pin_name
from analyzer.reading.placement import PlacedPin, Placement

DriverKey = tuple[tuple[tuple[int, int | str], ...], tuple[tuple[int, int | str], ...], tuple[int, int], str]


@dataclass(frozen=True, slots=True)
class NetNames:
    """Names by root node, and which of them a person gave."""

    of_root: dict[int, str]
    given: frozenset[str]


def name_nets(placements: list[Placement], netting: Netting, style: UnitStyle) -> NetNames:
    """Name every net that has a pin.

    Nets whose labels give them the same full name are one name here, as they are one net on the board.
    Names that come only from pins of parts or of sheets and would occur twice get "_1", "_2".
    """
    root = netting.joins.root
    pins: dict[int, list[PlacedPin]] = defaultdict(list)
    for placement in placements:
        for placed in placement.pins:
            pins[root(placed.node)].append(placed)
    best: dict[int, Candidate] = {}
    for node, candidate in netting.candidates:
        net = root(node)
        if net not in best or candidate < best[net]:
            best[net] = candidate
    named = {net: candidate.name for net, candidate in best.items() if candidate.rank is not Rank.SHEET_PIN}
    given = set(named.values())
    taken = given | netting.drawn
    unconnected = {root(node) for node in netting.no_connects}
    weak: list[tuple[str, DriverKey, int]] = []
    for net, members in pins.items():
        if net not in named:
            name, driver = _automatic(members, style, unconnected=net in unconnected)
            weak.append((best[net].name if net in best else name, _driver_key(driver), net))
    for name, _, net in sorted(weak):
        members = pins[net]
        unique = _unused(name, taken)
        taken.add(unique)
        if net in best:
            given.add(unique)
        elif len(members) == 1 and not name.startswith("unconnected-("):
            # KiCad numbers equal names first and only then sees that a net has a single pin
            unique = _unused(pin_name(members[0], style, unconnected=True), taken)
            taken.add(unique)
        named[net] = unique
    return NetNames(named, frozenset(given))


def _automatic(members: list[PlacedPin], style: UnitStyle, *, unconnected: bool) -> tuple[str, PlacedPin]:
    able = [pin for pin in members if pin.owner.flags[2] and pin.owner.library and pin.owner.library.names_nets]
    names = [
        (pin_name(pin, style, unconnected=unconnected or pin.pin.kind == "no_connect"), pin) for pin in able or members
    ]
    return min(names, key=lambda pair: ("-Pad" in pair[0], pair[0], _driver_key(pair[1])))


def _driver_key(placed: PlacedPin) -> DriverKey:
    owner = placed.owner
    x, y = placed.pin.at
    # pins of the same number are told apart by where the library drew them, from below
    return natural_key(owner.reference), natural_key(placed.pin.number), (-y, x), owner.key


def _unused(name: str, taken: set[str]) -> str:
    if name not in taken:
        return name
    number = 1
    while f"{name}_{number}" in taken:
        number += 1
    return f"{name}_{number}"
