"""Statements of the settings that name parts which the board does not have, or which nothing asks about."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from analyzer.circuit import Circuit, natural_key
from analyzer.findings import statements as kinds
from analyzer.findings.base import Finding
from analyzer.part import Part
from analyzer.settings import PartStatement, Settings


def unused_statements(circuit: Circuit, parts: Iterable[Part], settings: Settings) -> tuple[Finding, ...]:
    """A finding for each table of [parts] and each [[coupling]] that no part of the board answers to."""
    known = {part.component.ref for part in parts}
    found: list[Finding] = []
    for ref, stated in sorted(settings.parts.items(), key=lambda item: natural_key(item[0])):
        place = f"{settings.file} [parts.{ref}]"
        if ref not in circuit.by_ref:
            message = f"[parts.{ref}]: no part has this reference"
            found.append(kinds.STATEMENT_WITHOUT_PART.found(ref, message, place))
        elif ref not in known and _has_figures(stated):
            message = f"[parts.{ref}]: {ref} is not recognised as a regulator or passage"
            found.append(kinds.STATEMENT_UNUSED.found(ref, message, place))
    for pair in settings.coupling:
        for ref in (pair.ref, pair.by):
            if ref not in circuit.by_ref:
                message = f"[[coupling]] of {pair.ref} and {pair.by}: no part has the reference {ref}"
                found.append(kinds.COUPLING_WITHOUT_PART.found(ref, message, f"{settings.file} [[coupling]]"))
    return tuple(dict.fromkeys(found))


def _has_figures(stated: PartStatement) -> bool:
    """Whether anything is stated but what the part is, or that it is no regulator."""
    if stated.is_regulator is False:
        return False
    return replace(stated, is_regulator=None) != PartStatement()
