"""What every model from an efficiency has in common: what it lacks, its parts outside, its evidence and assumptions."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from analyzer.losses import efficiency
from analyzer.losses.base import End, Figures, Loss, LossModel, Point, lacking
from analyzer.losses.elsewhere import OPPOSITE, Outsides, Shares, outside_notes, outsides, outsides_measured
from analyzer.rail import Wiring

_NONE = Outsides(None, None, ())

Interior = Callable[[float, float, float, float], tuple[float, ...]]


@dataclass(frozen=True, slots=True)
class Around:
    """The parts outside a converter: those its efficiency was measured with, and those on this board."""

    measured: Outsides
    board: Outsides

    def shares(self, end: End, inductor: float, rectifier: float) -> tuple[Shares, Shares]:
        """Losses to take out of the part, the least they surely are, and those on this board, the most they may be."""
        return self.measured.shares(end, inductor, rectifier), self.board.shares(OPPOSITE[end], inductor, rectifier)


def model_by_efficiency(
    wiring: Wiring, at: Callable[[Point, End, float, Around], Loss], interior: Interior, *, is_closed: bool = False
) -> LossModel:
    """The model of a converter known by its efficiency.

    Args:
        wiring: The channel.
        at: (point, end, efficiency there, parts outside) → losses.
        interior: Input voltages between the ends where the heat may be greatest.
        is_closed: Whether the efficiency has its own inductor in it, and none of what stands around the part.
    """
    channel = wiring.channel
    if lacks := efficiency.lacks(channel):
        return lacking(*lacks)
    around = Around(_NONE, _NONE)
    if not is_closed:
        around = Around(outsides_measured(wiring, efficiency.figure_of(channel)), outsides(wiring))
    knots = efficiency.load_knots(channel)
    return LossModel(
        lambda point, end: at(point, end, efficiency.at_point(channel, point, end), around),
        tuple(dict.fromkeys((*efficiency.evidence(channel), *around.measured.used, *around.board.used))),
        notes=(
            *efficiency.notes(channel),
            *(() if is_closed else outside_notes(wiring, around.board, around.measured)),
        ),
        interior=interior,
        loads=knots,
        has_humps=bool(knots),
        heats=Figures(channel).has("efficiency_hot_loss"),
    )
