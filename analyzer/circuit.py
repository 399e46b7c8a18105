"""The circuit: what every reader produces and every later stage reads. Nothing here touches a file."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

from analyzer.evidence import Evidence
from analyzer.findings.base import Finding


@dataclass(frozen=True, slots=True)
class Place:
    """Where something is drawn.

    Attributes:
        file: Path of the file relative to the project folder.
        sheet: Human sheet path, "/" for the root, "/psu/" for a sheet below.
        x_mm: Position on the sheet [mm], None where the input has no drawing (netlists).
        y_mm: Position on the sheet [mm].
    """

    file: str
    sheet: str = "/"
    x_mm: float | None = None
    y_mm: float | None = None

    def __str__(self) -> str:
        at = "" if self.x_mm is None else f" at ({self.x_mm:g}, {self.y_mm:g}) mm"
        return f"{self.file} sheet {self.sheet}{at}"


@dataclass(frozen=True, slots=True)
class Pin:
    """One pin of a placed part.

    Attributes:
        number: Pad number as text ("5", "EP", "A4").
        name: Pin name with overbar and sub/superscript markup as drawn; "" when it has none.
        kind: KiCad's electrical type ("power_in", "passive", ...).
        net: Name of the net it is on; every pin has one, an unconnected pin a net of its own.
        more_nets: Further nets the same pad number is on (a drawing fault that is also a finding).
    """

    number: str
    name: str
    kind: str
    net: str
    more_nets: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Component:
    """One part with all its units.

    Attributes:
        key: Identity that survives renumbering: sheet-instance path and symbol uuid of the first unit.
        ref: Reference designator of this instance.
        value: Value field, text variables expanded.
        lib_id: Library nickname and symbol name.
        footprint: Footprint field, may be empty.
        fields: All fields except Reference, Value, Footprint, by name as written.
        description: Description of this instance, else of its library symbol.
        keywords: Keywords of the library symbol.
        pins: All pins of all placed units, in natural order of number.
        place: Where its first unit is drawn.
        fitted: False when marked "do not populate" (part, sheet or field convention).
        in_bom: False when excluded from the bill of materials; says nothing about fitting.
        on_board: False when excluded from the board.
    """

    key: str
    ref: str
    value: str
    lib_id: str
    footprint: str
    fields: Mapping[str, str]
    description: str
    keywords: str
    pins: tuple[Pin, ...]
    place: Place
    fitted: bool = True
    in_bom: bool = True
    on_board: bool = True

    def nets_of(self, name: str) -> tuple[str, ...]:
        """Nets of the pins whose plain name is `name`."""
        return tuple(pin.net for pin in self.pins if plain_name(pin.name) == name)


@dataclass(frozen=True, slots=True)
class Net:
    """One net.

    Attributes:
        name: KiCad's name of it, unique in the circuit.
        pins: (component key, pin number) of every pin on it, in natural order.
        is_named: True when a person named it (label or power symbol), False for automatic names.
    """

    name: str
    pins: tuple[tuple[str, str], ...]
    is_named: bool


@dataclass(frozen=True, slots=True)
class Note:
    """A free text on a schematic sheet."""

    text: str
    place: Place


@dataclass(frozen=True, slots=True)
class InputFile:
    """A file that was read: path relative to the project folder and SHA-256 of its bytes in hex."""

    path: str
    sha256: str


@dataclass(frozen=True)
class Circuit:
    """A whole board as read.

    Attributes:
        board: Name of the project.
        components: Every part, fitted or not, in natural order of reference.
        nets: Every net, in natural order of name.
        notes: Free texts of the sheets.
        findings: What the reader had to report (missing sheets, doubled references, ...).
        complete: False when any part of the drawing could not be read; then no entry may be `clear`.
        inputs: Every file read.
        copper_layers: Number of copper layers as found in the board file beside the schematic, if any.
        cannot_contain: What this kind of input leaves out ("parts excluded from the BOM"), for the report.
    """

    board: str
    components: tuple[Component, ...]
    nets: tuple[Net, ...]
    notes: tuple[Note, ...] = ()
    findings: tuple[Finding, ...] = ()
    complete: bool = True
    inputs: tuple[InputFile, ...] = ()
    copper_layers: Evidence | None = None
    cannot_contain: tuple[str, ...] = field(default=())

    @cached_property
    def by_key(self) -> Mapping[str, Component]:
        """Components by their identity."""
        return {component.key: component for component in self.components}

    @cached_property
    def by_ref(self) -> Mapping[str, tuple[Component, ...]]:
        """Components by reference; more than one where a reference is doubled."""
        found: dict[str, tuple[Component, ...]] = {}
        for component in self.components:
            found[component.ref] = (*found.get(component.ref, ()), component)
        return found

    @cached_property
    def net_by_name(self) -> Mapping[str, Net]:
        """Nets by name."""
        return {net.name: net for net in self.nets}

    @cached_property
    def on_net(self) -> Mapping[str, tuple[tuple[Component, Pin], ...]]:
        """For each net name, the (component, pin) pairs on it, in natural order."""
        found: dict[str, list[tuple[Component, Pin]]] = {net.name: [] for net in self.nets}
        for component in self.components:
            for pin in component.pins:
                for net in (pin.net, *pin.more_nets):
                    found.setdefault(net, []).append((component, pin))
        return {name: tuple(pairs) for name, pairs in found.items()}


_MARKUP = re.compile(r"[~_^]\{([^{}]*)\}")


def plain_name(name: str) -> str:
    """A pin or net name without overbars, sub- and superscripts: "~{EN}" → "EN", "V_{IN}" → "VIN"."""
    while (bare := _MARKUP.sub(r"\1", name)) != name:
        name = bare
    return name


_DIGITS = re.compile(r"(\d+)")


def natural_key(text: str) -> tuple[tuple[int, int | str], ...]:
    """Sort key that puts U2 before U10 and never compares a number with text."""
    return tuple((0, int(piece)) if piece.isdecimal() else (1, piece) for piece in _DIGITS.split(text) if piece)
