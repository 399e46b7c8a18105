"""Formats, column lists and page set-up shared by all sheets. Text is always written as text, never as a formula."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any

PAPER_A4 = 9
LONGEST_CELL = 32_767
"""UTF-16 units in one cell: what spreadsheets hold."""

HEAD_ROW = 3
"""Row (from 0) of the column heads; title and remarks stand above."""

FIRST_ROW = HEAD_ROW + 1

TYPE_HEADS = ("Type low [A]", "Type nominal [A]", "Type high [A]")
"""Heads of the cells on the Currents sheet that currents are typed into."""

SIGN_OFF = ("Reviewed by", "Date", "Decision", "Remarks")
"""Labels of the review block on the Summary sheet."""


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a sheet: head with its unit, width [characters], and the format of its cells."""

    head: str
    width: float = 12
    form: str = "text"


WRAPPED = frozenset({"wrap", "head", "head_right", "note"})
LINE_HEIGHT = 15.0
MOST_LINES = 20
WIDE = 66.0
"""Width taken for sheets without columns of their own."""

FORMS: Mapping[str, Mapping[str, Any]] = {
    # the indent keeps text off the numbers of the column before it; it holds only beside an alignment of its own
    "text": {"valign": "top", "align": "left", "indent": 1},
    "wrap": {"valign": "top", "align": "left", "indent": 1, "text_wrap": True},
    "number": {"num_format": "0.000", "valign": "top"},
    "volts": {"num_format": "0.000", "valign": "top"},
    "amps": {"num_format": "0.00000", "valign": "top"},
    "watts": {"num_format": "0.0000", "valign": "top"},
    "kelvin": {"num_format": "0.0", "valign": "top"},
    "count": {"num_format": "0", "valign": "top", "align": "left", "indent": 1},
    # nothing missing is no figure to read
    "missing": {"num_format": "0;;", "valign": "top", "align": "left", "indent": 1},
    "percent": {"num_format": "0.0%", "valign": "top"},
    "plain": {"num_format": "General", "valign": "top", "align": "left", "indent": 1},
    # the look of spreadsheets' own Input style, by which people know where to type
    "input": {"bg_color": "#FFCC99", "font_color": "#3F3F76", "border": 1, "locked": False, "valign": "top"},
    "note": {
        "bg_color": "#FFCC99",
        "font_color": "#3F3F76",
        "border": 1,
        "locked": False,
        "valign": "top",
        "align": "left",
        "text_wrap": True,
    },
    "head": {
        "bold": True,
        "text_wrap": True,
        "valign": "top",
        "align": "left",
        "indent": 1,
        "bottom": 2,
        "bg_color": "#E4E7EB",
    },
    "head_right": {
        "bold": True,
        "text_wrap": True,
        "valign": "top",
        "align": "right",
        "bottom": 2,
        "bg_color": "#E4E7EB",
    },
    "title": {"bold": True, "font_size": 14, "align": "left", "indent": 1},
    "remark": {"italic": True, "font_color": "#444444", "align": "left", "indent": 1},
    "label": {"bold": True, "valign": "top", "align": "left", "indent": 1},
    # verdicts: the looks of Bad, Neutral, Note and Good, beside the word itself
    "over": {"bg_color": "#FFC7CE", "font_color": "#9C0006", "bold": True},
    "tight": {"bg_color": "#FFEB9C", "font_color": "#7F6000"},
    "open": {"bg_color": "#DDEBF7", "font_color": "#1F4E78", "italic": True},
    "clear": {"bg_color": "#C6EFCE", "font_color": "#006100"},
}


RIGHT = frozenset({"number", "volts", "amps", "watts", "kelvin", "percent"})
"""Formats whose cells end at the right of their column, as its head then does too."""

INPUTS = frozenset({"input", "note"})
"""Formats of cells to type into."""


class Book:
    """An XlsxWriter workbook with the formats of `FORMS`, made once each."""

    def __init__(self, book: Any, footer: str, sheet_class: type | None = None) -> None:
        self.book = book
        self.footer = footer
        self.sheet_class = sheet_class
        self._forms: dict[str, Any] = {}

    def form(self, name: str) -> Any:
        """The format of this name."""
        if name not in self._forms:
            self._forms[name] = self.book.add_format(dict(FORMS[name]))
        return self._forms[name]

    def sheet(self, name: str, title: str, remark: str, columns: Sequence[Column], *, freeze: int = 1) -> Sheet:
        """A sheet with title, remark, heads, frozen panes and page set-up."""
        sheet = self.book.add_worksheet(name, worksheet_class=self.sheet_class)
        sheet.set_landscape()
        sheet.set_paper(PAPER_A4)
        sheet.fit_to_pages(1, 0)
        sheet.set_margins(left=0.4, right=0.4, top=0.5, bottom=0.6)
        sheet.set_footer(f"&L{self.footer}&C&A&RPage &P of &N")
        sheet.write_string(0, 0, title, self.form("title"))
        sheet.write_string(1, 0, remark, self.form("remark"))
        if columns:
            sheet.repeat_rows(HEAD_ROW)
            sheet.freeze_panes(HEAD_ROW + 1, freeze)
        made = Sheet(self, sheet, columns)
        for number, column in enumerate(columns):
            sheet.set_column(number, number, column.width)
            made.put(HEAD_ROW, number, column.head, "head_right" if column.form in RIGHT else "head")
        return made


class Sheet:
    """One worksheet: cells by row and column, in the format of the column."""

    def __init__(self, book: Book, sheet: Any, columns: Sequence[Column]) -> None:
        self.book = book
        self.raw = sheet
        self.columns = columns
        self._lines: dict[int, int] = {}

    def put(self, row: int, column: int, value: object, form: str | None = None) -> None:
        """A number as number, anything else as text; None and "" leave the cell empty."""
        cell = self.book.form(form or self.columns[column].form)
        if value is None or value == "":
            if form in INPUTS:
                self.raw.write_blank(row, column, None, cell)
            return
        if isinstance(value, (int, float)) and not isinstance(value, bool):
            self.raw.write_number(row, column, value, cell)
        else:
            text = plain(str(value))
            self.raw.write_string(row, column, text, cell)
            if (form or self.columns[column].form) in WRAPPED:
                self._grow(row, text, self.columns[column].width if self.columns else WIDE)

    def _grow(self, row: int, text: str, width: float) -> None:
        """Make a row as high as its longest wrapped text needs; not every program does it by itself."""
        # a character less for the indent
        lines = min(MOST_LINES, sum(lines_of(line, int(width) - 1) for line in text.split("\n")))
        if lines > self._lines.get(row, 1):
            self._lines[row] = lines
            self.raw.set_row(row, LINE_HEIGHT * lines)

    def row(self, row: int, values: Sequence[object]) -> None:
        """A whole row from the first column on."""
        for column, value in enumerate(values):
            self.put(row, column, value)

    def formula(self, row: int, column: int, formula: str, result: object) -> None:
        """A formula with the engine's value as its stored result."""
        stored = "" if result is None else result
        self.raw.write_formula(row, column, formula, self.book.form(self.columns[column].form), stored)

    def filter(self, last_row: int) -> None:
        """An auto-filter over the heads and the rows down to `last_row`."""
        self.raw.autofilter(HEAD_ROW, 0, max(last_row, HEAD_ROW + 1), len(self.columns) - 1)

    def verdict_colours(self, first: int, last: int, column: int) -> None:
        """Colours that follow the verdict's word, whatever becomes of it by editing."""
        for word in ("over", "tight", "open", "clear"):
            rule = {"type": "cell", "criteria": "==", "value": f'"{word}"', "format": self.book.form(word)}
            self.raw.conditional_format(first, column, max(first, last), column, rule)


def lines_of(text: str, width: int) -> int:
    """Lines that a text takes in a column as wide as `width` figures, wrapped at blanks; longer words are broken."""
    lines, room = 1, width
    for word in text.split(" ") if len(text) > width else ():
        if len(word) > room:
            lines += 1 if room < width else 0
            lines += (len(word) - 1) // width
            room = width - (len(word) - 1) % width - 1
        else:
            room -= len(word)
        room -= 1
    return lines


def plain(text: str) -> str:
    """Text that a cell can hold: control characters made visible, cut to the longest a cell may be."""
    clean = "".join(_visible(c) for c in text) if _NO_CELL_TEXT.search(text) else text
    if len(clean) * 2 <= LONGEST_CELL:
        return clean
    units = clean.encode("utf-16-le")
    if len(units) <= 2 * LONGEST_CELL:
        return clean
    # half a character at the cut is left out
    return units[: 2 * (LONGEST_CELL - 1)].decode("utf-16-le", errors="ignore") + "…"


_NO_CELL_TEXT = re.compile("[\x00-\x09\x0b-\x1f\x7f-\x9f\ud800-\udfff\ufffe\uffff]")
"""Characters that no cell can hold, or that programs obey instead of showing."""


def _visible(c: str) -> str:
    if not _NO_CELL_TEXT.match(c):
        return c
    # the Unicode pictures of control characters; what has none becomes the replacement character
    return chr(0x2400 + ord(c)) if c < " " else "\ufffd"


@cache
def letter(column: int) -> str:
    """The letters of a column as an absolute reference, $AB."""
    name, number = "", column + 1
    while number:
        number, rest = divmod(number - 1, 26)
        name = chr(65 + rest) + name
    return "$" + name


def cell(row: int, column: int) -> str:
    """An absolute reference, $B$5."""
    return f"{letter(column)}${row + 1}"
