"""The trail of one part as text: every step in the order of computation."""

from __future__ import annotations

from collections.abc import Iterator

from analyzer.cli import CAUTION
from analyzer.ledger import Entry
from analyzer.output.console import _wrapped as wrapped
from analyzer.output.console import safe
from analyzer.wording import show


def trail_lines(entry: Entry, width: int) -> list[str]:
    """The lines of the trail, wrapped to `width`."""
    return [safe(line) for line in _lines(entry, width)]


def _lines(entry: Entry, width: int) -> Iterator[str]:
    yield f"{entry.ref} {entry.part} ({entry.kind}, sheet {entry.sheet}): {entry.verdict.value} [{entry.grade.value}]"
    corner = ""
    for step in entry.steps:
        if step.corner != corner:
            corner = step.corner
            yield ""
            if corner:
                yield from wrapped(f"corner: {corner}", width)
        text = f"  {step.what}: "
        if step.formula:
            text += f"{step.formula} = "
        text += step.value
        where = f" [{step.grade.value}]" + (f" {step.source}" if step.source else "")
        yield from wrapped(text + where, width, indent="      ")
    if entry.limit is not None and entry.margin is not None and entry.worst is not None:
        junction = entry.worst.junction or 0.0
        yield ""
        yield f"margin: {show(entry.limit, '°C')} − {show(junction, '°C')} = {entry.margin:+.1f} K"
    for remedy in entry.remedies:
        yield from wrapped(f"{remedy.kind}: {remedy.text}", width)
    for name, kelvin in entry.sensitivity:
        yield f"sensitivity: {name} moves the junction by {kelvin:.1f} K"
    if entry.chance is not None:
        over, low, high = entry.chance
        text = f"chance of exceeding the limit: {over:.1%}; junction {low:.1f} to {high:.1f} °C (5 to 95 %)"
        yield from wrapped(f"{text}, triangular over each span, inputs independent", width)
    yield ""
    yield from wrapped(CAUTION, width)
