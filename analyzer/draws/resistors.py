"""Currents through resistors that hang on rails: dividers, bleeders, pull-ups, resistors between rails.

The resistors between rails, ground and the nodes behind them are solved as a network. A node that nothing but
high-impedance pins touches floats; a node that a chip, switch or transistor can drive is at rest where it floats and
at its worst at ground (on boards with a negative rail at that chip, on that rail). Of a pull-up, rest is the low and
nominal value, worst state the high one. A rail that receives current is not relieved of load in the worst case.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterable, Mapping

from analyzer.circuit import Component
from analyzer.draws.board import Board
from analyzer.draws.drives import Drives
from analyzer.draws.network import Branch, current, solve
from analyzer.draws.resistances import Resistances, Resistor, is_rail, rail_node, rail_of
from analyzer.evidence import Evidence, Grade
from analyzer.load import Draw, Gap
from analyzer.quantity import Span
from analyzer.rail import Rail
from analyzer.wording import show

_SIGNAL_MAX = 0.05
"""Above this current [A] a resistor towards a chip or connector is taken for a supply line, not for a pull-up."""
_CORNERS_MAX = 6
"""Up to this many resistors between several rails every corner of their tolerances is tried."""


def resistor_draws(board: Board, network: Resistances, claimed: frozenset[str]) -> tuple[list[Draw], list[Gap]]:
    """Draws of all resistors on live rails except `claimed` ones (keys), and gaps where they cannot be computed."""
    draws: list[Draw] = []
    gaps: list[Gap] = []
    usable = [resistor for resistor in network.resistors if resistor.component.key not in claimed]
    drives = Drives(board, network)
    for group in _groups(usable):
        rails = _live(board, group)
        if rails:
            found, missing = _Group(board, group, rails, drives).close()
            draws += found
            gaps += missing
    return draws, gaps


def _groups(resistors: Iterable[Resistor]) -> list[list[Resistor]]:
    """Resistors that share free nodes, group by group."""
    parent: dict[str, str] = {}

    def root(node: str) -> str:
        while (above := parent.get(node, node)) != node:
            node = above
        return node

    listed = list(resistors)
    for n, resistor in enumerate(listed):
        tag = f"resistor {n}"
        for node in (resistor.a, resistor.b):
            if not is_rail(node):
                parent[root(node)] = root(tag)
                parent.setdefault(tag, tag)
    groups: dict[str, list[Resistor]] = {}
    for n, resistor in enumerate(listed):
        groups.setdefault(root(f"resistor {n}"), []).append(resistor)
    return list(groups.values())


def _live(board: Board, group: list[Resistor]) -> dict[str, Rail]:
    """Node → rail, for the live rails a group touches."""
    nodes = dict.fromkeys(node for resistor in group for node in (resistor.a, resistor.b) if is_rail(node))
    rails = {node: board.rails.by_name[rail_of(node)] for node in nodes}
    return {node: rail for node, rail in rails.items() if not rail.is_ground}


class _Group:
    """One group of resistors with the rails it touches."""

    def __init__(
        self,
        board: Board,
        group: list[Resistor],
        rails: Mapping[str, Rail],
        drives: Drives,
    ) -> None:
        self.board = board
        self.group = group
        self.rails = rails
        self.known = {node: rail.volts.span for node, rail in rails.items() if rail.volts}
        self.drives = {
            node: drive
            for node in dict.fromkeys(node for resistor in group for node in (resistor.a, resistor.b))
            if not is_rail(node) and (drive := drives.at(node))
        }
        self.grounds = {rail_node(rail.name): 0.0 for rail in board.rails.rails if rail.is_ground}

    def close(self) -> tuple[list[Draw], list[Gap]]:
        """The draws of this group, and its gaps."""
        draws: list[Draw] = []
        gaps: list[Gap] = []
        for node, rail in self.rails.items():
            adjacent = [resistor for resistor in self.group if node in (resistor.a, resistor.b)]
            if rail.volts is None:
                first = adjacent[0].component
                refs = ", ".join(resistor.component.ref for resistor in adjacent)
                gaps.append(gap(first, rail.name, f"voltage of {rail.name} not known, so neither current of {refs}"))
                continue
            spans = self._spans(node, adjacent)
            for resistor in adjacent:
                span = spans[resistor.name]
                if self._is_supply_line(resistor, node, span):
                    gaps.append(gap(resistor.component, rail.name, "current behind this resistor not stated"))
                elif span.low or span.high:
                    draws.append(self._draw(resistor, node, rail.volts, span))
        return draws, gaps

    def _spans(self, node: str, adjacent: list[Resistor]) -> dict[str, Span]:
        """Current of each resistor on the rail at `node`, positive where it loads the rail."""
        sign = 1.0 if self.known[node].nominal >= 0 else -1.0
        worst, best = (min, max) if sign > 0 else (max, min)
        heavy: dict[str, list[float]] = {resistor.name: [] for resistor in adjacent}
        light: dict[str, list[float]] = {key: [] for key in heavy}
        own_strong, own_weak = (self.known[node].high, self.known[node].low)
        if sign < 0:
            own_strong, own_weak = own_weak, own_strong
        driven = {n: (d.low if sign > 0 else d.high) for n, d in self.drives.items()}
        strong = {n: worst(s.low, s.high) for n, s in self.known.items()} | driven | {node: own_strong}
        weak = {n: best(s.low, s.high) for n, s in self.known.items()} | {node: own_weak}
        for corner in self._corners():
            self._collect(heavy, corner, strong, node, sign)
            self._collect(light, corner, weak, node, sign)
        nominal: dict[str, list[float]] = {key: [] for key in heavy}
        middle = [resistor.ohms.span.nominal for resistor in self.group]
        self._collect(nominal, middle, {n: s.nominal for n, s in self.known.items()}, node, sign)
        return {
            key: Span(
                min(*light[key], nominal[key][0]), nominal[key][0], max(*heavy[key], *light[key], nominal[key][0], 0.0)
            )
            for key in heavy
        }

    def _corners(self) -> Iterable[list[float]]:
        """Corners of the resistances; all low and all high suffice where only one rail feeds the group."""
        spans = [resistor.ohms.span for resistor in self.group]
        if len(self.known) > 1 and len(spans) <= _CORNERS_MAX:
            return [list(corner) for corner in itertools.product(*((s.low, s.high) for s in spans))]
        return [[s.low for s in spans], [s.high for s in spans]]

    def _collect(
        self, into: dict[str, list[float]], ohms: list[float], fixed: Mapping[str, float], node: str, sign: float
    ) -> None:
        branches = [
            Branch(resistor.name, resistor.a, resistor.b, value)
            for resistor, value in zip(self.group, ohms, strict=True)
        ]
        ends = {**dict.fromkeys(self.rails, 0.0), **self.grounds, **fixed}
        volts = solve(branches, ends)
        for branch in branches:
            if node in (branch.a, branch.b):
                amps = current(branch, volts) * (sign if branch.a == node else -sign)
                # rounding of a floating node is no current
                into[branch.name].append(amps if abs(amps) > 1e-12 else 0.0)

    def _is_supply_line(self, resistor: Resistor, node: str, span: Span) -> bool:
        other = resistor.b if resistor.a == node else resistor.a
        drive = self.drives.get(other)
        return drive is not None and drive.is_signal and span.high > _SIGNAL_MAX

    def _draw(self, resistor: Resistor, node: str, volts: Evidence, span: Span) -> Draw:
        others = [one.component.ref for one in self.group if one is not resistor]
        value = show(resistor.ohms.span.nominal, "Ω")
        if others:
            listed = ", ".join(others[:4]) + (f" and {len(others) - 4} more" if len(others) > 4 else "")
            formula = f"node equations of {resistor.component.ref} ({value}) with {listed}"
        else:
            formula = f"I = V/R = {show(volts.span.nominal, 'V')} / {value}"
        amps = Evidence(
            f"current through {resistor.component.ref}",
            span,
            "A",
            f"{resistor.component.place}, {resistor.component.ref}",
            Grade.DERIVED,
            formula,
            (volts, resistor.ohms),
            "high value: driven to its worst state" if self.drives and span.high > span.nominal else "",
        )
        return Draw(resistor.component.ref, resistor.component.key, self.rails[node].name, amps, "computed")


def gap(component: Component, rail: str, why: str) -> Gap:
    """A gap of a part on a rail."""
    return Gap(component.ref, component.key, rail, component.value, component.place.sheet, why)
