"""What a part means for the currents of a board: consumer, possible consumer, passive, connector."""

from __future__ import annotations

import re

from analyzer.circuit import Component, Pin, plain_name
from analyzer.rails.kinds import Kind, letters

PASSIVE = frozenset(
    {
        Kind.RESISTOR,
        Kind.THERMISTOR,
        Kind.TRIMMER,
        Kind.CAPACITOR,
        Kind.INDUCTOR,
        Kind.BEAD,
        Kind.CHOKE,
        Kind.FUSE,
        Kind.NET_TIE,
        Kind.JUMPER,
        Kind.DIODE,
        Kind.CLAMP,
        Kind.LED,
        Kind.SWITCH,
        Kind.TEST_POINT,
        Kind.BATTERY,
    }
)
"""Parts that are no consumers themselves: they carry what flows behind them, or nothing, or are computed."""
IN_SERIES = PASSIVE - {Kind.TRIMMER, Kind.CAPACITOR, Kind.TEST_POINT, Kind.BATTERY, Kind.CLAMP, Kind.LED, Kind.CHOKE}
"""Two-terminal parts that may lie between a rail and a supply pin."""
JOINING = frozenset({Kind.INDUCTOR, Kind.BEAD, Kind.CHOKE, Kind.FUSE, Kind.NET_TIE, Kind.JUMPER})
"""Parts that drive nothing of their own."""
TWO_PINS = JOINING | {Kind.RESISTOR, Kind.CAPACITOR, Kind.THERMISTOR}
"""Parts that with two pins are never consumers, whatever the type of their pins."""
_NOTHING = frozenset("H MH FID LOGO SYM TM MP ANT AE".split())
_CRYSTALS = frozenset({"Y", "XTAL", "X"})
SURE_LOADS = frozenset({"K", "RL", "RLY", "RE", "M", "MOT", "FAN", "BZ", "LS", "SP", "SPK", "HT", "LA"})
"""Relays, motors, fans, sounders, heaters, lamps: they draw current whatever their pins are called."""
CHIPS = frozenset("U IC A M Y DS MOD X XO OSC N VR PS DD DA MK LCD DISP".split())

_SUPPLY_NAME = re.compile(
    r"(?:A|D|P|C|I|IO)?V(?:CC|DD|S|BAT|SUP|SYS|AA|PP|PWR|IO)(?:[AIOBCDQ]|IO|INT|CORE)?[_+-]?[0-9]{0,2}"
    r"|V\+|VCC_?\w{0,4}|VDD_?\w{0,4}|\+?(?:1V[0-9]+|2V[58]|3V3|3\.3V|5V|12V)|\+V|VPOS|PWR|VSUPPLY",
    re.IGNORECASE,
)
_IGNORED = re.compile(
    r"VLX\w*|VLCD|VREF\w*[+-]?|VDDLDO\w*|VCAP\w*|VCORE_?CAP|S|-VIN|VREG\w*|VDD_EXT|VBG", re.IGNORECASE
)
"""Names of power inputs that draw nothing to speak of: references, outputs of on-chip regulators, sense pins."""
_GROUND_NAME = re.compile(r"[ADP]?GND\w*|[ADP]?VSS\w*|EP|PAD|EPAD|VEE", re.IGNORECASE)
_OUTLET = re.compile(r"USB_?-?A(?![A-Z0-9])|fan\b|outlet", re.IGNORECASE)


def carries_nothing(component: Component, kind: Kind) -> bool:
    """Whether no direct current flows through the part: capacitors, test points, holes, aerials, bare crystals."""
    head = letters(component.ref)
    if kind in (Kind.CAPACITOR, Kind.TEST_POINT) or head in _NOTHING or _symbol(component).startswith("TestPoint"):
        return True
    return head in _CRYSTALS and not any(pin.kind in ("power_in", "output") for pin in component.pins)


def is_connector(component: Component, kind: Kind) -> bool:
    """Whether the part leads off the board."""
    if carries_nothing(component, kind):
        return False
    if component.lib_id.casefold().startswith("connector") or _symbol(component).startswith("Conn_"):
        return True
    return kind is Kind.CONNECTOR and not any(pin.kind == "power_in" for pin in component.pins)


def is_outlet(component: Component) -> bool:
    """Whether a connector's own texts say that it supplies something outside."""
    return bool(_OUTLET.search(_symbol(component)) or _OUTLET.search(component.value))


def is_led(component: Component, kind: Kind) -> bool:
    """Whether the part is a light-emitting diode without electronics of its own."""
    return kind is Kind.LED and not any(pin.kind == "power_in" for pin in component.pins)


def takes_supply(pin: Pin) -> bool:
    """Whether a pin draws its part's supply current, by its type."""
    return pin.kind == "power_in" and not _IGNORED.fullmatch(plain_name(pin.name))


def named_ground(pin: Pin) -> bool:
    """Whether a pin is a ground or negative supply pin by its name."""
    return bool(_GROUND_NAME.fullmatch(plain_name(pin.name)))


def named_supply(component: Component, pin: Pin) -> bool:
    """Whether a pin of another type is a supply pin by its name; for chips only."""
    if letters(component.ref) not in CHIPS or pin.kind in ("power_in", "power_out", "output", "no_connect"):
        return False
    return bool(_SUPPLY_NAME.fullmatch(plain_name(pin.name)))


def _symbol(component: Component) -> str:
    return component.lib_id.rpartition(":")[2]
