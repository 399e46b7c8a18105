"""Rule areas that mark all symbols they touch as not fitted, or keep them out of the BOM or off the board."""

from __future__ import annotations

from dataclasses import dataclass

from analyzer.reading.drawing import Drawing, Flags, Symbol
from analyzer.reading.geometry import Point, point, turned
from analyzer.reading.library import LibrarySymbol
from analyzer.reading.sexpr import Node, every, first, flag

AREAS_HAVE_MARKS = 20250610
"""From this format on rule areas carry marks for the symbols they touch."""

Box = tuple[int, int, int, int]


@dataclass(frozen=True, slots=True)
class Area:
    """A rule area that changes something: its outline, and the marks it leaves untouched (False: it clears them)."""

    outline: tuple[Point, ...]
    flags: Flags


def areas_of(drawing: Drawing) -> list[Area]:
    """The rule areas of a drawing that change anything."""
    if drawing.version < AREAS_HAVE_MARKS:
        return []
    found: list[Area] = []
    for node in drawing.areas:
        flags: Flags = (not flag(node, "dnp"), flag(node, "in_bom", True), flag(node, "on_board", True))
        line = first(node, "polyline")
        points = first(line, "pts") if line is not None else None
        if all(flags) or points is None:
            continue
        outline = tuple(at for each in every(points, "xy") if (at := point(each)) is not None)
        if len(outline) > 2:
            found.append(Area(outline, flags))
    return found


def flags_from(areas: list[Area], symbol: Symbol, library: LibrarySymbol | None, unit: int) -> Flags:
    """The marks that the areas touching a symbol leave it."""
    box = _box(symbol, library, unit)
    left = [area.flags for area in areas if _meets(area.outline, box)]
    return all(f[0] for f in left), all(f[1] for f in left), all(f[2] for f in left)


def _box(symbol: Symbol, library: LibrarySymbol | None, unit: int) -> Box:
    """The smallest rectangle around body, pins and the places of visible fields."""
    x, y = symbol.at
    points = [symbol.at]
    if library is not None:
        local = [pin.at for pin in library.pins_of(unit, symbol.style)] + _body(library.node)
        for at in local:
            dx, dy = turned(at, symbol.quarter_turns, symbol.mirror)
            points.append((x + dx, y + dy))
    for node in every(symbol.node, "property"):
        at_node = point(first(node, "at"))
        effects = first(node, "effects")
        hidden = flag(node, "hide") or (effects is not None and flag(effects, "hide"))
        if at_node is not None and not hidden and len(node) > 2 and node[2] != "":
            points.append(at_node)
    return (
        min(p[0] for p in points),
        min(p[1] for p in points),
        max(p[0] for p in points),
        max(p[1] for p in points),
    )


def _body(node: Node) -> list[Point]:
    points: list[Point] = []
    for part in [node, *every(node, "symbol")]:
        for key in ("rectangle", "arc", "bezier", "polyline"):
            for shape in every(part, key):
                places = [shape, *every(shape, "pts")]
                ends = [e for p in places for k in ("start", "mid", "end", "xy") for e in every(p, k)]
                points += [(at[0], -at[1]) for end in ends if (at := point(end)) is not None]
        for circle in every(part, "circle"):
            center, radius = point(first(circle, "center")), first(circle, "radius")
            reach = point(["", radius[1], 0]) if radius is not None and len(radius) > 1 else None
            if center is not None and reach is not None:
                cx, cy, r = center[0], -center[1], abs(reach[0])
                points += [(cx - r, cy - r), (cx + r, cy + r)]
    return points


def _meets(outline: tuple[Point, ...], box: Box) -> bool:
    left, top, right, bottom = box
    corners = [(left, top), (right, top), (right, bottom), (left, bottom)]
    if any(left <= x <= right and top <= y <= bottom for x, y in outline):
        return True
    if any(_inside(outline, corner) for corner in corners):
        return True
    edges = list(zip(outline, (*outline[1:], outline[0]), strict=True))
    sides = list(zip(corners, (*corners[1:], corners[0]), strict=True))
    return any(_cross(a, b, c, d) for a, b in edges for c, d in sides)


def _inside(outline: tuple[Point, ...], at: Point) -> bool:
    x, y = at
    inside = False
    for (ax, ay), (bx, by) in zip(outline, (*outline[1:], outline[0]), strict=True):
        if (ay > y) != (by > y) and x < ax + (y - ay) * (bx - ax) / (by - ay):
            inside = not inside
    return inside


def _cross(a: Point, b: Point, c: Point, d: Point) -> bool:
    return _side(a, b, c) * _side(a, b, d) < 0 and _side(c, d, a) * _side(c, d, b) < 0


def _side(a: Point, b: Point, at: Point) -> int:
    turn = (b[0] - a[0]) * (at[1] - a[1]) - (b[1] - a[1]) * (at[0] - a[0])
    return (turn > 0) - (turn < 0)
