"""The Settings sheet: surroundings and margins as named input cells that every formula reads."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from analyzer.heat.altitude import EXPONENTS, multiplier
from analyzer.ledger import Ledger
from analyzer.output.workbook.currents import CURRENT_PLACES
from analyzer.output.workbook.layout import FIRST_ROW, HEAD_ROW, Book, Column, Sheet, letter
from analyzer.output.workbook.typed import Typed
from analyzer.output.workbook.typed_reading import YES
from analyzer.rule import BoardClass
from analyzer.settings import Settings
from analyzer.wording import show_span

COLUMNS = (
    Column("Setting", 34),
    Column("Value", 20, "plain"),
    Column("Unit", 9),
    Column("As audited", 12, "plain"),
    Column("Source", 44, "wrap"),
    Column("Grade", 10),
    Column("Name in formulas", 20),
    Column("Typed", 8),
)


NO_CAP = 1000.0
"""Cell value [°C] where the policy names no greatest temperature: no rating is as high."""

TYPED = len(COLUMNS) - 1
"""Column of the mark that tells a typed value from one of the files."""


@dataclass(frozen=True, slots=True)
class Input:
    """One input cell: name in formulas, meaning, value, unit, source and grade."""

    name: str
    meaning: str
    value: float | None
    unit: str
    source: str
    grade: str


def inputs(settings: Settings) -> Iterator[Input]:
    """Every input cell, in the order of the sheet."""
    site, policy = settings.site, settings.policy
    for name, meaning, evidence, end in (
        ("Ambient_nominal", "Ambient, nominal", site.ambient, "nominal"),
        ("Ambient_high", "Ambient, highest", site.ambient, "high"),
        ("Rise_nominal", "Enclosure rise, nominal", site.enclosure_rise, "nominal"),
        ("Rise_high", "Enclosure rise, highest", site.enclosure_rise, "high"),
        ("Altitude_high", "Altitude, highest", site.altitude, "high"),
    ):
        value = getattr(evidence.span, end)
        yield Input(name, meaning, value, evidence.unit, evidence.source, evidence.grade.value)
    exponent = site.altitude_exponent if site.altitude_exponent is not None else EXPONENTS[site.cooling]
    yield Input(
        "Altitude_exponent", f"Altitude exponent ({site.cooling} cooling)", exponent, "", "see Evidence", "ruled"
    )
    source = f"policy {policy.name}: {policy.source}"
    grade = "ruled" if policy.verified else "presumed"
    yield Input("Margin_over", "Policy limit: rating less", policy.junction_over, "K", source, grade)
    yield Input("Margin_tight", "Tight above: rating less", policy.junction_tight, "K", source, grade)
    yield Input("Policy_factor", "Policy limit: fraction of rating", policy.junction_factor or 1.0, "", source, grade)
    cap, no_cap = policy.junction_cap, f"{source}; no greatest temperature, for which {NO_CAP:g} stands"
    current = policy.current_fraction
    yield Input("Policy_current", "Policy limit: fraction of rated current", current, "", source, grade)
    cap_source = no_cap if cap is None else source
    yield Input("Policy_cap", "Policy limit: at most", NO_CAP if cap is None else cap, "°C", cap_source, grade)


INPUT_NAMES = tuple(one.name for one in inputs(Settings()))
"""Names of the input cells, in the order of the sheet."""


def _write_class(book: Book, sheet: Sheet, row: int, settings: Settings, typed: Typed) -> None:
    """The board class: another one means other figures of θ, which only a re-run chooses."""
    stated = settings.board.board_class.value if settings.board.board_class is not None else None
    names = ", ".join(one.value for one in BoardClass)
    source = f"{names}; blank: by copper layers, else the poorest"
    sheet.row(row, ("Board class", None, "class", stated, source, "stated" if stated else "presumed", "Board_class"))
    if typed.board_class is not None:
        sheet.put(row, 1, typed.board_class.value, "input")
        sheet.put(row, TYPED, YES)
    else:
        sheet.put(row, 1, stated, "input")
    book.book.define_name("Board_class", f"=Settings!$B${row + 1}")
    words = ("Board class edited since the audit", None, "", None, "every row says re-run", "", "Class_edited")
    sheet.row(row + 1, words)
    sheet.formula(row + 1, 1, f"=IF(B{row + 1}=D{row + 1},0,1)", 0)
    book.book.define_name("Class_edited", f"=Settings!$B${row + 2}")


def _write_unread(book: Book, sheet: Sheet, row: int, lines: int) -> None:
    """Counts of what was typed and no formula can read: every row says re-run while there is any."""
    first, last = HEAD_ROW + 2, HEAD_ROW + 1 + len(INPUT_NAMES)
    crossed = "+".join(
        f"IF(AND(N($B{at})>N($B{at + 1}),$B{at}<>$D{at}),1,0)"
        for at in (first + INPUT_NAMES.index("Ambient_nominal"), first + INPUT_NAMES.index("Rise_nominal"))
    )
    numbers = f"=ROWS($B${first}:$B${last})-COUNT($B${first}:$B${last})+{crossed}"
    place = letter(CURRENT_PLACES["State"])
    currents = f"=COUNTIF(Currents!{place}${FIRST_ROW + 1}:{place}${FIRST_ROW + max(lines, 1)},2)"
    for offset, (words, formula, name) in enumerate(
        (
            ("Settings emptied, or no numbers that fit", numbers, "Unread_settings"),
            ("Typed currents that wait for a re-run", currents, "Unread_currents"),
        )
    ):
        sheet.row(row + offset, (words, None, "", None, "every row says re-run while there is any", "", name))
        sheet.formula(row + offset, 1, formula, 0)
        book.book.define_name(name, f"=Settings!$B${row + offset + 1}")


def write(book: Book, ledger: Ledger, settings: Settings, typed: Typed, lines: int) -> None:
    """Write the sheet and define its names.

    Args:
        book: The workbook.
        ledger: The ledger.
        settings: The settings in force.
        typed: What was typed before; carried over.
        lines: How many rows the Currents sheet has.
    """
    remark = "Coloured cells may be edited: dissipation, junction, margin and verdict follow. A re-run takes them over "
    remark += "and goes back to the files for cells that were emptied."
    sheet = book.sheet("Settings", "Settings", remark, COLUMNS)
    row = HEAD_ROW
    for one in inputs(settings):
        row += 1
        sheet.row(row, (one.meaning, None, one.unit, one.value, one.source, one.grade, one.name))
        value = one.value if typed.applied else typed.settings.get(one.name, one.value)
        sheet.put(row, 1, value, "input")
        sheet.put(row, TYPED, YES if one.name in typed.settings else None)
        book.book.define_name(one.name, f"=Settings!$B${row + 1}")
    row += 1
    exponent = next(one.value for one in inputs(settings) if one.name == "Altitude_exponent")
    factor = multiplier(settings.site.altitude.span.high, exponent or 0.0)
    sheet.row(row, ("Altitude multiplier", None, "", factor, "US Standard Atmosphere 1976 pressure ratio", "derived"))
    formula = "=MAX(1,POWER(POWER(1-0.0000225577*Altitude_high,5.25588),-Altitude_exponent))"
    sheet.formula(row, 1, formula, factor)
    sheet.put(row, 6, "Thin_air")
    book.book.define_name("Thin_air", f"=Settings!$B${row + 1}")
    row += 1
    first, last = HEAD_ROW + 2, row - 1
    edited = f"=SUMPRODUCT(--($B${first}:$B${last}<>$D${first}:$D${last}))"
    sheet.row(row, ("Settings edited since the audit", None, "", None, "rows that no formula follows say re-run", ""))
    sheet.formula(row, 1, edited, 0)
    sheet.put(row, 6, "Edited")
    book.book.define_name("Edited", f"=Settings!$B${row + 1}")
    row += 1
    _write_class(book, sheet, row, settings, typed)
    row += 2
    _write_unread(book, sheet, row, lines)
    row += 3
    sheet.put(row, 0, "All that holds for the whole board", "title")
    for evidence in ledger.settings:
        row += 1
        # unit and "as audited" stay empty, so that the span has room
        sheet.row(row, (evidence.quantity, None, None, None, evidence.source, evidence.grade.value))
        sheet.put(row, 1, show_span(evidence.span, evidence.unit), "text")
