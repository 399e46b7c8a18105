"""Rails and what feeds them, put together: links, traces, feeds, voltages in order of dependence, findings."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from itertools import pairwise

from analyzer.circuit import Circuit, natural_key
from analyzer.evidence import Evidence
from analyzer.findings import rails as kinds
from analyzer.findings.base import Finding
from analyzer.part import Part
from analyzer.rail import Feed, Rail, Rails, Wiring
from analyzer.rails.checks import check_dividers, check_feeds, check_names
from analyzer.rails.feeds import (
    Edge,
    cut_cycles,
    discrete_edges,
    follower_edges,
    part_edges,
    source_edges,
    switch_edges,
)
from analyzer.rails.ground import ground_nets
from analyzer.rails.levels import Levels
from analyzer.rails.links import join, path_between
from analyzer.rails.naming import rail_name
from analyzer.rails.network import Mesh
from analyzer.rails.passages import find_passages
from analyzer.rails.power import Power
from analyzer.rails.supplies import unused_supplies
from analyzer.rails.wiring import Trace, trace
from analyzer.rails.wirings import wiring
from analyzer.rule import Rulebook
from analyzer.settings import Settings


def find_rails(circuit: Circuit, parts: tuple[Part, ...], rulebook: Rulebook, settings: Settings) -> Rails:
    """Rails of a board, their voltages, and how its regulators and passages hang between them."""
    ground = ground_nets(circuit)
    joined = join(circuit, parts, settings, ground)
    mesh = Mesh(circuit, joined, settings)
    power = Power(mesh, parts, rulebook, (*settings.supplies, *settings.supply_names))
    traces = tuple(trace(power, part, channel) for part in parts for channel in part.channels)
    fixed = part_edges(power, traces)
    taken = frozenset(
        component.key for one in traces for outside in one.outside for component in circuit.by_ref.get(outside.ref, ())
    ) | frozenset(part.key for part in parts)
    passages = find_passages(power, taken, [(edge.source, edge.sink) for edge in fixed if edge.source])
    through = (*fixed, *discrete_edges(passages))
    for find_more in (follower_edges, switch_edges):
        through += find_more(power, taken, frozenset(edge.sink for edge in through))
    groups = _rail_groups(power, through)
    sources = source_edges(
        power, sorted(groups - power.ground, key=natural_key), frozenset(edge.sink for edge in through)
    )
    edges = tuple(sorted((*through, *sources), key=_edge_key))
    levels = Levels(power, settings, edges, traces)
    board = Board(power, groups, edges, levels, {group: rail_name(mesh, group) for group in groups})
    return board.rails(settings)


def _edge_key(edge: Edge) -> tuple[object, ...]:
    return (natural_key(edge.ref), edge.channel, natural_key(edge.sink), natural_key(edge.source or ""))


def _rail_groups(power: Power, edges: Iterable[Edge]) -> frozenset[str]:
    found = set(power.rails) | set(power.ground)
    for edge in edges:
        found.add(edge.sink)
        if edge.source is not None:
            found.add(edge.source)
    return frozenset(found)


@dataclass(frozen=True)
class Board:
    """Everything found, ready to be written down.

    Attributes:
        power: Groups and what is known of them.
        groups: Groups that are rails.
        edges: All feeds.
        levels: Voltages.
        names: Name of each rail by group.
    """

    power: Power
    groups: frozenset[str]
    edges: tuple[Edge, ...]
    levels: Levels
    names: dict[str, str]

    def rails(self, settings: Settings) -> Rails:
        """The result, with its findings."""
        order, cycles = self._order()
        by_sink: dict[str, list[Edge]] = {}
        for edge in self.edges:
            by_sink.setdefault(edge.sink, []).append(edge)
        refs: dict[str, set[str]] = {}
        for link in self.power.mesh.joined.links:
            refs.setdefault(self.power.mesh.groups.of(link.one), set()).add(link.ref)
        rails = tuple(self._rail(group, by_sink.get(group, []), refs.get(group, set()), settings) for group in order)
        wirings = tuple(self._wiring(one, settings) for one in self.levels.traces)
        of_net = {net: self.names[group] for group in order for net in self.power.mesh.members.get(group, ())}
        findings = (
            *self._findings(cycles, settings),
            *check_feeds(rails, wirings),
            *check_names(self.power, self.levels, self.names),
            *check_dividers(self.power, self.levels, wirings),
        )
        return Rails(rails, wirings, tuple(dict.fromkeys(findings)), of_net)

    def _order(self) -> tuple[list[str], list[tuple[str, ...]]]:
        needs: dict[str, set[str]] = {group: set() for group in self.groups}
        for edge in self.edges:
            if edge.source is not None:
                needs[edge.sink].add(edge.source)
        order, cycles, _ = cut_cycles(needs)
        rank = {group: number for number, group in enumerate(order)}
        return sorted(self.groups, key=lambda group: (group in self.power.ground, rank[group])), cycles

    def _rail(self, group: str, edges: list[Edge], links: set[str], settings: Settings) -> Rail:
        is_ground = group in self.power.ground
        volts = None if is_ground else self.levels.of.get(group)
        return Rail(
            name=self.names[group],
            nets=self.power.mesh.members.get(group, (group,)),
            volts=volts,
            feeds=() if is_ground else tuple(self._feed(edge, settings) for edge in edges),
            links=tuple(sorted(links, key=natural_key)),
            is_ground=is_ground,
            why_open="" if volts or is_ground else self.levels.why(group),
        )

    def _feed(self, edge: Edge, settings: Settings) -> Feed:
        statement = settings.parts.get(edge.ref)
        share = statement.share if statement is not None and statement.share is not None else 1.0
        return Feed(
            ref=edge.ref,
            kind=edge.kind,
            channel=edge.channel,
            from_rail=self.names.get(edge.source) if edge.source is not None else None,
            through=(*edge.first, *self.through(edge.trace)),
            volts=self.levels.feed_volts(edge),
            share=share,
        )

    def through(self, one: Trace | None) -> tuple[str, ...]:
        """Links between a channel's output net and the net its rail is named after."""
        if one is None or one.output is None:
            return ()
        name = self.names.get(self.power.mesh.groups.of(one.output))
        return path_between(self.levels.links_of(one.output), one.output, name) if name else ()

    def _wiring(self, one: Trace, settings: Settings) -> Wiring:
        return wiring(self.power, self.levels, self.names, one, self.through(one), settings)

    def _findings(self, cycles: list[tuple[str, ...]], settings: Settings) -> Iterable[Finding]:
        for path in cycles:
            steps = [self.names[group] for group in path]
            refs = [self._between(source, sink) for source, sink in pairwise(path)]
            text = steps[0] + "".join(f" → {ref} → {name}" for ref, name in zip(refs, steps[1:], strict=True))
            yield kinds.CIRCULAR_FEED.found(steps[0], f"feeds run in a circle: {text}")
        for ref in self.power.mesh.joined.unpaired:
            yield kinds.CHOKE_UNPAIRED.found(ref, f"{ref}: which pins are one winding is not known")
        for ref in sorted(settings.links, key=natural_key):
            if ref not in self.power.mesh.circuit.by_ref:
                yield kinds.LINK_WITHOUT_PART.found(ref, f"link '{ref}': no part has this reference", settings.file)
        nets = [net.name for net in self.power.mesh.circuit.nets]
        for key, why in unused_supplies(settings, self.power.rulebook, nets):
            yield kinds.SUPPLY_WITHOUT_NET.found(key, f"supply '{key}': {why}", settings.file)
        for one in self.levels.traces:
            fitted = one.part.component.fitted and not one.is_off and one.output is not None
            of = self.power.mesh.groups.of
            if fitted and one.inputs and of(one.inputs[0]) == of(one.output or ""):
                message = (
                    f"input and output of {one.part.ref} are both on {self.names.get(of(one.inputs[0]), one.inputs[0])}"
                )
                yield kinds.BYPASSED.found(one.part.ref, message, str(one.part.component.place), key=one.part.key)

    def _between(self, source: str, sink: str) -> str:
        return next((edge.ref for edge in self.edges if edge.source == source and edge.sink == sink), "?")


def rail_volts(rails: Rails, net: str) -> Evidence | None:
    """Voltage of the rail a net belongs to."""
    name = rails.of_net.get(net)
    return rails.by_name[name].volts if name is not None else None
