"""What a budget is made of: each part's case from wiring, loads, figures and settings, and what it lacks."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from analyzer.circuit import Circuit
from analyzer.evidence import Evidence, Grade
from analyzer.findings.base import Finding, Weight
from analyzer.findings.statements import may_be_anyones
from analyzer.heat.altitude import EXPONENTS, HIGHEST, multiplier
from analyzer.heat.case import Case, ChannelCase
from analyzer.heat.limits import Limits, limits_of
from analyzer.heat.path import ThermalPath, thermal_path
from analyzer.load import Loads, RailLoad
from analyzer.losses import model_of
from analyzer.losses.buck import is_inverting
from analyzer.part import Part
from analyzer.quantity import ZERO, Span
from analyzer.rail import Rails, Wiring
from analyzer.rule import LINEARS, Rulebook, Topology
from analyzer.settings import PartStatement, Settings, Site
from analyzer.wording import show

NOTHING_STATED = PartStatement()

USUAL_DROPOUT = 2.0
"""Dropout [V] that bipolar three-terminal regulators need at their rated current (common practice)."""

_KEEP_SIGN = LINEARS | {Topology.BUCK, Topology.BOOST, Topology.SHUNT, Topology.CHARGER, Topology.LOAD_SWITCH}


@dataclass(frozen=True)
class Draft:
    """One part's budget before it is worked out.

    Attributes:
        part: The part.
        stated: What the settings say of it.
        wirings: Its channels, in the rule's order.
        loads: Load of each channel's output rail, None where there is none.
        case: Its case; without channels if no channel's losses can be worked out.
        limits: Junction limits, None if unknown.
        missing: What is missing, one line each.
        evidence: Every number used.
        notes: Assumptions of the loss models.
        is_complete: False when a load is only a lower bound, or anything else its heat rests on is in doubt.
    """

    part: Part
    stated: PartStatement
    wirings: tuple[Wiring, ...]
    loads: tuple[RailLoad | None, ...]
    case: Case
    limits: Limits | None
    missing: tuple[str, ...]
    evidence: tuple[Evidence, ...]
    notes: tuple[str, ...] = ()
    findings: tuple[Finding, ...] = field(default=())
    is_complete: bool = True


def draft(
    part: Part,
    wirings: tuple[Wiring, ...],
    circuit: Circuit,
    rails: Rails,
    loads: Loads,
    rulebook: Rulebook,
    settings: Settings,
    known: Iterable[Finding],
    silent: Mapping[str, str] = MappingProxyType({}),
) -> Draft:
    """Gather one part's case."""
    stated = settings.parts.get(part.ref, NOTHING_STATED)
    missing: list[str] = []
    evidence: list[Evidence] = []
    notes: list[str] = []
    channels: list[ChannelCase] = []
    rail_loads: list[RailLoad | None] = []
    complete = True
    for wiring in wirings:
        load = loads.by_rail.get(wiring.output_rail) if wiring.output_rail else None
        rail_loads.append(load)
        if wiring.is_off:
            continue
        channel, lacks, used, more = _channel(wiring, load, _share(rails, wiring), silent)
        missing += lacks
        evidence += used
        notes += more
        complete = complete and not lacks
        if channel is not None:
            channels.append(channel)
    if wirings and all(wiring.is_off for wiring in wirings):
        missing.append("nothing to budget: every channel is strapped off")
    if not wirings:
        missing.append("wiring: no input or output was found")
    path = thermal_path(part, circuit, settings, stated, rulebook.packages)
    findings: tuple[Finding, ...] = ()
    if isinstance(path, str):
        missing.append(path)
    else:
        evidence += path.evidence
        findings += path.findings
    limits = limits_of(part, stated, settings.policy)
    if isinstance(limits, str):
        missing.append(limits)
    else:
        evidence.append(limits.evidence)
        findings += limits.findings
    evidence += site_evidence(settings.site)
    if settings.site.altitude.span.high > HIGHEST:
        missing.append("altitude: no correction is known above 11 km")
    doubts = _open_findings(part, wirings, circuit, known)
    missing += doubts
    return Draft(
        part,
        stated,
        wirings,
        tuple(rail_loads),
        Case(
            tuple(channels),
            path if isinstance(path, ThermalPath) else None,
            air(settings.site),
            thin_air(settings.site),
            limits.limit if isinstance(limits, Limits) else None,
            limits.tight_above if isinstance(limits, Limits) else None,
        ),
        limits if isinstance(limits, Limits) else None,
        tuple(dict.fromkeys(missing)),
        tuple(evidence),
        tuple(dict.fromkeys(notes)),
        findings,
        complete and not doubts,
    )


def site_evidence(site: Site) -> tuple[Evidence, ...]:
    """The surroundings as evidence."""
    return (site.ambient, site.enclosure_rise, site.altitude)


def air(site: Site) -> Span:
    """Air around the board before neighbours [°C]."""
    return site.ambient.span + site.enclosure_rise.span


def thin_air(site: Site) -> tuple[float, float]:
    """Altitude multiplier at the nominal and at the highest altitude."""
    exponent = site.altitude_exponent
    if exponent is None:
        # air that is stated to move is forced, whatever else was left at its default
        moving = site.cooling == "natural" and site.air_speed.span.high > 0
        exponent = EXPONENTS["forced" if moving else site.cooling]
    nominal, high = (min(metres, HIGHEST) for metres in (site.altitude.span.nominal, site.altitude.span.high))
    return multiplier(nominal, exponent), multiplier(high, exponent)


def _channel(
    wiring: Wiring, load: RailLoad | None, share: float, silent: Mapping[str, str]
) -> tuple[ChannelCase | None, list[str], list[Evidence], list[str]]:
    model = model_of(wiring)
    name = f"channel {wiring.channel.name}: " if wiring.channel.name else ""
    lacks = [name + what for what in model.missing]
    lacks += [name + why for why in wiring.why_open]
    evidence = [one for one in (wiring.vin, wiring.vout) if one is not None]
    evidence += model.used
    if wiring.vin is None:
        lacks.append(f"{name}input voltage")
    if wiring.vout is None:
        lacks.append(f"{name}output voltage")
    amps = ZERO
    if model.own_load is not None:
        amps = model.own_load.span
    elif load is None:
        lacks.append(f"{name}load: no output rail")
    else:
        amps = Span(*(max(0.0, corner * share) for corner in load.known.corners))
        evidence.append(load_evidence(load, amps, silent.get(load.rail, "")))
        if not load.is_complete:
            lacks.append(f"{name}load of {load.rail}: {_gap_words(load)}")
    lacks += [name + what for what in _doubts(wiring)]
    if model.missing or wiring.vin is None or wiring.vout is None:
        return None, lacks, evidence, list(model.notes)
    channel = ChannelCase(wiring, model, _magnitude(wiring.vin.span), _magnitude(wiring.vout.span), amps, load, share)
    return channel, lacks, evidence, list(model.notes)


def _doubts(wiring: Wiring) -> Iterator[str]:
    """What of a channel's voltages is not as its topology has it, so that its heat may be anything."""
    vin, vout, channel = wiring.vin, wiring.vout, wiring.channel
    if vin is None or vout is None:
        return
    if channel.topology in _KEEP_SIGN and vin.span.nominal * vout.span.nominal < 0 and not is_inverting(wiring):
        shown = f"{show(vin.span.nominal, 'V')} and {show(vout.span.nominal, 'V')}"
        yield f"input and output of opposite signs ({shown}), which a {channel.topology} part does not make"
    elif channel.topology in LINEARS and "dropout" not in channel.figures and "dropout" not in channel.curves:
        left = _magnitude(vin.span).low - _magnitude(vout.span).high
        if left < USUAL_DROPOUT:
            # a part that needs more drops more: then its heat is above (Vin − Vout) · I
            yield f"dropout (only {show(left, 'V')} left between lowest input and highest output)"


def load_evidence(load: RailLoad, amps: Span, silent: str = "") -> Evidence:
    """The load of a rail as evidence, with the draws it was summed from.

    Args:
        load: The rail's load.
        amps: What of it this part carries [A].
        silent: What hangs on the rail and was counted as taking none, "" if nothing: an assumption, so presumed.
    """
    refs = ", ".join(dict.fromkeys(draw.ref or "off-board" for draw in load.draws)) or "nothing"
    lower = "" if load.is_complete else "a lower bound: some parts' currents are missing"
    note = "; ".join(text for text in (lower, silent) if text)
    parents = tuple(draw.amps for draw in load.draws)
    grade = Grade.PRESUMED if silent else Grade.DERIVED
    return Evidence(f"load of {load.rail}", amps, "A", f"sum over {refs}", grade, parents=parents, note=note)


def _gap_words(load: RailLoad) -> str:
    refs = [gap.ref for gap in load.gaps]
    shown = ", ".join(refs[:6]) + (f" and {len(refs) - 6} more" if len(refs) > 6 else "")
    return f"no current known for {shown}"


def _magnitude(span: Span) -> Span:
    low, high = sorted((abs(span.low), abs(span.high)))
    if span.low < 0 < span.high:
        low = 0.0
    return Span(low, abs(span.nominal), high)


def _share(rails: Rails, wiring: Wiring) -> float:
    rail = rails.by_name.get(wiring.output_rail or "")
    for feed in rail.feeds if rail else ():
        if feed.ref == wiring.part.ref and feed.channel == wiring.channel.name:
            return feed.share
    return 1.0


def _open_findings(part: Part, wirings: tuple[Wiring, ...], circuit: Circuit, known: Iterable[Finding]) -> list[str]:
    """Open matters about this part or its rails keep its budget from being closed."""
    names = {part.ref} | {
        rail
        for one in wirings
        for rail in (one.input_rail, one.output_rail, one.control_rail, one.input_net, one.output_net)
        if rail
    }
    found = []
    for finding in known:
        mine = finding.key == part.key if finding.key else finding.subject in names or may_be_anyones(finding)
        if mine and finding.weight is Weight.OPEN:
            found.append(f"{finding.name}: {finding.message}")
    if not circuit.complete:
        found.append("part of the drawing could not be read")
    return found


def by_part(wirings: Iterable[Wiring]) -> Mapping[str, tuple[Wiring, ...]]:
    """Wirings by identity of their part."""
    found: dict[str, tuple[Wiring, ...]] = {}
    for wiring in wirings:
        found[wiring.part.key] = (*found.get(wiring.part.key, ()), wiring)
    return found
