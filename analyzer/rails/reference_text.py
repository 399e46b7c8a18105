"""Reference voltages from the schematic's own words: notes beside the part, then the symbol's description."""

from __future__ import annotations

import math
import re

from analyzer.circuit import Circuit, Component, Note
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span

_VOLTS = r"(?P<number>\d+(?:[.,]\d+)?)\s*(?P<unit>m?V)?"
_STATED = re.compile(rf"V_?\{{?\s*(?:FB|REF|ADJ)\s*\}}?\s*(?:=|is|:)\s*{_VOLTS}", re.IGNORECASE)
_FORMULA = re.compile(
    rf"V_?\{{?\s*OUT?\s*\}}?\s*=\s*{_VOLTS}\s*[*x×·]?\s*[(\[]\s*(?:1\s*\+|[(\[]?\s*R\w*\s*/\s*R\w*\s*[)\]]?\s*\+\s*1)",
    re.IGNORECASE,
)
_RANGE = re.compile(
    r"(?<![\d.,])(?P<number>\d+(?:[.,]\d+)?)\s*(?P<unit>m?V)?\s*(?:-|–|to|\.\.+|~)\s*\d+(?:[.,]\d+)?\s*V(?P<tail>[^,;]{0,16})",
    re.IGNORECASE,
)
_ADJUSTABLE = re.compile(r"(?<![a-z])adj(?:ustable|\b)|variable", re.IGNORECASE)
_OF_INPUT = re.compile(r"^\s*(?:in\b|in(?:put|\s|,|$)|supply|vin)", re.IGNORECASE)
_NAMED_INPUT = re.compile(r"(?:input|vin|supply)[^,;]{0,16}$", re.IGNORECASE)
_LEAST, _GREATEST = 0.1, 5.0
_NEAR_MM = 120.0


def reference_from_text(circuit: Circuit, component: Component) -> Evidence | None:
    """Reference voltage that the drawing states, graded presumed; None if it states none or two at one distance.

    A note counts when it stands on the part's sheet; the nearest one wins. Without a note, the lower end of the
    output range in the description is the reference, since an adjustable part cannot go below it.
    """
    found: list[tuple[float, float, Note, str]] = []
    for note in circuit.notes:
        if (note.place.file, note.place.sheet) != (component.place.file, component.place.sheet):
            continue
        for match in (*_STATED.finditer(note.text), *_FORMULA.finditer(note.text)):
            volts = _volts(match)
            if volts is not None:
                found.append((_distance(component, note), volts, note, match[0]))
    if found:
        nearest = min(item[0] for item in found)
        level = {item[1] for item in found if item[0] <= nearest + 1e-6}
        if len(level) == 1 and nearest <= _NEAR_MM:
            _, volts, note, text = min(found, key=lambda item: (item[0], item[1]))
            return _evidence(
                volts, f"note '{' '.join(text.split())}' in {note.place}", "read from a note beside the part"
            )
        if len(level) > 1:
            return None
    return _from_description(component)


def _from_description(component: Component) -> Evidence | None:
    text = component.description
    if not _ADJUSTABLE.search(text):
        return None
    for match in _RANGE.finditer(text):
        if _OF_INPUT.search(match["tail"]) or _NAMED_INPUT.search(text[: match.start()]):
            continue
        volts = _volts(match)
        if volts is not None:
            return _evidence(
                volts,
                f"description of {component.ref}: '{' '.join(match[0].split())}'",
                "lowest output of the description taken as the reference",
            )
    return None


def _volts(match: re.Match[str]) -> float | None:
    volts = float(match["number"].replace(",", "."))
    if (match["unit"] or "V") == "mV":
        volts /= 1000
    return volts if _LEAST <= volts <= _GREATEST else None


def _distance(component: Component, note: Note) -> float:
    here, there = component.place, note.place
    if here.x_mm is None or here.y_mm is None or there.x_mm is None or there.y_mm is None:
        return 0.0
    return math.hypot(here.x_mm - there.x_mm, here.y_mm - there.y_mm)


def _evidence(volts: float, source: str, note: str) -> Evidence:
    return Evidence("reference voltage", Span.exact(volts), "V", source, Grade.PRESUMED, note=note)
