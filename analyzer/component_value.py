"""What the value text of a schematic symbol says: magnitude, tolerance, series resistance, "not fitted".

Designers write values in many shapes: `4k7`, `4,7K`, `R_10k_0402`, `1.27k/1%/62.5mW/R0402`, `0.02+-1%`, `2,2uH`,
`NA(22R/R0603)`. Unlike the grammar for stated quantities this one therefore takes a decimal comma, values without a
unit, and further words behind the value; what it does not understand it leaves alone (None), it never guesses.
Letters in place of the point as in IEC 60062.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from decimal import Decimal

from analyzer import limits
from analyzer.quantity import Dimension


@dataclass(frozen=True, slots=True)
class ComponentValue:
    """A value text that was understood.

    Attributes:
        magnitude: The value in the SI unit; None when the text says only that the part is not fitted.
        dimension: Dimension where the text gives it ("4k7" is a resistance); None for a number with at most a prefix
            that several dimensions share ("100n", "600").
        tolerance: Relative tolerance as a fraction, where the text gives one.
        dcr: Series resistance [Ω] of an inductor, where the text gives one.
        is_unfitted: True when the text says that the part is not fitted.
    """

    magnitude: float | None
    dimension: Dimension | None = None
    tolerance: float | None = None
    dcr: float | None = None
    is_unfitted: bool = False


_SPELLINGS = str.maketrans("\u00b5\u03bc\u2126\u2212\u00a0", "uu\u03a9- ")
_NOT_FITTED = re.compile(
    r"\s*(?:DNP|DNF|DNI|DNS|DNM|NOPOP|N\.?C\.?|N/?A|N\.?F\.?|NM|NP"
    r"|(?:do )?not (?:populated?|fit(?:ted)?|mount(?:ed)?|placed?))(?=$|[\s(/_,:;-])",
    re.IGNORECASE,
)
_NOT_FITTED_LATER = re.compile(r"(?<![A-Za-z0-9])(?:DNP|DNF|DNI|NOPOP)(?![A-Za-z0-9])", re.IGNORECASE)
_DCR = re.compile(r"DCR\s*[=:]?\s*([0-9][0-9.,]*\s*[a-zA-ZΩ]+)", re.IGNORECASE)
_TOLERANCE = re.compile(r"(?:^|[^0-9.,])([0-9]{1,2}(?:[.,][0-9]{1,3})?)\s*%")
_PACKAGE = re.compile(r"[RCL]?(?:01005|0201|0402|0603|0805|1206|1210|1218|1806|1812|2010|2512)|[RCL]")
_SPLIT = re.compile(r"[\s/_()|;@]+|(?<=[\w%Ω])-(?=\w)")

_OTHER_UNIT = re.compile(r"[pnumkMG]?(?:Hz|HZ|VA|V|A|W|s)(?:AC|DC)?")
_SMALL_ONLY = frozenset({"", *"pnumUPN"})
"""Prefixes of farad and henry."""

_EXPONENTS = {"p": -12, "n": -9, "u": -6, "U": -6, "m": -3, "": 0, "k": 3, "K": 3, "M": 6, "G": 9}
_PLAIN = re.compile(
    r"(?P<number>[0-9]+(?:[.,][0-9]+)?)(?P<prefix>[pnumkKMGU]?)(?P<unit>R|Ω|[Oo]hms?|OHMS?|F|H|)(?P<tolerance>[BCDFGJKMN]?)"
)
_UPPER = re.compile(r"(?P<number>[0-9]+(?:[.,][0-9]+)?)(?P<prefix>[PN])(?P<unit>[FH])(?P<tolerance>)")
_POINT = re.compile(
    r"(?P<whole>[0-9]{0,3})(?P<letter>[pnumkKMGRLΩ])(?P<part>[0-9]{1,4})(?P<unit>R|Ω|[Oo]hms?|F|H|)(?P<tolerance>[BCDFGJKMN]?)"
)
_LETTER_TOLERANCE = {
    "B": 0.001,
    "C": 0.0025,
    "D": 0.005,
    "F": 0.01,
    "G": 0.02,
    "J": 0.05,
    "K": 0.10,
    "M": 0.20,
    "N": 0.30,
}


def component_value(text: str) -> ComponentValue | None:
    """The value a symbol's value text states, None if the text is no passive part's value."""
    clean = (
        text[: limits.VALUE_LENGTH]
        .strip()
        .translate(_SPELLINGS)
        .replace("+/-", "±")
        .replace("+-", "±")
        .replace("±", " ±")
    )
    unfitted = _NOT_FITTED.match(clean)
    rest = clean[unfitted.end() :] if unfitted else clean
    value = _first_value(rest)
    if value is None:
        return ComponentValue(None, is_unfitted=True) if unfitted else None
    tolerance = _TOLERANCE.search(rest)
    dcr = _DCR.search(rest)
    return replace(
        value,
        tolerance=float(Decimal(_point(tolerance[1])) / 100) if tolerance else value.tolerance,
        dcr=_dcr(dcr[1]) if dcr else None,
        is_unfitted=bool(unfitted or _NOT_FITTED_LATER.search(rest)),
    )


def _first_value(text: str) -> ComponentValue | None:
    """The first piece that is neither a letter class nor a case size, if it is a value; later pieces are remarks."""
    pieces = [piece for piece in _SPLIT.split(text) if piece]
    while pieces and _PACKAGE.fullmatch(pieces[0]):
        pieces.pop(0)
    if not pieces:
        return None
    if (
        len(pieces) > 1
        and pieces[0][-1].isdigit()
        and not pieces[1][0].isdigit()
        and (joined := _one(pieces[0] + pieces[1]))
    ):
        return joined  # "2.2 uH"
    if len(pieces) > 1 and _OTHER_UNIT.fullmatch(pieces[1]) and pieces[0][-1].isdigit():
        return None  # "100 mA" is a rating
    return _one(pieces[0])


def _one(piece: str) -> ComponentValue | None:
    if found := _PLAIN.fullmatch(piece) or _UPPER.fullmatch(piece):
        return _plain(found)
    if found := _POINT.fullmatch(piece):
        return _lettered(found)
    return None


def _plain(found: re.Match[str]) -> ComponentValue | None:
    number, prefix, unit, letter = found["number"], found["prefix"], found["unit"], found["tolerance"]
    if re.fullmatch(r"[0-9]{1,3},[0-9]{3}", number) and not number.startswith("0,"):
        return None  # decimal comma or thousands: nobody can tell
    if letter and not unit and not prefix:
        return None  # "100K" is kilo; "100J" is a name
    dimension = _dimension(unit, prefix)
    exponent = _EXPONENTS[prefix.lower() if prefix in "PN" else prefix]
    if unit in ("F", "H") and prefix not in _SMALL_ONLY:
        return None
    if unit == "OHM" and prefix == "M":
        return None  # all in capitals it may be milli or mega
    magnitude = float(Decimal(_point(number)).scaleb(exponent))
    return ComponentValue(magnitude, dimension, _LETTER_TOLERANCE.get(letter))


def _lettered(found: re.Match[str]) -> ComponentValue:
    letter = found["letter"]
    exponent = {"R": 0, "Ω": 0, "L": -3}.get(letter, _EXPONENTS.get(letter, 0))
    number = Decimal(f"{found['whole'] or '0'}.{found['part']}")
    dimension = Dimension.RESISTANCE if letter in "RLkKMΩ" else None
    if found["unit"]:
        dimension = _dimension(found["unit"], letter)
    return ComponentValue(float(number.scaleb(exponent)), dimension, _LETTER_TOLERANCE.get(found["tolerance"]))


def _dimension(unit: str, prefix: str) -> Dimension | None:
    if unit == "F":
        return Dimension.CAPACITANCE
    if unit == "H":
        return Dimension.INDUCTANCE
    if unit or prefix in ("k", "K"):
        return Dimension.RESISTANCE
    return None


def _dcr(text: str) -> float | None:
    value = _one(text.replace(" ", ""))
    return value.magnitude if value and value.dimension is Dimension.RESISTANCE else None


def _point(number: str) -> str:
    return number.replace(",", ".")
