"""One schematic file as drawn: what stands on the sheet, read once however often the sheet is used."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from analyzer.circuit import Place
from analyzer.reading.geometry import GRID_PER_MM, Point
from analyzer.reading.library import LibrarySymbol, read_symbol
from analyzer.reading.sexpr import Node

Flags = tuple[bool, bool, bool]
"""(populated, in the bill of materials, on the board)."""


def both(one: Flags, other: Flags) -> Flags:
    """The marks of a thing inside another: each must hold for both."""
    return one[0] and other[0], one[1] and other[1], one[2] and other[2]


@dataclass(frozen=True, slots=True)
class Label:
    """A label: `kind` is "local", "global" or "hierarchical"."""

    text: str
    kind: str
    at: Point


@dataclass(frozen=True, slots=True)
class Usage:
    """What one use of a sheet makes of a symbol: its reference and unit there, and its variants.

    Attributes:
        project: Name of the project the use belongs to.
        path: Sheet path as uuids, "/root/sheet".
        reference: Reference designator.
        unit: Unit, or None where it is not stated or not a number.
        value: Value stated for this use (old files), else None.
        footprint: Footprint stated for this use (old files), else None.
        variants: The `(variant ...)` expressions.
    """

    project: str
    path: str
    reference: str
    unit: int | None
    value: str | None = None
    footprint: str | None = None
    variants: tuple[Node, ...] = ()


@dataclass(frozen=True, slots=True)
class Symbol:
    """A placed symbol as the file holds it, before it is looked at from a sheet instance."""

    lib_id: str
    library_name: str
    at: Point
    quarter_turns: int
    mirror: str
    unit: int
    style: int
    uuid: str
    fields: Mapping[str, str]
    flags: Flags
    usages: tuple[Usage, ...]
    alternates: Mapping[str, str]
    node: Node


@dataclass(frozen=True, slots=True)
class SheetSymbol:
    """A sheet symbol: the box that stands for another file."""

    uuid: str
    name: str
    file: str
    at: Point | None
    fields: Mapping[str, str]
    pins: tuple[tuple[str, Point], ...]
    flags: Flags
    usages: tuple[Usage, ...]


@dataclass(slots=True)
class Drawing:
    """Everything of one schematic file that matters here.

    Attributes:
        file: Path relative to the project folder, with forward slashes.
        version: Format version.
        uuid: The file's own uuid, "" in early files.
        library: Expressions of the library symbols by name.
        twice: Names that two different library symbols bear.
        old_usages: Symbol uuid path → use, of files before 20221002 (root file only).
        title: Title-block entries by the name of their text variable.
    """

    file: str
    version: int
    uuid: str
    wires: list[tuple[Point, Point]] = field(default_factory=list)
    buses: list[tuple[Point, Point]] = field(default_factory=list)
    junctions: list[Point] = field(default_factory=list)
    no_connects: list[Point] = field(default_factory=list)
    bus_entries: list[tuple[Point, Point]] = field(default_factory=list)
    labels: list[Label] = field(default_factory=list)
    symbols: list[Symbol] = field(default_factory=list)
    sheets: list[SheetSymbol] = field(default_factory=list)
    notes: list[tuple[str, Point | None]] = field(default_factory=list)
    aliases: dict[str, tuple[str, ...]] = field(default_factory=dict)
    areas: list[Node] = field(default_factory=list)
    library: dict[str, Node] = field(default_factory=dict)
    twice: list[str] = field(default_factory=list)
    old_usages: dict[str, Usage] = field(default_factory=dict)
    title: dict[str, str] = field(default_factory=dict)
    _symbols_read: dict[str, LibrarySymbol | None] = field(default_factory=dict)

    def library_symbol(self, name: str) -> LibrarySymbol | None:
        """The library symbol of that name, read at first use."""
        if name not in self._symbols_read:
            node = self.library.get(name)
            self._symbols_read[name] = None if node is None else read_symbol(node, self.version, self.library)
        return self._symbols_read[name]

    def place(self, at: Point | None, sheet: str = "/") -> Place:
        """A position on this sheet, for messages and parts."""
        if at is None:
            return Place(self.file, sheet)
        return Place(self.file, sheet, at[0] / GRID_PER_MM, at[1] / GRID_PER_MM)
