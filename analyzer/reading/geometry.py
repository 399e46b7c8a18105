"""Exact geometry on KiCad's grid of 100 nm: points, wires under a point, and the turning of symbols."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable

from analyzer.reading.sexpr import Node

Point = tuple[int, int]
"""Position in units of 100 nm, x to the right, y downwards."""

Segment = tuple[Point, Point, int]
"""Two ends, and a number that tells the segment from others."""

GRID_PER_MM = 10_000
_FARTHEST_MM = 1e5  # 100 m: beyond any sheet, below any trouble with integers


def point(node: Node | None) -> Point | None:
    """The position in `(at X Y ...)` or `(xy X Y)`; None if it is missing or no position."""
    if node is None or len(node) < 3:
        return None
    try:
        x, y = float(node[1]), float(node[2])
    except (TypeError, ValueError, OverflowError):
        return None
    if not (-_FARTHEST_MM < x < _FARTHEST_MM and -_FARTHEST_MM < y < _FARTHEST_MM):
        return None
    return round(x * GRID_PER_MM), round(y * GRID_PER_MM)


def turned(at: Point, quarter_turns: int, mirror: str) -> Point:
    """A point of a symbol after turning the symbol by quarter turns and then mirroring it."""
    x, y = at
    for _ in range(quarter_turns % 4):
        x, y = y, -x
    if mirror == "x":
        y = -y
    elif mirror == "y":
        x = -x
    return x, y


class WireIndex:
    """Finds the segments a point lies on, ends included, without looking at all of them."""

    def __init__(self, segments: Iterable[Segment]) -> None:
        self._level: dict[int, list[tuple[int, int, int]]] = defaultdict(list)
        self._upright: dict[int, list[tuple[int, int, int]]] = defaultdict(list)
        self._slanted: list[Segment] = []
        for start, end, name in segments:
            if start[1] == end[1]:
                self._level[start[1]].append((min(start[0], end[0]), max(start[0], end[0]), name))
            elif start[0] == end[0]:
                self._upright[start[0]].append((min(start[1], end[1]), max(start[1], end[1]), name))
            else:
                self._slanted.append((start, end, name))

    def under(self, at: Point) -> list[int]:
        """Numbers of all segments through a point."""
        x, y = at
        found = [name for low, high, name in self._level.get(y, ()) if low <= x <= high]
        found += [name for low, high, name in self._upright.get(x, ()) if low <= y <= high]
        for (ax, ay), (bx, by), name in self._slanted:
            if (
                min(ax, bx) <= x <= max(ax, bx)
                and min(ay, by) <= y <= max(ay, by)
                and (bx - ax) * (y - ay) == (by - ay) * (x - ax)
            ):
                found.append(name)
        return found
