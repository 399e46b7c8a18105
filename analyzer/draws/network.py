"""Node voltages of a network of resistors: nodal analysis by elimination on sparse rows."""

from __future__ import annotations

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

    Kirchhoff's current law at each free node: Σ (V − Vj) / Rj = 0.
    """
    rows: dict[str, dict[str, float]] = {}
    known: dict[str, float] = {}
    for branch in _reached(list(branches), fixed):
        conductance = 1.0 / branch.ohms
        for node, other in ((branch.a, branch.b), (branch.b, branch.a)):
            if node in fixed:
                continue
            row = rows.setdefault(node, {})
            row[node] = row.get(node, 0.0) + conductance
            if other in fixed:
                known[node] = known.get(node, 0.0) + conductance * fixed[other]
            else:
                row[other] = row.get(other, 0.0) - conductance
    return dict(fixed) | _eliminated(rows, known)


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


def _eliminated(rows: dict[str, dict[str, float]], known: dict[str, float]) -> dict[str, float]:
    """Solution of the symmetric system, the node with fewest neighbours first, which keeps the rows sparse."""
    order: list[tuple[str, dict[str, float], float]] = []
    while rows:
        node = min(rows, key=lambda name: (len(rows[name]), name))
        row = rows.pop(node)
        pivot = row.pop(node)
        right = known.get(node, 0.0)
        order.append((node, {other: value / pivot for other, value in row.items()}, right / pivot))
        for other, value in row.items():
            factor = value / pivot
            target = rows[other]
            target.pop(node, None)
            for third, coefficient in row.items():
                target[third] = target.get(third, 0.0) - factor * coefficient
            if node in known:
                known[other] = known.get(other, 0.0) - factor * right
    volts: dict[str, float] = {}
    for node, row, right in reversed(order):
        volts[node] = right - sum(value * volts[other] for other, value in row.items())
    return volts
