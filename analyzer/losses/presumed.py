"""Figures that are presumed where a rule leaves them out and nothing would be the wrong guess."""

from __future__ import annotations

from dataclasses import replace

from analyzer.evidence import Evidence, Grade
from analyzer.part import Channel
from analyzer.quantity import Span
from analyzer.rail import Wiring

_RESISTANCES = frozenset({"on_resistance", "high_side_resistance", "low_side_resistance"})

USUAL_TEMPCO = Evidence(
    "resistance tempco",
    Span(0.004, 0.006, 0.008),
    "1/K",
    "common practice: on-resistance of a MOSFET at 125 °C is 1.4 to 1.8 times that at 25 °C",
    Grade.PRESUMED,
    note="none given",
)
"""What an on-resistance gains per kelvin above 25 °C where no rule tells; TI's TPS1HB35 doubles when hot."""


def with_presumptions(wiring: Wiring) -> Wiring:
    """The channel with a usual temperature coefficient where it has on-resistances and none is given."""
    channel: Channel = wiring.channel
    if not _RESISTANCES & channel.figures.keys() or "resistance_tempco" in channel.figures:
        return wiring
    figures = {**channel.figures, "resistance_tempco": USUAL_TEMPCO}
    return replace(wiring, channel=replace(channel, figures=figures))
