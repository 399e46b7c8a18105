"""The Regulators sheet: one row a part, heat, junction, margin and verdict as live formulas.

Every column has one formula for all rows. Rows whose model is no cell formula (tables, hot figures, several channels)
say "engine" and keep the engine's values.
"""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence

from analyzer.findings.base import Weight
from analyzer.ledger import Entry, Ledger
from analyzer.output.workbook.layout import FIRST_ROW, Book, Column, Sheet, letter
from analyzer.output.workbook.plan import Plan, fed_rails, known_load, weighted, weighted_formula
from analyzer.output.workbook.typed import Typed
from analyzer.output.workbook.typed_reading import YES

COLUMNS = (
    Column("Part", 8),
    Column("Part number", 15, "wrap"),
    Column("Kind", 8, "wrap"),
    Column("Package", 9, "wrap"),
    Column("Rail fed", 13, "wrap"),
    Column("Input low [V]", 8, "volts"),
    Column("Input high [V]", 8, "volts"),
    Column("Output low [V]", 8, "volts"),
    Column("Output high [V]", 8, "volts"),
    Column("Load high [A]", 10, "amps"),
    Column("Heat [W]", 9, "watts"),
    Column("θ at sea level [K/W]", 9, "kelvin"),
    Column("θ used [K/W]", 9, "kelvin"),
    Column("Air [°C]", 8, "kelvin"),
    Column("Junction nominal [°C]", 9, "kelvin"),
    Column("Junction worst [°C]", 9, "kelvin"),
    Column("Rating [°C]", 8, "kelvin"),
    Column("Limit [°C]", 9, "kelvin"),
    Column("Margin [K]", 8, "kelvin"),
    Column("Verdict", 9),
    Column("Further load until over [A]", 10, "amps"),
    Column("Grade", 10),
    Column("Worst corner", 26, "wrap"),
    Column("Missing", 60, "wrap"),
    Column("Model", 8),
    Column("Sheet", 14, "wrap"),
    Column("k0 [W]", 8, "plain"),
    Column("k1 [W/A]", 8, "plain"),
    Column("k2 [W/A²]", 8, "plain"),
    Column("θ solid [K/W]", 8, "plain"),
    Column("Neighbours [K]", 8, "plain"),
    Column("Share of rail", 8, "plain"),
    Column("Rated load [A]", 8, "plain"),
    Column("Other findings", 9),
    Column("Missing besides the load", 9, "count"),
    Column("Missing in all", 9, "count"),
    Column("Engine heat [W]", 9, "plain"),
    Column("Engine junction [°C]", 9, "plain"),
    Column("Engine load [A]", 9, "plain"),
    Column("Rail load as audited [A]", 9, "plain"),
    Column("θ as audited [K/W]", 9, "plain"),
    Column("Engine θ [K/W]", 9, "plain"),
    Column("θ typed", 9, "plain"),
    Column("Identity", 12),
)
PLACES: Mapping[str, int] = {column.head: number for number, column in enumerate(COLUMNS)}

_FOLLOWED_KINDS = frozenset(
    {
        "junction-over-rating",
        "junction-over-policy",
        "junction-tight",
        "current-over-rating",
        "current-over-policy",
        "budget-open",
    }
)
"""Findings that the verdict's own formula works out; all others are taken as the audit found them."""


MOST_MISSING = 90
"""Characters of a missing figure that a row shows."""

RERUN = "re-run"
"""What a row says in place of its verdict when something was edited that its formulas do not follow."""


def write(book: Book, ledger: Ledger, plan: Plan, typed: Typed) -> None:
    """Write the sheet.

    Args:
        book: The workbook.
        ledger: The ledger.
        plan: Rows.
        typed: What was typed before; carried over.
    """
    remark = (
        "Worst first, as audited. θ may be edited; loads follow the Currents sheet, surroundings the Settings sheet."
    )
    sheet = book.sheet("Regulators", "Regulators", remark, COLUMNS)
    shares = {(feed.ref, rail.name): feed.share for rail in ledger.rails for feed in rail.feeds}
    for entry in ledger.entries:
        _row(sheet, entry, plan, shares, ledger)
        _theta(sheet, plan.entry_rows[entry.key], entry, typed)
        _formulas(sheet, plan.entry_rows[entry.key], entry, plan.rail_rows, fed_rails(entry, ledger), waits=typed.waits)
    last = FIRST_ROW + len(ledger.entries) - 1
    _gone(sheet, last + 1, ledger, typed)
    sheet.filter(last)
    if ledger.entries:
        sheet.verdict_colours(FIRST_ROW, last, PLACES["Verdict"])
        _margin_colours(sheet, last)
    hidden = {"level": 1, "hidden": 1}
    sheet.raw.set_column(PLACES["k0 [W]"], PLACES["Identity"], 9, None, hidden)
    sheet.raw.print_area(0, 0, max(last, FIRST_ROW), PLACES["Grade"])


def _theta(sheet: Sheet, row: int, entry: Entry, typed: Typed) -> None:
    """The cell that a θ is typed into: the engine's where its formula is live, else empty until somebody types one."""
    audited = entry.live.get("theta_air") if is_live(entry) else None
    stated = typed.thetas.get(entry.ref)
    if stated is not None and typed.applied:
        audited = stated
    sheet.put(row, PLACES["θ at sea level [K/W]"], stated or audited, "input" if entry.fitted else None)
    sheet.put(row, PLACES["θ as audited [K/W]"], audited)
    sheet.put(row, PLACES["θ typed"], YES if stated is not None else None)


def _gone(sheet: Sheet, row: int, ledger: Ledger, typed: Typed) -> None:
    """Rows for θ typed for parts that are not on the board now: nothing typed is dropped."""
    there = {entry.ref for entry in ledger.entries}
    for number, (ref, theta) in enumerate((ref, theta) for ref, theta in typed.thetas.items() if ref not in there):
        sheet.put(row + number, PLACES["Part"], ref)
        sheet.put(row + number, PLACES["Kind"], "gone")
        sheet.put(row + number, PLACES["θ at sea level [K/W]"], theta, "input")
        sheet.put(row + number, PLACES["Missing"], "θ typed for a part that has no budget now: rename or delete it")
        sheet.put(row + number, PLACES["θ typed"], YES)


def is_live(entry: Entry) -> bool:
    """Whether the entry's heat is a cell formula."""
    return entry.live.get("closed_form") == 1.0


def _row(sheet: Sheet, entry: Entry, plan: Plan, shares: Mapping[tuple[str, str], float], ledger: Ledger) -> None:
    row = plan.entry_rows[entry.key]
    output = next((one for one in entry.outputs if one.rail), None)
    rail = _rail(entry)
    live, worst = entry.live, entry.worst
    closed = is_live(entry) and rail in plan.rail_rows
    volts_in = entry.input.volts if entry.input else None
    volts_out = output.volts if output else None
    rails = ", ".join(dict.fromkeys(one.rail for one in entry.outputs if one.rail))
    identity = (entry.ref, entry.part, entry.kind, entry.package, rails)
    ends = [end for span in (volts_in, volts_out) for end in ((span.low, span.high) if span else (None, None))]
    sheet.row(row, (*identity, *ends))
    others = [missing for missing in entry.missing if not missing.startswith(f"load of {rail}:")]
    weights = {finding.weight for finding in entry.findings if finding.name not in _FOLLOWED_KINDS}
    other = "over" if Weight.OVER in weights else "tight" if Weight.TIGHT in weights else "none"
    load = live.get("load")
    static: dict[str, object] = {
        "Junction nominal [°C]": entry.nominal.junction if entry.nominal else None,
        "Rating [°C]": entry.data_sheet_limit,
        "Grade": entry.grade.value,
        "Worst corner": worst.name if worst else "",
        "Missing": _told(entry.missing),
        "Model": "live" if closed else "engine",
        "Sheet": entry.sheet,
        "k0 [W]": live.get("k0"),
        "k1 [W/A]": live.get("k1"),
        "k2 [W/A²]": live.get("k2"),
        "θ solid [K/W]": live.get("theta_solid"),
        "Neighbours [K]": live.get("rise_extra"),
        "Share of rail": shares.get((entry.ref, rail), 1.0),
        "Rated load [A]": entry.rated_load,
        "Other findings": other if entry.fitted else "not fitted",
        "Missing besides the load": len(others),
        "Engine heat [W]": worst.watts if worst else None,
        "Engine junction [°C]": worst.junction if worst else None,
        "Engine load [A]": load,
        "Rail load as audited [A]": weighted(fed, known_load(ledger)) if (fed := fed_rails(entry, ledger)) else None,
        "Engine θ [K/W]": worst.theta if worst else None,
        "Identity": entry.key,
    }
    for head, value in static.items():
        sheet.put(row, PLACES[head], value)


def _formulas(
    sheet: Sheet, row: int, entry: Entry, rail_rows: Mapping[str, int], fed: Sequence[str], *, waits: bool
) -> None:
    worst, rail_row = entry.worst, rail_rows.get(_rail(entry))
    at = {head: letter(number) + str(row + 1) for head, number in PLACES.items()}
    rail_load = f"Rails!$F${rail_row + 1}" if rail_row is not None else "0"
    rail_gaps = f"Rails!$G${rail_row + 1}" if rail_row is not None else "0"
    live = f'{at["Model"]}="live"'
    load, heat, theta, junction = at["Load high [A]"], at["Heat [W]"], at["θ used [K/W]"], at["Junction worst [°C]"]
    air, limit, rating = at["Air [°C]"], at["Limit [°C]"], at["Rating [°C]"]
    k0, k1, k2 = at["k0 [W]"], at["k1 [W/A]"], at["k2 [W/A²]"]
    tight = f"MIN({rating}-Margin_tight,{limit})"
    allowed = f"(({limit}-{air})/{theta}-{k0})"
    root = f"IF({k2}=0,{allowed}/{k1},(SQRT({k1}^2+4*{k2}*{allowed})-{k1})/(2*{k2}))"
    rated = at["Rated load [A]"]
    most = f"IF(ISNUMBER({rated}),MIN({rated},MAX(0,{root})),MAX(0,{root}))"
    static_missing = at["Missing besides the load"]
    missing = at["Missing in all"]
    audited = at["Rail load as audited [A]"]
    loads = weighted_formula(fed, rail_rows)
    moved = f"OR(Edited>0,AND(ISNUMBER({audited}),ABS({loads}-N({audited}))>1E-12))"
    typed = at["θ at sea level [K/W]"]
    moved = f"OR({moved},NOT(EXACT({typed},{at['θ as audited [K/W]']})))"
    stale = f"OR(Class_edited+Unread_settings+Unread_currents>0,IF({live},N({typed})<=0,{moved}))"
    verdict = (
        f'=IF({at["Other findings"]}="not fitted","not fitted",IF({stale},"{RERUN}",'
        f'IF(OR({at["Other findings"]}="over",AND(ISNUMBER({junction}),ISNUMBER({limit}),{junction}>{limit}),'
        f'AND(ISNUMBER({rated}),N({load})>{rated})),"over",'
        f'IF({missing}>0,"open",'
        f'IF(OR({at["Other findings"]}="tight",{junction}>{tight},'
        f'AND(ISNUMBER({rated}),N({load})>{rated}*Policy_current)),"tight","clear")))))'
    )
    formulas: tuple[tuple[str, str, object], ...] = (
        (
            "Load high [A]",
            f"=IF({live},{rail_load}*{at['Share of rail']},{_or_blank(at['Engine load [A]'])})",
            _load(entry),
        ),
        (
            "Heat [W]",
            f"=IF({live},{k0}+{k1}*{load}+{k2}*{load}^2,{_or_blank(at['Engine heat [W]'])})",
            worst and worst.watts,
        ),
        (
            "θ used [K/W]",
            f"=IF({live},{at['θ solid [K/W]']}+{typed}*Thin_air,{_or_blank(at['Engine θ [K/W]'])})",
            worst and worst.theta,
        ),
        ("Air [°C]", f"=Ambient_high+Rise_high+N({at['Neighbours [K]']})", _air(entry)),
        (
            "Junction worst [°C]",
            f"=IF({live},{air}+{theta}*{heat},{_or_blank(at['Engine junction [°C]'])})",
            worst and worst.junction,
        ),
        (
            "Limit [°C]",
            f'=IF(ISNUMBER({rating}),MIN({rating},{rating}-Margin_over,{rating}*Policy_factor,Policy_cap),"")',
            entry.limit,
        ),
        ("Margin [K]", f'=IF(AND(ISNUMBER({junction}),ISNUMBER({limit})),{limit}-{junction},"")', entry.margin),
        ("Missing in all", f"={static_missing}+MIN(1,{rail_gaps})", _missing(entry)),
        ("Verdict", verdict, _verdict(entry, waits=waits)),
        (
            "Further load until over [A]",
            f'=IF(AND({live},ISNUMBER({limit})),MAX(0,{most}-{load}),"")',
            entry.headroom.over if entry.headroom and is_live(entry) and entry.limit is not None else "",
        ),
    )
    for head, formula, result in formulas:
        sheet.formula(row, PLACES[head], formula, result)


def _told(missing: Sequence[str]) -> str:
    """What is missing, in short: the Findings sheet has all of it, and a row as high as that would fill the page."""
    if not missing:
        return ""
    more = f" (and {len(missing) - 1} more, see Findings)" if len(missing) > 1 else ""
    return textwrap.shorten(missing[0], MOST_MISSING, placeholder=" …") + more


def _rail(entry: Entry) -> str:
    """The rail whose load the row follows."""
    return next((one.rail for one in entry.outputs if one.rail), "")


def _verdict(entry: Entry, *, waits: bool) -> str:
    """The word stored: what opens the file without working it out shows no verdict that edits may have changed."""
    if not entry.fitted:
        return "not fitted"
    return RERUN if waits else entry.verdict.value


def _or_blank(reference: str) -> str:
    return f'IF(ISNUMBER({reference}),{reference},"")'


def _load(entry: Entry) -> float | None:
    return entry.live.get("load")


def _air(entry: Entry) -> float | None:
    return entry.worst.ambient if entry.worst else None


def _missing(entry: Entry) -> int:
    loads = [missing for missing in entry.missing if missing.startswith("load of ")]
    return len(entry.missing) - len(loads) + min(1, len(loads))


def _margin_colours(sheet: Sheet, last: int) -> None:
    column = PLACES["Margin [K]"]
    for criteria, value, form in (("<", "0", "over"), ("<", "Margin_tight-Margin_over", "tight")):
        rule = {
            "type": "cell",
            "criteria": criteria,
            "value": value,
            "format": sheet.book.form(form),
            "stop_if_true": True,
        }
        sheet.raw.conditional_format(FIRST_ROW, column, last, column, rule)
