"""What a part says it is: part-number fields first, then Value, then the name of its symbol.

Field names are those met on real boards. Fields of part numbers name the part itself; fields of suppliers hold
order codes that name nothing, unless a supplier writes the part number there.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass

from analyzer.circuit import Component

PART_FIELDS = frozenset(
    """mpn partnumber partno partnum pn manufacturerpartnumber manufacturerpart mfrno mfrpartnumber mfgpartnumber mfpn
    mpnalt dpn prodid manf part mfr mfg key source mfrpart mfgpart manufacturerpn szlcscpartnumber""".split()
)
SUPPLIER_FIELDS = frozenset("lcsc digikey mouser supplier dk jlc jlcpcb lcscpart lcscpartnumber farnell".split())

_BREAKS = re.compile(r"[,;\s]+")


@dataclass(frozen=True, slots=True)
class Identity:
    """One text that may name the part.

    Attributes:
        field: Field it stands in, as written; "Value" or "symbol name".
        text: The text, upper case, stripped of invisible characters.
        is_part_number: Whether the field is meant to hold the maker's part number.
    """

    field: str
    text: str
    is_part_number: bool


def identities(component: Component) -> Iterator[Identity]:
    """Every text that may name the part, best first."""
    for wanted, is_part_number in ((PART_FIELDS, True), (SUPPLIER_FIELDS, False)):
        for name, text in component.fields.items():
            if _plain(name) in wanted:
                for piece in pieces(text):
                    yield Identity(name, piece, is_part_number)
    for piece in pieces(component.value):
        yield Identity("Value", piece, False)
    name = component.lib_id.rpartition(":")[2]
    for piece in pieces(name):
        yield Identity("symbol name", piece, False)


def _plain(name: str) -> str:
    return re.sub(r"[^a-z0-9]", "", name.lower())


def pieces(text: str) -> Iterator[str]:
    """A field may hold two part numbers, trailing blanks and invisible marks."""
    visible = "".join(c for c in text if unicodedata.category(c) != "Cf").upper()
    for piece in _BREAKS.split(visible):
        if piece and piece != "~":
            yield piece


_VOLTS_ONLY = re.compile(r"[+-]?\d{1,2}(?:[.,]\d{1,2})?V?\d{0,2}")


def looks_like_part_number(text: str) -> bool:
    """Whether a text could be a part number: letters and at least two digits, and not just a voltage."""
    if _VOLTS_ONLY.fullmatch(text):
        return False
    return sum(c.isdigit() for c in text) >= 2 and any(c.isalpha() for c in text) and len(text) >= 4
