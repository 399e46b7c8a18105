"""The junction that heats itself: figures taken at the junction temperature that they lead to.

    Tj = Ta + θ · P(Tj)

The least solution is where a part that starts cold comes to rest. Without one the part runs away.
"""

from __future__ import annotations

from dataclasses import dataclass

from analyzer.losses.base import End, Loss, LossModel, Point

HOPELESS_CELSIUS = 1000.0
"""Above this no semiconductor is left; a search that gets here has no solution that matters."""

_PASSES = 200
_AGREEMENT = 1e-9


@dataclass(frozen=True, slots=True)
class Rest:
    """Where the junction comes to rest: its temperature [°C] and the losses there; `runs_away` if nowhere."""

    junction: float
    loss: Loss
    runs_away: bool = False


def settle(model: LossModel, point: Point, end: End, ambient: float, theta: float) -> Rest:
    """The junction temperature at which heat made and heat carried away are equal.

    Args:
        model: Loss model of the channel.
        point: Operating point; its junction is where the search starts at the least.
        end: Which end of the figures.
        ambient: Air around the part, everything else that heats it included [°C].
        theta: Junction to ambient [K/W].
    """
    junction = ambient
    loss = model.at(_hotter(point, junction), end)
    if not model.heats:
        return Rest(ambient + theta * loss.watts, loss)
    for _ in range(_PASSES):
        found = ambient + theta * loss.watts
        if found > HOPELESS_CELSIUS:
            return Rest(found, loss, runs_away=True)
        if abs(found - junction) <= _AGREEMENT * max(1.0, abs(found)):
            return Rest(found, loss)
        junction = found
        try:
            loss = model.at(_hotter(point, junction), end)
        except ValueError:
            # a figure that stops being one (efficiency below zero) on the way up has no rest
            return Rest(found, loss, runs_away=True)
    return Rest(junction, loss, runs_away=True)


def _hotter(point: Point, junction: float) -> Point:
    return Point(point.vin, point.vout, point.iout, junction)
