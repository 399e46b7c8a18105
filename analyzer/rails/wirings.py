"""How one channel hangs between the rails, with its voltages seen from its own ground pin."""

from __future__ import annotations

from collections.abc import Mapping

from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rail import Wiring
from analyzer.rails.levels import Levels
from analyzer.rails.power import Power
from analyzer.rails.programming import programmed
from analyzer.rails.wiring import Trace
from analyzer.rule import PASSAGES, Topology
from analyzer.settings import Settings

GROUND = Evidence("ground", Span.exact(0.0), "V", "ground is the reference of all voltages", Grade.DERIVED)


def wiring(
    power: Power, levels: Levels, names: Mapping[str, str], one: Trace, through: tuple[str, ...], settings: Settings
) -> Wiring:
    """The wiring of one channel."""
    of = power.mesh.groups.of
    input_net = one.inputs[0] if one.inputs else None
    input_group = of(input_net) if input_net else None
    output_group = of(one.output) if one.output else None
    ground_group = of(one.ground) if one.ground else None
    control = of(one.control) if one.control else None
    channel, why_set = programmed(power, one, settings)
    vin, why_in = _vin(power, levels, one, input_group, ground_group, settings)
    vout, why_out = _vout(levels, one, output_group)
    return Wiring(
        part=one.part,
        channel=channel,
        input_net=input_net,
        input_rail=names.get(input_group) if input_group else None,
        output_net=one.output,
        output_rail=names.get(output_group) if output_group else None,
        ground_rail=names.get(ground_group) if ground_group else None,
        control_rail=names.get(control) if control else None,
        vin=vin,
        vout=vout,
        is_off=one.is_off,
        through=through,
        outside=one.outside,
        has_other_feed=any(edge.ref != one.part.ref for edge in levels.feeds_of(output_group or "")),
        why_open=tuple(dict.fromkeys((*one.trouble, *why_set, *why_in, *why_out))),
    )


def _vin(
    power: Power,
    levels: Levels,
    one: Trace,
    group: str | None,
    ground: str | None,
    settings: Settings,
) -> tuple[Evidence | None, tuple[str, ...]]:
    statement = settings.parts.get(one.part.ref)
    if statement is not None and statement.vin is not None:
        return statement.vin, ()
    if one.is_off:
        return None, ()
    if group is None:
        return None, () if one.trouble else ("no input found behind its pins",)
    if one.channel.topology is Topology.POWER_MUX and len(one.inputs) > 1:
        several = [levels.of.get(power.mesh.groups.of(net)) for net in one.inputs]
        known = [volts for volts in several if volts is not None]
        if len(known) < len(several):
            return None, ("voltage of one of its inputs not known",)
        first, *others = known
        for other in others:
            first = _hull(first, other)
        return first, ()
    volts = levels.of.get(group) if group not in power.ground else GROUND
    if volts is None:
        return None, (f"input voltage not known: {levels.why(group)}",)
    if ground is None or ground in power.ground or one.channel.topology is Topology.SHUNT:
        return volts, ()
    below = levels.of.get(ground)
    if below is None:
        return None, (f"voltage at its ground pin not known: {levels.why(ground)}",)
    return (
        Evidence(
            "input voltage",
            volts.span - below.span,
            "V",
            f"{one.part.ref} between its input and ground pins",
            Grade.DERIVED,
            f"{volts.span.nominal:.4g} V - ({below.span.nominal:.4g} V)",
            (volts, below),
        ),
        (),
    )


def _hull(one: Evidence, other: Evidence) -> Evidence:
    return Evidence(
        "input voltage", Span.hull(one.span, other.span), "V", "span over its inputs", Grade.DERIVED, "", (one, other)
    )


def _vout(levels: Levels, one: Trace, group: str | None) -> tuple[Evidence | None, tuple[str, ...]]:
    if one.is_off:
        return None, ()
    if one.channel.topology in PASSAGES:
        volts = levels.of.get(group) if group else None
        return volts, () if volts else ("output voltage not known",)
    own, why, _ = levels.outputs[(one.part.key, one.channel.name)]
    if own is not None:
        return own, ()
    volts = levels.of.get(group) if group else None
    if volts is None:
        return None, tuple(f"output voltage not known: {text}" for text in why) or ("output voltage not known",)
    return volts, ()
