"""Sheet pins joined: with the hierarchical label inside, and with nets of the parent that also bear their name."""

from __future__ import annotations

from analyzer.findings import reading as kinds
from analyzer.reading.joins import Netting
from analyzer.reading.names import Rank
from analyzer.reading.report import Report
from analyzer.reading.wiring import WiredSheet


def join_sheet_pins(wired: list[WiredSheet], netting: Netting, report: Report) -> None:
    """Join every sheet pin with the hierarchical label of its name on the sheet below."""
    for each in wired:
        if each.sheet_pins:
            _join_by_name(each, netting, report)
    by_number = {each.sheet.number: each for each in wired}
    for each in wired:
        for (position, text), node in each.sheet_pins.items():
            child = each.sheet.children.get(position)
            if child is not None:
                inner = by_number[child.number].hierarchical.get(text)
                if inner is not None:
                    netting.joins.join(node, inner)


def _join_by_name(each: WiredSheet, netting: Netting, report: Report) -> None:
    """Join loose sheet pins with the net on which their name stands beside a stronger one.

    A sheet pin is no label: a net of the parent whose label bears the pin's name is not joined with it. But where that
    label only comes second on its net, KiCad 9 (measured) takes the two for one; where it comes first it does not.
    """
    root = netting.joins.root
    strong = {root(node) for node, _, rank in netting.on_sheet[each.sheet.number] if rank is not Rank.SHEET_PIN}
    first = {names[0][1] for names in each.drawn_names if names[0][0] is not Rank.SHEET_PIN}
    second = {name for names in each.drawn_names for rank, name in names[1:] if rank is not Rank.SHEET_PIN} - first
    loose: dict[str, set[int]] = {}
    for node, name, rank in netting.on_sheet[each.sheet.number]:
        if rank is Rank.SHEET_PIN and name in second and root(node) not in strong:
            loose.setdefault(name, set()).add(root(node))
    for name, nets in sorted(loose.items()):
        if len(nets) == 1:
            netting.joins.join(nets.pop(), netting.local_node(each.sheet, name))
            message = f"sheet pin '{name}' is not wired to the net that also bears its name; KiCad joins them"
        else:
            # which one depends on KiCad's own order; none is the reading of the drawing
            message = f"{len(nets)} sheet pins '{name}' are not wired to the net of that name; KiCad joins one of them"
        report.add(kinds.SHEET_PIN_LOOSE, name, message, each.sheet.drawing.place(None, each.sheet.name))
