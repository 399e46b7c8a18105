"""How one channel of a part is wired: from its pins to the nets where its input comes from and its output goes."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field, replace

from analyzer.circuit import Component, Pin, plain_name
from analyzer.component_value import component_value
from analyzer.evidence import Evidence, Grade
from analyzer.part import Channel, Part
from analyzer.quantity import Dimension, Span
from analyzer.rail import Outside
from analyzer.rails.kinds import Kind, value_of
from analyzer.rails.names import named_volts
from analyzer.rails.network import End, Resistance, network_at
from analyzer.rails.power import Power
from analyzer.rule import SWITCHERS, Role, Topology


@dataclass(frozen=True)
class Trace:
    """One channel's nets.

    Attributes:
        part, channel: What it is.
        inputs: Nets of its inputs; more than one for multiplexers.
        output: Net where its output is available, behind the inductor or diode.
        ground: Net of its ground pin.
        control: Net of its control supply.
        tap: Net of its feedback pin.
        outside: Parts of its power path.
        first: References of the parts between its own pin and `output`.
        sign: Sign of its output as wired: a shunt element with its cathode on ground makes a negative voltage.
        is_inverted: A converter whose ground pin is its (negative) output.
        is_off: Strapped off.
        trouble: What could not be found, one line each.
    """

    part: Part
    channel: Channel
    inputs: tuple[str, ...] = ()
    output: str | None = None
    ground: str | None = None
    control: str | None = None
    tap: str | None = None
    outside: tuple[Outside, ...] = ()
    first: tuple[str, ...] = ()
    sign: int = 1
    is_inverted: bool = False
    is_off: bool = False
    trouble: tuple[str, ...] = field(default=())


def trace(power: Power, part: Part, channel: Channel) -> Trace:
    """Trace one channel."""
    found = _trace(power, part, channel)
    if part.rule is None and found.sign < 0 and not found.is_inverted and found.output is not None:
        # without a rule the sign was read from words ("4.2V-18V"); a rail named with a plus knows better
        named = [volts for net in power.names(power.mesh.groups.of(found.output)) if (volts := named_volts(net))]
        if named and min(item.volts for item in named) > 0:
            return replace(found, sign=1)
    return found


def _trace(power: Power, part: Part, channel: Channel) -> Trace:
    of, ground = power.mesh.groups.of, power.ground
    grounds = channel.nets(Role.GROUND)
    at_ground = [net for net in grounds if of(net) in ground]
    inputs = channel.nets(Role.INPUT)
    # between a negative rail and ground, the positive side is the input
    is_lifted = bool(grounds) and not at_ground
    live = tuple(net for net in inputs if of(net) not in ground or is_lifted)
    found = Trace(
        part,
        channel,
        inputs=_ordered_inputs(power, part, channel, _one_each(power, live)) or inputs,
        ground=next(iter((*at_ground, *grounds)), None),
        control=next(iter(channel.nets(Role.BIAS)), None),
        tap=next(iter(channel.nets(Role.FEEDBACK)), None),
        sign=channel.sign,
        is_off=bool(inputs) and not live,
    )
    if channel.topology is Topology.SHUNT:
        return _shunt(power, found)
    if channel.topology is Topology.SERIES_DIODE:
        return _series_diode(power, found)
    if channel.topology in SWITCHERS and channel.topology is not Topology.MODULE:
        found = _switcher(power, found)
    else:
        found = replace(found, output=_output_pin(power, found), trouble=(*found.trouble, *_spread(power, found)))
    if found.output is None and not found.is_off:
        found = _by_feedback(power, found)
    if not found.inputs:
        found = replace(found, trouble=(*found.trouble, "no input pin found"))
    if found.output is None and not found.is_off:
        found = replace(found, trouble=(*found.trouble, "no output found behind its pins"))
    return found


def _ordered_inputs(power: Power, part: Part, channel: Channel, nets: tuple[str, ...]) -> tuple[str, ...]:
    """The power input first: pins of a control supply or an internal regulator's bypass come after it."""
    if len(nets) < 2 or channel.topology is Topology.POWER_MUX:
        return nets
    of = power.mesh.groups.of

    def rank(net: str) -> tuple[bool, bool]:
        names = {plain_name(pin.name).upper() for pin in part.component.pins if of(pin.net) == of(net)}
        kinds = power.mesh.joined.kinds
        fed = any(
            component.key != part.key and kinds[component.key] not in (Kind.CAPACITOR, Kind.TEST_POINT)
            for component, _ in power.mesh.pins(of(net))
        )
        return (not fed, not any(_POWER_INPUT.fullmatch(name) for name in names))

    return tuple(sorted(nets, key=rank))


_POWER_INPUT = re.compile(r"\+?P?_?V?_?INP?_?\d*\+?|V?BAT\w*|VI|PWR_?IN|INP")


def _one_each(power: Power, nets: tuple[str, ...]) -> tuple[str, ...]:
    """One net per group, in pin order."""
    found: dict[str, str] = {}
    for net in nets:
        found.setdefault(power.mesh.groups.of(net), net)
    return tuple(found.values())


def _output_pin(power: Power, found: Trace) -> str | None:
    """Net of the output pins, unconnected ones and those strapped to ground left out."""
    nets = found.channel.nets(Role.OUTPUT)
    wired = [
        net for net in nets if len(power.mesh.members.get(power.mesh.groups.of(net), ())) > 1 or _is_wired(power, net)
    ]
    live = [net for net in wired if power.mesh.groups.of(net) not in power.ground or found.channel.sign < 0]
    return next(iter((*live, *wired)), None)


def _spread(power: Power, found: Trace) -> tuple[str, ...]:
    """What one channel cannot be: pins of its output, or of its power input, on several live rails.

    The load or the voltage of all but one would be in no budget.
    """
    of, rails = power.mesh.groups.of, power.rails - power.ground
    pins = found.channel.pins
    outputs = [pin.net for pin in pins.get(Role.OUTPUT, ()) if of(pin.net) in rails]
    inputs = [
        pin.net
        for pin in pins.get(Role.INPUT, ())
        if of(pin.net) in rails and _POWER_INPUT.fullmatch(plain_name(pin.name).upper())
    ]
    if found.channel.topology is Topology.POWER_MUX:
        inputs = []
    return tuple(
        f"{what} pins on several rails: {', '.join(nets)}"
        for what, nets in (("output", _one_each(power, tuple(outputs))), ("input", _one_each(power, tuple(inputs))))
        if len(nets) > 1
    )


def _is_wired(power: Power, net: str) -> bool:
    return len(power.mesh.circuit.net_by_name[net].pins) > 1 if net in power.mesh.circuit.net_by_name else False


def _switch_groups(power: Power, channel: Channel) -> tuple[str, ...]:
    of = power.mesh.groups.of
    nets = channel.nets(Role.SWITCH) or tuple(
        net for net in channel.nets(Role.OUTPUT) if of(net) in power.mesh.joined.pulsed
    )
    return tuple(dict.fromkeys(of(net) for net in nets))


def _inductors(power: Power, group: str) -> Iterator[tuple[Component, str]]:
    """Fitted inductors at a switch node with the net at their far end."""
    seen: set[str] = set()
    for component, pin in power.mesh.pins(group):
        kind = power.mesh.joined.kinds[component.key]
        if kind not in (Kind.INDUCTOR, Kind.BEAD, Kind.CHOKE) or not component.fitted or component.key in seen:
            continue
        seen.add(component.key)
        far = _far_end(power, component, pin, group)
        if far is not None:
            yield component, far


def _far_end(power: Power, component: Component, pin: Pin, group: str) -> str | None:
    others = [other.net for other in component.pins if power.mesh.groups.of(other.net) != group]
    if len(component.pins) > 2 and power.mesh.joined.kinds[component.key] is Kind.CHOKE:
        partner = {"1": "2", "2": "1", "3": "4", "4": "3"}.get(pin.number)
        others = [other.net for other in component.pins if other.number == partner] or others
    return others[0] if others else None


def _diodes(power: Power, group: str) -> Iterator[tuple[Component, str, bool]]:
    """Fitted diodes at a group: (part, far net, whether it conducts away from the group)."""
    for component, pin in power.mesh.pins(group):
        if power.mesh.joined.kinds[component.key] is Kind.DIODE and component.fitted:
            end = diode_end(pin)
            for other in component.pins:
                if end and diode_end(other) not in (end, "") and power.mesh.groups.of(other.net) != group:
                    yield component, other.net, end == "A"


def diode_end(pin: Pin) -> str:
    """Which end of a diode a pin is, "A" or "K": by name, else by KiCad's numbers (1 is the cathode); "" for others."""
    name = plain_name(pin.name).upper()
    if name[:1] in ("A", "K") and (len(name) <= 2 or name in ("ANODE", "KATHODE")):
        return name[0]
    if name in ("C", "CATHODE", "-"):
        return "K"
    if name == "+":
        return "A"
    if name in ("", "~", pin.number):
        return {"1": "K", "2": "A", "K": "K", "A": "A"}.get(pin.number.upper(), "")
    return ""


def _series_resistance(branch: Resistance) -> Evidence:
    grade = Grade.DERIVED if branch.tolerance_stated else Grade.PRESUMED
    note = "" if branch.tolerance_stated else "tolerance presumed"
    return Evidence("series resistor", branch.span, "Ω", f"{branch.ref} Value '{branch.text}'", grade, note=note)


def _outside_inductor(component: Component) -> Outside:
    at_most = False
    value = value_of(component)
    ohms, source = (value.dcr, f"Value '{component.value}'") if value is not None else (None, "")
    for name in sorted(component.fields):
        if ohms is None and _DCR_FIELD.fullmatch(name.strip()):
            stated = component_value(component.fields[name])
            if stated is not None and stated.dimension is Dimension.RESISTANCE:
                ohms, source = stated.magnitude, f"field {name} '{component.fields[name]}'"
                at_most = "max" in name.casefold()
    resistance = None
    if ohms is not None:
        where = f"{component.ref} {source}"
        # a greatest resistance says nothing of the least, and only the least is surely lost outside the part
        span = Span(0.0, ohms, ohms) if at_most else Span.exact(ohms)
        resistance = Evidence("inductor resistance", span, "Ω", where, Grade.DERIVED)
    return Outside(component.ref, "inductor", resistance)


_DCR_FIELD = re.compile(r"DCR(?:\s*\(?(?:max|typ)\)?)?|DC[ _-]?R(?:esistance)?", re.IGNORECASE)


def _switcher(power: Power, found: Trace) -> Trace:
    topology = found.channel.topology
    switches = _switch_groups(power, found.channel)
    coils = [(coil, far, group) for group in switches for coil, far in _inductors(power, group)]
    outside = tuple(dict.fromkeys(_outside_inductor(coil) for coil, _, _ in coils))
    found = replace(found, outside=outside)
    if topology is Topology.CONTROLLER:
        found = _controller(power, found)
        if found.output is not None:
            return found
        switches = switches or _switch_groups(power, found.channel)
    if topology is Topology.BOOST:
        return _boost(power, found, switches, coils)
    if topology is Topology.BUCK_BOOST:
        return replace(found, output=_output_pin(power, found))
    return _buck_or_inverting(power, found, switches, coils)


def _buck_or_inverting(
    power: Power, found: Trace, switches: tuple[str, ...], coils: list[tuple[Component, str, str]]
) -> Trace:
    of = power.mesh.groups.of
    rectifiers = [(diode, far, away) for group in switches for diode, far, away in _diodes(power, group)]
    found = replace(found, outside=(*found.outside, *(Outside(diode.ref, "diode") for diode, _, _ in rectifiers)))
    live = [(coil, far) for coil, far, _ in coils if of(far) not in power.ground and of(far) not in switches]
    to_ground = [(coil, far) for coil, far, _ in coils if of(far) in power.ground]
    if found.channel.topology is Topology.INVERTING or (to_ground and not live):
        own = found.ground
        if own is not None and of(own) not in power.ground:
            # the chip's ground pin is the negative output; the inductor returns to the board's ground
            return replace(found, output=own, is_inverted=True, first=tuple(coil.ref for coil, _ in to_ground[:1]))
        negative = [(diode, far) for diode, far, away in rectifiers if not away and of(far) not in power.ground]
        if negative:
            return replace(found, output=negative[0][1], first=(negative[0][0].ref,))
        return replace(found, output=_output_pin_not(power, found, switches))
    if live:
        coil, far = live[0]
        return replace(found, output=far, first=(coil.ref,))
    return replace(found, output=_output_pin_not(power, found, switches))


def _output_pin_not(power: Power, found: Trace, switches: tuple[str, ...]) -> str | None:
    net = _output_pin(power, found)
    return None if net is None or power.mesh.groups.of(net) in switches else net


def _boost(power: Power, found: Trace, switches: tuple[str, ...], coils: list[tuple[Component, str, str]]) -> Trace:
    of = power.mesh.groups.of
    entry = [far for _, far, _ in coils if of(far) not in power.ground and of(far) not in switches]
    inputs = tuple(dict.fromkeys(entry)) or found.inputs
    output = _output_pin_not(power, found, switches)
    rectifiers = [(diode, far) for group in switches for diode, far, away in _diodes(power, group) if away]
    rectifiers = [(diode, far) for diode, far in rectifiers if of(far) not in power.ground]
    found = replace(found, inputs=inputs[:1], is_off=found.is_off and not entry)
    if rectifiers and (output is None or of(output) == of(rectifiers[0][1])):
        diode, far = rectifiers[0]
        return replace(found, output=far, first=(diode.ref,), outside=(*found.outside, Outside(diode.ref, "diode")))
    return replace(found, output=output)


def _controller(power: Power, found: Trace) -> Trace:
    """External transistors: those whose gate the part reaches, directly or through one resistor."""
    of = power.mesh.groups.of
    own = {of(pin.net) for pin in found.part.component.pins} - power.ground - power.rails
    reach = own | {far for group in own for _, _, far in power.mesh.by_group.get(group, ())}
    transistors: list[Component] = []
    for group in sorted(reach - power.ground - power.rails):
        for component, pin in power.mesh.pins(group):
            gate = plain_name(pin.name).upper() in ("G", "GATE", "B", "BASE", "G1", "G2")
            if power.mesh.joined.kinds[component.key] is Kind.TRANSISTOR and gate and component.fitted:
                transistors.append(component)
    transistors = list({component.key: component for component in transistors}.values())
    outside = tuple(Outside(component.ref, "transistor") for component in transistors)
    switches = _switch_groups(power, found.channel)
    channel_groups = [
        of(pin.net)
        for component in transistors
        for pin in component.pins
        if plain_name(pin.name).upper() not in ("G", "B")
    ]
    nodes = switches or tuple(group for group in dict.fromkeys(channel_groups) if group in power.mesh.joined.pulsed)
    coils = [(coil, far) for group in nodes for coil, far in _inductors(power, group) if of(far) not in power.ground]
    supplies = [
        pin.net
        for component in transistors
        for pin in component.pins
        if of(pin.net) in power.rails and of(pin.net) not in {of(far) for _, far in coils}
    ]
    found = replace(
        found,
        outside=(*found.outside, *(_outside_inductor(coil) for coil, _ in coils), *outside),
        inputs=_one_each(power, tuple(supplies)) or found.inputs,
    )
    found = replace(found, outside=tuple(dict.fromkeys(found.outside)))
    return replace(found, output=coils[0][1], first=(coils[0][0].ref,)) if coils else found


def _by_feedback(power: Power, found: Trace) -> Trace:
    """The output is where the feedback divider comes from, when no pin leads there."""
    if found.tap is None:
        return found
    of = power.mesh.groups.of
    tap = of(found.tap)
    ground = of(found.ground) if found.ground else None
    inputs = {of(net) for net in found.inputs}
    if tap in power.rails and tap not in inputs:
        return replace(found, output=found.tap)
    network = network_at(power.mesh, tap, ground, frozenset(), power.is_rail, found.part.key)
    candidates = [leg.group for leg in network.legs_of(End.RAIL) if leg.group not in inputs]
    if len(candidates) == 1:
        return replace(found, output=power.mesh.members[candidates[0]][0])
    return found


def _series_diode(power: Power, found: Trace) -> Trace:
    """A rectifier with a rule: on a negative rail the supplying side is its cathode."""
    output = _output_pin(power, found)
    of = power.mesh.groups.of
    ends = [net for net in (*found.inputs[:1], output) if net is not None]
    if len(ends) == 2 and any(power.is_named_negative(of(net)) for net in ends):
        return replace(found, inputs=(ends[1],), output=ends[0])
    return replace(found, output=output)


def _shunt(power: Power, found: Trace) -> Trace:
    """A shunt regulator: its output is its live pin, its input lies behind the series resistor."""
    of = power.mesh.groups.of
    pins = [pin for role in (Role.INPUT, Role.OUTPUT, Role.GROUND) for pin in found.channel.pins.get(role, ())]
    pins = pins or [pin for pin in found.part.component.pins if diode_end(pin)]
    live = [pin for pin in pins if of(pin.net) not in power.ground]
    if not live:
        return replace(found, is_off=True)
    output = live[0].net
    cathode_on_ground = any(diode_end(pin) == "K" and of(pin.net) in power.ground for pin in found.part.component.pins)
    sign = -1 if cathode_on_ground or power.is_named_negative(of(output)) else found.sign
    feeding: dict[str, list[Outside]] = {}
    for component, _, far in power.mesh.by_group.get(of(output), ()):
        branch = power.mesh.resistance(component, of(output), far)
        if branch and (far in power.rails or power.is_entry(far)) and far not in power.ground:
            feeding.setdefault(far, []).append(Outside(component.ref, "resistor", _series_resistance(branch)))
    # what several supplies feed through resistors of their own has no one input that the heat follows from
    best = next(iter(feeding)) if len(feeding) == 1 else None
    series = feeding[best] if best else []
    inputs = (power.mesh.members[best][0],) if best else ()
    trouble = () if best else ("fed from several nets" if feeding else "no series resistor to a supply found",)
    return replace(
        found,
        inputs=inputs,
        output=output,
        first=tuple(part.ref for part in series),
        outside=(*found.outside, *series),
        sign=sign,
        is_off=False,
        trouble=trouble,
    )
