"""The everyday units, by dimension: how much of the SI unit inside one of each is.

Factors are decimal text so that scaling a number text is exact; a test holds every entry against pint.
"""

from __future__ import annotations

from collections.abc import Mapping
from decimal import Decimal

from analyzer.quantity import Dimension

PREFIXES: Mapping[str, str] = {
    "p": "1e-12",
    "n": "1e-9",
    "µ": "1e-6",
    "m": "1e-3",
    "": "1",
    "k": "1e3",
    "M": "1e6",
    "G": "1e9",
}
"""SI prefixes in use here; both code points of µ, and u, are read as micro."""


def _prefixed(*symbols: str, prefixes: str = "pnµmkMG", own: bool = True) -> dict[str, Decimal]:
    chosen = [*prefixes, *([""] if own else [])]
    return {prefix + symbol: Decimal(PREFIXES[prefix]) for symbol in symbols for prefix in chosen}


def _fixed(**factors: str) -> dict[str, Decimal]:
    return {symbol: Decimal(factor) for symbol, factor in factors.items()}


def _table(text: str) -> dict[str, Decimal]:
    """Rows of "factor unit unit …"."""
    rows = (line.split() for line in text.strip().splitlines())
    return {unit: Decimal(factor) for factor, *units in rows for unit in units}


EVERYDAY: Mapping[Dimension, Mapping[str, Decimal]] = {
    Dimension.CURRENT: _prefixed("A", prefixes="pnµmk"),
    Dimension.VOLTAGE: _prefixed("V", prefixes="nµmk"),
    Dimension.POWER: _prefixed("W", prefixes="nµmk"),
    Dimension.RESISTANCE: _prefixed("Ω", "ohm", "Ohm", "R", prefixes="µmkMG") | _fixed(k="1e3", M="1e6"),
    Dimension.CAPACITANCE: _prefixed("F", prefixes="pnµm"),
    Dimension.INDUCTANCE: _prefixed("H", prefixes="pnµm"),
    Dimension.FREQUENCY: _prefixed("Hz", prefixes="mkMG"),
    Dimension.CHARGE: _prefixed("C", prefixes="pnµm"),
    Dimension.TIME: _prefixed("s", prefixes="pnµm") | _fixed(min="60", h="3600"),
    Dimension.LENGTH: _prefixed("m", prefixes="nµmk")
    | _fixed(cm="0.01", ft="0.3048", mil="0.0000254")
    | _table("0.0254 in inch"),
    Dimension.AREA: _table("""
        1 m2 m² m^2
        0.0001 cm2 cm² cm^2
        0.000001 mm2 mm² mm^2
        0.00064516 in2 in² in^2
    """),
    Dimension.SPEED: _table("""
        1 m/s
        0.00508 ft/min lfm LFM
    """),
    Dimension.TEMPERATURE: _table("1 °C ℃ degC C"),
    Dimension.TEMPERATURE_DIFFERENCE: _table("1 K °C ℃ degC") | _fixed(mK="0.001"),
    Dimension.THERMAL_RESISTANCE: _table("""
        1 K/W °C/W ℃/W degC/W C/W
        1000 K/mW °C/mW
    """),
    Dimension.THERMAL_CONDUCTIVITY: _table("1 W/(m·K) W/(m*K) W/m/K W/mK W/m-K W/(mK)"),
    Dimension.RATIO: _table("""
        0.01 %
        0.000001 ppm
    """),
    Dimension.PER_KELVIN: _table("""
        1 1/K /K 1/°C /°C
        0.01 %/K %/°C
        0.000001 ppm/K ppm/°C
    """),
}
"""Unit as written → its size in the unit used inside. Temperatures are °C on both sides."""
