"""Losses from an efficiency figure: a number, a table over the load, or a map over load and input voltage.

    total = Pout · (1/η − 1),   part = total − inductor − external diode − external transistors

Source: TI SNVA951 section 9 (which also lowers a 25 °C figure for the hot board). What is not known of the parts
outside is left in the part: the safe side.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable

from analyzer.evidence import Evidence, Grade
from analyzer.losses.base import REFERENCE_CELSIUS, End, Figures, Loss, Point, amps, high, low, volts
from analyzer.losses.elsewhere import Shares
from analyzer.part import Channel
from analyzer.quantity import Span
from analyzer.rule import EfficiencyMap
from analyzer.wording import show

KEYS = ("efficiency", "efficiency_output", "efficiency_temperature", "efficiency_hot_loss")

HOT_BOARD = Evidence(
    "efficiency lost on a hot board",
    Span(0.0, 0.0, 0.02),
    "1",
    "TI SNVA951 section 9: 87 % of a 25 °C figure counted as 85 %",
    Grade.PRESUMED,
    note="no efficiency_hot_loss given",
)
"""What is presumed where nothing tells how an efficiency falls with temperature."""

MEASURED_HOT = 85.0
"""Temperature [°C] from which an efficiency counts as measured hot."""


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
    presumed = () if says_hot(channel) else (HOT_BOARD,)
    return (*mapped, *Figures(channel).used(*KEYS, "quiescent"), *presumed)


def says_hot(channel: Channel) -> bool:
    """Whether it is known what the efficiency is on a hot board."""
    measured = channel.figures.get("efficiency_temperature")
    return "efficiency_hot_loss" in channel.figures or (measured is not None and measured.span.low >= MEASURED_HOT)


def lacks(channel: Channel) -> tuple[str, ...]:
    """What an efficiency needs besides itself, in words.

    A number from a rule holds at the load it was measured at; below it the losses fall towards what the part takes
    without a load, which must be known. At a lower output voltage the loss stays about what it was, and an efficiency
    would make it fall: where the output is adjustable, the one it was measured at must be known. What is stated for
    this board is taken to hold for its own load and output.
    """
    if figure_of(channel).grade is Grade.STATED:
        return ()
    found = []
    tabled = channel.efficiency_map is not None or "efficiency" in channel.curves
    if not tabled and "quiescent" not in channel.figures:
        found.append("quiescent current (what the converter loses without a load)")
    if channel.volts is None and "efficiency_output" not in channel.figures:
        found.append("output voltage at which the efficiency was measured (efficiency_output)")
    return tuple(found)


def notes(channel: Channel) -> tuple[str, ...]:
    """Assumptions about the efficiency itself."""
    found = [] if says_hot(channel) else ["efficiency taken as a 25 °C figure: 2 points lower on a hot board"]
    if "quiescent" not in channel.figures:
        low = "the loss of the table's smallest load is" if load_knots(channel) else "nothing is"
        found.append(f"quiescent current not given: {low} counted without a load")
    return tuple(found)


def load_knots(channel: Channel) -> tuple[float, ...]:
    """Loads [A] at which a map or table of the efficiency has its points."""
    mapped = {x for x, _, _ in channel.efficiency_map.points} if channel.efficiency_map else set()
    return tuple(sorted({*mapped, *Figures(channel).knots("efficiency")}))


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
    if not says_hot(channel):
        found -= high(HOT_BOARD.span, end)
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

    # rounding may put equal ends out of order
    return Span(*sorted((mixed(lambda s: s.low), mixed(lambda s: s.nominal), mixed(lambda s: s.high))))


def _between(knots: list[float], x: float) -> tuple[float, float, float]:
    i = min(max(bisect_right(knots, x) - 1, 0), max(len(knots) - 2, 0))
    low_knot, high_knot = knots[i], knots[min(i + 1, len(knots) - 1)]
    return low_knot, high_knot, 0.0 if high_knot == low_knot else (x - low_knot) / (high_knot - low_knot)


def light_load_loss(channel: Channel, point: Point, efficiency: float, idle: float) -> float:
    """What may be lost besides Pout · (1/η − 1) below the load that an efficiency was measured at [W].

    The loss a + b·I + c·I² of a converter is convex, so below a load I1 where it is P1 it is at most the chord
    idle + (P1 − idle)·I/I1. With a number alone, I1 is not known: then at most Pout · (1/η − 1) + idle. Below the
    first point of a table, without a quiescent current, the loss of that point is held.
    """
    least = next(iter(load_knots(channel)), None)
    if least is None:
        return idle
    if point.iout >= least:
        return 0.0
    vout = measured_output(channel, point)
    first = total_loss(vout * least, efficiency)
    known = "quiescent" in channel.figures
    most = idle + max(0.0, first - idle) * point.iout / least if known else first
    return max(0.0, most - total_loss(vout * point.iout, efficiency))


def measured_output(channel: Channel, point: Point) -> float:
    """Output voltage [V] that the loss is worked out at: below the one an efficiency was measured at the loss stays."""
    measured = channel.figures.get("efficiency_output")
    return point.vout if measured is None else max(point.vout, measured.span.high)


def left_inside(total: float, outside_parts: Shares) -> tuple[float, tuple[tuple[str, float], ...]]:
    """What of a converter's whole loss [W] stays in the part, and what is taken out of it: (who, watts).

    The inductor's loss rises with the square of the load, the loss by a given efficiency only with the load itself:
    from where the inductor would take half of what the rectifier leaves, the part would get cooler with more load.
    The efficiency was then measured with a better inductor, and no more than that half is taken out.
    """
    rest, taken = total, []
    if outside_parts.diode is not None:
        who, watts = outside_parts.diode
        taken.append((who, min(watts, rest)))
        rest -= taken[-1][1]
    if outside_parts.inductor is not None:
        who, watts = outside_parts.inductor
        taken.insert(0, (who, min(watts, rest / 2)))
        rest -= taken[0][1]
    return rest, tuple(taken)


def figure_of(channel: Channel) -> Evidence:
    """The efficiency itself as evidence.

    Raises:
        KeyError: If none is given.
    """
    if channel.efficiency_map is not None:
        return channel.efficiency_map.evidence
    curve = channel.curves.get("efficiency")
    return curve.evidence if curve else channel.figures["efficiency"]


def loss_from_efficiency(
    channel: Channel, point: Point, end: End, efficiency: float, supply: float, outside_parts: Shares, board: Shares
) -> Loss:
    """The losses of a converter known by its efficiency.

    They are never less than what the part takes without a load, Vin · Iq: an efficiency says nothing of an idle board.
    At the severe end see `light_load_loss`.

    Args:
        channel: For its quiescent current.
        point: Operating point.
        end: End of the quiescent current's span.
        efficiency: Efficiency there.
        supply: Input voltage against board ground [V], which the input current is counted at.
        outside_parts: Losses outside the part that the efficiency has in it.
        board: Losses of the parts outside on this board, as far as they are known.

    Raises:
        ValueError: If even at the severe end the rectifier alone makes more than the whole loss.
    """
    power = point.vout * point.iout
    own = Figures(channel).high("quiescent", end, default=0.0)
    idle = point.vin * own
    vout = measured_output(channel, point)
    total = total_loss(vout * point.iout, efficiency)
    if end is End.SEVERE and outside_parts.diode is not None and outside_parts.diode[1] > total:
        who, watts = outside_parts.diode
        raise ValueError(
            f"{who} alone loses {show(watts, 'W')}, the efficiency {efficiency:.3f} leaves {show(total, 'W')}"
        )
    rest, taken = left_inside(total, outside_parts)
    more = light_load_loss(channel, point, efficiency, idle) if end is End.SEVERE else 0.0
    inside = max(idle, rest + more)

    def formula() -> str:
        if inside > rest + more:
            return f"{volts(point.vin)} · {amps(own)} without a load"
        less = "".join(f" − {show(watts, 'W')} in {who}" for who, watts in taken)
        light = f" + {show(more, 'W')} at light load" if more else ""
        return f"{show(vout * point.iout, 'W')} · (1/{efficiency:.3f} − 1){less}{light}"

    terms: tuple[tuple[str, float], ...] = (("quiescent", idle),)
    if inside == rest + more:
        terms = (("converter loss", total), *((f"less {who}", -watts) for who, watts in taken))
        terms = (*terms, ("at light load", more)) if more else terms
    lost = board.over(outside_parts)
    # what was not taken out of the part is lost outside all the same, and comes from the input as well (energy balance)
    return Loss(inside, (power + inside + lost.watts) / supply, lost.items, terms, formula)
