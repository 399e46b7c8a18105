"""Parts tables: a CSV or XLSX list of regulators with their figures, without any connectivity.

Columns are found by the words of their heads; a unit in the head ("Vin [V]", "Current (mA)") goes with bare
numbers below it. Nothing is assumed for a column that is absent.
"""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.grammar import parse
from analyzer.quantity import Dimension, Span

SYNONYMS: Mapping[str, tuple[str, ...]] = {
    "ref": ("ref", "refs", "reference", "references", "designator", "designators", "refdes", "part reference"),
    "value": ("value", "val", "comment"),
    "part": ("part number", "mpn", "manufacturer part number", "mfr part number", "part no", "pn", "part"),
    "package": ("package", "footprint", "case", "pattern"),
    "vin": ("input voltage", "vin", "v in", "input", "vin max"),
    "vout": ("output voltage", "vout", "v out", "output"),
    "current": ("current", "load", "load current", "iout", "i out", "i load", "output current"),
}
"""Words of column heads, lower case, punctuation as blanks."""

_QUANTITIES = {"vin": Dimension.VOLTAGE, "vout": Dimension.VOLTAGE, "current": Dimension.CURRENT}
_UNIT = re.compile(r"[\[(]\s*([^\])]{1,8}?)\s*[\])]")
_COMMA_DECIMAL = re.compile(r"(?<![0-9,.])([+-]?[0-9]+),([0-9]+)(?![0-9,.])")


@dataclass(frozen=True, slots=True)
class Row:
    """One row of a parts table.

    Attributes:
        refs: References in it; grouped ones ("U1, U2", "U1-U3") one by one.
        value, part, package: Texts, "" where absent.
        quantities: "vin", "vout", "current" → span, where the column is there and the cell is filled.
        faults: What could not be read in this row, one line each.
        place: File and row, for evidence.
    """

    refs: tuple[str, ...]
    value: str
    part: str
    package: str
    quantities: Mapping[str, Span]
    faults: tuple[str, ...]
    place: str


@dataclass(frozen=True, slots=True)
class Table:
    """A parts table as read: its rows and which of our columns it has."""

    rows: tuple[Row, ...]
    columns: tuple[str, ...]


def read_table(path: Path, heads: Mapping[str, str] | None = None) -> Table:
    """Read a parts table.

    Args:
        path: A `.csv`, `.tsv` or `.xlsx` file.
        heads: Column heads named in the settings: our name → head as written; beats the synonyms.

    Raises:
        InputError: If the file cannot be read, has no head row with a reference column, or is too large.
    """
    cells, comma_is_decimal = _xlsx(path) if path.suffix.lower() == ".xlsx" else _csv(path)
    if len(cells) > limits.TABLE_ROWS:
        raise InputError(Fault(f"more than {limits.TABLE_ROWS} rows", str(path), remedy="Split the table."))
    for number, row in enumerate(cells[:20]):
        columns = _columns(row, heads or {})
        if "ref" in columns and len(columns) > 1:
            rows = tuple(
                _row(path, number + offset, line, columns, comma_is_decimal)
                for offset, line in enumerate(cells[number + 1 :], 2)
                if any(line)
            )
            return Table(rows, tuple(columns))
    remedy = "Name the columns first: Reference, Value, Part number, Package, Input voltage, Output voltage, Current."
    raise InputError(Fault("no head row with a reference column was found", str(path), remedy=remedy))


def _csv(path: Path) -> tuple[list[list[str]], bool]:
    text, _ = decoded(path)
    separator = separator_of(text)
    try:
        cells = [
            [cell.strip() for cell in row] for row in csv.reader(io.StringIO(text, newline=""), delimiter=separator)
        ]
    except csv.Error as error:
        raise InputError(Fault(f"is no table of text ({error})", str(path))) from error
    # where the comma separates nothing, it is the decimal sign of many locales
    return cells, separator != ","


def separator_of(text: str) -> str:
    """The character that separates columns: the one that the first lines hold most of."""
    head = "\n".join(text.splitlines()[:20])
    return max(";\t,", key=head.count)


def _xlsx(path: Path) -> tuple[list[list[str]], bool]:
    from analyzer.output.workbook.archive_check import check_archive

    check_archive(path)
    import openpyxl

    try:
        book = openpyxl.load_workbook(path, read_only=True, data_only=True)
        rows = list(book.worksheets[0].iter_rows(max_row=limits.TABLE_ROWS + 1, values_only=True))
        book.close()
    except Exception as error:  # openpyxl raises many kinds for a damaged file, some of them as it reads the rows
        raise InputError(Fault("is no readable workbook", str(path), remedy="Save it again as .xlsx.")) from error
    return [["" if cell is None else str(cell).strip() for cell in row] for row in rows], True


def _bytes(path: Path) -> bytes:
    try:
        if path.stat().st_size > limits.TABLE_BYTES:
            raise InputError(
                Fault(f"is larger than {limits.TABLE_BYTES // 1024**2} MB", str(path), remedy="Split the table.")
            )
        return path.read_bytes()
    except OSError as error:
        raise InputError(Fault(f"cannot be read ({error.strerror})", str(path))) from error


def decoded(path: Path) -> tuple[str, str]:
    """The text of a CSV file and the encoding it is written in.

    Raises:
        InputError: If it cannot be read, is too large, or is no text.
    """
    data = _bytes(path)
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return data.decode("utf-16", errors="replace"), "utf-16"
    if b"\0" in data:
        raise InputError(Fault("is no text file", str(path), remedy="Export the table as CSV or XLSX."))
    encoding = "utf-8-sig" if data.startswith(b"\xef\xbb\xbf") else "utf-8"
    try:
        return data.decode(encoding), encoding
    except UnicodeDecodeError:
        # spreadsheets on Western Windows still write this code page (common practice)
        return data.decode("cp1252", errors="replace"), "cp1252"


def _columns(row: list[str], heads: Mapping[str, str]) -> dict[str, tuple[int, str]]:
    """Our column name → (index, unit in the head)."""
    found: dict[str, tuple[int, str]] = {}
    for index, cell in enumerate(row):
        unit = _UNIT.search(cell)
        plain = re.sub(r"[^a-z0-9]+", " ", _UNIT.sub(" ", cell).lower()).strip()
        named = next((name for name, head in heads.items() if head == cell), None)
        name = named or next((name for name, words in SYNONYMS.items() if plain in words), None)
        if name is not None and (named or name not in found):
            found[name] = (index, unit[1] if unit else "")
    return found


def _row(path: Path, number: int, line: list[str], columns: dict[str, tuple[int, str]], comma_is_decimal: bool) -> Row:
    def cell(name: str) -> str:
        index, _ = columns.get(name, (len(line), ""))
        return line[index] if index < len(line) else ""

    place = f"{path.name} row {number}"
    quantities, faults = {}, []
    for name, dimension in _QUANTITIES.items():
        text = cell(name)
        if not text:
            continue
        if comma_is_decimal:
            text = _COMMA_DECIMAL.sub(r"\1.\2", text)
        unit = columns[name][1]
        try:
            quantities[name] = parse(f"{text} {unit}" if unit and text[-1].isdecimal() else text, dimension)
        except ValueError as error:
            faults.append(f"{name}: {error}")
    texts = (cell("value"), cell("part"), cell("package"))
    return Row(spread_refs(cell("ref")), *texts, quantities, tuple(faults), place)


_RANGE = re.compile(r"\s*(?:-|–|\.\.)\s*(?=[A-Za-z]*[0-9])")
_GROUP = re.compile(r"([A-Za-z_]+)([0-9]+)-([A-Za-z_]*)([0-9]+)")


def spread_refs(text: str) -> tuple[str, ...]:
    """References one by one: "U1, U3-U5" → U1, U3, U4, U5. A range that does not rise stays as it is written."""
    found: list[str] = []
    for piece in re.split(r"[,;\s]+", _RANGE.sub("-", text.strip())):
        group = _GROUP.fullmatch(piece)
        if group and group[3] in ("", group[1]) and 0 <= int(group[4]) - int(group[2]) < 1000:
            found += [f"{group[1]}{number}" for number in range(int(group[2]), int(group[4]) + 1)]
        elif piece:
            found.append(piece)
    return tuple(dict.fromkeys(found))
