"""Losses from an efficiency figure: a number, a table over the load, or a map over load and input voltage.

    total = Pout · (1/η − 1),   part = total − inductor − external diode − external transistors

Source: TI SNVA951 section 9 (which also lowers a 25 °C figure for the hot board). What is not known of the parts
outside is left in the part: the safe side.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable
from dataclasses import dataclass

from analyzer.evidence import Evidence
from analyzer.losses.base import REFERENCE_CELSIUS, End, Figures, Loss, Point, low, outside
from analyzer.part import Channel
from analyzer.quantity import Span
from analyzer.rail import Wiring
from analyzer.rule import EfficiencyMap
from analyzer.wording import show

KEYS = ("efficiency", "efficiency_temperature", "efficiency_hot_loss")


def total_loss(power_out: float, efficiency: float) -> float:
    """Loss [W] of a whole converter: Pout · (1/η − 1).

    Raises:
        ValueError: If the efficiency is not above 0 and at most 1, or the power is negative.
    """
    if not 0 < efficiency <= 1 or power_out < 0:
        raise ValueError(f"needs 0 < η ≤ 1 and Pout ≥ 0, not η {efficiency:g}, Pout {power_out:g}")
    return power_out * (1.0 / efficiency - 1.0)


def hot_efficiency(efficiency: float, measured_at: float, loss_per_kelvin: float, junction: float) -> float:
    """Efficiency at a hotter junction: falls by `loss_per_kelvin` for each kelvin above `measured_at` [°C].

    Never rises above the figure itself.
    """
    return efficiency - max(0.0, junction - measured_at) * loss_per_kelvin


def is_given(channel: Channel) -> bool:
    """Whether the rule gives an efficiency in any form."""
    return channel.efficiency_map is not None or Figures(channel).has("efficiency")


def evidence(channel: Channel) -> tuple[Evidence, ...]:
    """Evidence of the efficiency figures."""
    mapped = (channel.efficiency_map.evidence,) if channel.efficiency_map else ()
    return (*mapped, *Figures(channel).used(*KEYS))


def at_point(channel: Channel, point: Point, end: End) -> float:
    """Efficiency at an operating point.

    Raises:
        ValueError: Outside the table or map, or where the hot figure is no efficiency any more.
    """
    figures = Figures(channel)
    if channel.efficiency_map is not None:
        found = low(interpolated(channel.efficiency_map, point.iout, point.vin), end)
    else:
        found = figures.low("efficiency", end, point.iout)
    measured = figures.high("efficiency_temperature", End.NOMINAL, default=REFERENCE_CELSIUS)
    found = hot_efficiency(found, measured, figures.high("efficiency_hot_loss", end, default=0.0), point.junction)
    if not 0 < found <= 1:
        raise ValueError(f"an efficiency of {found:.3g} at {point.junction:.0f} °C is none")
    return found


def interpolated(table: EfficiencyMap, load: float, vin: float) -> Span:
    """Efficiency between the points of a full grid, linear in load and input voltage.

    Below the smallest load the efficiency of the smallest load is held, which is not on the safe side for the input
    current of a sleeping board but is for its heat, for the loss falls with the load.

    Raises:
        ValueError: If the load lies above the map, or the input voltage outside it.
    """
    loads = sorted({x for x, _, _ in table.points})
    voltages = sorted({y for _, y, _ in table.points})
    if load > loads[-1] or not voltages[0] <= vin <= voltages[-1]:
        raise ValueError(f"the efficiency map does not cover {show(load, 'A')} at {show(vin, 'V')}")
    grid = {(x, y): span for x, y, span in table.points}
    x0, x1, across = _between(loads, max(load, loads[0]))
    y0, y1, up = _between(voltages, vin)

    def mixed(corner: Callable[[Span], float]) -> float:
        near = corner(grid[x0, y0]) * (1 - across) + corner(grid[x1, y0]) * across
        far = corner(grid[x0, y1]) * (1 - across) + corner(grid[x1, y1]) * across
        return near * (1 - up) + far * up

    return Span(mixed(lambda s: s.low), mixed(lambda s: s.nominal), mixed(lambda s: s.high))


def _between(knots: list[float], x: float) -> tuple[float, float, float]:
    i = min(max(bisect_right(knots, x) - 1, 0), max(len(knots) - 2, 0))
    low_knot, high_knot = knots[i], knots[min(i + 1, len(knots) - 1)]
    return low_knot, high_knot, 0.0 if high_knot == low_knot else (x - low_knot) / (high_knot - low_knot)


@dataclass(frozen=True, slots=True)
class Shares:
    """What of the total loss is outside the part: (who, watts) by the current that flows there."""

    items: tuple[tuple[str, float], ...]

    @property
    def watts(self) -> float:
        """Sum of them [W]."""
        return sum(watts for _, watts in self.items)


def shares(wiring: Wiring, end: End, inductor: float, diode: float) -> Shares:
    """Losses in inductors and external rectifiers whose figures are known.

    Args:
        wiring: The channel.
        end: The part keeps most heat when the parts outside take least, so `End.SEVERE` takes their small end.
        inductor: Current through the inductor [A].
        diode: Average current through the rectifier [A].
    """
    items: list[tuple[str, float]] = []
    for ref, resistance, _, _ in outside(wiring, "inductor"):
        if resistance is not None:
            items.append((ref, inductor * inductor * low(resistance, end)))
    for ref, _, drop, _ in outside(wiring, "diode"):
        if drop is not None:
            items.append((ref, diode * low(drop, end)))
    return Shares(tuple(items))


def outside_notes(wiring: Wiring) -> tuple[str, ...]:
    """What is not known of the parts outside, and so is left in the part."""
    return tuple(
        f"loss of {part.role} {part.ref} not known: left in the part"
        for part in wiring.outside
        if part.role in ("inductor", "diode") and part.resistance is None and part.drop is None
    )


def loss_from_efficiency(point: Point, efficiency: float, supply: float, outside_parts: Shares) -> Loss:
    """The losses of a converter known by its efficiency.

    Args:
        point: Operating point.
        efficiency: Efficiency there.
        supply: Input voltage against board ground [V], which the input current is counted at.
        outside_parts: Losses outside the part.
    """
    power = point.vout * point.iout
    total = total_loss(power, efficiency)
    inside = max(0.0, total - outside_parts.watts)

    def formula() -> str:
        taken = "".join(f" − {show(watts, 'W')} in {who}" for who, watts in outside_parts.items)
        return f"{show(power, 'W')} · (1/{efficiency:.3f} − 1){taken}"

    return Loss(
        inside,
        power / efficiency / supply,
        outside_parts.items,
        (("converter loss", total), *((f"less {who}", -watts) for who, watts in outside_parts.items)),
        formula,
    )
