"""Library symbols as a schematic file carries them: pins by unit and body style, and what kind of symbol it is."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from analyzer import limits
from analyzer.reading.geometry import Point, point
from analyzer.reading.sexpr import Node, every, first, flag, text, word

TILDE_IS_A_NAME = 20250318
"""From this format on a pin named "~" has that name; before, "~" means no name, in fields too."""


@dataclass(frozen=True, slots=True)
class LibraryPin:
    """One pin of a library symbol.

    Attributes:
        number: Pad number as written, maybe in stacked notation.
        name: Name without meaning tilde.
        kind: Electrical type.
        hidden: Whether the pin is invisible.
        at: Electrical end, y downwards [100 nm].
        unit: Unit it belongs to; 0 belongs to all.
        style: Body style it belongs to; 0 belongs to all.
        alternates: Alternate functions: name → electrical type.
    """

    number: str
    name: str
    kind: str
    hidden: bool
    at: Point
    unit: int
    style: int
    alternates: dict[str, str] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class LibrarySymbol:
    """One library symbol.

    Attributes:
        name: Name with nickname.
        power: "" for ordinary symbols, else "global" or "local".
        pins: All pins of all units and styles that could be read.
        unreadable: Number of pins that could not be read.
        units: Numbers of the units it has (never 0).
        styles: Numbers of the body styles its drawings use.
        has_styles: Whether it declares several body styles (`body_styles`).
        jumper_groups: Pads that are joined inside the part.
        same_number_joins: Whether pins with the same number are joined inside the part.
        fields: Its own fields (Description, ki_keywords, ...).
        node: The expression it was read from, for its outline.
    """

    name: str
    power: str
    pins: tuple[LibraryPin, ...]
    unreadable: int
    units: frozenset[int]
    styles: frozenset[int]
    has_styles: bool
    jumper_groups: tuple[tuple[str, ...], ...]
    same_number_joins: bool
    fields: dict[str, str]
    node: Node

    @property
    def names_nets(self) -> bool:
        """Whether its pins may name a net; those of flags and other symbols with a "#" reference may not."""
        return not self.fields.get("Reference", "").startswith("#")

    def pins_of(self, unit: int, style: int) -> tuple[LibraryPin, ...]:
        """The pins one placed unit shows in one body style."""
        return tuple(pin for pin in self.pins if pin.unit in {0, unit} and pin.style in {0, style})


def read_symbol(node: Node, version: int, siblings: dict[str, Node]) -> LibrarySymbol:
    """Read one `(symbol ...)` of `lib_symbols`.

    Args:
        node: The expression.
        version: Format version of the file.
        siblings: All library symbols of the file by name, for `extends`.
    """
    name = text(node[1]) if len(node) > 1 else ""
    base = node
    seen = {name}
    while (parent := word(base, "extends")) and parent not in seen:
        # a derived symbol draws its parent's pins; the parent is named without nickname
        seen.add(parent)
        nickname = name.partition(":")[0]
        found = siblings.get(parent) or siblings.get(f"{nickname}:{parent}")
        if found is None:
            break
        base = found
    pins: list[LibraryPin] = []
    units: set[int] = set()
    styles: set[int] = set()
    unreadable = 0
    for part in [base, *every(base, "symbol")]:
        unit, style = (0, 0) if part is base else _unit_and_style(part)
        if unit:
            units.add(unit)
        if style:
            styles.add(style)
        for child in part:
            if type(child) is list and child and child[0] == "pin":
                pin = _pin(child, version, unit, style)
                if pin is None:
                    unreadable += 1
                else:
                    pins.append(pin)
    power = first(node, "power") or first(base, "power")
    groups = first(node, "jumper_pin_groups") or first(base, "jumper_pin_groups") or []
    return LibrarySymbol(
        name=name,
        power="" if power is None else "local" if "local" in power[1:] else "global",
        pins=tuple(pins),
        unreadable=unreadable,
        units=frozenset(units),
        styles=frozenset(styles),
        has_styles=any(len(each) > 1 for each in (first(node, "body_styles"), first(base, "body_styles")) if each),
        jumper_groups=tuple(
            tuple(text(pad) for pad in group if type(pad) is not list)
            for group in groups[1:]
            if isinstance(group, list)
        ),
        same_number_joins=flag(node, "duplicate_pin_numbers_are_jumpers")
        or flag(base, "duplicate_pin_numbers_are_jumpers"),
        fields={**read_fields(base), **read_fields(node)},
        node=base,
    )


def read_fields(node: Node) -> dict[str, str]:
    """The properties of a symbol or sheet, by name as written; a repeated name keeps its first value."""
    fields: dict[str, str] = {}
    for child in node:
        if type(child) is list and len(child) > 2 and child[0] == "property":
            at = 2 if child[1] == "private" and len(child) > 3 and type(child[3]) is not list else 1
            fields.setdefault(text(child[at]), text(child[at + 1]))
    return fields


_STACK = re.compile(r"([A-Za-z]*)(\d+)(?:-([A-Za-z]*)(\d+))?\Z")


def pads_of(number: str) -> tuple[str, ...]:
    """The pads of one pin: "[1-3,5]" are four pads, anything else is one; a malformed stack stays as written."""
    if not (number.startswith("[") and number.endswith("]")):
        return (number,)
    pads: list[str] = []
    for piece in number[1:-1].split(","):
        match = _STACK.match(piece.strip())
        if match is None:
            return (number,)
        prefix, low, last_prefix, high = match.groups()
        end = int(high) if high is not None else int(low)
        if (high is not None and prefix != last_prefix) or end < int(low) or end - int(low) >= limits.STACKED_PADS:
            return (number,)
        pads.extend(f"{prefix}{pad}" for pad in range(int(low), end + 1))
    return tuple(pads) if 0 < len(pads) <= limits.STACKED_PADS else (number,)


def _unit_and_style(node: Node) -> tuple[int, int]:
    pieces = text(node[1]).rsplit("_", 2) if len(node) > 1 else []
    if len(pieces) == 3 and pieces[1].isdecimal() and pieces[2].isdecimal():
        return int(pieces[1]), int(pieces[2])
    return 0, 0


def _pin(node: Node, version: int, unit: int, style: int) -> LibraryPin | None:
    at = number = name = None
    hidden = False
    alternates: dict[str, str] = {}
    for child in node[2:]:
        if type(child) is not list:
            hidden = hidden or child == "hide"
        elif not child:
            continue
        elif child[0] == "at":
            at = point(child)
        elif child[0] == "number" and len(child) > 1:
            number = text(child[1])
        elif child[0] == "name" and len(child) > 1:
            name = text(child[1])
        elif child[0] == "hide":
            hidden = len(child) == 1 or child[1] == "yes"
        elif child[0] == "alternate" and len(child) > 2:
            alternates[text(child[1])] = text(child[2])
    if at is None or number is None or name is None or len(node) < 2:
        return None
    if name == "~" and version < TILDE_IS_A_NAME:
        name = ""
    kind = text(node[1])
    return LibraryPin("" if number == "~" else number, name, kind, hidden, (at[0], -at[1]), unit, style, alternates)
