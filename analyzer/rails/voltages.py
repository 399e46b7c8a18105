"""Output voltage of one channel: stated, ruled, solved from its feedback network, or passed on less a drop."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from analyzer.circuit import plain_name
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import ZERO, Span
from analyzer.rails.feedback import Drive, divider_evidence, solve_feedback
from analyzer.rails.ground import is_ground_pin
from analyzer.rails.names import named_volts
from analyzer.rails.network import End, Leg, Network, network_at
from analyzer.rails.power import Power
from analyzer.rails.programming import set_resistance
from analyzer.rails.reference_text import reference_from_text
from analyzer.rails.wiring import Trace
from analyzer.rule import LINEARS, Role, Topology
from analyzer.settings import Settings

Known = Callable[[str], Evidence | None]


def network_of(power: Power, trace: Trace) -> Network | None:
    """The network at a channel's feedback pin, seen from its own ground; None if there is nothing to solve."""
    tap_net = trace.tap
    if tap_net is None or trace.output is None:
        return None
    of = power.mesh.groups.of
    tap, output = of(tap_net), of(trace.output)
    if tap == output or tap in power.ground:
        return None
    ground = of(trace.ground) if trace.ground else None
    outputs = frozenset([output])
    if trace.is_inverted:
        # seen from the chip, its ground pin is zero and the board's ground is its output
        network = network_at(power.mesh, tap, ground, power.ground, power.is_rail, trace.part.key)
        legs = {
            group: Leg(
                group, End.GROUND if group == ground else End.OUTPUT if group in power.ground else leg.end, leg.ref
            )
            for group, leg in network.legs.items()
        }
        return replace(network, legs=legs)
    network = network_at(power.mesh, tap, ground, outputs, power.is_rail, trace.part.key)
    rails = network.legs_of(End.RAIL)
    if not network.legs_of(End.OUTPUT) and len(rails) == 1:
        # remote sense behind a switch: the divider regulates that rail
        legs = {**network.legs, rails[0].group: Leg(rails[0].group, End.OUTPUT)}
        return replace(network, legs=legs)
    return network


def supplies_of_drivers(power: Power, network: Network) -> dict[str, tuple[str, ...]]:
    """For each driven leg, the groups that supply its driver; for each rail leg, the rail itself."""
    found: dict[str, tuple[str, ...]] = {leg.group: (leg.group,) for leg in network.legs_of(End.RAIL)}
    for leg in network.legs_of(End.DRIVEN):
        drivers = power.mesh.circuit.by_ref.get(leg.ref, ())
        groups = dict.fromkeys(
            power.mesh.groups.of(pin.net)
            for component in drivers
            for pin in component.pins
            if pin.kind == "power_in"
            and not is_ground_pin(pin.name)
            and power.mesh.groups.of(pin.net) not in power.ground
        )
        found[leg.group] = tuple(groups)
    return found


def depends_on(power: Power, trace: Trace, network: Network | None) -> frozenset[str]:
    """Groups whose voltage the channel's own output voltage depends on."""
    if trace.channel.topology is Topology.CHARGE_PUMP and trace.channel.volts is None:
        return frozenset(power.mesh.groups.of(net) for net in trace.inputs)
    ground = _lifted_ground(power, trace)
    lifted = frozenset([ground] if ground is not None else [])
    if network is None or trace.channel.volts is not None:
        return lifted
    return lifted | {group for groups in supplies_of_drivers(power, network).values() for group in groups}


def _lifted_ground(power: Power, trace: Trace) -> str | None:
    """Group of a ground pin that is neither board ground nor the part's own output; None for all ordinary parts."""
    if trace.ground is None or trace.is_inverted or trace.channel.topology is Topology.SHUNT:
        return None
    group = power.mesh.groups.of(trace.ground)
    return None if group in power.ground else group


def channel_volts(
    power: Power, trace: Trace, network: Network | None, known: Known, settings: Settings
) -> tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]:
    """Output voltage of a regulating channel relative to board ground.

    Returns:
        The voltage or None; why it is not known; what makes it adjustable.
    """
    stated = settings.parts.get(trace.part.ref)
    if stated is not None and stated.vout is not None:
        return stated.vout, (), ()
    own, why, reasons = _above_own_ground(power, trace, network, known, settings)
    ground = _lifted_ground(power, trace)
    if own is None or ground is None:
        return own, why, reasons
    below = known(ground)
    if below is None:
        return None, ("voltage at its ground pin not known",), ()
    lifted = Evidence(
        own.quantity,
        own.span + below.span,
        "V",
        f"{trace.part.ref} above its ground pin",
        Grade.DERIVED,
        f"{own.span.nominal:.4g} V + ({below.span.nominal:.4g} V)",
        (own, below),
        own.note,
    )
    return lifted, why, reasons


def _above_own_ground(
    power: Power, trace: Trace, network: Network | None, known: Known, settings: Settings
) -> tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]:
    channel = trace.channel
    figures = channel.figures
    if channel.volts is not None:
        return _signed(_with_tolerance(channel.volts, figures.get("output_tolerance")), _sign_of(trace)), (), ()
    if Role.SET in channel.pins and "set_current" in figures:
        return _by_set_current(power, trace, settings)
    if channel.topology is Topology.CHARGE_PUMP and "gain" in figures and trace.tap is None:
        return _by_gain(trace, figures["gain"], known(power.mesh.groups.of(trace.inputs[0])) if trace.inputs else None)
    if trace.tap is None:
        return None, ("its output voltage is neither in its name nor set by a feedback pin",), ()
    reference = (
        channel.reference or figures.get("reference") or reference_from_text(power.mesh.circuit, trace.part.component)
    )
    if reference is None:
        return None, ("reference voltage of the feedback pin not known",), ()
    reference = _with_tolerance(reference, figures.get("output_tolerance"))
    of = power.mesh.groups.of
    if network is None:
        if trace.output is not None and of(trace.tap) == of(trace.output):
            return _unity(power, trace, reference)
        return (
            None,
            ("feedback pin is on ground" if of(trace.tap) in power.ground else "no output found to regulate",),
            (),
        )
    return _by_network(power, trace, network, reference, known, settings)


def _sign_of(trace: Trace) -> int:
    return -1 if trace.is_inverted else trace.sign


def _signed(evidence: Evidence, sign: int) -> Evidence:
    if (evidence.span.nominal < 0) == (sign < 0):
        return evidence
    return replace(evidence, span=-evidence.span)


def _with_tolerance(evidence: Evidence, tolerance: Evidence | None) -> Evidence:
    if tolerance is None or not evidence.span.is_exact:
        return evidence
    return Evidence(
        evidence.quantity,
        Span.around(evidence.span.nominal, tolerance.span.high),
        evidence.unit,
        evidence.source,
        evidence.grade,
        f"{evidence.span.nominal:g} V ±{tolerance.span.high * 100:g} %",
        (evidence, tolerance),
        evidence.note,
    )


def _unity(power: Power, trace: Trace, reference: Evidence) -> tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]:
    """Feedback wired to the output: the reference itself, unless the rail's name says the part is a fixed version."""
    from analyzer.rails.supplies import volts_by_name

    output = power.mesh.groups.of(trace.output or "")
    for net in power.names(output):
        named = volts_by_name(net)
        if named is not None and abs(named.span.nominal) > 1.3 * abs(reference.span.nominal):
            return (
                None,
                (f"feedback is wired to the output, so it is a fixed version; its voltage is not known ({net})",),
                (),
            )
    span = reference.span if trace.sign > 0 or reference.span.nominal < 0 else -reference.span
    evidence = Evidence(
        "output voltage",
        span,
        "V",
        f"{trace.part.ref} feedback wired to its output",
        Grade.DERIVED,
        "output = reference",
        (reference,),
    )
    return evidence, (), ()


def _by_network(
    power: Power, trace: Trace, network: Network, reference: Evidence, known: Known, settings: Settings
) -> tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]:
    drives: dict[str, Drive] = {}
    for group, supplies in supplies_of_drivers(power, network).items():
        leg = network.legs[group]
        levels = [level for supply in supplies if (level := known(supply))]
        if leg.end is End.RAIL and levels:
            drives[group] = Drive(levels[0].span, "")
        elif levels:
            low = min(0.0, *(level.span.low for level in levels))
            high = max(0.0, *(level.span.high for level in levels))
            middle = (
                min(0.0, *(level.span.nominal for level in levels))
                + max(0.0, *(level.span.nominal for level in levels))
            ) / 2
            name = _driver_name(power, leg)
            drives[group] = Drive(
                Span(low, middle, high), f"{name} drives the feedback network with {low:.3g} to {high:.3g} V"
            )
    sign = trace.sign if not trace.is_inverted else 1
    span = reference.span if sign > 0 or reference.span.nominal < 0 else -reference.span
    current = trace.channel.figures.get("feedback_current")
    solved = solve_feedback(network, span, current.span if current else ZERO, across=_across(trace), drives=drives)
    if solved.volts is None:
        return None, solved.trouble, ()
    against = _against_name(power, trace, solved.volts) if reference.grade is Grade.PRESUMED else ""
    if against:
        return None, (f"with {reference.span.nominal:g} V from {reference.source} the divider gives {against}",), ()
    evidence = divider_evidence(
        solved, reference, current, f"{trace.part.ref} feedback network", settings.resistor_tolerance
    )
    if trace.is_inverted:
        evidence = replace(evidence, span=-evidence.span, note=_join(evidence.note, "wired as inverter"))
    return evidence, (), solved.reasons


def _across(trace: Trace) -> str:
    """Side of the divider the reference is across: without a ground pin it can only be the upper one."""
    channel = trace.channel
    if channel.topology is Topology.LINEAR_FLOATING or (
        channel.topology in LINEARS and Role.GROUND not in channel.pins
    ):
        return "upper"
    return channel.reference_across


def _against_name(power: Power, trace: Trace, volts: Span) -> str:
    """What speaks against a voltage that rests on a presumed reference: a rail name that is far from it."""
    for net in power.names(power.mesh.groups.of(trace.output or "")):
        named = named_volts(net)
        if named is not None and not min(0.75 * named.volts, 1.3 * named.volts) <= volts.nominal <= max(
            0.75 * named.volts, 1.3 * named.volts
        ):
            return f"{volts.nominal:.3g} V, but the rail's name says {named.volts:g} V"
    return ""


def _driver_name(power: Power, leg: Leg) -> str:
    value = next((component.value for component in power.mesh.circuit.by_ref.get(leg.ref, ())), "")
    return f"{leg.ref} ({plain_name(value)})" if value else leg.ref


def _by_gain(
    trace: Trace, gain: Evidence, vin: Evidence | None
) -> tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]:
    if vin is None:
        return None, ("a charge pump's output follows its input, which is not known",), ()
    factor = gain.span.nominal * (-1 if trace.sign < 0 and gain.span.nominal > 0 else 1)
    span = vin.span.scaled(factor)
    evidence = Evidence(
        "output voltage",
        span,
        "V",
        f"{trace.part.ref} gain",
        Grade.DERIVED,
        f"{factor:g} · input voltage",
        (vin, gain),
        "without load: the output falls with the load current",
    )
    return evidence, (), ()


def _by_set_current(
    power: Power, trace: Trace, settings: Settings
) -> tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]:
    """A current from the SET pin through its resistance to ground is the output voltage."""
    ohms, why = set_resistance(power, trace, settings)
    if ohms is None:
        return None, why, ()
    current = trace.channel.figures["set_current"]
    span = Span(*(amps * each for amps, each in zip(current.span.corners, ohms.span.corners, strict=True)))
    evidence = Evidence(
        "output voltage",
        span,
        "V",
        ohms.source,
        Grade.DERIVED,
        f"{current.span.nominal:g} A · {ohms.span.nominal:g} Ω",
        (current, *ohms.parents),
    )
    return evidence, (), ()


def _join(*texts: str) -> str:
    return "; ".join(text for text in texts if text)
