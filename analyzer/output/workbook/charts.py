"""The Charts sheet: junctions against limits, dissipation by part, margin against ambient for the worst five."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from analyzer.ledger import Entry, Ledger
from analyzer.output.workbook.layout import FIRST_ROW, Book, Column, Sheet, letter
from analyzer.output.workbook.plan import Plan
from analyzer.output.workbook.regulators import PLACES, is_live

WORST = 5
AMBIENTS = (0, 10, 20, 30, 40, 50, 60, 70, 80, 90)
MOST_BARS = 30
"""Bars that still read in one chart; the worst are shown."""

SIZE = {"width": 700, "height": 500}
"""Pixels of a chart: two beside each other and two below fill a page across."""

_RIGHT, _LOWER = 7, 26
"""Column of the charts at the right; row of the lower ones."""

_FILLS = ({"color": "#E3E9EF"}, {"color": "#8CA3B9"})
"""Nominal and worst: far enough apart in brightness to print in black and white, and lighter than the limit's line."""

_MARKERS = ("circle", "square", "triangle", "diamond", "x")
_DASHES = ("solid", "dash", "round_dot", "dash_dot", "long_dash")
_GRID = {"visible": True, "line": {"color": "#D0D0D0", "width": 0.5}}


def write(book: Book, ledger: Ledger, plan: Plan) -> None:
    """Write the sheet; its table and charts follow the Regulators sheet."""
    shown = [e for e in ledger.entries if e.fitted and e.worst is not None and e.worst.junction is not None][:MOST_BARS]
    worst = [e for e in shown if is_live(e) and e.margin is not None][:WORST]
    heads = (Column("Ambient [°C]", 14, "kelvin"), *(Column(f"{e.ref}: margin [K]", 14, "kelvin") for e in worst))
    remark = "The table gives the margin left at other ambients, for the worst parts whose budget is a formula."
    if not worst:
        remark = "No part's margin is a formula: where input, load or θ is missing there is nothing to draw."
    sheet = book.sheet("Charts", "Charts", remark, heads if worst else (), freeze=0)
    # a chart cut by a page break cannot be read
    sheet.raw.fit_to_pages(1, 1)
    # whatever the table needs, the columns left of the right charts are as wide together as a chart
    sheet.raw.set_column(0, _RIGHT - 1, 14)
    _table(sheet, ledger, plan, worst)
    rows = [plan.entry_rows[entry.key] for entry in shown]
    if not rows:
        return
    junctions = _bars(book, "Junction [°C]", rows, ("Junction nominal [°C]", "Junction worst [°C]"))
    _limit_line(book, junctions, rows)
    heat = _bars(book, "Heat at the worst corner [W]", rows, ("Heat [W]",))
    heat.set_legend({"none": True})
    sheet.raw.insert_chart(_LOWER, 0, junctions, {"object_position": 3})
    sheet.raw.insert_chart(_LOWER, _RIGHT, heat, {"object_position": 3})
    if worst:
        margins = _margins(book, [entry.ref for entry in worst])
        sheet.raw.insert_chart(0, _RIGHT, margins, {"object_position": 3})


def _table(sheet: Sheet, ledger: Ledger, plan: Plan, worst: Sequence[Entry]) -> None:
    for offset, ambient in enumerate(AMBIENTS if worst else ()):
        row = FIRST_ROW + offset
        sheet.put(row, 0, ambient)
        for number, entry in enumerate(worst):
            line = plan.entry_rows[entry.key] + 1
            margin, air = (f"Regulators!{letter(PLACES[head])}${line}" for head in ("Margin [K]", "Air [°C]"))
            extra = f"Rise_high+N(Regulators!{letter(PLACES['Neighbours [K]'])}${line})"
            result = None
            if entry.margin is not None and entry.worst is not None:
                moved = entry.worst.ambient - _own_rise(ledger) - entry.live.get("rise_extra", 0.0)
                result = entry.margin + moved - ambient
            sheet.formula(row, 1 + number, f"={margin}+{air}-({extra})-$A${row + 1}", result)


def _own_rise(ledger: Ledger) -> float:
    return next((one.span.high for one in ledger.settings if one.quantity == "enclosure rise"), 0.0)


def _bars(book: Book, title: str, rows: list[int], heads: tuple[str, ...]) -> Any:
    """A bar chart over the parts."""
    chart = book.book.add_chart({"type": "column"})
    first, last = rows[0], rows[-1]
    for head, fill in zip(heads, _FILLS[-len(heads) :], strict=True):
        series = {
            "name": head,
            "categories": ["Regulators", first, PLACES["Part"], last, PLACES["Part"]],
            "values": ["Regulators", first, PLACES[head], last, PLACES[head]],
            "fill": fill,
            "border": {"color": "#1B2A3A"},
            "gap": 60,
        }
        chart.add_series(series)
    chart.set_title({"name": title, "name_font": {"size": 11}})
    chart.set_y_axis({"major_gridlines": _GRID})
    chart.set_legend({"position": "bottom"})
    chart.set_size(SIZE)
    return chart


def _limit_line(book: Book, chart: Any, rows: list[int]) -> None:
    line = book.book.add_chart({"type": "line"})
    first, last = rows[0], rows[-1]
    line.add_series(
        {
            "name": "Limit [°C]",
            "categories": ["Regulators", first, PLACES["Part"], last, PLACES["Part"]],
            "values": ["Regulators", first, PLACES["Limit [°C]"], last, PLACES["Limit [°C]"]],
            "line": {"color": "#9C0006", "width": 2.25, "dash_type": "dash"},
            "marker": {"type": "square", "size": 6, "border": {"color": "#9C0006"}, "fill": {"color": "#FFFFFF"}},
        }
    )
    chart.combine(line)


def _margins(book: Book, refs: list[str]) -> Any:
    """Margin over ambient, true to scale; below nought the limit is exceeded."""
    chart = book.book.add_chart({"type": "scatter", "subtype": "straight_with_markers"})
    last = FIRST_ROW + len(AMBIENTS) - 1
    for number, ref in enumerate(refs):
        chart.add_series(
            {
                "name": ref,
                "categories": ["Charts", FIRST_ROW, 0, last, 0],
                "values": ["Charts", FIRST_ROW, 1 + number, last, 1 + number],
                "marker": {"type": _MARKERS[number], "size": 7},
                "line": {"width": 1.5, "dash_type": _DASHES[number]},
            }
        )
    chart.set_title(
        {"name": "Margin [K] against ambient [°C]: below 0 the limit is exceeded", "name_font": {"size": 11}}
    )
    chart.set_x_axis(
        {
            "name": "Ambient [°C]",
            "label_position": "low",
            "min": AMBIENTS[0],
            "max": AMBIENTS[-1],
            "major_unit": 10,
            "major_gridlines": {"visible": False},
        }
    )
    chart.set_y_axis({"name": "Margin [K]", "major_gridlines": _GRID})
    chart.set_legend({"position": "bottom"})
    chart.set_size(SIZE)
    return chart
