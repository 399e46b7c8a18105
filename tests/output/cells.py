"""Typing into a written workbook the way a spreadsheet program stores it, in milliseconds: straight into its sheets."""

from __future__ import annotations

import io
import re
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from xml.sax.saxutils import escape

import openpyxl

INPUT_COLOUR = "FFFFCC99"
"""Fill by which spreadsheets mark the cells to type into (their style "Input")."""

Place = tuple[str, str]
"""Sheet and coordinate."""


@dataclass(frozen=True, repr=False)
class Sheets:
    """A workbook taken apart: its parts by name, and where each sheet lies."""

    parts: Mapping[str, bytes]
    files: Mapping[str, str]
    inputs: tuple[Place, ...]
    rows: Mapping[str, Mapping[int, Mapping[str, object]]] = field(default_factory=dict)
    """Sheet → row as people count → head → value."""

    def typed(self, edits: Mapping[Place, object]) -> bytes:
        """The workbook's bytes with values in these cells: numbers, text, or None for an emptied one."""
        parts = dict(self.parts)
        for (sheet, cell), value in edits.items():
            name = self.files[sheet]
            found = re.compile(rf'<c r="{cell}"( s="\d+")?[^>]*?(?:/>|>.*?</c>)'.encode(), re.DOTALL)
            shown = _cell(cell, value)
            parts[name], number = found.subn(lambda match, shown=shown: shown(match[1] or b""), parts[name])
            assert number == 1, (sheet, cell, number)
        buffer = io.BytesIO()
        with zipfile.ZipFile(buffer, "w") as archive:
            for name, data in parts.items():
                archive.writestr(name, data)
        return buffer.getvalue()

    def head(self, place: Place) -> str:
        """Head of the column of a cell."""
        sheet, coordinate = place
        column = re.sub(r"\d", "", coordinate)
        letters = {openpyxl.utils.get_column_letter(n + 1): head for n, head in enumerate(self.row(place))}
        return letters[column] if sheet != "Summary" else column

    def row(self, place: Place) -> Mapping[str, object]:
        """Head → value of the row of a cell."""
        return self.rows[place[0]][int(re.sub(r"\D", "", place[1]))]


def _cell(cell: str, value: object):  # type: ignore[no-untyped-def]
    def shown(style: bytes) -> bytes:
        start = f'<c r="{cell}"'.encode() + style
        if value is None:
            return start + b"/>"
        if isinstance(value, (int, float)):
            return start + f"><v>{value!r}</v></c>".encode()
        return start + f' t="inlineStr"><is><t xml:space="preserve">{escape(str(value))}</t></is></c>'.encode()

    return shown


def taken_apart(file: Path) -> Sheets:
    """A written workbook, ready to be typed into many times."""
    book = openpyxl.load_workbook(file)
    with zipfile.ZipFile(file) as archive:
        parts = {name: archive.read(name) for name in archive.namelist()}
    files = {title: f"xl/worksheets/sheet{number + 1}.xml" for number, title in enumerate(book.sheetnames)}
    inputs = tuple(
        (sheet.title, str(cell.coordinate))
        for sheet in book
        for row in sheet.iter_rows()
        for cell in row
        if cell.fill.start_color.rgb == INPUT_COLOUR
    )
    rows = {}
    for sheet in book:
        heads = [str(cell.value) for cell in sheet[4]]
        rows[sheet.title] = {
            row[0].row: dict(zip(heads, (cell.value for cell in row), strict=True)) for row in sheet.iter_rows()
        }
    return Sheets(parts, files, inputs, rows)
