"""Currents in the free texts of the sheets: suggestions for a person, never values.

A line that states a current or a dissipation is a suggestion for the nearest part that waits for a current (on the
rail the line names, if it names one), and for a whole rail: the one it names, unless a part is nearer than any
regulator, or else the output of the nearest regulator on its sheet.
"""

from __future__ import annotations

import math
import re
from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from analyzer.circuit import Note, Place, natural_key, plain_name
from analyzer.draws.board import Board
from analyzer.load import Gap

_NUMBER = r"[0-9]+(?:[.,][0-9]+)?"
_CURRENT = re.compile(
    rf"(?<![A-Za-z0-9_.]){_NUMBER}(?:\s*(?:-|–|\.\.|/|to)\s*{_NUMBER})?\s*(?:[munµμ]A|A|mA[hH]?|m?W)(?![A-Za-z0-9])(?!\s*(?:->|<-|→|←))"
)
_CAPACITY = re.compile(rf"{_NUMBER}\s*m?A[hH]")
_WORD = re.compile(r"[A-Za-z0-9_+.,/-]+")
_VOLTS = re.compile(r"[+-]?([0-9]+)(?:[Vv]([0-9]+)|[.,]([0-9]+)\s*[Vv]|\s*[Vv])")
NEAR_REGULATOR_MM = 75.0
"""Notes about a regulator stand 14 to 68 mm from it on the boards measured."""
NEAR_PART_MM = 40.0
_LINES_MAX = 4
_LENGTH_MAX = 160


@dataclass(frozen=True, slots=True)
class Hint:
    """What a note states, and about whom.

    Attributes:
        text: The lines with a current, and where the note stands.
        words: The words of these lines.
        rails: Rails it names.
        place: Where it stands.
    """

    text: str
    words: frozenset[str]
    rails: tuple[str, ...]
    place: Place

    def may_be_on(self, rail: str) -> bool:
        """Whether it names no other rail than this."""
        return not self.rails or rail in self.rails


def with_suggestions(board: Board, gaps: Iterable[Gap]) -> list[Gap]:
    """The gaps, each with the notes that may be about it."""
    waiting = list(gaps)
    hints = [hint for note in board.circuit.notes for hint in find_hints(board, note)]
    if not hints:
        return waiting
    for_rail: dict[str, list[str]] = defaultdict(list)
    for_part: dict[tuple[str, str], list[str]] = defaultdict(list)
    for hint in hints:
        addressed = [gap for gap in waiting if not gap.follows and gap.ref in hint.words and hint.may_be_on(gap.rail)]
        if addressed:
            for gap in addressed:
                for_part[gap.key, gap.rail].append(hint.text)
            continue  # a note that names its part is about nothing else
        parts, apart = _nearest_gaps(board, hint, waiting)
        outputs, from_regulator = _nearest_outputs(board, hint.place)
        for gap in parts:
            for_part[gap.key, gap.rail].append(hint.text)
        if hint.rails and apart < from_regulator:
            continue  # about what one part takes from the rail it names
        for rail in hint.rails or outputs:
            for_rail[rail].append(f"for all of {rail}: {hint.text}")
    return [_extended(gap, for_part, for_rail) for gap in waiting]


def find_hints(board: Board, note: Note) -> list[Hint]:
    """What a note states: one hint for each set of rails its lines name."""
    by_rails: dict[tuple[str, ...], list[str]] = {}
    for line in note.text.splitlines():
        if _CURRENT.search(_CAPACITY.sub("", line)):
            by_rails.setdefault(_named_rails(board, line), []).append(" ".join(line.split()))
    return [
        Hint(f'"{_shortened(lines)}" ({note.place})', _words(lines), rails, note.place)
        for rails, lines in by_rails.items()
    ]


def _words(lines: Iterable[str]) -> frozenset[str]:
    return frozenset(word.strip(".,-/") for line in lines for word in _WORD.findall(line))


def _extended(gap: Gap, for_part: Mapping[tuple[str, str], list[str]], for_rail: Mapping[str, list[str]]) -> Gap:
    found = (*for_part.get((gap.key, gap.rail), ()), *for_rail.get(gap.rail, ()))
    return replace(gap, suggestions=tuple(dict.fromkeys((*gap.suggestions, *found)))) if found else gap


def _shortened(lines: list[str]) -> str:
    text = " / ".join(lines[:_LINES_MAX])
    return text if len(text) <= _LENGTH_MAX else f"{text[: _LENGTH_MAX - 1]}…"


def _named_rails(board: Board, line: str) -> tuple[str, ...]:
    """Rails whose name, or the voltage in whose name, is a word of the line."""
    words = {word.strip(".,-/").casefold() for word in _WORD.findall(line)}
    named, of_volts = [], []
    said = {volts for found in _VOLTS.finditer(line) if (volts := _volts(found))}
    for rail in board.rails.rails:
        if rail.is_ground:
            continue
        leaves = {plain_name(net.rpartition("/")[2]) for net in (rail.name, *rail.nets)}
        leaves = {leaf for leaf in leaves if leaf and not leaf.startswith("Net-(")}
        if any(leaf.casefold().strip(".,-/") in words for leaf in leaves):
            named.append(rail.name)
        elif any(_volts(found) in said for leaf in leaves if (found := _VOLTS.search(leaf))):
            of_volts.append(rail.name)
    # a voltage alone names a rail only where no other rail has it in its name
    chosen = named or (of_volts if len(of_volts) == 1 else [])
    return tuple(sorted(chosen, key=natural_key))


def _volts(found: re.Match[str]) -> float:
    return float(f"{found[1]}.{found[2] or found[3] or '0'}")


def _nearest_outputs(board: Board, place: Place) -> tuple[tuple[str, ...], float]:
    """Output rails of the nearest regulator on the note's sheet, and its distance [mm]."""
    at = {part.key: part.component.place for part in board.parts if part.component.fitted}
    apart, key = min(((_apart(place, where), key) for key, where in at.items()), default=(math.inf, ""))
    if apart > NEAR_REGULATOR_MM:
        return (), math.inf
    rails = (wiring.output_rail for wiring in board.rails.wirings if wiring.part.key == key)
    return tuple(dict.fromkeys(rail for rail in rails if rail)), apart


def _nearest_gaps(board: Board, hint: Hint, gaps: Iterable[Gap]) -> tuple[list[Gap], float]:
    """The gaps of the nearest part that waits for a current on a rail of the hint, and its distance [mm]."""
    near = [
        (apart, gap)
        for gap in gaps
        if hint.may_be_on(gap.rail)
        and (component := board.circuit.by_key.get(gap.key))
        and (apart := _apart(hint.place, component.place)) <= NEAR_PART_MM
    ]
    least = min((apart for apart, _ in near), default=math.inf)
    return [gap for apart, gap in near if apart == least], least


def _apart(one: Place, other: Place) -> float:
    """Distance on the sheet [mm], infinite between sheets and where nothing is drawn."""
    if one.sheet != other.sheet or one.x_mm is None or one.y_mm is None or other.x_mm is None or other.y_mm is None:
        return math.inf
    return math.hypot(one.x_mm - other.x_mm, one.y_mm - other.y_mm)
