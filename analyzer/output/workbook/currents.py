"""The Rails and Currents sheets: who draws what, where currents are typed, and the sums that follow.

Lines of one rail stand together, so that each rail sums its own block and no formula ever meets itself.
"""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache

from analyzer.ledger import Entry, Ledger
from analyzer.output.workbook.layout import FIRST_ROW, TYPE_HEADS, Book, Column, Sheet, letter
from analyzer.output.workbook.plan import Line, Plan, known_load, weighted, weighted_formula
from analyzer.output.workbook.regulators import PLACES as REGULATOR_PLACES
from analyzer.output.workbook.typed import NOTHING, Cells, Typed

RAIL_COLUMNS = (
    Column("Rail", 24, "wrap"),
    Column("Fed by", 22, "wrap"),
    Column("Low [V]", 9, "volts"),
    Column("Nominal [V]", 9, "volts"),
    Column("High [V]", 9, "volts"),
    Column("Known load high [A]", 11, "amps"),
    Column("Missing currents", 10, "missing"),
    Column("Headroom until over [A]", 11, "amps"),
    Column("Grade", 10),
    Column("Source of the voltage, or why it is unknown", 44, "wrap"),
    Column("Joined by", 18, "wrap"),
    Column("Nets", 30, "wrap"),
)

CURRENT_COLUMNS = (
    Column("Rail", 20, "wrap"),
    Column("Part", 8),
    Column("Value", 18, "wrap"),
    Column("Kind", 10),
    Column("Low [A]", 9, "amps"),
    Column("Nominal [A]", 9, "amps"),
    Column("High [A]", 9, "amps"),
    *(Column(head, 10, "plain") for head in TYPE_HEADS),
    Column("Your note", 24, "wrap"),
    Column("Counts as [A]", 10, "amps"),
    Column("Missing", 9, "missing"),
    Column("Rail headroom [A]", 14, "amps"),
    Column("Suggestions from notes, or source", 44, "wrap"),
    Column("Sheet", 14, "wrap"),
    Column("i0 [A]", 8, "plain"),
    Column("i1 [A/A]", 8, "plain"),
    Column("i2 [A/A²]", 8, "plain"),
    Column("Low as audited", 8, "plain"),
    Column("Nominal as audited", 8, "plain"),
    Column("High as audited", 8, "plain"),
    Column("State", 8, "plain"),
    Column("Takes typing", 8, "plain"),
    Column("Below as audited [A]", 8, "plain"),
    Column("Identity", 12),
)
NO_CELLS: Cells = (None, None, None)
AUDITED_HEADS = ("Low as audited", "Nominal as audited", "High as audited")
CURRENT_PLACES: Mapping[str, int] = {column.head: number for number, column in enumerate(CURRENT_COLUMNS)}


def write_rails(book: Book, ledger: Ledger, plan: Plan) -> None:
    """Write the Rails sheet: sources first, as a tree."""
    remark = "In tree order: each rail after the one that feeds it. Loads sum the lines of the Currents sheet."
    sheet = book.sheet("Rails", "Rails", remark, RAIL_COLUMNS)
    feeders = _feeders(ledger)
    for rail in ledger.rails:
        row = plan.rail_rows[rail.name]
        volts = rail.volts
        ends = (volts.span.low, volts.span.nominal, volts.span.high) if volts else (None, None, None)
        feeds = ", ".join(dict.fromkeys(feed.ref or feed.kind for feed in rail.feeds))
        why = volts.source if volts else rail.why_open
        load = ledger.loads.get(rail.name)
        grade = volts.grade.value if volts else ""
        joined, nets = ", ".join(rail.links), ", ".join(rail.nets)
        sheet.row(row, (rail.name, feeds, *ends, None, None, None, grade, why, joined, nets))
        block = plan.blocks.get(rail.name)
        total, gaps = "=0", "=0"
        if block:
            first, last = block[0] + 1, block[1] + 1
            total = f"=SUM(Currents!$L${first}:$L${last})"
            gaps = f"=SUM(Currents!$M${first}:$M${last})"
        sheet.formula(row, 5, total, load.known.high if load else 0.0)
        sheet.formula(row, 6, gaps, len(load.gaps) if load else 0)
        entry = feeders.get(rail.name)
        place = letter(REGULATOR_PLACES["Further load until over [A]"])
        reference = f"Regulators!{place}${plan.entry_rows[entry.key] + 1}" if entry else '""'
        sheet.formula(row, 7, f"={reference}", _room(entry))
    sheet.filter(FIRST_ROW + len(ledger.rails) - 1)


def _feeders(ledger: Ledger) -> dict[str, Entry]:
    """The entry that feeds each rail; of several the one with least room."""
    found: dict[str, Entry] = {}
    for entry in ledger.entries:
        for output in entry.outputs:
            if entry.fitted and output.rail:
                found.setdefault(output.rail, entry)
    return found


def _room(entry: Entry | None) -> object:
    if entry is None or entry.headroom is None or entry.live.get("closed_form") != 1.0:
        return ""
    return entry.headroom.over


def write_currents(
    book: Book,
    ledger: Ledger,
    plan: Plan,
    typed: Typed,
) -> None:
    """Write the Currents sheet.

    Args:
        book: The workbook.
        ledger: The ledger.
        plan: Rows.
        typed: What was typed before; carried over.
    """
    remark = (
        "Type into the coloured cells: amperes as numbers count at once; text such as 120 mA, 80..150 mA, 1.2 W or "
        "2 A for 5 ms every 100 ms counts after a re-run with --currents."
    )
    sheet = book.sheet("Currents", "Currents", remark, CURRENT_COLUMNS, freeze=2)
    rooms = {rail: _room(entry) for rail, entry in _feeders(ledger).items()}
    written: set[tuple[str, str]] = set()
    for number, line in enumerate(plan.lines):
        row, where = FIRST_ROW + number, (line.key, line.rail)
        _line(sheet, row, line, plan, ledger)
        # a part that has two rows on one rail gets what was typed for it in one of them
        _typed(sheet, row, line, NOTHING if where in written else typed)
        written.add(where)
        if line.rail in plan.rail_rows:
            place = f"Rails!$H${plan.rail_rows[line.rail] + 1}"
            formula = f'=IF(ISNUMBER({place}),{place},"")'
            sheet.formula(row, CURRENT_PLACES["Rail headroom [A]"], formula, rooms.get(line.rail, ""))
    last = FIRST_ROW + len(plan.lines) - 1
    sheet.filter(last)
    first = CURRENT_PLACES["i0 [A]"]
    sheet.raw.set_column(first, CURRENT_PLACES["Identity"], 9, None, {"level": 1, "hidden": 1})
    sheet.raw.print_area(0, 0, max(last, FIRST_ROW), CURRENT_PLACES["Sheet"])
    if plan.lines:
        rule = {"type": "cell", "criteria": ">", "value": "0", "format": book.form("open")}
        sheet.raw.conditional_format(FIRST_ROW, CURRENT_PLACES["Missing"], last, CURRENT_PLACES["Missing"], rule)


def _typed(sheet: Sheet, row: int, line: Line, typed: Typed) -> None:
    """The cells to type into, with what was typed into them before."""
    where = (line.key, line.rail)
    cells = typed.cells.get(where, NO_CELLS)
    audited = cells if typed.applied else NO_CELLS
    form = "input" if line.is_open_to_typing else None
    # what was typed for a part that is gone counts nowhere here, but a re-run may find its place again
    sheet.put(row, CURRENT_PLACES["Takes typing"], 2 if line.kind == "gone" else int(line.is_open_to_typing))
    for offset in range(3):
        sheet.put(row, CURRENT_PLACES[TYPE_HEADS[0]] + offset, cells[offset], form)
        sheet.put(row, CURRENT_PLACES[AUDITED_HEADS[0]] + offset, audited[offset])
    sheet.put(row, CURRENT_PLACES["Your note"], typed.notes.get(where), "note")


def _line(sheet: Sheet, row: int, line: Line, plan: Plan, ledger: Ledger) -> None:
    span = line.amps.span if line.amps else None
    ends = span.corners if span else (None, None, None)
    words = _words(line)
    sheet.row(row, (line.rail, line.ref or "off-board", line.value, line.kind, *ends))
    sheet.put(row, CURRENT_PLACES["Suggestions from notes, or source"], words)
    sheet.put(row, CURRENT_PLACES["Sheet"], line.sheet)
    sheet.put(row, CURRENT_PLACES["Identity"], line.key)
    below = line.below
    if line.follows:
        below = (line.follows[0],)
        for offset, coefficient in enumerate(line.follows[1]):
            sheet.put(row, CURRENT_PLACES["i0 [A]"] + offset, coefficient)
    elif below:
        sheet.put(row, CURRENT_PLACES["Below as audited [A]"], weighted(below, known_load(ledger)))
    below_load = weighted_formula(below, plan.rail_rows)
    results = (span.high if span else 0.0, 1 if line.gap else 0, 0)
    for (head, formula), result in zip(_formulas(below_load).items(), results, strict=True):
        sheet.formula(row, CURRENT_PLACES[head], formula.replace(ROW, str(row + 1)), result)


ROW = "§"
"""What stands for the row in a column's formula."""


@cache
def _formulas(below_load: str) -> Mapping[str, str]:
    """Head → formula of the cells that follow what is typed, with `ROW` for the row.

    Numbers count at once (state 1). Text, which no formula reads, a negative number and an emptied cell that the audit
    used wait for a re-run (state 2), and till then no verdict stands; so does the input of a part that no formula
    follows when the load below it changes. State 0 is as audited. The formulas are kept short, for they are most of
    what a large workbook takes to write.
    """
    at = {head: letter(number)[1:] + ROW for head, number in CURRENT_PLACES.items()}
    low, nominal, high = (at[head] for head in TYPE_HEADS)
    cells, state, takes, i1 = f"{low}:{high}", at["State"], at["Takes typing"], at["i1 [A/A]"]
    pairs = zip((low, nominal, high), AUDITED_HEADS, strict=True)
    same = ",".join(f"EXACT({typed},{at[head]})" for typed, head in pairs)
    numbers = f"{takes}=1,COUNT({cells})>0,COUNTA({cells})=COUNT({cells}),MIN({cells})>=0"
    follows = f"{at['i0 [A]']}+{i1}*({below_load})+{at['i2 [A/A²]']}*({below_load})^2"
    moved = f"AND(ISNUMBER({at['Below as audited [A]']}),ABS({below_load}-N({at['Below as audited [A]']}))>1E-12)"
    return {
        "Counts as [A]": f"=IF({state}=1,MAX({cells}),IF(ISNUMBER({i1}),{follows},N({at['High [A]']})))",
        "Missing": f'=IF(AND(LEFT({at["Kind"]},3)="gap",{state}<>1),1,0)',
        "State": f"=IF({moved},2,IF(OR({takes}=0,AND({same})),0,IF(AND({numbers}),1,2)))",
    }


def _words(line: Line) -> str:
    if line.gap is not None:
        return "; ".join(line.gap.suggestions) or line.gap.why
    if line.amps is not None:
        return line.amps.source
    return "typed for a part or rail that is not on the board now: rename, move or delete it"
