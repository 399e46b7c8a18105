"""What does not fit together: names against voltages, dividers against names, feeds against feeds."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from analyzer.circuit import natural_key
from analyzer.evidence import Evidence
from analyzer.findings import rails as kinds
from analyzer.findings.base import Finding
from analyzer.rail import Rail, Wiring
from analyzer.rails.levels import Levels
from analyzer.rails.names import base_name, named_volts
from analyzer.rails.power import Power
from analyzer.rails.series import is_preferred


def check_feeds(rails: tuple[Rail, ...], wirings: tuple[Wiring, ...]) -> Iterable[Finding]:
    """Rails without feeds, with parallel regulators, with feeds of opposite sign or unknown voltage."""
    consumed = {wiring.input_rail for wiring in wirings if wiring.part.component.fitted}
    for rail in rails:
        if rail.is_ground:
            continue
        if not rail.feeds and rail.name in consumed:
            yield kinds.RAIL_WITHOUT_FEED.found(rail.name, f"nothing on the board feeds {rail.name}")
        regulators = [feed for feed in rail.feeds if feed.kind == "regulator"]
        if len(regulators) > 1:
            listed = ", ".join(f"{feed.ref} ({_volts(feed.volts)})" for feed in regulators)
            yield kinds.PARALLEL_REGULATORS.found(rail.name, f"{rail.name} is fed by {listed}")
        carried = sum(feed.share for feed in rail.feeds)
        if rail.feeds and carried < 1 - 1e-6:
            listed = ", ".join(f"{feed.ref} {feed.share:g}" for feed in rail.feeds)
            yield kinds.SHARES_INCOMPLETE.found(rail.name, f"feeds of {rail.name} carry {carried:g} of it: {listed}")
        known = [feed for feed in rail.feeds if feed.volts is not None]
        signs = {(feed.volts.span.nominal > 0) for feed in known if feed.volts is not None and feed.volts.span.nominal}
        if len(signs) > 1:
            listed = ", ".join(f"{feed.ref} ({_volts(feed.volts)})" for feed in known)
            yield kinds.OPPOSITE_FEEDS.found(rail.name, f"{rail.name} is fed with both signs: {listed}")
        unknown = [feed.ref for feed in rail.feeds if feed.volts is None]
        if known and unknown and len(rail.feeds) > 1:
            yield kinds.FEED_VOLTS_UNKNOWN.found(
                rail.name, f"{rail.name}: voltage of feed {', '.join(unknown)} not known"
            )


def check_names(power: Power, levels: Levels, names: Mapping[str, str]) -> Iterable[Finding]:
    """Names that state another voltage than was found."""
    for group in sorted(levels.of, key=natural_key):
        found = levels.of[group]
        for net in power.names(group):
            named = named_volts(net)
            if named is None or found.source == f"net name {base_name(net)}":
                continue
            if not found.span.low - 1e-6 <= named.volts <= found.span.high + 1e-6:
                yield kinds.NAME_DISAGREES.found(
                    names.get(group, net),
                    f"{base_name(net)} says {named.volts:g} V, {found.source} gives {_volts(found)}",
                )
    for group in sorted(levels.conflicts, key=natural_key):
        listed = ", ".join(base_name(net) for net in levels.conflicts[group])
        yield kinds.NAMES_CONFLICT.found(names.get(group, group), f"joined nets name different voltages: {listed}")
    for group in sorted(levels.distrusted, key=natural_key):
        yield kinds.NAME_NOT_TRUSTED.found(names.get(group, group), levels.distrusted[group])


def check_dividers(power: Power, levels: Levels, wirings: tuple[Wiring, ...]) -> Iterable[Finding]:
    """Feedback networks: odd values, copies, contradictions, adjustable outputs."""
    same: dict[tuple[object, ...], list[tuple[Wiring, float]]] = {}
    for wiring in wirings:
        key = (wiring.part.key, wiring.channel.name)
        network = levels.networks[key]
        own, _, reasons = levels.outputs[key]
        place = str(wiring.part.component.place)
        ref = wiring.part.ref
        if reasons and own is not None:
            text = f"{ref}: {'; '.join(reasons)}; output {own.span.low:.3g} to {own.span.high:.3g} V"
            yield kinds.ADJUSTABLE_OUTPUT.found(ref, text, place, key=wiring.part.key)
        if network is None or wiring.channel.volts is not None:
            continue
        for item in network.resistances:
            if not is_preferred(item.span.nominal):
                message = f"{item.ref} '{item.text}' in the feedback of {ref} is in no preferred series"
                yield kinds.UNUSUAL_RESISTANCE.found(item.ref, message, place)
        named = _named(power, wiring)
        if own is None or named is None or reasons:
            continue
        if not own.span.low - 1e-6 <= named <= own.span.high + 1e-6:
            message = f"{ref} makes {_volts(own)} by its divider, {wiring.output_rail} says {named:g} V"
            yield kinds.DIVIDER_AGAINST_NAME.found(ref, message, place, key=wiring.part.key)
        values = tuple(sorted(item.span.nominal for item in network.resistances))
        same.setdefault((own.span.nominal, values), []).append((wiring, named))
    for group in same.values():
        if len({named for _, named in group}) > 1:
            listed = ", ".join(f"{wiring.part.ref} ({named:g} V)" for wiring, named in group)
            yield kinds.SAME_DIVIDER.found(group[0][0].part.ref, f"equal dividers for different rails: {listed}")


def _named(power: Power, wiring: Wiring) -> float | None:
    if wiring.output_net is None:
        return None
    values = {
        named.volts
        for net in power.names(power.mesh.groups.of(wiring.output_net))
        if (named := named_volts(net)) is not None
    }
    return values.pop() if len(values) == 1 else None


def _volts(evidence: Evidence | None) -> str:
    if evidence is None:
        return "voltage not known"
    low, nominal, high = evidence.span.corners
    return f"{nominal:.4g} V" if low == high else f"{nominal:.4g} V ({low:.4g} to {high:.4g} V)"
