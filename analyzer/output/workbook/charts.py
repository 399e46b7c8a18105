"""The Charts sheet: junctions against limits, dissipation by part, margin against ambient for the worst five."""

from __future__ import annotations

from typing import Any

from analyzer.ledger import Ledger
from analyzer.output.workbook.layout import FIRST_ROW, Book, Column, letter
from analyzer.output.workbook.plan import Plan
from analyzer.output.workbook.regulators import PLACES, is_live

WORST = 5
AMBIENTS = (0, 10, 20, 30, 40, 50, 60, 70, 85)
MOST_BARS = 30
"""Bars that still read in one chart; the worst are shown."""

_COLUMNS = (
    Column("Ambient [°C]", 14, "kelvin"),
    *(Column(f"Worst {n + 1}: margin [K]", 16, "kelvin") for n in range(WORST)),
)


def write(book: Book, ledger: Ledger, plan: Plan) -> None:
    """Write the sheet; its table and charts follow the Regulators sheet."""
    remark = "The table gives the margin left at other ambients for the worst parts whose budget is a formula."
    sheet = book.sheet("Charts", "Charts", remark, _COLUMNS, freeze=0)
    shown = [e for e in ledger.entries if e.fitted and e.worst is not None and e.worst.junction is not None][:MOST_BARS]
    worst = [e for e in shown if is_live(e) and e.margin is not None][:WORST]
    for number, entry in enumerate(worst):
        sheet.put(2, 1 + number, entry.ref, "label")
    for offset, ambient in enumerate(AMBIENTS):
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
    # a chart cut by a page break cannot be read
    sheet.raw.fit_to_pages(1, 1)
    if not shown:
        return
    rows = [plan.entry_rows[entry.key] for entry in shown]
    top = FIRST_ROW + len(AMBIENTS) + 2
    junctions = _bars(book, "Junction [°C]", rows, ("Junction nominal [°C]", "Junction worst [°C]"))
    _limit_line(book, junctions, rows)
    sheet.raw.insert_chart(top, 0, junctions, {"object_position": 1})
    sheet.raw.insert_chart(top + 19, 0, _bars(book, "Heat [W]", rows, ("Heat [W]",)), {"object_position": 1})
    if worst:
        sheet.raw.insert_chart(top + 38, 0, _margins(book, [entry.ref for entry in worst]), {"object_position": 1})


def _own_rise(ledger: Ledger) -> float:
    return next((one.span.high for one in ledger.settings if one.quantity == "enclosure rise"), 0.0)


_PATTERNS = ("light_upward_diagonal", "solid_diamond")
_GREYS = ("#9DB2C6", "#2F4B66")


def _bars(book: Book, title: str, rows: list[int], heads: tuple[str, ...]) -> Any:
    """A bar chart over the parts; fills differ in brightness and pattern, so that they print in black and white."""
    chart = book.book.add_chart({"type": "column"})
    first, last = rows[0], rows[-1]
    for number, head in enumerate(heads):
        series = {
            "name": head,
            "categories": ["Regulators", first, PLACES["Part"], last, PLACES["Part"]],
            "values": ["Regulators", first, PLACES[head], last, PLACES[head]],
            "fill": {"color": _GREYS[number + 2 - len(heads)]},
            "border": {"color": "#1B2A3A"},
            "gap": 60,
        }
        chart.add_series(series)
    chart.set_title({"name": title, "name_font": {"size": 11}})
    chart.set_legend({"position": "bottom"})
    chart.set_size({"width": 900, "height": 360})
    return chart


def _limit_line(book: Book, chart: Any, rows: list[int]) -> None:
    line = book.book.add_chart({"type": "line"})
    first, last = rows[0], rows[-1]
    line.add_series(
        {
            "name": "Limit [°C]",
            "categories": ["Regulators", first, PLACES["Part"], last, PLACES["Part"]],
            "values": ["Regulators", first, PLACES["Limit [°C]"], last, PLACES["Limit [°C]"]],
            "line": {"color": "#9C0006", "width": 2, "dash_type": "dash"},
            "marker": {"type": "square", "size": 6, "border": {"color": "#9C0006"}, "fill": {"color": "#FFFFFF"}},
        }
    )
    chart.combine(line)


def _margins(book: Book, refs: list[str]) -> Any:
    chart = book.book.add_chart({"type": "line"})
    last = FIRST_ROW + len(AMBIENTS) - 1
    markers = ("circle", "square", "triangle", "diamond", "x")
    for number, ref in enumerate(refs):
        chart.add_series(
            {
                "name": ref,
                "categories": ["Charts", FIRST_ROW, 0, last, 0],
                "values": ["Charts", FIRST_ROW, 1 + number, last, 1 + number],
                "marker": {"type": markers[number], "size": 7},
                "line": {"width": 1.5},
            }
        )
    chart.set_title({"name": "Margin [K] against ambient [°C], worst parts", "name_font": {"size": 11}})
    chart.set_x_axis({"name": "Ambient [°C]", "label_position": "low"})
    chart.set_y_axis({"name": "Margin [K]"})
    chart.set_legend({"position": "bottom"})
    chart.set_size({"width": 900, "height": 360})
    return chart
