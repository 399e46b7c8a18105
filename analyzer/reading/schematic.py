"""A schematic project becomes a circuit: sheets, symbols, connections, names, parts, in this order."""

from __future__ import annotations

from analyzer.circuit import Circuit, Note
from analyzer.findings import reading as kinds
from analyzer.reading.assembly import build_components, build_nets, group_units, join_jumpers
from analyzer.reading.board_file import copper_layers
from analyzer.reading.buses import Bus, BusError, read_bus
from analyzer.reading.buslines import join_buses
from analyzer.reading.checks import check_buses, check_names, check_pins, check_sheets
from analyzer.reading.files import Files
from analyzer.reading.geometry import Point
from analyzer.reading.hierarchy import Hierarchy, SheetInstance
from analyzer.reading.joins import Netting
from analyzer.reading.netlisting import name_nets
from analyzer.reading.placement import Placement, place_all
from analyzer.reading.project import Project
from analyzer.reading.report import Report
from analyzer.reading.scope import Scope
from analyzer.reading.sheet_pins import join_sheet_pins
from analyzer.reading.wiring import WiredSheet, wire_sheet
from analyzer.settings import Settings


def read_schematic(project: Project, files: Files, report: Report, settings: Settings, variant: str | None) -> Circuit:
    """Read all sheets of a project.

    Raises:
        InputError: If the root sheet cannot be read; everything else becomes a finding.
    """
    hierarchy = Hierarchy(files, report, variant)
    hierarchy.read(project.roots)
    sheets = hierarchy.instances
    placements = place_all(sheets, sheets[0].drawing.old_usages, project.name, variant, report)
    scope = Scope(project, placements, report)
    netting = Netting()
    wired = _wire(sheets, placements, netting, scope, _aliases(sheets, project), report)
    join_buses(wired, netting)
    join_sheet_pins(wired, netting, report)
    parts = group_units(placements, report)
    join_jumpers(parts, netting)
    names = name_nets(placements, netting, project.unit_style)
    check_sheets(wired, report)
    check_buses(wired, placements, report)
    check_names(netting, names, report)
    check_pins(placements, wired, netting, names, report)
    components = build_components(parts, netting, names, scope.field, settings, report)
    return Circuit(
        board=project.name,
        components=components,
        nets=build_nets(components, names.given),
        notes=tuple(_notes(sheets, scope)),
        findings=tuple(report.findings),
        complete=report.complete,
        inputs=tuple(files.inputs[name] for name in sorted(files.inputs)),
        copper_layers=copper_layers(project.roots[0].path, files, report),
    )


def _aliases(sheets: list[SheetInstance], project: Project) -> dict[str, tuple[str, ...]]:
    # an alias of any file counts everywhere; the project's own ones go before
    aliases: dict[str, tuple[str, ...]] = {}
    for sheet in sheets:
        for name, members in sheet.drawing.aliases.items():
            aliases.setdefault(name, members)
    return {**aliases, **project.aliases}


def _wire(
    sheets: list[SheetInstance],
    placements: list[Placement],
    netting: Netting,
    scope: Scope,
    aliases: dict[str, tuple[str, ...]],
    report: Report,
) -> list[WiredSheet]:
    on_sheet: dict[int, list[Placement]] = {sheet.number: [] for sheet in sheets}
    for placement in placements:
        on_sheet[placement.sheet.number].append(placement)

    def bus(label: str, sheet: SheetInstance, at: Point) -> Bus | None:
        if label[-1:] not in "]}+-PN" or not label:
            return None
        place = sheet.drawing.place(at, sheet.name)
        try:
            found = read_bus(label, aliases)
        except BusError as error:
            report.add(kinds.BUS_UNKNOWN, label, str(error), place, lost=True)
            return Bus((), (), is_vector=True)
        return found

    return [wire_sheet(sheet, on_sheet[sheet.number], netting, scope.on(sheet), bus, report) for sheet in sheets]


def _notes(sheets: list[SheetInstance], scope: Scope) -> list[Note]:
    return [
        Note(scope.on(sheet)(text), sheet.drawing.place(at, sheet.name))
        for sheet in sheets
        for text, at in sheet.drawing.notes
        if text.strip()
    ]
