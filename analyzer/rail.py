"""Rails: nets joined by links, at one DC voltage, with what feeds them. `analyzer.rails` finds them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

from analyzer.evidence import Evidence
from analyzer.findings.base import Finding
from analyzer.part import Channel, Part


@dataclass(frozen=True, slots=True)
class Feed:
    """One source of a rail.

    Attributes:
        ref: Reference of the part that feeds it; "" for a declared or named supply.
        kind: "regulator", "passage" (switch, diode, mux), "connector", "battery", "supply".
        channel: Channel of the part, "" otherwise.
        from_rail: The rail it draws from, None for a source from outside the board.
        through: References of the parts between its pin and the rail, in order.
        volts: Voltage it gives the rail, None if unknown.
        share: Fraction of the rail's load it carries: 1 unless a rule or setting says how feeds share.
    """

    ref: str
    kind: str
    channel: str = ""
    from_rail: str | None = None
    through: tuple[str, ...] = ()
    volts: Evidence | None = None
    share: float = 1.0


@dataclass(frozen=True, slots=True)
class Rail:
    """Nets at one DC voltage.

    Attributes:
        name: Name under which consumers know it: the best user-given net name.
        nets: All its nets, in natural order.
        volts: Its voltage, None if unknown.
        feeds: What feeds it.
        links: References of the links that join its nets.
        is_ground: True for the ground rail(s).
        why_open: Why the voltage is unknown, one line; "" if it is known.
    """

    name: str
    nets: tuple[str, ...]
    volts: Evidence | None = None
    feeds: tuple[Feed, ...] = ()
    links: tuple[str, ...] = ()
    is_ground: bool = False
    why_open: str = ""


@dataclass(frozen=True, slots=True)
class Outside:
    """A part in the power path of a converter whose heat is not the converter's.

    Attributes:
        ref: Its reference.
        role: "inductor", "diode", "transistor" or "resistor" (the one before a shunt regulator).
        resistance: Series resistance (DCR, on-resistance) where its value text or a rule gives it.
        drop: Forward drop where a rule gives it.
    """

    ref: str
    role: str
    resistance: Evidence | None = None
    drop: Evidence | None = None


@dataclass(frozen=True, slots=True)
class Wiring:
    """How one channel of a part is wired into the rails.

    Attributes:
        part: The part.
        channel: The channel.
        input_net: Net at its input pins; None if no input was found.
        input_rail: Rail that net belongs to.
        output_net: Net at its output after the inductor, where there is one; None if none was found.
        output_rail: Rail of that net.
        ground_rail: Rail its ground pins are on (the negative output of a buck wired as inverter).
        control_rail: Rail of the control supply of two-supply parts.
        vcontrol: Its voltage, None if unknown.
        vin: Input voltage relative to the part's own ground pin, None if unknown.
        vout: Output voltage relative to board ground, None if unknown.
        is_off: True when the channel is strapped off and supplies nothing.
        through: References between the output net and the rail's named net.
        outside: Inductor, diode and transistors of its power path; the series resistors of a shunt regulator.
        has_other_feed: Whether something else feeds its output rail too, so that it may have to block.
        why_open: What is unknown and why, one line each.
    """

    part: Part
    channel: Channel
    input_net: str | None = None
    input_rail: str | None = None
    output_net: str | None = None
    output_rail: str | None = None
    ground_rail: str | None = None
    control_rail: str | None = None
    vcontrol: Evidence | None = None
    vin: Evidence | None = None
    vout: Evidence | None = None
    is_off: bool = False
    through: tuple[str, ...] = ()
    outside: tuple[Outside, ...] = ()
    has_other_feed: bool = False
    why_open: tuple[str, ...] = ()


@dataclass(frozen=True)
class Rails:
    """All rails of a board and how its regulators and passages hang between them."""

    rails: tuple[Rail, ...]
    wirings: tuple[Wiring, ...]
    findings: tuple[Finding, ...] = ()
    of_net: Mapping[str, str] = field(default_factory=dict)
    """Name of the rail of every net that belongs to one."""

    @cached_property
    def by_name(self) -> Mapping[str, Rail]:
        """Rails by name."""
        return {rail.name: rail for rail in self.rails}
