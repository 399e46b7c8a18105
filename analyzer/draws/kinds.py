"""What kind of part a component is, as far as its current is concerned: by reference letters and library name."""

from __future__ import annotations

import re
from functools import lru_cache

from analyzer.circuit import Component, Pin, plain_name

_LETTERS = re.compile(r"[A-Za-z]+")

RESISTORS = frozenset({"R"})
NO_DIRECT_CURRENT = frozenset(["C", "TP", "H", "MH", "FID", "Y", "XTAL", "LOGO", "SYM", "TM", "MP", "ANT", "AE"])
"""Parts no direct current flows through, or which have none: capacitors, test points, holes, crystals, aerials."""
JOINING = frozenset({"L", "FB", "NT", "F", "JP", "SJ"})
"""Two-terminal parts that join their nets for direct current."""
IN_SERIES = frozenset({"R", "L", "FB", "F", "JP", "SJ", "NT", "D", "SW", "W", "LB", "BD", "RS", "RSH"})
"""Two-terminal parts that may lie between a rail and a supply pin, or carry only what flows behind them."""
CONNECTORS = frozenset({"J", "P", "CN", "CON", "CONN", "X", "XP", "XS", "HDR", "USB", "JST"})
SURE_LOADS = frozenset({"K", "RL", "RLY", "RE", "M", "MOT", "FAN", "BZ", "LS", "SP", "SPK", "HT", "LA"})
"""Relays, motors, fans, sounders, heaters, lamps: they draw current whatever their pins are called."""
CHIPS = frozenset(
    {"U", "IC", "A", "M", "Y", "DS", "MOD", "X", "XO", "OSC", "N", "VR", "PS", "DD", "DA", "MK", "LCD", "DISP"}
)

_SUPPLY_NAME = re.compile(
    r"(?:A|D|P|C|I|IO)?V(?:CC|DD|S|BAT|SUP|SYS|AA|PP|PWR|IO)(?:[AIOBCDQ]|IO|INT|CORE)?[_+-]?[0-9]{0,2}|V\+|VCC_?\w{0,4}|VDD_?\w{0,4}"
    r"|\+?(?:1V[0-9]+|2V[58]|3V3|3\.3V|5V|12V)|\+V|VPOS|PWR|VSUPPLY",
    re.IGNORECASE,
)
_IGNORED = re.compile(
    r"VLX\w*|VLCD|VREF\w*[+-]?|VDDLDO\w*|VCAP\w*|VCORE_?CAP|S|-VIN|VREG\w*|VDD_EXT|VBG", re.IGNORECASE
)
_GROUND_NAME = re.compile(r"[ADP]?GND\w*|[ADP]?VSS\w*|EP|PAD|EPAD|VEE", re.IGNORECASE)
_LED = re.compile(r"(?<![A-Z])LED(?![A-Z]{2})|light[- ]emitting", re.IGNORECASE)
_OUTLET = re.compile(r"USB_?-?A(?![A-Z0-9])|fan\b|outlet", re.IGNORECASE)


@lru_cache(maxsize=65536)
def letters(ref: str) -> str:
    """Reference letters, upper case: "FB" of "FB12"; "" when there are none."""
    found = _LETTERS.match(ref)
    return found[0].upper() if found else ""


def is_connector(component: Component) -> bool:
    """Whether the part leads off the board."""
    nickname, _, name = component.lib_id.partition(":")
    if letters(component.ref) in NO_DIRECT_CURRENT or name.startswith("TestPoint"):
        return False
    if nickname.casefold().startswith("connector") or name.startswith("Conn_"):
        return True
    return letters(component.ref) in CONNECTORS and not any(pin.kind == "power_in" for pin in component.pins)


def is_outlet(component: Component) -> bool:
    """Whether a connector's library name says that it supplies something outside."""
    return bool(_OUTLET.search(component.lib_id.partition(":")[2]) or _OUTLET.search(component.value))


def is_led(component: Component) -> bool:
    """Whether the part is a light-emitting diode without electronics of its own."""
    if letters(component.ref) not in ("D", "LED", "LD", "DS", "DL"):
        return False
    texts = (component.lib_id, component.value, component.description, component.keywords)
    return any(_LED.search(text) for text in texts) and not any(pin.kind == "power_in" for pin in component.pins)


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
