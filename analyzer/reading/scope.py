"""What a text variable means where it stands: on a symbol, on a sheet, in the project."""

from __future__ import annotations

from collections.abc import Callable

from analyzer.findings import reading as kinds
from analyzer.reading.hierarchy import SheetInstance
from analyzer.reading.placement import Placement
from analyzer.reading.project import Project
from analyzer.reading.report import Report
from analyzer.reading.variables import Lookup, VariableCycleError, put_in

_ANY_CASE = {"REFERENCE": "Reference", "VALUE": "Value", "FOOTPRINT": "Footprint", "DATASHEET": "Datasheet"}


class Scope:
    """Looks variables up for one project."""

    def __init__(self, project: Project, placements: list[Placement], report: Report) -> None:
        self._project = project
        self._report = report
        self._placements = placements
        self._by_reference: dict[str, Placement] | None = None

    def on(self, sheet: SheetInstance) -> Callable[[str], str]:
        """A function that puts variables into texts standing on a sheet."""

        def expand(text: str) -> str:
            if "${" not in text and "@{" not in text:
                return text
            return self._expand(text, lambda name: self._on_sheet(sheet, name), sheet)

        return expand

    def field(self, placement: Placement, text: str) -> str:
        """A field's text with variables put in."""
        if "${" not in text and "@{" not in text:
            return text
        return self._expand(text, lambda name: self._on_symbol(placement, name), placement.sheet)

    def _expand(self, text: str, lookup: Lookup, sheet: SheetInstance) -> str:
        try:
            return put_in(text, lookup)
        except VariableCycleError as cycle:
            message = f"text variable ${{{cycle}}} refers to itself, nests too deeply or grows too long"
            self._report.add(kinds.VARIABLE_CYCLE, str(cycle), message, sheet.drawing.place(None, sheet.name))
            return text

    def _on_symbol(self, placement: Placement, name: str) -> str | None:
        fields = placement.fields
        if name in fields:
            return fields[name]
        if name.upper() in _ANY_CASE:
            return fields.get(_ANY_CASE[name.upper()])
        return self._on_sheet(placement.sheet, name)

    def _on_sheet(self, sheet: SheetInstance, name: str) -> str | None:
        if sheet.symbol is not None and name in sheet.symbol.fields:
            return sheet.symbol.fields[name]
        if name == "SHEETNAME":
            return sheet.symbol.name if sheet.symbol is not None else sheet.name.strip("/")
        if name == "SHEETPATH":
            return sheet.name
        if name == "SHEETFILE":
            return sheet.drawing.file.rpartition("/")[2]
        if name == "#":
            return str(sheet.number)
        if name == "PROJECTNAME":
            return self._project.name
        if name in sheet.drawing.title:
            return sheet.drawing.title[name]
        if name in self._project.variables:
            return self._project.variables[name]
        reference, colon, field = name.partition(":")
        return self._of_other(reference, field) if colon else None

    def _of_other(self, reference: str, field: str) -> str | None:
        if self._by_reference is None:
            self._by_reference = {}
            for placement in self._placements:
                self._by_reference.setdefault(placement.reference, placement)
        other = self._by_reference.get(reference)
        if other is None:
            return None
        return other.fields.get(field, other.fields.get(_ANY_CASE.get(field.upper(), "")))
