"""Net names as KiCad 10 forms them: who may name a net, and in which order."""

from __future__ import annotations

import re
from dataclasses import dataclass
from enum import IntEnum

from analyzer.reading.placement import PlacedPin, Placement

_ESCAPED = re.compile(r"\{(dblquote|quote|lt|gt|backslash|slash|bar|comma|colon|space|dollar|tab|return|brace)\}")
_CHARACTERS = {
    "dblquote": '"',
    "quote": "'",
    "lt": "<",
    "gt": ">",
    "backslash": "\\",
    "slash": "/",
    "bar": "|",
    "comma": ",",
    "colon": ":",
    "space": " ",
    "dollar": "$",
    "tab": "\t",
    "return": "\n",
    "brace": "{",
}
NO_TEXT = "<NO NET>"
"""What KiCad calls the net of a label without text."""


class Rank(IntEnum):
    """Who names a net, strongest first. A bus stands before the plain labels of its members."""

    GLOBAL_LABEL = 0
    GLOBAL_POWER = 1
    BUS_LABEL = 2
    BUS_HIERARCHICAL = 3
    BUS_SHEET_PIN = 4
    LOCAL_POWER = 5
    LOCAL_LABEL = 6
    HIERARCHICAL_LABEL = 7
    SHEET_PIN = 8


@dataclass(frozen=True, slots=True, order=True)
class Candidate:
    """A name a net may get; the least candidate wins.

    Attributes:
        rank: Who proposes it.
        depth: Levels below the root of the sheet it stands on; 0 for names that hold on all sheets.
        by: Name of the proposer where it differs from the net's (a bus), else the net's name.
        name: Full name the net would get.
    """

    rank: Rank
    depth: int
    by: str
    name: str


def meant(label: str) -> str:
    """The text a label means: {slash} and the like replaced by the characters they stand for."""
    return _ESCAPED.sub(lambda match: _CHARACTERS[match[1]], label) if "{" in label else label


def written(name: str) -> str:
    """A meant text as it stands in net names, where "/" separates sheets."""
    return name.replace("/", "{slash}").replace("\n", "").replace("\r", "") if name else NO_TEXT


def unit_letters(unit: int, separator: str, first: str) -> str:
    """How a unit is written behind its reference: A, B, ..., Z, AA with KiCad's defaults."""
    if first.isdecimal():
        return f"{separator}{unit - 1 + int(first)}"
    letters = ""
    number = unit
    while number > 0:
        number, rest = divmod(number - 1, 26)
        letters = chr(ord("A" if first.isupper() or not first else "a") + rest) + letters
    return f"{separator}{letters}"


@dataclass(frozen=True, slots=True)
class UnitStyle:
    """How units are written: separator, and the sign of the first unit."""

    separator: str = ""
    first: str = "A"


def pin_name(placed: PlacedPin, style: UnitStyle, *, unconnected: bool) -> str:
    """The automatic name a net gets from one of its pins."""
    owner, pin = placed.owner, placed.pin
    number = shown_number(pin.number)
    head = "unconnected-(" if unconnected else "Net-("
    unannotated = owner.reference.endswith("?") or not owner.reference
    if unannotated:
        return f"{head}{owner.reference or '?'}-{owner.symbol.uuid[:8]}-Pad{written(number)})"
    if not pin.name or pin.name == number:
        return f"{head}{owner.reference}-Pad{written(number)})"
    several = owner.library is not None and len(owner.library.units) > 1
    unit = unit_letters(owner.unit, style.separator, style.first) if several else ""
    shared = unconnected or _shares_name(owner, placed)
    pad = f"-Pad{written(number)}" if shared else ""
    return f"{head}{owner.reference}{unit}-{written(meant(pin.name))}{pad})"


def shown_number(number: str) -> str:
    """The pad that stands for a pin in names: of a stack its first one."""
    from analyzer.reading.library import pads_of

    return pads_of(number)[0]


def _shares_name(owner: Placement, placed: PlacedPin) -> bool:
    pin = placed.pin
    return any(other.pin.name == pin.name and other.pin.number != pin.number for other in owner.pins)
