"""The way in: tells schematics from netlists and reads either."""

from __future__ import annotations

from pathlib import Path

from analyzer.circuit import Circuit
from analyzer.findings import reading as kinds
from analyzer.reading.files import Files
from analyzer.reading.project import NETLIST_SUFFIXES, check_variant, find_schematic, load_project
from analyzer.reading.report import Report
from analyzer.reading.schematic import read_schematic
from analyzer.settings import Settings


def read_board(path: Path, settings: Settings, variant: str | None, *, allow_outside: bool) -> Circuit:
    """See `analyzer.reading.read`."""
    report = Report()
    if path.suffix.lower() in NETLIST_SUFFIXES:
        from analyzer.reading.netlist import read_netlist, schematic_beside

        beside = schematic_beside(path)
        if beside is None:
            return read_netlist(path, settings, variant)
        message = f"{beside.name} lies beside {path.name} and was read instead: it holds more than a netlist"
        report.add(kinds.SCHEMATIC_PREFERRED, path.name, message, path.name)
        path = beside
    found = find_schematic(path)
    files = Files(found.parent, allow_outside)
    project = load_project(found, files, report)
    check_variant(variant, project.variants, found.name)
    return read_schematic(project, files, report, settings, variant)


def variant_names(path: Path) -> tuple[str, ...]:
    """See `analyzer.reading.variants`."""
    if path.suffix.lower() in NETLIST_SUFFIXES:
        from analyzer.reading.netlist import names_of_variants, schematic_beside

        beside = schematic_beside(path)
        if beside is None:
            return names_of_variants(path)
        path = beside
    found = find_schematic(path)
    return load_project(found, Files(found.parent), Report()).variants
