"""Recognised parts: what `recognise` hands on. A part has one or more channels, each with pin roles and figures."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from analyzer.circuit import Component, Pin
from analyzer.evidence import Evidence
from analyzer.rule import Curve, EfficiencyMap, Role, Rule, ThermalFigure, Topology


@dataclass(frozen=True, slots=True)
class Package:
    """Package as read from the footprint name.

    Attributes:
        family: Family of `rules/packages.toml`; None when the name is not understood.
        text: Footprint the family was read from.
        has_pad: Whether the name says there is an exposed pad.
        has_vias: Whether the name says there are thermal vias.
        tab_pin: Pin number the tab is joined to, as named ("2"), else None.
        source: "footprint", "footprint filter" or "stated".
    """

    family: str | None
    text: str
    has_pad: bool = False
    has_vias: bool = False
    tab_pin: str | None = None
    source: str = "footprint"


@dataclass(frozen=True, slots=True)
class Channel:
    """One output of a recognised part.

    Attributes:
        name: Channel name of the rule, "" for single-output parts.
        topology: How it works.
        sign: +1 for a positive output, -1 for a negative one.
        pins: Its pins by role.
        volts: Output voltage decoded from the part's name or stated by the rule; None if it must be derived.
        reference: Reference voltage at the feedback pin, if known.
        reference_across: "lower" or "upper" resistor of the divider.
        figures: Electrical figures by key of `rule.FIGURES`, rule and channel merged.
        curves: Figures given as tables.
        efficiency_map: Efficiency over load and input voltage, if given.
    """

    name: str
    topology: Topology
    sign: int
    pins: Mapping[Role, tuple[Pin, ...]]
    volts: Evidence | None = None
    reference: Evidence | None = None
    reference_across: str = "lower"
    figures: Mapping[str, Evidence] = field(default_factory=dict)
    curves: Mapping[str, Curve] = field(default_factory=dict)
    efficiency_map: EfficiencyMap | None = None

    def nets(self, role: Role) -> tuple[str, ...]:
        """Distinct nets of the pins with this role, in pin order."""
        return tuple(dict.fromkeys(pin.net for pin in self.pins.get(role, ())))


@dataclass(frozen=True, slots=True)
class Part:
    """A component recognised as a regulator or a passage.

    Attributes:
        component: The placed part.
        how: "rule", "pins" (generic layer: looks like a regulator, no rule) or "stated" (settings name the rule).
        rule: The rule that matched, if any.
        identity_field: Field the identity was read from ("MPN", "Value", "symbol name").
        identity: Text of that field, e.g. the part number.
        package: Package, family None if not understood.
        channels: Its outputs; at least one.
        thermal: Thermal figures of the rule that fit the package.
        evidence: Why it was recognised so, one line.
    """

    component: Component
    how: str
    rule: Rule | None
    identity_field: str
    identity: str
    package: Package
    channels: tuple[Channel, ...]
    thermal: tuple[ThermalFigure, ...] = ()
    evidence: str = ""

    @property
    def topology(self) -> Topology:
        """Topology of its first channel."""
        return self.channels[0].topology

    @property
    def key(self) -> str:
        """Identity of the component."""
        return self.component.key

    @property
    def ref(self) -> str:
        """Reference of the component."""
        return self.component.ref
