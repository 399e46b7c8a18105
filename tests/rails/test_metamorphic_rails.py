"""Changes that must change nothing: an unrelated part, consistent new names, another order of components and parts."""

from __future__ import annotations

import random
from dataclasses import replace
from pathlib import Path

import pytest
from rails_bench import circuit, part, rulebook
from test_rails_board_truth import BOARDS, board

from analyzer.circuit import Circuit, Component, Net
from analyzer.part import Part
from analyzer.rail import Rails
from analyzer.rails import find_rails
from analyzer.rails.names import named_volts
from analyzer.settings import Settings

pytestmark = pytest.mark.boards


def gist(rails: Rails, rename: dict[str, str] | None = None) -> tuple[object, ...]:
    """Everything but the texts, with names translated."""
    names = rename or {}

    def name(net: str | None) -> str | None:
        return names.get(net, net) if net else net

    return (
        sorted(
            (
                name(rail.name),
                tuple(sorted(name(net) or "" for net in rail.nets)),
                rail.volts.span.corners if rail.volts else None,
                tuple((feed.ref, feed.kind, name(feed.from_rail), feed.through) for feed in rail.feeds),
                rail.is_ground,
            )
            for rail in rails.rails
        ),
        [
            (
                wiring.part.ref,
                wiring.channel.name,
                name(wiring.input_rail),
                name(wiring.output_net),
                name(wiring.output_rail),
                wiring.vin.span.corners if wiring.vin else None,
                wiring.vout.span.corners if wiring.vout else None,
                wiring.through,
                wiring.outside,
                wiring.is_off,
            )
            for wiring in rails.wirings
        ],
        sorted((finding.name, name(finding.subject)) for finding in rails.findings),
    )


@pytest.mark.parametrize("name", BOARDS)
def test_unrelated_part(shared: Path, name: str) -> None:
    read, parts, rails = board(shared, name)
    extra = part("R99999", "10k", "FAR1 FAR2")
    nets = (*read.nets, Net("FAR1", (("/R99999", "1"),), True), Net("FAR2", (("/R99999", "2"),), True))
    more = replace(read, components=(*read.components, extra), nets=nets)
    assert gist(find_rails(more, parts, rulebook(), Settings())) == gist(rails)


def translated(read: Circuit, parts: tuple[Part, ...], new: dict[str, str]) -> tuple[Circuit, tuple[Part, ...]]:
    def moved(component: Component) -> Component:
        return replace(component, pins=tuple(replace(pin, net=new.get(pin.net, pin.net)) for pin in component.pins))

    components = tuple(moved(component) for component in read.components)
    nets = tuple(replace(net, name=new.get(net.name, net.name)) for net in read.nets)
    by_key = {component.key: component for component in components}
    again = tuple(
        replace(
            one,
            component=by_key[one.key],
            channels=tuple(
                replace(
                    channel,
                    pins={
                        role: tuple(replace(pin, net=new.get(pin.net, pin.net)) for pin in pins)
                        for role, pins in channel.pins.items()
                    },
                )
                for channel in one.channels
            ),
        )
        for one in parts
    )
    return replace(read, components=components, nets=nets), again


@pytest.mark.parametrize("name", BOARDS)
def test_automatic_names_carry_no_meaning(shared: Path, name: str) -> None:
    """New names for all automatically named nets, in an order unlike the old one."""
    read, parts, rails = board(shared, name)
    automatic = [net.name for net in read.nets if not net.is_named and named_volts(net.name) is None]
    shuffled = list(automatic)
    random.Random(7).shuffle(shuffled)
    new = {old: f"Net-(X{number}-Pad1)" for number, old in enumerate(shuffled)}
    again = find_rails(*translated(read, parts, new), rulebook(), Settings())
    back = {fresh: old for old, fresh in new.items()}
    assert gist(again, back) == gist(rails)


@pytest.mark.parametrize("name", BOARDS)
@pytest.mark.parametrize("seed", [1, 2])
def test_order_of_components_and_parts(shared: Path, name: str, seed: int) -> None:
    read, parts, rails = board(shared, name)
    components, nets, mixed = list(read.components), list(read.nets), list(parts)
    for items in (components, nets, mixed):
        random.Random(seed).shuffle(items)
    again = find_rails(
        replace(read, components=tuple(components), nets=tuple(nets)), tuple(mixed), rulebook(), Settings()
    )
    assert sorted(map(str, gist(again)[1])) == sorted(map(str, gist(rails)[1]))
    assert gist(again)[0] == gist(rails)[0]
    assert gist(again)[2] == gist(rails)[2]


def test_bench_circuit_is_in_contract_order() -> None:
    made = circuit(part("R10", "1k", "B A"), part("R2", "1k", "A C"))
    assert [component.ref for component in made.components] == ["R2", "R10"]
