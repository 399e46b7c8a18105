"""Which nets are ground: by name, and where no name says so, by what hangs on them."""

from __future__ import annotations

import re

from analyzer.circuit import Circuit, plain_name
from analyzer.rails.names import base_name, named_volts

_NAME = re.compile(
    r"(?:[A-Z0-9]{1,8}[_-]?)?(?<![A-Z])(?:[ADPSFC]|PWR|SIG|CH|ISO|USB|RF|HV|LV|POE|VBUS)?[_-]?GND(?:[A-Z]{0,4}|[_-]?\w{0,12})"
    r"|(?:\w{1,10}[_-])?(?:RTN|RETURN)|GROUND\w*|EARTH\w*|VSS[A-Z0-9_]{0,6}|0V(?:[A-Z_][A-Z0-9_]{0,4})?|CHASSIS\w*|SHIELD\w*|PE|FG"
)
_NOT = re.compile(r"DET|DETECT|SENSE|SNS|_?OK$|_FB$|EN$")
_GROUND_PIN = re.compile(r"(?:[ADPSG]?GND\w{0,4}|VSS\w?|GROUND|EP|E?PAD|GND/HS|V-)")


def is_ground_name(name: str) -> bool:
    """Whether a net name says ground ("GND", "/GND", "GNDA", "AGND", "GND1", "VSS", "0V")."""
    base = base_name(name).upper()
    return bool(_NAME.fullmatch(base)) and not _NOT.search(base)


def is_ground_pin(name: str) -> bool:
    """Whether a pin name says ground."""
    return bool(_GROUND_PIN.fullmatch(plain_name(name).upper()))


def ground_nets(circuit: Circuit) -> frozenset[str]:
    """Nets that are ground.

    A ground pin alone proves nothing: on a converter wired as inverter, or beside a single negative supply, the
    chip's ground pin is on the negative rail. So names decide; only a board without any such name falls back to the
    net that carries most ground pins.
    """
    named = frozenset(net.name for net in circuit.nets if is_ground_name(net.name))
    # beside a net called GND, one called VSS may be the negative supply of an analogue board
    sure = frozenset(name for name in named if not base_name(name).upper().startswith("VSS"))
    if named:
        return sure or named
    votes: dict[str, tuple[int, int]] = {}
    for net in circuit.nets:
        volts = named_volts(net.name)
        if volts is not None:
            continue
        pins = sum(is_ground_pin(pin.name) for _, pin in circuit.on_net[net.name])
        if pins:
            votes[net.name] = (pins, len(net.pins))
    if not votes:
        return frozenset()
    best = max(votes.values())
    return frozenset([next(name for name, count in votes.items() if count == best)])
