"""Design variants of KiCad 10: which fields and marks a variant changes for one use of a symbol or sheet."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from analyzer.reading.drawing import Flags
from analyzer.reading.sexpr import Node, every, flag, word

BOM_MARK_MENDED = 20260306
"""Before this format KiCad wrote `in_bom` of variants the wrong way round: yes meant excluded."""


def changed_fields(variants: Iterable[Node], name: str) -> Mapping[str, str]:
    """Fields the variant sets, by name."""
    return {
        word(field, "name"): word(field, "value")
        for node in variants
        if word(node, "name") == name
        for field in every(node, "field")
    }


def changed_flags(base: Flags, variants: Iterable[Node], name: str, version: int) -> Flags:
    """The marks of the base design with those the variant changes put in their place."""
    fitted, in_bom, on_board = base
    for node in variants:
        if word(node, "name") != name:
            continue
        fitted = not flag(node, "dnp", not fitted)
        bom_before = in_bom if version >= BOM_MARK_MENDED else not in_bom
        bom = flag(node, "in_bom", bom_before)
        in_bom = bom if version >= BOM_MARK_MENDED else not bom
        on_board = flag(node, "on_board", on_board)
    return fitted, in_bom, on_board
