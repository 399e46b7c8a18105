"""Exact solution of small resistive networks by nodal analysis: Gaussian elimination with pivoting, no library."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Branch:
    """A resistance between two nodes.

    Attributes:
        name: What it is called in reports.
        one, other: The nodes.
        ohms: Its resistance [Ω], greater than zero.
    """

    name: str
    one: str
    other: str
    ohms: float


def solve(matrix: list[list[float]], right: list[float]) -> list[float] | None:
    """Solution of a dense linear system, None if it is singular. Both arguments are consumed."""
    size = len(right)
    tiny = 1e-12 * max((abs(matrix[row][row]) for row in range(size)), default=0.0)
    for column in range(size):
        pivot = max(range(column, size), key=lambda row: abs(matrix[row][column]))
        if abs(matrix[pivot][column]) <= tiny:
            return None
        matrix[column], matrix[pivot] = matrix[pivot], matrix[column]
        right[column], right[pivot] = right[pivot], right[column]
        for row in range(column + 1, size):
            factor = matrix[row][column] / matrix[column][column]
            if factor:
                for k in range(column, size):
                    matrix[row][k] -= factor * matrix[column][k]
                right[row] -= factor * right[column]
    answer = [0.0] * size
    for row in reversed(range(size)):
        rest = right[row] - sum(matrix[row][k] * answer[k] for k in range(row + 1, size))
        answer[row] = rest / matrix[row][row]
    return answer


def node_volts(branches: Sequence[Branch], fixed: Mapping[str, float]) -> dict[str, float] | None:
    """Voltages of all nodes, given those of some [V]; None if a part of the network hangs in the air."""
    free = sorted({node for branch in branches for node in (branch.one, branch.other)} - set(fixed))
    index = {node: number for number, node in enumerate(free)}
    matrix = [[0.0] * len(free) for _ in free]
    right = [0.0] * len(free)
    for branch in branches:
        conductance = 1.0 / branch.ohms
        for near, far in ((branch.one, branch.other), (branch.other, branch.one)):
            if near in index:
                row = index[near]
                matrix[row][row] += conductance
                if far in index:
                    matrix[row][index[far]] -= conductance
                else:
                    right[row] += conductance * fixed[far]
    answer = solve(matrix, right)
    return None if answer is None else {**fixed, **dict(zip(free, answer, strict=True))}


def current_into(node: str, branches: Sequence[Branch], volts: Mapping[str, float]) -> float:
    """Current that the network drives into `node` [A]."""
    flow = 0.0
    for branch in branches:
        if branch.one == node:
            flow += (volts[branch.other] - volts[node]) / branch.ohms
        elif branch.other == node:
            flow += (volts[branch.one] - volts[node]) / branch.ohms
    return flow
