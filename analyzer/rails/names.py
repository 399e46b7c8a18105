"""Voltage by net name, for the forms boards use and the traps among them.

A name is the weakest evidence there is, so a form that can be read two ways is not read at all.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache


@dataclass(frozen=True, slots=True)
class NamedVolts:
    """Voltage that a name states.

    Attributes:
        volts: The voltage [V], with its sign.
        text: The piece of the name it was read from.
    """

    volts: float
    text: str


_SIGNALS = frozenset(
    """
    EN ENA ENABLE NEN PG PGOOD PWRGD GOOD PWROK POK OK FB VFB FEEDBACK SENSE SNS VSENSE ISENSE ADC DAC AIN MON
    VMON IMON RST NRST RESET NRESET FAULT FLT NFAULT INT IRQ ALERT SEL CTRL CTL DET DETECT FLAG STAT STATUS OC DIS
    DISABLE GATE GT BTN BUTTON KEY LED SDA SCL TX RX TXD RXD RTS CTS CLK SCK SCLK MISO MOSI CS NCS DIN DOUT AMUX
    MUX GPIO TRIG SW LX PH PHASE BOOT BST CB COMP SS TP ADJ SET DIV PWM TRIM MODE WAKE SHDN NSHDN ON OFF VSEL LVL
    LEVEL DATA TDI TDO TCK TMS SWDIO SWCLK INH BIT RUN REQ ACK READY RDY RTN RETURN GND
    """.split()
)
_DOMAINS = frozenset({"LED", "ADC", "DAC", "GPIO", "DATA", "MUX", "CLK", "INT", "PWM", "BUTTON", "KEY", "LEVEL"})
"""Words that behind a voltage name what the rail supplies, and only before one make it a signal."""
_INPUT_WORDS = ("IN", "INPUT")
_NEGATIVE_WORDS = frozenset({"NEG", "MINUS", "VEE", "VNEG", "N"})
_NEGATIVE_TAILS = frozenset({"NEG", "N", "MINUS"})

_NUMBER = re.compile(
    r"""(?P<sign>[+-]|±|\+/-)?
        (?:
            (?P<a>\d{1,3})[Vv](?P<b>\d{1,3})            # 3V3, 12V0, 1v8
          | (?P<c>\d{1,2})[Pp](?P<d>\d{1,2})(?P<pv>V?)  # 1P8V
          | (?P<e>\d{1,3}[.,]\d{1,3})(?P<ev>[Vv]?)      # 3.3V, 1.35
          | (?P<f>3_3|1_8)[Vv]                          # the only two that cannot be an index and a whole number
          | (?P<g>\d{1,4})[Vv](?!\d)                    # 5V
        )
        (?![0-9])""",
    re.VERBOSE,
)
_SIGNED_ONLY = re.compile(r"(?P<sign>[+-])(?P<number>\d{1,2}(?:[.,]\d{1,2})?)")
_REFERENCE = re.compile(r"V?REF(?P<sign>[+-])(?P<number>\d{1,2}(?:[.,]\d{1,3})?)V?", re.IGNORECASE)
_SUPPLY_HEAD = re.compile(
    r"(?:\+|P|PWR|POWER|PS|V|[A-Z]?VCC\w*|[A-Z]?VDD\w*|VREF|VBUS|VSYS|SUPPLY|RAIL)[_+-]?$", re.IGNORECASE
)
_LETTERS_AFTER_V = re.compile(r"(?:CC|DD|SS|EE|BUS|BAT|BATT|REF|SYS|PP|CORE|IO|OUT|IN)", re.IGNORECASE)
_GREATEST = 1000.0


def base_name(net: str) -> str:
    """A net's own name: sheet path removed, escaped slashes put back, markup of names removed."""
    name = _MARKUP.sub(r"\1", net)
    if name.startswith("/"):
        head, _, last = name.rpartition("/")
        if last.isdigit():
            # "+5V/4" below a sheet, its slash unescaped: the number is no name of its own
            last = f"{head.rpartition('/')[2]}/{last}"
        name = last
    return name.replace("{slash}", "/").strip()


_MARKUP = re.compile(r"[~_^]\{([^{}]*)\}")


def is_signal_name(net: str) -> bool:
    """Whether a word in a net's name says that it is a signal of a supply ("VBUS_DET"), not the supply."""
    words = re.split(r"[^A-Za-z0-9]+", base_name(net).upper())
    return bool((_SIGNALS - _DOMAINS).intersection(words))


@lru_cache(maxsize=16384)
def named_volts(net: str) -> NamedVolts | None:
    """The voltage a net's name states; None if it states none, or could be a signal's name."""
    name = base_name(net)
    if not name or name.startswith(("Net-(", "unconnected-", "N$", "Net_")):
        return None
    if found := _REFERENCE.fullmatch(name) or _SIGNED_ONLY.fullmatch(name):
        volts = float(found["number"].replace(",", "."))
        return NamedVolts(-volts if found["sign"] == "-" else volts, found[0])
    hits = [hit for found in _NUMBER.finditer(name) if (hit := _read(name, found))]
    if not hits or len({hit.volts for hit in hits}) > 1:
        return None
    return hits[0]


def _read(name: str, found: re.Match[str]) -> NamedVolts | None:
    before, after = name[: found.start()], name[found.end() :]
    if before[-1:].isdigit() or before[-1:] in (".", ","):
        return None
    magnitude = _magnitude(found, before, after)
    if magnitude is None or not 0 < magnitude <= _GREATEST or _is_signal(before, after, found):
        return None
    sign = _sign(found["sign"], before, after)
    return None if sign == 0 else NamedVolts(sign * magnitude, found[0])


def _magnitude(found: re.Match[str], before: str, after: str) -> float | None:
    if found["a"] is not None:
        return float(f"{found['a']}.{found['b']}")
    if found["c"] is not None:
        headed = _SUPPLY_HEAD.search(before) is not None
        return float(f"{found['c']}.{found['d']}") if found["pv"] or headed else None
    if found["e"] is not None:
        headed = bool(found["sign"]) or _SUPPLY_HEAD.search(before) is not None
        return float(found["e"].replace(",", ".")) if found["ev"] or headed else None
    if found["f"] is not None:
        return float(found["f"].replace("_", "."))
    if before[-1:].isalpha() and _LETTERS_AFTER_V.match(after):
        return None  # "SPI2VCC": the V belongs to the word behind it
    if after[:2].upper() == "AC":
        return None
    return float(found["g"])


def _is_signal(before: str, after: str, found: re.Match[str]) -> bool:
    """Whether the words around the number make it a signal of that rail, not the rail."""
    heads = [word for word in re.split(r"[^A-Za-z0-9]+", before.upper()) if word]
    tails = [word for word in re.split(r"[^A-Za-z0-9]+", after.upper()) if word]
    glued_head = bool(before) and before[-1].isalpha()
    if tails and not after[:1].isalpha() and tails[0] == "SW" and not _SIGNALS.intersection(heads):
        tails = tails[1:]  # "3V3_SW": the switched rail
    if (_SIGNALS - {"LED", "DAC", "CLK"}).intersection(heads) or (_SIGNALS - _DOMAINS).intersection(tails):
        return True
    if any(re.fullmatch(r"(?:S|D|A|Q|IO|CH|AD|GP|P[A-K])\d{1,2}", word) for word in heads):
        return True  # "AMUX_S0_3V3": a signal at that level
    # "BU3V3IN": what the regulator of that voltage takes in
    return glued_head and found["a"] is not None and tails[:1] in ([word] for word in _INPUT_WORDS)


def _sign(sign: str | None, before: str, after: str) -> int:
    heads = [word for word in re.split(r"[^A-Za-z]+", before.upper()) if word]
    tails = [word for word in re.split(r"[^A-Za-z0-9]+", after.upper()) if word]
    if sign in ("±", "+/-") or (heads and heads[-1] == "M"):
        return 0  # both signs, or "M12V": some mean minus, some mean main
    negative = bool(heads and heads[-1] in _NEGATIVE_WORDS) or bool(tails and tails[0] in _NEGATIVE_TAILS)
    if sign == "-" and not (before and before[-1].isalnum()):
        negative = True
    return -1 if negative else 1
