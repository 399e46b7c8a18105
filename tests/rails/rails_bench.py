"""A bench for rail tests: circuits and recognised parts made by hand, independent of reader and rule files."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from pathlib import Path

from analyzer.circuit import Circuit, Component, Net, Note, Pin, Place, natural_key
from analyzer.evidence import Evidence, Grade
from analyzer.grammar import parse
from analyzer.part import Channel, Package, Part
from analyzer.quantity import Dimension, Span
from analyzer.rule import Role, Rulebook, SupplyRule, Topology

ROOT = Path(__file__).resolve().parents[2]

LIBS = {
    "R": "Device:R",
    "C": "Device:C",
    "L": "Device:L",
    "FB": "Device:FerriteBead",
    "D": "Device:D",
    "F": "Device:Fuse",
    "J": "Connector:Conn_01x02",
    "Q": "Device:Q_PMOS_GSD",
    "BT": "Device:Battery_Cell",
    "NT": "Device:NetTie_2",
    "JP": "Jumper:SolderJumper_2_Open",
    "RV": "Device:R_Potentiometer",
}


def part(ref: str, value: str, pins: Mapping[str, str] | str, **more: object) -> Component:
    """A component. `pins` is {"number name kind": net} or, for two-pin parts, "net net"."""
    if isinstance(pins, str):
        pins = {str(number): net for number, net in enumerate(pins.split(), start=1)}
    made = []
    for head, net in pins.items():
        words = head.split()
        name = words[1] if len(words) > 1 else ""
        kind = words[2] if len(words) > 2 else "passive"
        made.append(Pin(words[0], name, kind, net))
    head = re.match(r"[A-Z]+", ref)
    options = {
        "lib_id": LIBS.get(head[0] if head else "", "Own:Chip"),
        "footprint": "",
        "fields": {},
        "description": "",
        "keywords": "",
        "fitted": True,
        "x": 0.0,
        **more,
    }
    return Component(
        key=f"/{ref}",
        ref=ref,
        value=value,
        lib_id=str(options["lib_id"]),
        footprint=str(options["footprint"]),
        fields=options["fields"],  # type: ignore[arg-type]
        description=str(options["description"]),
        keywords=str(options["keywords"]),
        pins=tuple(made),
        place=Place("board.kicad_sch", "/", float(str(options["x"])), 0.0),
        fitted=bool(options["fitted"]),
    )


def circuit(*components: Component, notes: tuple[Note, ...] = ()) -> Circuit:
    """A circuit of components; nets whose names start with "Net-(" count as automatic."""
    nets: dict[str, list[tuple[str, str]]] = {}
    ordered = sorted(components, key=lambda component: natural_key(component.ref))
    for component in ordered:
        for pin in component.pins:
            nets.setdefault(pin.net, []).append((component.key, pin.number))
    made = tuple(
        Net(name, tuple(pins), not name.startswith(("Net-(", "unconnected-")))
        for name, pins in sorted(nets.items(), key=lambda item: natural_key(item[0]))
    )
    return Circuit("bench", tuple(ordered), made, notes)


def figure(value: float | Span, unit: str = "V", quantity: str = "figure") -> Evidence:
    """A figure as a rule would give it."""
    span = value if isinstance(value, Span) else Span.exact(value)
    return Evidence(quantity, span, unit, "bench rule", Grade.RULED)


ROLES: dict[Role, str] = {
    Role.INPUT: r"P?VIN\d?|IN\d?|VI|\+VIN|VDD|K",
    Role.OUTPUT: r"VOUT\d?|OUT\d?|VO|\+VOUT|VBAT",
    Role.GROUND: r"[AP]?GND\w*|VSS|EP|PAD|0V|A",
    Role.FEEDBACK: r"V?FB|ADJ",
    Role.SWITCH: r"SW|LX",
    Role.ENABLE: r"EN|CE|SHUTDOWN",
    Role.BOOTSTRAP: r"BOOT|BST",
    Role.SET: r"SET",
    Role.BIAS: r"BIAS",
}


def recognised(
    component: Component,
    topology: Topology,
    *,
    volts: float | None = None,
    reference: float | Span | None = None,
    across: str = "lower",
    sign: int = 1,
    figures: Mapping[str, Evidence] | None = None,
    roles: Mapping[Role, str] | None = None,
    channels: Mapping[str, Mapping[Role, str]] | None = None,
) -> Part:
    """A recognised part: roles by pin names, or by the given comma-separated pin numbers."""
    made = []
    for name, own in (channels or {"": roles or {}}).items():
        pins: dict[Role, tuple[Pin, ...]] = {}
        for role, pattern in ROLES.items():
            if role in own:
                wanted = own[role].split(",")
                pins[role] = tuple(pin for pin in component.pins if pin.number in wanted)
            elif not own:
                matches = (
                    re.fullmatch(pattern, re.sub(r"[_{}~^]", "", pin.name), re.IGNORECASE) for pin in component.pins
                )
                pins[role] = tuple(pin for pin, match in zip(component.pins, matches, strict=True) if match)
        made.append(
            Channel(
                name=name,
                topology=topology,
                sign=sign,
                pins={role: found for role, found in pins.items() if found},
                volts=figure(volts, quantity="output voltage") if volts is not None else None,
                reference=figure(reference, quantity="reference voltage") if reference is not None else None,
                reference_across=across,
                figures=figures or {},
            )
        )
    return Part(component, "rule", None, "Value", component.value, Package(None, ""), tuple(made))


def rulebook() -> Rulebook:
    """A rulebook with the shipped standard supplies and nothing else."""
    data = tomllib.loads((ROOT / "rules" / "supplies.toml").read_text(encoding="utf-8"))
    supplies = tuple(
        SupplyRule(
            entry["name"],
            tuple(entry["nets"]),
            Evidence(
                "supply voltage",
                parse(entry["volts"], Dimension.VOLTAGE),
                "V",
                f"supplies.toml [{entry['name']}]: {entry['source']}",
                Grade.RULED if entry.get("verified", True) else Grade.PRESUMED,
                note=entry.get("note", ""),
            ),
        )
        for entry in data["supply"]
    )
    return Rulebook((), (), supplies, ())


GROUND_PINS = {"3 GND power_in": "GND"}
