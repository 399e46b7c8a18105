"""What a component is for direct current: by reference letters, library symbol and value, in that order of doubt."""

from __future__ import annotations

import re
from enum import StrEnum
from functools import lru_cache

from analyzer.circuit import Component
from analyzer.component_value import ComponentValue, component_value
from analyzer.quantity import Dimension


class Kind(StrEnum):
    """Kinds of part that matter for finding rails."""

    RESISTOR = "resistor"
    TRIMMER = "trimmer"
    THERMISTOR = "thermistor"
    CAPACITOR = "capacitor"
    INDUCTOR = "inductor"
    BEAD = "bead"
    CHOKE = "choke"
    """Two or more windings on one core, joined pairwise."""
    FUSE = "fuse"
    NET_TIE = "net tie"
    JUMPER = "jumper"
    DIODE = "diode"
    CLAMP = "clamp"
    """Zener, TVS or protection array: carries no supply current."""
    LED = "led"
    TRANSISTOR = "transistor"
    CONNECTOR = "connector"
    BATTERY = "battery"
    SWITCH = "switch"
    TEST_POINT = "test point"
    TRANSFORMER = "transformer"
    CHIP = "chip"


_LETTERS = re.compile(r"[A-Za-z]+")
_BY_LETTERS = {
    "R": Kind.RESISTOR,
    "RS": Kind.RESISTOR,
    "RSH": Kind.RESISTOR,
    "RN": Kind.RESISTOR,
    "RA": Kind.RESISTOR,
    "RP": Kind.RESISTOR,
    "RV": Kind.TRIMMER,
    "VR": Kind.CHIP,
    "POT": Kind.TRIMMER,
    "RT": Kind.THERMISTOR,
    "TH": Kind.THERMISTOR,
    "NTC": Kind.THERMISTOR,
    "C": Kind.CAPACITOR,
    "L": Kind.INDUCTOR,
    "FB": Kind.BEAD,
    "BD": Kind.BEAD,
    "FL": Kind.BEAD,
    "FLT": Kind.BEAD,
    "EMI": Kind.BEAD,
    "F": Kind.FUSE,
    "FU": Kind.FUSE,
    "PTC": Kind.FUSE,
    "FS": Kind.FUSE,
    "FUSE": Kind.FUSE,
    "SB": Kind.JUMPER,
    "LK": Kind.JUMPER,
    "LNK": Kind.JUMPER,
    "NT": Kind.NET_TIE,
    "JP": Kind.JUMPER,
    "SJ": Kind.JUMPER,
    "D": Kind.DIODE,
    "CR": Kind.DIODE,
    "TVS": Kind.CLAMP,
    "ZD": Kind.CLAMP,
    "DZ": Kind.CLAMP,
    "Z": Kind.CLAMP,
    "LED": Kind.LED,
    "LD": Kind.LED,
    "Q": Kind.TRANSISTOR,
    "T": Kind.TRANSISTOR,
    "TR": Kind.TRANSISTOR,
    "M": Kind.TRANSISTOR,
    "FET": Kind.TRANSISTOR,
    "J": Kind.CONNECTOR,
    "P": Kind.CONNECTOR,
    "X": Kind.CONNECTOR,
    "XP": Kind.CONNECTOR,
    "XS": Kind.CONNECTOR,
    "CN": Kind.CONNECTOR,
    "CON": Kind.CONNECTOR,
    "CONN": Kind.CONNECTOR,
    "USB": Kind.CONNECTOR,
    "HDR": Kind.CONNECTOR,
    "BT": Kind.BATTERY,
    "BAT": Kind.BATTERY,
    "SW": Kind.SWITCH,
    "S": Kind.SWITCH,
    "TP": Kind.TEST_POINT,
    "W": Kind.NET_TIE,
}

_BEAD = re.compile(r"ferrite|(?<![a-z])bead|\bFB\b|@\s*100\s*MHz", re.IGNORECASE)
_FUSE = re.compile(r"(?<![a-z])(?:poly)?fuse(?!d)|polyswitch|resettable|\bPTC\b", re.IGNORECASE)
_NET_TIE = re.compile(r"net[-_ ]?tie", re.IGNORECASE)
_JUMPER = re.compile(r"jumper", re.IGNORECASE)
_LED = re.compile(r"(?<![A-Za-z])LED(?![A-Z]{2})|light[- ]emitting", re.IGNORECASE)
_LED_VALUE = re.compile(
    r"(?:(?:super|ultra)?\s*(?:bright)?\s*)(?:red|green|blue|yellow|amber|orange|white|pink)\b.*", re.IGNORECASE
)
_CLAMP = re.compile(
    r"zener|(?<![a-z])TVS|transient|(?<![a-z])ESD|suppress|(?<![a-z])varistor|D_Zener|surge"
    r"|(?<![a-z0-9])(?:BZ[XTVGM]\w*|MMSZ\w*|SM[ABCF]J\w*|PESD\w*|P[46]SMA?\w*|USBLC\w*)",
    re.IGNORECASE,
)
_CHOKE = re.compile(r"common[-_ ]?mode|L_Coupled|coupled|choke", re.IGNORECASE)
_THERMISTOR = re.compile(r"thermistor|(?<![a-z])[NP]TC(?![a-z])", re.IGNORECASE)
_TRIMMER = re.compile(r"potentiometer|R_Pot|trimm?er|R_Variable", re.IGNORECASE)
_BATTERY = re.compile(r"battery(?:_?cell|_?holder)?$|^battery", re.IGNORECASE)
_MOSFET = re.compile(r"mosfet|(?<![a-z])[NP]?(?:MOS|FET)(?![a-z])|[NP][-_ ]?channel", re.IGNORECASE)


@lru_cache(maxsize=65536)
def letters(ref: str) -> str:
    """Reference letters in upper case: "FB" of "FB12"; "" when there are none."""
    found = _LETTERS.match(ref)
    return found[0].upper() if found else ""


@lru_cache(maxsize=16384)
def _value(text: str) -> ComponentValue | None:
    return component_value(text)


def value_of(component: Component) -> ComponentValue | None:
    """Value of a passive part as its value text states it."""
    return _value(component.value)


def symbol_of(component: Component) -> str:
    """Name of the library symbol without its library."""
    return component.lib_id.partition(":")[2] or component.lib_id


def ends(component: Component) -> tuple[str, ...]:
    """Distinct nets of a component, in pin order."""
    return tuple(dict.fromkeys(pin.net for pin in component.pins))


def kind_of(component: Component) -> Kind:
    """Kind of a component."""
    head = letters(component.ref)
    symbol = symbol_of(component)
    kind = _BY_LETTERS.get(head, Kind.CHIP)
    pins = len(component.pins)
    texts = (symbol, component.value, component.description)
    if _NET_TIE.search(symbol) or _NET_TIE.search(component.footprint):
        return Kind.NET_TIE
    if _JUMPER.search(symbol) or _JUMPER.search(component.footprint):
        return Kind.JUMPER
    if kind in (Kind.DIODE, Kind.CLAMP, Kind.LED):
        return _diode_kind(component, texts)
    if kind is Kind.RESISTOR:
        return _resistor_kind(texts, pins)
    if kind is Kind.TRANSISTOR:
        return _transistor_kind(component, texts, pins)
    if kind in (Kind.INDUCTOR, Kind.BEAD):
        return _inductor_kind(texts, kind, pins)
    if kind in (Kind.CONNECTOR, Kind.SWITCH, Kind.CHIP) and pins == 2:
        return _two_pin_kind(component, texts, kind)
    if kind is Kind.CHIP and component.lib_id.casefold().startswith("connector"):
        return Kind.CONNECTOR
    return kind


def _diode_kind(component: Component, texts: tuple[str, ...]) -> Kind:
    if any(_LED.search(text) for text in (*texts, component.keywords)) or _LED_VALUE.fullmatch(component.value.strip()):
        return Kind.LED
    if any(_CLAMP.search(text) for text in texts):
        return Kind.CLAMP
    return Kind.DIODE if len(component.pins) <= 6 else Kind.CHIP


def _resistor_kind(texts: tuple[str, ...], pins: int) -> Kind:
    if any(_THERMISTOR.search(text) for text in texts):
        return Kind.THERMISTOR
    if any(_TRIMMER.search(text) for text in texts):
        return Kind.TRIMMER
    if any(_FUSE.search(text) for text in texts):
        return Kind.FUSE
    if pins == 2 and _BEAD.search(" ".join(texts)):
        return Kind.BEAD
    return Kind.RESISTOR


def _transistor_kind(component: Component, texts: tuple[str, ...], pins: int) -> Kind:
    names = {pin.name.upper() for pin in component.pins}
    if names & {"G", "D", "S", "B", "C", "E"} or any(_MOSFET.search(text) for text in texts):
        return Kind.TRANSISTOR
    if letters(component.ref) in ("T", "TR") and pins >= 4:
        return Kind.CHOKE if any(_CHOKE.search(text) for text in texts) else Kind.TRANSFORMER
    return Kind.TRANSISTOR if letters(component.ref) in ("Q", "FET") and pins >= 3 else Kind.CHIP


def _inductor_kind(texts: tuple[str, ...], kind: Kind, pins: int) -> Kind:
    if pins >= 4 and pins % 2 == 0 and (kind is Kind.INDUCTOR or any(_CHOKE.search(text) for text in texts)):
        return Kind.CHOKE
    return Kind.BEAD if kind is Kind.BEAD or any(_BEAD.search(text) for text in texts) else Kind.INDUCTOR


def _two_pin_kind(component: Component, texts: tuple[str, ...], kind: Kind) -> Kind:
    if any(_FUSE.search(text) for text in texts):
        return Kind.FUSE
    if any(_BATTERY.search(text) for text in texts[:2]):
        return Kind.BATTERY
    if kind is Kind.CHIP and any("ferrite" in text.casefold() for text in texts):
        return Kind.BEAD
    if kind is Kind.CONNECTOR and any(word in component.value.upper() for word in ("SHORT", "BRIDGED")):
        return Kind.JUMPER
    return kind


def ohms(component: Component) -> float | None:
    """Resistance a resistor's value text states [Ω]; None when it states none."""
    value = value_of(component)
    if value is None and _ZERO.match(component.value.strip()):
        return 0.0
    if value is None or value.magnitude is None or value.dimension not in (None, Dimension.RESISTANCE):
        return None
    return value.magnitude


_ZERO = re.compile(r"(?:R_)?0+(?:[.,]0+)?\s*(?:R|E|Ω|ohms?)?0*(?=$|[\s,;/_(])", re.IGNORECASE)


def is_schottky(component: Component) -> bool:
    """Whether a diode's own texts say Schottky."""
    texts = (
        symbol_of(component),
        component.value,
        component.description,
        component.keywords,
        *component.fields.values(),
    )
    return any(_SCHOTTKY.search(text) for text in texts)


_SCHOTTKY = re.compile(
    r"schottky|(?<![a-z0-9])(?:1N581[789]\w*|1N582[0-9]\w*|SS[1-5][2-9]\w*|SK[1-5]\d\w*|B5[89]1[0-9]\w*|MBR\w*|SB[1-9]\w*"
    r"|PMEG\w*|BAT[0-9]\w*|B[1-5][2-6]0\w*|STPS\w*|RB\d+\w*|NSR\w*|CUS\w*|SD103\w*|DSS\w*|DFLS\w*|VS-\w*)",
    re.IGNORECASE,
)
