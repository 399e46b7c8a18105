"""Node voltages of a network of resistors: free nodes are eliminated one by one."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Branch:
    """A resistor between two nodes [Ω]; its resistance is above zero."""

    name: str
    a: str
    b: str
    ohms: float


def solve(branches: Iterable[Branch], fixed: Mapping[str, float]) -> dict[str, float]:
    """Voltage of every node [V], given the fixed ones; nodes without a path to a fixed one are left out.

    Free nodes are eliminated one by one by the star-mesh transform (A. Rosen, J. IEE 62, 1924): its neighbours i and
    j get the conductance gi·gj / Σg between them. Nothing is ever subtracted, so no digit is lost between a milliohm
    and a megohm, and no voltage lies outside those of the sources.
    """
    mesh: dict[str, dict[str, float]] = {}
    for branch in _reached(list(branches), fixed):
        if branch.a != branch.b:
            _join(mesh, branch.a, branch.b, 1.0 / branch.ohms)
    stars = _eliminated(mesh, fixed)
    volts = dict(fixed)
    for node, star in reversed(stars):
        total = math.fsum(star.values())
        volts[node] = math.fsum(conductance / total * volts[other] for other, conductance in star.items())
    return volts


def current(branch: Branch, volts: Mapping[str, float]) -> float:
    """Current from node a to node b [A]; zero where the network floats."""
    if branch.a not in volts or branch.b not in volts:
        return 0.0
    return (volts[branch.a] - volts[branch.b]) / branch.ohms


def _reached(branches: list[Branch], fixed: Mapping[str, float]) -> list[Branch]:
    """The branches with a path to a fixed node; what floats has no voltage to solve for."""
    at: dict[str, list[Branch]] = {}
    for branch in branches:
        at.setdefault(branch.a, []).append(branch)
        at.setdefault(branch.b, []).append(branch)
    reached = {node for node in at if node in fixed}
    waiting = list(reached)
    while waiting:
        for branch in at[waiting.pop()]:
            for node in (branch.a, branch.b):
                if node not in reached:
                    reached.add(node)
                    waiting.append(node)
    return [branch for branch in branches if branch.a in reached]


def _eliminated(mesh: dict[str, dict[str, float]], fixed: Mapping[str, float]) -> list[tuple[str, dict[str, float]]]:
    """Each free node and its star of conductances [S] when it went, the one with fewest neighbours first."""
    free = {node for node in mesh if node not in fixed}
    stars = []
    while free:
        node = min(free, key=lambda name: (len(mesh[name]), name))
        free.remove(node)
        star = mesh.pop(node)
        total = math.fsum(star.values())
        stars.append((node, star))
        for other in star:
            del mesh[other][node]
        for one, other in itertools.combinations(star, 2):
            _join(mesh, one, other, star[one] * star[other] / total)
    return stars


def _join(mesh: dict[str, dict[str, float]], one: str, other: str, conductance: float) -> None:
    for node, neighbour in ((one, other), (other, one)):
        star = mesh.setdefault(node, {})
        star[neighbour] = star.get(neighbour, 0.0) + conductance
