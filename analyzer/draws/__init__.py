"""Draws: how much each part takes from each rail, who has not said so, and the load of every rail."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from analyzer.circuit import Circuit, natural_key
from analyzer.draws.board import Board
from analyzer.draws.consumers import Consumer, find_consumers, unfed_supplies
from analyzer.draws.edges import InputCurrent, find_edges, passage_edges
from analyzer.draws.leds import led_draws
from analyzer.draws.notes import with_suggestions
from analyzer.draws.resistances import Resistances, find_resistances
from analyzer.draws.resistors import gap, resistor_draws
from analyzer.draws.ruled import ruled_draws
from analyzer.draws.stated import stated_draws
from analyzer.draws.tree import Edge, solve_tree
from analyzer.findings import currents as kinds
from analyzer.findings.base import Finding
from analyzer.findings.rails import CIRCULAR_FEED
from analyzer.load import Draw, Gap, Loads, RailLoad
from analyzer.part import Part
from analyzer.rail import Rails
from analyzer.rule import Rulebook, Topology
from analyzer.settings import Settings
from analyzer.wording import show

_A_LOAD = 1e-3
"""Computed currents of at least this [A] together count as the load a rail was made for."""


def find_loads(
    circuit: Circuit,
    parts: tuple[Part, ...],
    rails: Rails,
    settings: Settings,
    rulebook: Rulebook,
    input_current: InputCurrent | None = None,
) -> Loads:
    """The load of every live rail.

    Args:
        circuit: The circuit as read.
        parts: Recognised regulators and passages.
        rails: Rails and how the parts hang between them.
        settings: What a person stated.
        rulebook: Rules in force.
        input_current: What a channel takes from its input for a load; None takes the loss models' own.
    """
    if input_current is None:
        from analyzer.losses.dispatch import input_current as of_losses

        input_current = of_losses
    board = Board(circuit, parts, rails, settings)
    consumers = find_consumers(board)
    network = find_resistances(board, settings)
    stated = stated_draws(board, consumers, settings)
    ruled, rule_findings = ruled_draws(consumers, rulebook)
    computed, missing = _computed(board, network)
    filters, filtering = passage_edges(board, network)
    edges, lost = find_edges(board, network, input_current)
    edges += filters
    said = {(draw.key, draw.rail) for draw in stated.draws}
    draws = [
        *stated.draws,
        *(draw for draw in (*ruled, *computed) if (draw.key, draw.rail) not in said and draw.key not in filtering),
    ]
    known = {(draw.key, draw.rail) for draw in draws}
    gaps = [one for one in missing if (one.key, one.rail) not in known and one.key not in filtering]
    gaps += _unstated((consumer for consumer in consumers if consumer.is_sure), known)
    gaps += lost
    waiting = {(one.key, one.rail) for one in gaps}
    gaps += [one for one in stated.gaps if (one.key, one.rail) not in waiting]
    possible = _unstated((consumer for consumer in consumers if not consumer.is_sure), known)
    gaps += _silent_rails(board, draws, gaps, edges, possible)
    waiting = {(one.key, one.rail) for one in gaps}
    possible = [one for one in possible if (one.key, one.rail) not in waiting]
    live = [rail.name for rail in rails.rails if not rail.is_ground]
    tree = solve_tree(live, draws, with_suggestions(board, gaps), edges)
    findings = (
        *stated.findings,
        *rule_findings,
        # a circle of feeds is reported once, by the stage that found it first
        *(() if any(finding.name == CIRCULAR_FEED.name for finding in rails.findings) else tree.findings),
        *_unfed(board),
        *_possible(possible),
        *_below_minimum(rails, tree.loads),
    )
    return Loads(tree.loads, findings, tree.input_amps, tuple(possible))


def _computed(board: Board, network: Resistances) -> tuple[list[Draw], list[Gap]]:
    leds, led_gaps, in_strings = led_draws(board, network)
    _, filtering = passage_edges(board, network)
    resistors, resistor_gaps = resistor_draws(board, network, in_strings | filtering)
    unclear = [
        gap(component, rail, f"resistance '{component.value}' or its pins are not understood")
        for component in network.not_understood
        for rail in board.rails_at(component)
    ]
    shunts = {w.output_rail for w in board.rails.wirings if w.channel.topology is Topology.SHUNT}
    shunts |= {rail.name for rail in board.rails.rails if not rail.feeds}
    # what comes through the resistor before a shunt regulator or reference feeds its rail, it does not relieve it
    resistors = [draw for draw in resistors if draw.rail not in shunts or draw.amps.span.nominal >= 0]
    return [*leds, *resistors], [*led_gaps, *resistor_gaps, *unclear]


def _unstated(consumers: Iterable[Consumer], known: set[tuple[str, str]]) -> list[Gap]:
    return [
        gap(one.component, one.rail, "no current stated" + (f" (fed through {one.through})" if one.through else ""))
        for one in consumers
        if (one.component.key, one.rail) not in known
    ]


def _silent_rails(
    board: Board, draws: Iterable[Draw], gaps: Iterable[Gap], edges: Iterable[Edge], possible: Iterable[Gap]
) -> list[Gap]:
    """Gaps of rails that would otherwise pass for unloaded: what may draw there, else the feed itself."""
    used = {draw.rail for draw in draws if draw.kind != "computed"} | {one.rail for one in gaps}
    used |= {edge.above for edge in edges} | _own_supplies(board)
    sums: dict[str, float] = {}
    for draw in draws:
        sums[draw.rail] = sums.get(draw.rail, 0.0) + draw.amps.span.nominal
    found: list[Gap] = []
    for rail in board.rails.rails:
        if rail.name in used or rail.is_ground or rail.name not in board.made_here:
            continue
        candidates = [one for one in possible if one.rail == rail.name]
        if candidates:
            found += candidates
        elif sums.get(rail.name, 0.0) < _A_LOAD:
            feeds = (board.circuit.by_ref.get(feed.ref, ()) for feed in rail.feeds)
            fed_by = [component for components in feeds for component in components][:1]
            found += [gap(one, rail.name, "nothing that draws from this rail was found") for one in fed_by]
    return found


def _own_supplies(board: Board) -> set[str]:
    """Rails that feed a regulator's own circuit: what that takes is in its quiescent current."""
    return {
        rail.name
        for part in board.parts
        for pin in part.component.pins
        if part.component.fitted and pin.kind == "power_in" and (rail := board.live_rail(pin.net))
    }


def _unfed(board: Board) -> list[Finding]:
    nets: dict[str, list[str]] = {}
    for component, pin in unfed_supplies(board):
        nets.setdefault(pin.net, []).append(f"{component.ref} pin {pin.number} ({pin.name})")
    return [
        kinds.SUPPLY_PIN_UNFED.found(net, f"{net} feeds {', '.join(dict.fromkeys(pins))}, but no rail reaches it")
        for net, pins in sorted(nets.items(), key=lambda item: natural_key(item[0]))
    ]


def _possible(possible: Iterable[Gap]) -> list[Finding]:
    rails: dict[str, list[str]] = {}
    for one in possible:
        rails.setdefault(one.rail, []).append(one.ref)
    return [
        kinds.POSSIBLE_LOADS.found(rail, f"{', '.join(dict.fromkeys(refs))} on {rail}: counted as taking none")
        for rail, refs in sorted(rails.items(), key=lambda item: natural_key(item[0]))
    ]


def _below_minimum(rails: Rails, loads: Mapping[str, RailLoad]) -> list[Finding]:
    found = []
    for wiring in rails.wirings:
        least = wiring.channel.figures.get("minimum_load")
        load = loads.get(wiring.output_rail or "")
        if least is None or load is None or load.total is None or load.total.low >= least.span.high:
            continue
        message = (
            f"{wiring.part.ref} needs {show(least.span.high, 'A')} on {load.rail}, "
            f"the load may be only {show(load.total.low, 'A')}"
        )
        found.append(kinds.LOAD_BELOW_MINIMUM.found(wiring.part.ref, message, least.source, key=wiring.part.key))
    return found


__all__ = ["find_loads"]
