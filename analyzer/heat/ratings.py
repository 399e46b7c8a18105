"""Checks of one worked case against ratings, dropout and limits: the findings that its verdict is made of."""

from __future__ import annotations

from collections.abc import Iterator

from analyzer.evidence import Evidence, Grade
from analyzer.findings import heat as kinds
from analyzer.findings.base import Finding
from analyzer.heat.altitude import UNCHECKED_ABOVE
from analyzer.heat.case import ChannelCase, Worked
from analyzer.heat.draft import Draft
from analyzer.heat.limits import least
from analyzer.losses.base import End, Point
from analyzer.losses.dispatch import HOT_CELSIUS
from analyzer.losses.linear import short_circuit_heat
from analyzer.rule import LINEARS, Topology
from analyzer.settings import Policy, Settings
from analyzer.wording import show


def junction_findings(draft: Draft, worst: Worked, policy: Policy) -> Iterator[Finding]:
    """The junction against both limits."""
    part, limits = draft.part, draft.limits
    if worst.runs_away:
        message = "no temperature is found at which the part comes to rest"
        yield kinds.RUNAWAY.found(part.ref, message, key=part.key)
        return
    if limits is None or worst.junction is None:
        return
    shown = f"junction {show(worst.junction, '°C')} at the worst corner"
    if worst.junction > limits.data_sheet:
        message = f"{shown}, the data sheet allows {show(limits.data_sheet, '°C')}"
        yield kinds.JUNCTION_OVER_RATING.found(part.ref, message, limits.evidence.source, key=part.key)
    elif worst.junction > limits.policy:
        message = f"{shown}, policy {policy.name} allows {show(limits.policy, '°C')}"
        yield kinds.JUNCTION_OVER_POLICY.found(part.ref, message, policy.source, key=part.key)
    elif worst.junction > limits.tight_above:
        message = f"{shown}, less than the required margin below {show(limits.data_sheet, '°C')}"
        yield kinds.JUNCTION_TIGHT.found(part.ref, message, policy.source, key=part.key)


def rated_current(one: ChannelCase, policy: Policy) -> float | None:
    """Greatest load [A] inside the rated output current and the policy's fraction of it; None without a rating."""
    rating = one.wiring.channel.figures.get("output_current_max")
    return None if rating is None else rating.span.low * policy.current_fraction


def rated_input(one: ChannelCase, policy: Policy) -> float | None:
    """Greatest magnitude of the input voltage [V] inside every rating of the channel; None without any."""
    figures = one.wiring.channel.figures
    ends = []
    if "input_max" in figures:
        ends.append(abs(figures["input_max"].span.low))
    if "input_absolute_max" in figures:
        ends.append(abs(figures["input_absolute_max"].span.low) * policy.input_fraction)
    if "differential_max" in figures:
        ends.append(abs(figures["differential_max"].span.low) + one.vout.low)
    return min(ends, default=None)


def electrical_findings(draft: Draft, policy: Policy) -> Iterator[Finding]:
    """Input voltage, output current, dropout, power and short circuit of every channel."""
    for one in draft.case.channels:
        yield from _input(draft, one, policy)
        yield from _current(draft, one, policy)
        yield from _dropout(draft, one)
        yield from _short(draft, one)
        yield from _unrated(draft, one)


def _input(draft: Draft, one: ChannelCase, policy: Policy) -> Iterator[Finding]:
    part, figures = draft.part, one.wiring.channel.figures
    vin = one.vin.high
    for key, word, value, middle in (
        ("input_max", "input voltage", vin, one.vin.nominal),
        ("input_absolute_max", "input voltage", vin, one.vin.nominal),
        ("differential_max", "input-output difference", vin - one.vout.low, one.vin.nominal - one.vout.nominal),
    ):
        rating = figures.get(key)
        if rating is None:
            continue
        rated = abs(rating.span.low)
        shown = f"{word} up to {show(value, 'V')}, rated {show(rated, 'V')}"
        if value > rated and middle <= rated and _is_presumed(one):
            yield kinds.INPUT_DOUBTFUL.found(part.ref, shown, rating.source, key=part.key)
        elif value > rated:
            yield kinds.INPUT_OVER_RATING.found(part.ref, shown, rating.source, key=part.key)
            return
        elif key == "input_absolute_max" and value > rated * policy.input_fraction:
            message = f"{shown}; policy {policy.name} allows {policy.input_fraction:.0%} of it"
            yield kinds.INPUT_OVER_POLICY.found(part.ref, message, policy.source, key=part.key)


def _current(draft: Draft, one: ChannelCase, policy: Policy) -> Iterator[Finding]:
    part, rating = draft.part, one.wiring.channel.figures.get("output_current_max")
    word, load = _carried(one)
    if rating is not None:
        rated = rating.span.low
        shown = f"{word} up to {show(load, 'A')}, rated {show(rated, 'A')}"
        if load > rated:
            yield kinds.CURRENT_OVER_RATING.found(part.ref, shown, rating.source, key=part.key)
        elif load > rated * policy.current_fraction:
            message = f"{shown}; policy {policy.name} allows {policy.current_fraction:.0%} of it"
            yield kinds.CURRENT_OVER_POLICY.found(part.ref, message, policy.source, key=part.key)
    stops = one.wiring.channel.figures.get("current_limit")
    if stops is not None and load > stops.span.low and (rating is None or load <= rating.span.low):
        shown = f"{word} up to {show(load, 'A')}, its current limit may hold at {show(stops.span.low, 'A')}"
        yield kinds.CURRENT_OVER_RATING.found(part.ref, shown, stops.source, key=part.key)
    least = one.wiring.channel.figures.get("minimum_load")
    if least is not None and draft.is_complete and one.load.low < least.span.high:
        message = f"load down to {show(one.load.low, 'A')}, the part needs {show(least.span.high, 'A')} to regulate"
        yield kinds.MINIMUM_LOAD.found(part.ref, message, least.source, key=part.key)


def _carried(one: ChannelCase) -> tuple[str, float]:
    """What a current rating is about, and how much that is at most [A]: a shunt carries what the load leaves."""
    if one.wiring.channel.topology is not Topology.SHUNT:
        return "load", one.load.high
    fed = one.model.at(Point(one.vin.high, one.vout.low, one.load.low), End.SEVERE).iin
    return "current of the element", max(0.0, fed - one.load.low)


def _unrated(draft: Draft, one: ChannelCase) -> Iterator[Finding]:
    """Ratings that no rule gives, so that nothing was compared with them."""
    figures, part = one.wiring.channel.figures, draft.part
    lacks = []
    if not {"input_max", "input_absolute_max", "differential_max"} & figures.keys():
        lacks.append("input voltage")
    if "output_current_max" not in figures:
        lacks.append("output current")
    if lacks:
        name = f" of channel {one.name}" if one.name else ""
        yield kinds.NOT_RATED.found(part.ref, f"rated {' and '.join(lacks)}{name} not known", key=part.key)


def _dropout(draft: Draft, one: ChannelCase) -> Iterator[Finding]:
    """Whether the output is kept at the corner where it is lost first."""
    part, topology = draft.part, one.wiring.channel.topology
    message = _linear_lost(one) if topology in LINEARS else _converter_lost(one)
    if not message:
        return
    if topology is Topology.BOOST:
        kind = kinds.DROPOUT_DOUBTFUL if _is_presumed(one) else kinds.INPUT_ABOVE_OUTPUT
    else:
        kind = kinds.DROPOUT_DOUBTFUL if _is_presumed(one) else kinds.DROPOUT_LOST
    yield kind.found(part.ref, message, key=part.key)


def _linear_lost(one: ChannelCase) -> str:
    left, needed = one.vin.low - one.vout.high, _needed(one)
    control = one.wiring.vcontrol
    if left < needed:
        return _little_left(one, f"the part needs {show(needed, 'V')}")
    if one.wiring.channel.topology is Topology.LINEAR_TWO_SUPPLY and control is not None:
        lowest = min(abs(corner) for corner in control.span.corners)
        if lowest < one.vout.high:
            return f"control supply {show(lowest, 'V')} is below the output {show(one.vout.high, 'V')}"
    return ""


def _converter_lost(one: ChannelCase) -> str:
    """By the loss model's own word, at the load and voltages where regulation is lost first."""
    topology, load = one.wiring.channel.topology, show(one.load.high, "A")
    words = {
        Topology.BUCK: _little_left(one, f"which its switch and inductor take at {load}"),
        Topology.CHARGE_PUMP: f"at {show(one.vin.low, 'V')} and {load} it does not reach {show(one.vout.high, 'V')}",
        Topology.SHUNT: f"at {show(one.vin.low, 'V')} its resistor does not carry {load} and the element's own current",
        Topology.BOOST: f"input up to {show(one.vin.high, 'V')} is above the output {show(one.vout.low, 'V')}",
    }
    if topology not in words:
        return ""
    if topology is Topology.BUCK and one.vin.low - one.vout.high < _needed(one):
        return _little_left(one, f"the part needs {show(_needed(one), 'V')}")
    point = Point(one.vin.low, one.vout.high, one.load.high, HOT_CELSIUS)
    if topology is Topology.BOOST:
        point = Point(one.vin.high, one.vout.low, one.load.low, HOT_CELSIUS)
    try:
        return "" if one.model.at(point, End.SEVERE).regulating else words[topology]
    except ValueError:
        return ""  # outside its figures: that is found where its heat is worked out


def _little_left(one: ChannelCase, then: str) -> str:
    low, high = one.vin.low, one.vout.high
    return f"input {show(low, 'V')} less output {show(high, 'V')} leaves {show(low - high, 'V')}, {then}"


def _is_presumed(one: ChannelCase) -> bool:
    """Whether input or output voltage rests on a presumption anywhere along its trail."""
    given = (one.wiring.vin, one.wiring.vout)
    return any(evidence is not None and evidence.weakest is Grade.PRESUMED for evidence in given)


def _needed(one: ChannelCase) -> float:
    """Dropout [V] at the greatest load; 0 where the part gives none (then Vin ≥ Vout is all that can be asked)."""
    channel = one.wiring.channel
    curve = channel.curves.get("dropout")
    if curve is not None:
        return curve.at(min(max(one.load.high, curve.lowest), curve.highest)).high
    figure: Evidence | None = channel.figures.get("dropout")
    return figure.span.high if figure else 0.0


def _short(draft: Draft, one: ChannelCase) -> Iterator[Finding]:
    part, channel = draft.part, one.wiring.channel
    limit = channel.figures.get("current_limit")
    if limit is None or channel.topology not in LINEARS:
        return
    watts = short_circuit_heat(one.vin.high, limit.span.high)
    message = f"into a short {show(limit.span.high, 'A')} at {show(one.vin.high, 'V')} would make {show(watts, 'W')}"
    yield kinds.SHORT_CIRCUIT.found(part.ref, message, limit.source, key=part.key)


def power_findings(draft: Draft, worst: Worked) -> Iterator[Finding]:
    """The package's power limit, and what of the loss is in other parts."""
    part = draft.part
    rating = least(part, "power_max")
    if rating is not None and worst.watts > rating.span.low:
        message = f"heat {show(worst.watts, 'W')}, the package is limited to {show(rating.span.low, 'W')}"
        yield kinds.POWER_OVER_RATING.found(part.ref, message, rating.source, key=part.key)
    outside = [(who, watts) for one in worst.chosen for who, watts in one.loss.elsewhere if watts > 0]
    if outside:
        listed = ", ".join(f"{show(watts, 'W')} in {who}" for who, watts in outside)
        yield kinds.HEAT_OUTSIDE.found(part.ref, f"further heat outside the part: {listed}", key=part.key)


def site_findings(settings: Settings) -> Iterator[Finding]:
    """What there is to say of site and policy, once for the board."""
    altitude = settings.site.altitude
    if altitude.span.high > UNCHECKED_ABOVE:
        message = f"altitude up to {altitude.span.high:g} m"
        yield kinds.ALTITUDE_UNCHECKED.found("site", message, altitude.source)
    policy = settings.policy
    if not policy.verified:
        yield kinds.POLICY_UNVERIFIED.found(f"policy {policy.name}", "figures not checked", policy.source)
