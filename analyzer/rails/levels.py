"""Voltage of every rail, solved in the order in which they depend on each other."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from analyzer.circuit import natural_key
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rails.feeds import Edge, cut_cycles
from analyzer.rails.links import Link
from analyzer.rails.names import base_name
from analyzer.rails.network import Network
from analyzer.rails.power import Power
from analyzer.rails.supplies import stated_supply, volts_by_name
from analyzer.rails.voltages import channel_volts, depends_on, network_of
from analyzer.rails.wiring import Trace
from analyzer.rule import LINEARS, PASSAGES, Topology
from analyzer.settings import Settings

LOWEST_LI_ION = 3.0
"""Lowest voltage of a lithium-ion cell in use (common practice) [V]."""


class Levels:
    """Voltages of rails and channels. Everything is computed once, when the object is made; read-only afterwards.

    Attributes:
        of: Voltage by group, where known.
        traces: All channels.
        networks: Feedback network by (part key, channel).
        outputs: By (part key, channel): own output voltage or None, why not, what makes it adjustable.
        distrusted: Groups whose name's voltage cannot be true, with the reason.
        negotiated: Groups whose voltage a power-delivery contract sets, with the reason.
        conflicts: Groups whose nets' names state different voltages, with the names.
    """

    def __init__(self, power: Power, settings: Settings, edges: tuple[Edge, ...], traces: tuple[Trace, ...]) -> None:
        self.power = power
        self.settings = settings
        self.edges = edges
        self.traces = traces
        self.networks: dict[tuple[str, str], Network | None] = {
            (one.part.key, one.channel.name): network_of(power, one) for one in traces
        }
        self.outputs: dict[tuple[str, str], tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]] = {}
        self.of: dict[str, Evidence] = {}
        self.distrusted: dict[str, str] = {}
        self.conflicts: dict[str, tuple[str, ...]] = {}
        self.negotiated: dict[str, str] = {}
        self._standard: set[str] = set()
        self._why: dict[str, str] = {}
        self._links: dict[str, list[Link]] = {}
        for link in power.mesh.joined.links:
            self._links.setdefault(power.mesh.groups.of(link.one), []).append(link)
        self._incoming: dict[str, list[Edge]] = {}
        for edge in edges:
            self._incoming.setdefault(edge.sink, []).append(edge)
        self._needs_of_trace = {
            (one.part.key, one.channel.name): depends_on(power, one, self.networks[one.part.key, one.channel.name])
            for one in traces
        }
        self._solve()

    def links_of(self, net: str) -> list[Link]:
        """Links of the group of a net."""
        return self._links.get(self.power.mesh.groups.of(net), [])

    def feeds_of(self, group: str) -> tuple[Edge, ...]:
        """What feeds a group."""
        return tuple(self._incoming.get(group, ()))

    def why(self, group: str) -> str:
        """Why a group's voltage is not known."""
        return self._why.get(group, "nothing states its voltage")

    def _solve(self) -> None:
        fallbacks = {group: self._fallback(group) for group in self._all_groups()}
        needs: dict[str, set[str]] = {group: set() for group in fallbacks}
        for edge in self.edges:
            if self._stated(edge.sink) is not None:
                continue
            if edge.kind == "passage" and edge.source is not None and edge.gives is None:
                needs[edge.sink].add(edge.source)
            elif edge.trace is not None:
                needs[edge.sink] |= {g for g in self._needs_of_trace[_key(edge.trace)] if g in needs and g != edge.sink}
        prefer = frozenset(group for group, evidence in fallbacks.items() if evidence is not None)
        order, _, self._cut = cut_cycles(needs, prefer)
        self._distrust(fallbacks)
        for group in order:
            evidence = self._level(group, fallbacks)
            if evidence is not None:
                self.of[group] = evidence
        for one in self.traces:
            self._output(one)

    def _all_groups(self) -> list[str]:
        found = set(self.power.rails)
        for edge in self.edges:
            found.add(edge.sink)
            if edge.source is not None:
                found.add(edge.source)
        for needed in self._needs_of_trace.values():
            found |= needed
        return sorted(found, key=natural_key)

    def _stated(self, group: str) -> Evidence | None:
        return stated_supply(self.power.mesh.members.get(group, (group,)), self.settings, self.power.rulebook)

    def _fallback(self, group: str) -> Evidence | None:
        """Voltage by name or by standard supply, for when nothing better is known."""
        by_name = [(net, evidence) for net in self.power.names(group) if (evidence := volts_by_name(net))]
        values = {evidence.span.nominal for _, evidence in by_name}
        if len(values) > 1:
            self.conflicts[group] = tuple(net for net, _ in by_name)
            return None
        if by_name:
            return by_name[0][1]
        supply = next(
            (found for net in self.power.names(group) if (found := self.power.standard_supply(net, group))), None
        )
        pin = self.power.supply_pin_name(group)
        if supply is None and pin:
            supply = self.power.standard_supply(pin, group) or volts_by_name(pin)
        negotiator = self.power.negotiator(group)
        if supply is not None and negotiator is not None:
            self.negotiated[group] = (
                f"{negotiator} can negotiate another voltage than {supply.span.nominal:g} V: state the contract"
            )
            return None
        if supply is not None:
            self._standard.add(group)
        return supply

    def _distrust(self, fallbacks: dict[str, Evidence | None]) -> None:
        """Drop a name that a step-down part fed from it makes impossible."""
        for one in self.traces:
            if one.channel.topology not in (*LINEARS, Topology.BUCK) or not one.inputs or one.is_inverted:
                continue
            group = self.power.mesh.groups.of(one.inputs[0])
            fallback = fallbacks.get(group)
            own = one.channel.volts
            if fallback is None or own is None or self._stated(group) is not None:
                continue
            if abs(fallback.span.high) < abs(own.span.nominal) * 0.98:
                self.distrusted[group] = (
                    f"{fallback.source} says {fallback.span.nominal:g} V, "
                    f"but {one.part.ref} makes {own.span.nominal:g} V from it"
                )
                fallbacks[group] = None

    def _level(self, group: str, fallbacks: Mapping[str, Evidence | None]) -> Evidence | None:
        stated = self._stated(group)
        if stated is not None:
            return stated
        incoming = self._incoming.get(group, [])
        given = [(edge, self._given(edge, fallbacks)) for edge in incoming if edge.kind in ("regulator", "passage")]
        known = [volts for _, volts in given if volts is not None]
        unknown = [edge.ref for edge, volts in given if volts is None]
        fallback = fallbacks.get(group)
        if known and not unknown:
            return known[0] if len(known) == 1 else _hull(known)
        if given and group in self._standard:
            fallback = None  # what feeds it is on the board, so a standard's supply name says nothing
        if fallback is not None:
            if not known:
                return fallback
            return replace(
                _hull([fallback, *known]), grade=Grade.PRESUMED, note=f"voltage of {', '.join(unknown)} not known"
            )
        self._why[group] = self._reason(group, given)
        return None

    def _reason(self, group: str, given: list[tuple[Edge, Evidence | None]]) -> str:
        own = base_name((self.power.names(group) or self.power.mesh.members.get(group, (group,)))[0])
        if group in self.distrusted:
            return f"{own}: {self.distrusted[group]}"
        reasons = [f"{own}: {self.negotiated[group]}"] if group in self.negotiated else []
        for edge, volts in given:
            if volts is not None:
                continue
            if edge.kind == "passage" and edge.source is None:
                reasons.append(f"{own}: no input of {edge.ref} found")
            elif edge.is_opaque:
                reasons.append(f"{own}: what holds {edge.ref} is not known")
            elif edge.kind == "passage" and edge.source is not None:
                reasons.extend(self._why.get(edge.source, f"{own}: voltage behind {edge.ref} not known").split("; "))
            elif edge.trace is not None:
                reasons.extend(f"{edge.ref}: {text}" for text in self.outputs[_key(edge.trace)][1][:1])
        if group in self.conflicts:
            reasons.append(f"{own}: names disagree, {', '.join(base_name(net) for net in self.conflicts[group])}")
        if not given and not reasons:
            outside = dict.fromkeys(edge.ref for edge in self._incoming.get(group, []))
            reasons.append(
                f"{own} comes from {', '.join(outside)} and nothing states its voltage"
                if outside
                else f"nothing on the board feeds {own} and its name states no voltage"
            )
        return "; ".join(list(dict.fromkeys(reasons))[:3]) or f"nothing states the voltage of {own}"

    def _given(self, edge: Edge, fallbacks: Mapping[str, Evidence | None]) -> Evidence | None:
        if edge.trace is not None and edge.kind == "regulator":
            volts = self._output(edge.trace)[0]
            if volts is not None and edge.trace.channel.topology is Topology.CHARGER:
                return _battery(edge.trace, volts)
            return volts
        if edge.gives is not None:
            return edge.gives
        if edge.source is None or edge.is_opaque:
            return None
        source = self.of.get(edge.source)
        if source is None and (edge.sink, edge.source) in self._cut:
            source = fallbacks.get(edge.source)
        return _less(source, edge) if source is not None else None

    def _output(self, one: Trace) -> tuple[Evidence | None, tuple[str, ...], tuple[str, ...]]:
        key = _key(one)
        if key not in self.outputs:
            if one.channel.topology in PASSAGES:
                self.outputs[key] = (None, (), ())
            else:
                self.outputs[key] = channel_volts(self.power, one, self.networks[key], self.of.get, self.settings)
        return self.outputs[key]

    def feed_volts(self, edge: Edge) -> Evidence | None:
        """Voltage a feed gives its rail; for connectors and batteries the rail's own."""
        if edge.kind in ("regulator", "passage"):
            return self._given(edge, {})
        return self.of.get(edge.sink)


def _key(one: Trace) -> tuple[str, str]:
    return (one.part.key, one.channel.name)


def _hull(known: list[Evidence]) -> Evidence:
    span = Span.hull(*(volts.span for volts in known))
    return Evidence(
        "rail voltage",
        span,
        "V",
        "span over its feeds",
        Grade.DERIVED,
        f"{span.low:.4g} to {span.high:.4g} V over {len(known)} feeds",
        tuple(known),
    )


def _less(source: Evidence, edge: Edge) -> Evidence:
    """Voltage behind a passage: smaller in magnitude by its drop."""
    drop = edge.drop
    if drop is None:
        return source
    span = source.span if source.span.nominal >= 0 else -source.span
    lost = Span(
        max(0.0, span.low - drop.span.high),
        max(0.0, span.nominal - drop.span.nominal),
        max(0.0, span.high - drop.span.low),
    )
    return Evidence(
        "rail voltage",
        lost if source.span.nominal >= 0 else -lost,
        "V",
        f"through {edge.ref}",
        Grade.DERIVED,
        f"{source.span.nominal:.4g} V less {drop.span.nominal:.3g} V",
        (source, drop),
    )


def _battery(one: Trace, volts: Evidence) -> Evidence:
    """What a charger's battery may be at: from where full charge current starts to the end of charge."""
    low = one.channel.figures.get("battery_low")
    parents: tuple[Evidence, ...]
    if low is not None:
        floor, parents, note = low.span.low, (volts, low), ""
    elif 4.0 <= volts.span.nominal <= 4.5:
        floor, parents, note = (
            LOWEST_LI_ION,
            (volts,),
            f"empty lithium-ion cell taken as {LOWEST_LI_ION:g} V, common practice",
        )
    else:
        return volts
    if floor >= volts.span.nominal:
        return volts
    return Evidence(
        "battery voltage",
        Span(floor, volts.span.nominal, volts.span.high),
        "V",
        f"{one.part.ref} charge voltage",
        Grade.DERIVED,
        f"{floor:g} V empty to {volts.span.nominal:g} V full",
        parents,
        note,
    )
