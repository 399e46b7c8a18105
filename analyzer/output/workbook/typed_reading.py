"""The way back in: reading what a person typed into a workbook, by part identity and rail, never by row.

Read are currents and notes, answers to findings, the sign-off, and edits of θ and of the Settings sheet. Every fault of
the file is reported at once, with sheet and cell.
"""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.evidence import Evidence, Grade
from analyzer.output.workbook.archive_check import check_archive
from analyzer.output.workbook.layout import HEAD_ROW, SIGN_OFF, TYPE_HEADS
from analyzer.output.workbook.typed import Answered, Cells, Typed
from analyzer.output.workbook.typed_load import load_of
from analyzer.rule import BoardClass
from analyzer.settings import StatedDraw

_NEEDED_HEADS: Mapping[str, tuple[str, ...]] = {
    "Currents": ("Rail", "Part", "Identity", *TYPE_HEADS, "Your note"),
    "Findings": ("Finding", "About", "Identity", "Your answer"),
    "Settings": ("Name in formulas", "Value", "As audited"),
    "Summary": (),
}
YES = "yes"
"""Mark of a cell that somebody typed and later runs carry on, though it is what they audited."""


def read_typed(path: Path) -> Typed:
    """Read what was typed into a workbook of ours.

    Raises:
        InputError: If the file is none, is damaged or oversized, or a cell cannot be read; all cells at once.
    """
    sheets = _sheets(path)
    needed = [name for name in _NEEDED_HEADS if name not in sheets]
    if needed:
        what = f"is no workbook of this program: it has no sheet '{needed[0]}'"
        raise InputError(Fault(what, str(path), remedy="Give a workbook that 'heatledger audit --workbook' wrote."))
    faults: list[Fault] = []
    typed = _currents(path, _rows(path, "Currents", sheets, faults), faults)
    answers = _answers(_rows(path, "Findings", sheets, faults))
    rows = _rows(path, "Settings", sheets, faults)
    settings, board_class = _settings(path, rows, faults), _board_class(path, rows, faults)
    thetas = _thetas(path, _rows(path, "Regulators", sheets, faults), faults) if "Regulators" in sheets else {}
    if faults:
        raise InputError(faults)
    sign_off = _sign_off(sheets["Summary"])
    return replace(typed, answers=answers, sign_off=sign_off, settings=settings, thetas=thetas, board_class=board_class)


Line = tuple[Any, ...]
Row = tuple[int, Mapping[str, Any]]


def _sheets(path: Path) -> dict[str, list[Line]]:
    """The cells of the sheets that are read, by name of the sheet."""
    check_archive(path)
    import openpyxl

    try:
        book = openpyxl.load_workbook(path, read_only=True, data_only=True)
        wanted = [sheet for sheet in book.worksheets if sheet.title in {*_NEEDED_HEADS, "Regulators"}]
        return {sheet.title: list(sheet.iter_rows(max_row=limits.TABLE_ROWS, values_only=True)) for sheet in wanted}
    except Exception as error:  # openpyxl raises many kinds for a damaged file, some of them as it reads the rows
        raise InputError(Fault("is no readable workbook", str(path), remedy="Save it again as .xlsx.")) from error


def _rows(path: Path, sheet: str, sheets: Mapping[str, list[Line]], faults: list[Fault]) -> list[Row]:
    """(row number as people count, head → value) of every row below the heads."""
    heads: list[str] = []
    found: list[Row] = []
    for number, cells in enumerate(sheets[sheet]):
        if number == HEAD_ROW:
            heads = ["" if cell is None else str(cell) for cell in cells]
        elif number > HEAD_ROW:
            found.append((number + 1, dict(zip(heads, cells, strict=False))))
    lost = [head for head in _NEEDED_HEADS.get(sheet, ()) if head not in heads]
    if lost:
        # without its head a column of typed cells would be passed over in silence
        what = f"row {HEAD_ROW + 1} has no column '{lost[0]}'"
        faults.append(Fault(what, str(path), sheet, "Put the heads back as they were written."))
        return []
    return found


def _text(value: Any) -> str:
    """The text of a cell as typed; a day is its date, and line breaks are those of this program."""
    if value is None:
        return ""
    if isinstance(value, datetime.datetime):
        return str(value.date() if value.time() == datetime.time() else value)
    # a carriage return has this name inside the file (ECMA-376 part 1, 22.9.2.19)
    return str(value).replace("_x000D_", "").replace("\r\n", "\n").strip()


def _currents(path: Path, rows: list[Row], faults: list[Fault]) -> Typed:
    cells: dict[tuple[str, str], Cells] = {}
    parts: dict[tuple[str, str], tuple[str, str]] = {}
    notes: dict[tuple[str, str], str] = {}
    draws: list[StatedDraw] = []
    for number, row in rows:
        rail, ref, key = _text(row.get("Rail")), _text(row.get("Part")), _text(row.get("Identity"))
        where, place = (key, rail), f"Currents!H{number}:J{number}"
        values = tuple(_plain(row.get(head)) for head in TYPE_HEADS)
        note = _text(row.get("Your note"))
        if note:
            # one part may have two rows on one rail: what it takes, and what is missing below it
            notes[where] = note if notes.get(where, note) == note else f"{notes[where]}; {note}"
        if note or any(value is not None for value in values):
            parts[where] = (ref, _text(row.get("Value")))
        if all(value is None for value in values):
            continue
        three = (values[0], values[1], values[2])
        if where in cells:
            if cells[where] != three:
                what = f"{ref} on {rail} has other currents in another row"
                faults.append(Fault(what, str(path), place, "Keep one."))
            continue
        cells[where] = three
        try:
            load = load_of(three)
        except ValueError as error:
            faults.append(Fault(str(error), str(path), place))
            continue
        # named by part and rail, for rows move from one workbook to the next
        source = f"{path.name} Currents: {ref} on {rail}"
        quantity, unit = ("power of the load", "W") if load.is_power else ("load current", "A")
        evidence = Evidence(quantity, load.span, unit, source, Grade.STATED, note=note)
        amps, watts = (None, evidence) if load.is_power else (evidence, None)
        draws.append(StatedDraw("" if ref == "off-board" else ref, rail, amps, watts, load.pulse, key))
    return Typed(path.name, cells, parts, tuple(draws), notes)


def _plain(value: Any) -> object:
    if isinstance(value, str):
        return _text(value) or None
    return value


def _answers(rows: list[Row]) -> dict[Answered, str]:
    heads = ("Finding", "About", "Identity", "What", "Where")
    return {
        Answered(*(_text(row.get(head)) for head in heads)): answer
        for _, row in rows
        if (answer := _text(row.get("Your answer")))
    }


def _sign_off(lines: list[Line]) -> dict[str, str]:
    found = {}
    for cells in lines[:200]:
        if len(cells) > 1 and cells[0] in SIGN_OFF and (text := _text(cells[1])):
            found[str(cells[0])] = text
    return found


_NO_INPUTS = frozenset({"Thin_air", "Edited", "Board_class", "Class_edited", "Unread_settings", "Unread_currents"})
"""Named cells of the Settings sheet that are no numbers to type."""


def _board_class(path: Path, rows: list[Row], faults: list[Fault]) -> BoardClass | None:
    known = {one.value.casefold(): one for one in BoardClass}
    for number, row in rows:
        text = _text(row.get("Value"))
        if _text(row.get("Name in formulas")) != "Board_class" or not _is_typed(row):
            continue
        if text.casefold() in known:
            return known[text.casefold()]
        remedy = f"Type one of {', '.join(one.value for one in BoardClass)}."
        faults.append(Fault(f"'{text}' is no board class", str(path), f"Settings!B{number}", remedy))
    return None


def _is_typed(row: Mapping[str, Any]) -> bool:
    """Whether a person typed this value, now or for an earlier run; emptying a cell takes the typed value back."""
    value, before = row.get("Value"), row.get("As audited")
    is_new = value != before and _text(value) != _text(before)
    return bool(_text(value)) and (is_new or _text(row.get("Typed")) == YES)


def _settings(path: Path, rows: list[Row], faults: list[Fault]) -> dict[str, float]:
    found: dict[str, float] = {}
    for number, row in rows:
        name, value = _text(row.get("Name in formulas")), row.get("Value")
        if not name or name in _NO_INPUTS or not _is_typed(row):
            continue
        if isinstance(value, (int, float)) and not isinstance(value, bool):
            found[name] = float(value)
        else:
            what = f"'{_text(value)}' is no number for {_text(row.get('Setting'))}"
            unit = _text(row.get("Unit"))
            remedy = f"Type it in {unit}, without the unit." if unit else "Type a number."
            faults.append(Fault(what, str(path), f"Settings!B{number}", remedy))
    for nominal, high in (("Ambient_nominal", "Ambient_high"), ("Rise_nominal", "Rise_high")):
        if found.get(nominal, 0.0) > found.get(high, found.get(nominal, 0.0)):
            what = f"{nominal} {found[nominal]:g} is above {high} {found[high]:g}"
            faults.append(Fault(what, str(path), "Settings", "The highest may not lie below the nominal one."))
    return found


def _thetas(path: Path, rows: list[Row], faults: list[Fault]) -> dict[str, float]:
    found = {}
    for number, row in rows:
        value, before, typed = row.get("θ at sea level [K/W]"), row.get("θ as audited [K/W]"), row.get("θ typed")
        if _text(value) == "" or (value == before and typed != YES):
            continue
        if before is None and "θ typed" not in row:
            continue  # a workbook of an earlier version, which showed the engine's θ here
        if isinstance(value, (int, float)) and not isinstance(value, bool) and 0 < value < 2000:
            found[_text(row.get("Part"))] = float(value)
        else:
            faults.append(Fault(f"'{_text(value)}' is no θ in K/W", str(path), f"Regulators row {number}"))
    return found
