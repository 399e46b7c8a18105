"""Which model a channel has, and what it takes from its input rail."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from analyzer.evidence import Evidence, Grade
from analyzer.losses import boost, buck, charge_pump, charger, converter, linear, passage, shunt
from analyzer.losses.base import End, LossModel, Point, lacking
from analyzer.losses.presumed import with_presumptions
from analyzer.quantity import Span
from analyzer.rail import Wiring
from analyzer.rule import Topology
from analyzer.wording import show_span

MODELS: Mapping[Topology, Callable[[Wiring], LossModel]] = {
    Topology.LINEAR: linear.build,
    Topology.LINEAR_FLOATING: linear.build_floating,
    Topology.LINEAR_TWO_SUPPLY: linear.build_two_supply,
    Topology.BUCK: buck.build,
    Topology.BOOST: boost.build,
    Topology.BUCK_BOOST: converter.build,
    Topology.INVERTING: converter.build,
    Topology.MODULE: converter.build,
    Topology.CONTROLLER: converter.build_controller,
    Topology.CHARGE_PUMP: charge_pump.build,
    Topology.CHARGER: charger.build,
    Topology.SHUNT: shunt.build,
    Topology.LOAD_SWITCH: passage.build_switch,
    Topology.EFUSE: passage.build_switch,
    Topology.IDEAL_DIODE: passage.build_switch,
    Topology.POWER_MUX: passage.build_switch,
    Topology.SERIES_DIODE: passage.build_diode,
    Topology.SERIES_TRANSISTOR: passage.build_switch,
}

HOT_CELSIUS = 125.0
"""Junction at which the tree of currents takes hot figures: the usual limit, so the safe side."""


def model_of(wiring: Wiring) -> LossModel:
    """The loss model of a channel, with what it lacks."""
    if wiring.part.rule is None and not wiring.channel.figures:
        return lacking("a rule for this part, or its figures in the settings")
    return MODELS[wiring.channel.topology](with_presumptions(wiring))


def input_current(wiring: Wiring, load: Span) -> Evidence | None:
    """Current a channel takes from its input rail for a load [A], over all corners; None where it cannot be known.

    Source: a linear part takes its load and its ground current; a switching one Pout/(η·Vin), most at the lowest
    input voltage (energy balance).
    """
    model = model_of(wiring)
    if model.missing:
        return None
    if model.own_load is not None:
        load = model.own_load.span
    if (wiring.vin is None or wiring.vout is None) and model.iin_needs_voltages:
        return None
    vouts = _magnitudes(wiring.vout) if wiring.vout else (0.0, 0.0, 0.0)
    # where the current does not follow from the voltages, an input with ample room stands for an unknown one
    vins = _magnitudes(wiring.vin) if wiring.vin else (vouts[2] + 100.0,) * 3
    table = wiring.channel.efficiency_map
    knots = [y for y in sorted({y for _, y, _ in table.points}) if vins[0] < y < vins[2]] if table else []
    try:
        span = _over_corners(model, vins, knots, vouts, load)
    except ValueError:
        return None
    source = f"{wiring.part.ref} {wiring.channel.topology} input for {show_span(load, 'A')} of load"
    parents = (*(evidence for evidence in (wiring.vin, wiring.vout) if evidence), *model.used)
    return Evidence("input current", span, "A", source, Grade.DERIVED, parents=parents)


def _over_corners(
    model: LossModel,
    vins: tuple[float, float, float],
    knots: list[float],
    vouts: tuple[float, float, float],
    load: Span,
) -> Span:
    # between two knots of a map, η · Vin and so the current have no extremum
    inside = [x for x in model.loads if load.low < x < load.high]
    found = [
        model.at(Point(vin, vout, iout, HOT_CELSIUS if end is End.SEVERE else 25.0), end).iin
        for vin in (vins[0], *knots, vins[2])
        for vout in (vouts[0], vouts[2])
        for iout in (load.low, load.high, *inside)
        for end in (End.MILD, End.SEVERE)
    ]
    nominal = model.at(Point(vins[1], vouts[1], load.nominal), End.NOMINAL).iin
    return Span(min(*found, nominal), nominal, max(*found, nominal))


def _magnitudes(volts: Evidence) -> tuple[float, float, float]:
    corners = sorted(abs(corner) for corner in volts.span.corners)
    return corners[0], abs(volts.span.nominal), corners[2]
