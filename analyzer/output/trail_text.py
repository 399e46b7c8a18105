"""The trail of one part as text: every step in the order of computation."""

from __future__ import annotations

from collections.abc import Iterator

from analyzer.cli import CAUTION
from analyzer.ledger import Entry
from analyzer.output.console import _wrapped as wrapped
from analyzer.output.console import safe

LEAST_KELVIN = 0.05


def sensitivities(entry: Entry) -> list[tuple[str, float]]:
    """The inputs whose spans move the junction by as much as a tenth of a kelvin shows."""
    return [(name, kelvin) for name, kelvin in entry.sensitivity if kelvin >= LEAST_KELVIN]


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
    if entry.limit is not None and entry.margin is not None:
        # to a tenth of a kelvin, so that the line adds up as it is written
        most = "at most " if entry.is_bound else ""
        yield ""
        yield f"margin: {most}{entry.limit:.1f} °C − {entry.limit - entry.margin:.1f} °C = {entry.margin:+.1f} K"
    for remedy in entry.remedies:
        yield from wrapped(f"{remedy.kind}: {remedy.text}", width)
    for name, kelvin in sensitivities(entry):
        yield f"sensitivity: {name} at its nominal instead of its worst lowers the junction by {kelvin:.1f} K"
    if entry.chance is not None:
        over, low, high = entry.chance
        text = f"chance of exceeding the limit: {over:.1%}; junction {low:.1f} to {high:.1f} °C (5 to 95 %)"
        yield from wrapped(f"{text}, triangular over each span, inputs independent", width)
    yield ""
    yield from wrapped(CAUTION, width)
