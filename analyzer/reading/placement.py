"""Placed symbols as one sheet instance shows them: reference, unit, fields, flags and pins with their positions."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from analyzer import limits
from analyzer.findings import reading as kinds
from analyzer.reading.areas import areas_of, flags_from
from analyzer.reading.drawing import Drawing, Flags, Symbol, Usage, both
from analyzer.reading.geometry import Point, turned
from analyzer.reading.hierarchy import SheetInstance
from analyzer.reading.library import LibraryPin, LibrarySymbol
from analyzer.reading.report import Report
from analyzer.reading.variants import changed_fields, changed_flags

STYLES_DECLARED = 20250827
"""From this format on a second body style exists only where the library symbol declares it."""


@dataclass(eq=False, slots=True)
class PlacedPin:
    """A pin on a sheet; `node` is filled in when the sheet is wired."""

    pin: LibraryPin
    at: Point
    owner: Placement
    node: int = -1


@dataclass(eq=False, slots=True)
class Placement:
    """A symbol in one sheet instance.

    Attributes:
        fields: Fields of this use, variables not yet put in.
        flags: Marks of the symbol, its variant and the sheets above it together.
    """

    sheet: SheetInstance
    symbol: Symbol
    library: LibrarySymbol | None
    reference: str
    unit: int
    fields: dict[str, str]
    flags: Flags
    pins: list[PlacedPin] = field(default_factory=list)

    @property
    def key(self) -> str:
        """Identity: sheet path and uuid."""
        return f"{self.sheet.key}{self.symbol.uuid}"

    @property
    def is_power(self) -> bool:
        """Whether the symbol is a power symbol (or flag), no part."""
        return self.library is not None and bool(self.library.power)

    @property
    def is_annotated(self) -> bool:
        """Whether the reference ends in a number."""
        return bool(self.reference) and self.reference[-1:].isdecimal()


def place_all(
    instances: list[SheetInstance],
    old_usages: Mapping[str, Usage],
    project: str,
    variant: str | None,
    report: Report,
) -> list[Placement]:
    """Look at every symbol from every instance of its sheet.

    Args:
        instances: All sheet instances.
        old_usages: The root file's `symbol_instances` (files before 20221002).
        project: Name of the project, which uses are looked up by.
        variant: Design variant to apply; None for the base design.
        report: Takes symbols whose pins are unknown.
    """
    placements: list[Placement] = []
    offsets: dict[tuple[int, str, int, int, int, str], list[tuple[LibraryPin, Point]]] = {}
    pins = 0
    for sheet in instances:
        areas = areas_of(sheet.drawing)
        for symbol in sheet.drawing.symbols:
            usage = _usage(symbol, sheet, old_usages, project)
            placement = _place(sheet, symbol, usage, variant)
            if areas:
                left = flags_from(areas, symbol, placement.library, placement.unit)
                placement.flags = both(placement.flags, left)
            shape = (
                id(sheet.drawing),
                symbol.library_name,
                placement.unit,
                symbol.style,
                symbol.quarter_turns,
                symbol.mirror,
            )
            if shape not in offsets:
                offsets[shape] = _offsets(placement)
            x, y = symbol.at
            placement.pins = [PlacedPin(pin, (x + dx, y + dy), placement) for pin, (dx, dy) in offsets[shape]]
            pins += len(placement.pins)
            placements.append(placement)
            _check(placement, sheet.drawing, report)
            if len(placements) > limits.SYMBOL_INSTANCES or pins > limits.PINS:
                report.add(
                    kinds.LIMIT_REACHED,
                    sheet.drawing.file,
                    f"more than {limits.SYMBOL_INSTANCES} placed symbols or {limits.PINS} pins",
                    sheet.drawing.place(None, sheet.name),
                    lost=True,
                )
                return placements
    return placements


def _usage(symbol: Symbol, sheet: SheetInstance, old: Mapping[str, Usage], project: str) -> Usage | None:
    if symbol.usages:
        here = [usage for usage in symbol.usages if usage.path == sheet.path]
        if here:
            return next((usage for usage in here if usage.project == project), here[0])
        # KiCad 9 and 10 both fall back on the first use in another project
        return old.get(f"{sheet.key}{symbol.uuid}") or symbol.usages[0]
    return old.get(f"{sheet.key}{symbol.uuid}")


def _place(sheet: SheetInstance, symbol: Symbol, usage: Usage | None, variant: str | None) -> Placement:
    fields = dict(symbol.fields)
    reference = fields.get("Reference", "")
    unit = symbol.unit
    flags: Flags = symbol.flags
    if usage is not None:
        reference = usage.reference or reference
        unit = symbol.unit if usage.unit is None else usage.unit
        if usage.value:
            fields["Value"] = usage.value
        if usage.footprint:
            fields["Footprint"] = usage.footprint
        if variant is not None and usage.variants:
            fields.update(changed_fields(usage.variants, variant))
            flags = changed_flags(flags, usage.variants, variant, sheet.drawing.version)
    fields["Reference"] = reference
    library = sheet.drawing.library_symbol(symbol.library_name)
    return Placement(sheet, symbol, library, reference, unit, fields, both(flags, sheet.flags))


def _offsets(placement: Placement) -> list[tuple[LibraryPin, Point]]:
    library, symbol = placement.library, placement.symbol
    if library is None or not _has_style(placement, library):
        return []
    return [
        (pin, turned(pin.at, symbol.quarter_turns, symbol.mirror))
        for pin in library.pins_of(placement.unit, symbol.style)
    ]


def _has_style(placement: Placement, library: LibrarySymbol) -> bool:
    style = placement.symbol.style
    return style <= 1 or placement.sheet.drawing.version < STYLES_DECLARED or library.has_styles


def _check(placement: Placement, drawing: Drawing, report: Report) -> None:
    library, symbol = placement.library, placement.symbol
    if library is not None and placement.pins and not library.unreadable and placement.unit in library.units:
        return
    place = drawing.place(symbol.at, placement.sheet.name)
    subject = placement.reference or symbol.lib_id
    if library is None:
        message = f"{subject}: the file holds no library symbol '{symbol.library_name}'; no pins known"
        report.add(kinds.NO_SYMBOL, subject, message, place, key=placement.key, lost=True)
    elif library.unreadable:
        message = f"{subject}: {library.unreadable} pin(s) of library symbol '{library.name}' are unreadable"
        report.add(kinds.BAD_ITEM, subject, message, place, key=placement.key, lost=True)
    elif not _has_style(placement, library):
        message = f"{subject}: body style {symbol.style} is not declared by library symbol '{library.name}'"
        report.add(kinds.NO_UNIT, subject, message, place, key=placement.key, lost=True)
    elif library.units and placement.unit not in library.units:
        message = f"{subject}: library symbol '{library.name}' has no unit {placement.unit}"
        report.add(kinds.NO_UNIT, subject, message, place, key=placement.key, lost=True)
