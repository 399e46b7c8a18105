"""Which groups of nets are supplies, and which merely touch one."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property

from analyzer.circuit import Component, plain_name
from analyzer.evidence import Evidence
from analyzer.part import Part
from analyzer.rails.ground import is_ground_pin
from analyzer.rails.kinds import Kind
from analyzer.rails.names import named_volts
from analyzer.rails.network import Mesh
from analyzer.rails.supplies import matches_net, supply_by_name
from analyzer.rule import Role, Rulebook

_ENTRY_KINDS = frozenset(
    {
        Kind.CONNECTOR,
        Kind.BATTERY,
        Kind.CAPACITOR,
        Kind.CLAMP,
        Kind.TEST_POINT,
        Kind.FUSE,
        Kind.BEAD,
        Kind.INDUCTOR,
        Kind.CHOKE,
        Kind.DIODE,
        Kind.LED,
        Kind.RESISTOR,
        Kind.TRANSISTOR,
        Kind.SWITCH,
        Kind.JUMPER,
        Kind.NET_TIE,
    }
)
_SUPPLY_PIN = re.compile(
    r"VBUS\w*|\+?V_?(?:IN|BATT?|SUPPLY)\w*|V\+|\+|\+?BATT?\+?|PWR_?IN|[+-]\d+V\d*\w?|VSUPPLY|DC(?:_?IN|\+)",
    re.IGNORECASE,
)
_NEGOTIATES = re.compile(
    r"power[ _-]?delivery|(?<![A-Za-z])USB[ _-]?(?:C[ _-]?)?PD(?![A-Za-z])|PD[ _-]?(?:sink|controller)", re.IGNORECASE
)
_NEGOTIATING_PIN = re.compile(r"PD\d?_\w*CC|PD\d?_?VCONN|VBUS_?(?:EN_)?SNK", re.IGNORECASE)
_CONTRACT_PIN = re.compile(r"(?:[AB]\d_?)?CC_?[12]?", re.IGNORECASE)
_NEGATIVE_POLE = frozenset({"-", "NEG", "N", "GND", "B-", "BAT-"})
_BOOT = re.compile(r"BOOT\w*|C?BST\w*|VBST|CB|VB|VBOOT|BS")


@dataclass(frozen=True)
class Power:
    """What is known of every group before any voltage is.

    Attributes:
        mesh: The circuit's groups.
        parts: Recognised parts.
        rulebook: For the names of standard supplies.
        stated: Names of nets that the settings give a voltage.
    """

    mesh: Mesh
    parts: tuple[Part, ...]
    rulebook: Rulebook
    stated: tuple[str, ...]

    @cached_property
    def ground(self) -> frozenset[str]:
        """Ground groups."""
        return self.mesh.joined.ground

    @cached_property
    def outputs(self) -> frozenset[str]:
        """Groups at output pins of recognised parts."""
        return frozenset(self._of_role(Role.OUTPUT))

    @cached_property
    def rails(self) -> frozenset[str]:
        """Groups that are supplies, ground excluded."""
        found = set(self.outputs) | set(self._of_role(Role.INPUT))
        for group in self.mesh.members:
            if group not in found and self._looks_like_supply(group):
                found.add(group)
        return frozenset(found - self.ground - self.mesh.joined.pulsed)

    def is_rail(self, group: str) -> bool:
        """Whether a group is a supply."""
        return group in self.rails

    def _of_role(self, role: Role) -> Iterable[str]:
        for part in self.parts:
            for channel in part.channels:
                for net in channel.nets(role):
                    yield self.mesh.groups.of(net)

    @cached_property
    def _has_usb_port(self) -> bool:
        return any(self._is_usb_port(component) for component in self.mesh.circuit.components)

    def _is_usb_port(self, component: Component) -> bool:
        texts = (component.lib_id, component.value, component.footprint, component.description, component.ref)
        is_connector = self.mesh.joined.kinds[component.key] is Kind.CONNECTOR
        return is_connector and any("USB" in text.upper() for text in texts)

    def is_usb(self, group: str) -> bool:
        """Whether a net called VBUS can be USB's: it is on a USB port, or on no connector of a board that has one."""
        ports = [component for component, _ in self.sources(group)]
        return any(map(self._is_usb_port, ports)) or (not ports and self._has_usb_port)

    def standard_supply(self, name: str, group: str) -> Evidence | None:
        """Voltage of the standard supply that the name of a net or pin of this group suggests."""
        return supply_by_name(name, self.rulebook, self.is_usb(group))

    def names(self, group: str) -> tuple[str, ...]:
        """Names of the nets of a group that a person gave."""
        return tuple(net for net in self.mesh.members.get(group, ()) if self.mesh.circuit.net_by_name[net].is_named)

    def _looks_like_supply(self, group: str) -> bool:
        if self.is_stated(group):
            return True
        capacitor = supplied = several = False
        count = 0
        for component, pin in self.mesh.pins(group):
            count += 1
            kind = self.mesh.joined.kinds[component.key]
            if kind is Kind.BATTERY and plain_name(pin.name).upper() not in _NEGATIVE_POLE:
                return True
            capacitor |= kind is Kind.CAPACITOR
            if pin.kind in ("power_in", "power_out") and not is_ground_pin(pin.name):
                supplied = True
        several = count > 1
        if supplied and several and (capacitor or self.names(group)):
            return True
        return capacitor and any(named_volts(net) or self.standard_supply(net, group) for net in self.names(group))

    @cached_property
    def _entries(self) -> dict[str, bool]:
        return {}

    def is_entry(self, group: str) -> bool:
        """Whether power can come in here from outside: a connector or battery, and no chip's signal pin."""
        if group not in self._entries:
            self._entries[group] = group not in self.ground and self._is_entry(group)
        return self._entries[group]

    def _is_entry(self, group: str) -> bool:
        comes_in = False
        for component, pin in self.mesh.pins(group):
            kind = self.mesh.joined.kinds[component.key]
            if kind in (Kind.CONNECTOR, Kind.BATTERY):
                comes_in = True
            elif (
                kind is Kind.CHIP
                and pin.kind
                not in (
                    "power_in",
                    "power_out",
                    "passive",
                    "no_connect",
                    "unspecified",
                )
            ) or (kind not in _ENTRY_KINDS and kind is not Kind.CHIP):
                return False
        return comes_in

    def sources(self, group: str) -> tuple[tuple[Component, str], ...]:
        """Connectors and batteries on a group: (part, name of its pin there), in natural order."""
        found: dict[str, tuple[Component, str]] = {}
        for component, pin in self.mesh.pins(group):
            kind = self.mesh.joined.kinds[component.key]
            if kind is Kind.BATTERY and plain_name(pin.name).upper() in _NEGATIVE_POLE:
                continue
            if kind in (Kind.CONNECTOR, Kind.BATTERY) and component.fitted:
                found.setdefault(component.key, (component, plain_name(pin.name)))
        return tuple(found.values())

    def negotiator(self, group: str) -> str | None:
        """Part that negotiates the voltage of a USB port on this group; None if there is none."""
        nearby = [component for component, _ in self.mesh.pins(group)]
        for component, _ in self.sources(group):
            contract = [pin.net for pin in component.pins if _CONTRACT_PIN.fullmatch(plain_name(pin.name))]
            nearby += self._reached_from(contract)
        for component in nearby:
            texts = (component.description, component.keywords, component.value, component.lib_id)
            if component.fitted and (
                any(_NEGOTIATING_PIN.match(plain_name(pin.name)) for pin in component.pins)
                or any(_NEGOTIATES.search(text) for text in texts)
            ):
                return component.ref
        return None

    def _reached_from(self, nets: Iterable[str]) -> list[Component]:
        """Parts on these nets, and those behind a protection array that the nets run through."""
        circuit = self.mesh.circuit
        near = [component for net in nets for component, _ in circuit.on_net[net]]
        arrays = [
            component
            for component in near
            if len(component.pins) <= 16 and self.mesh.joined.kinds[component.key] is not Kind.CONNECTOR
        ]
        beyond = {pin.net: None for component in arrays for pin in component.pins}
        quiet = [net for net in beyond if self.mesh.groups.of(net) not in self.ground | self.rails]
        return [*near, *(component for net in quiet for component, _ in circuit.on_net[net])]

    def chip_sources(self, group: str) -> tuple[Component, ...]:
        """Fitted chips that are no recognised parts and have a supply output on this group."""
        known = {part.key for part in self.parts}
        found = (
            component
            for component, pin in self.mesh.pins(group)
            if pin.kind == "power_out"
            and component.fitted
            and component.key not in known
            and self.mesh.joined.kinds[component.key] is Kind.CHIP
        )
        return tuple({component.key: component for component in found}.values())

    def is_named_negative(self, group: str) -> bool:
        """Whether the names of a group state a negative voltage."""
        volts = [named.volts for net in self.names(group) if (named := named_volts(net))]
        return bool(volts) and max(volts) < 0

    def is_stated(self, group: str) -> bool:
        """Whether the settings give this group a voltage."""
        nets = self.mesh.members.get(group, (group,))
        return any(matches_net(key, nets) for key in self.stated)

    def is_sure_source(self, group: str) -> bool:
        """Whether what comes in here is a supply by its name, by a connector's pin name, or because it is stated."""
        if self.is_stated(group):
            return True
        if not self.is_entry(group):
            return False
        named = any(named_volts(net) or self.standard_supply(net, group) for net in self.names(group))
        battery = any(self.mesh.joined.kinds[c.key] is Kind.BATTERY for c, _ in self.sources(group))
        return named or battery or self.supply_pin_name(group) is not None

    def supply_pin_name(self, group: str) -> str | None:
        """Name of a connector pin on this group that says "supply"; None if there is none."""
        for _, name in self.sources(group):
            if _SUPPLY_PIN.fullmatch(name):
                return name
        return None

    def is_boot(self, group: str) -> bool:
        """Whether a group is the supply of a floating driver."""
        return group in self.mesh.joined.pulsed or any(
            _BOOT.fullmatch(plain_name(pin.name).upper())
            for component, pin in self.mesh.pins(group)
            if self.mesh.joined.kinds[component.key] is Kind.CHIP
        )
