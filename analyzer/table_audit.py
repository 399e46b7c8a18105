"""Parts-table mode: a budget for each row of a list of regulators, without any connectivity.

A row is made into a circuit of its own kind: its voltages and its load are what the row states, its part is found by
its number alone. Where a column is absent or empty the budget stays open.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Iterator
from pathlib import Path

from analyzer.circuit import Circuit, Component, InputFile, Place
from analyzer.evidence import Evidence, Grade
from analyzer.findings.base import Finding
from analyzer.findings.reading import TABLE_CELL
from analyzer.findings.recognition import NO_RULE
from analyzer.load import Draw, Gap, Loads, RailLoad
from analyzer.part import Part
from analyzer.quantity import ZERO, Span
from analyzer.rail import Rail, Rails, Wiring
from analyzer.reading.parts_table import Row, Table
from analyzer.recognise.by_rule import Index, channels_of
from analyzer.recognise.identity import identities
from analyzer.recognise.package import read_package
from analyzer.rule import Rulebook, Topology
from analyzer.wording import show

Stages = tuple[Circuit, tuple[Part, ...], Rails, Loads, list[Finding]]


def stages(path: Path, table: Table, rulebook: Rulebook) -> Stages:
    """What the stages before the budget would have handed on, made from the rows of a table."""
    index = Index(rulebook)
    components: list[Component] = []
    parts: list[Part] = []
    wirings: list[Wiring] = []
    rails: list[Rail] = []
    loads: dict[str, RailLoad] = {}
    findings: list[Finding] = []
    for row in table.rows:
        findings += [TABLE_CELL.found(", ".join(row.refs), fault, row.place) for fault in row.faults]
        for ref in row.refs:
            component = _component(ref, row)
            components.append(component)
            part = _part(component, row, index, rulebook)
            if part is None:
                message = f"no rule knows {row.part or row.value or 'a row without part number'}"
                findings.append(NO_RULE.found(ref, message, row.place, key=component.key))
                continue
            rail = f"output of {ref}"
            parts.append(part)
            wirings.append(_wiring(part, row, rail))
            rails.append(Rail(rail, (rail,), _volts(row, "vout", "output voltage")))
            loads[rail] = _load(component, row, rail)
    digest = hashlib.sha256(path.read_bytes()).hexdigest()
    circuit = Circuit(
        path.stem,
        tuple(components),
        (),
        inputs=(InputFile(path.name, digest),),
        cannot_contain=("connections: voltages and loads are only what the table states",),
    )
    return circuit, tuple(parts), Rails(tuple(rails), tuple(wirings)), Loads(loads), findings


def _component(ref: str, row: Row) -> Component:
    fields = {"MPN": row.part} if row.part else {}
    return Component(f"{row.place} {ref}", ref, row.value, "", row.package, fields, "", "", (), Place(row.place))


def _part(component: Component, row: Row, index: Index, rulebook: Rulebook) -> Part | None:
    hit = next((hits[0] for identity in identities(component) if (hits := index.hits(identity))), None)
    if hit is None:
        return None
    package = read_package(row.package, rulebook.packages, "table")
    thermal = tuple(figure for figure in hit.rule.thermal if figure.package == package.family)
    channels = channels_of(component, hit)
    why = f"{hit.identity.field} {hit.identity.text} matches {hit.pattern} of {hit.rule.where}"
    return Part(component, "rule", hit.rule, hit.identity.field, hit.identity.text, package, channels, thermal, why)


def _volts(row: Row, column: str, quantity: str) -> Evidence | None:
    span = row.quantities.get(column)
    return None if span is None else Evidence(quantity, span, "V", row.place, Grade.STATED)


def _wiring(part: Part, row: Row, rail: str) -> Wiring:
    channel = part.channels[0]
    vout = _volts(row, "vout", "output voltage") or channel.volts
    vin = _volts(row, "vin", "input voltage")
    net = f"input of {part.ref}"
    why = ("a shunt regulator's resistor cannot stand in a table",) if channel.topology is Topology.SHUNT else ()
    said = channel.volts
    if said is not None and vout is not None and not said.span.overlaps(vout.span):
        shown = f"{show(vout.span.nominal, 'V')}, the part number {show(said.span.nominal, 'V')}"
        why = (*why, f"its output voltage: the row says {shown}")
    if len(part.channels) > 1:
        others = ", ".join(one.name or "?" for one in part.channels[1:])
        why = (*why, f"a table's row holds one output, the part has more: {others}")
    return Wiring(part, channel, net, net, rail, rail, vin=vin, vout=vout, why_open=why)


def _load(component: Component, row: Row, rail: str) -> RailLoad:
    span: Span | None = row.quantities.get("current")
    if span is None:
        gap = Gap(component.ref, component.key, rail, component.value, row.place, "no current in the table")
        return RailLoad(rail, (), (gap,), ZERO)
    amps = Evidence("load current", span, "A", row.place, Grade.STATED)
    return RailLoad(rail, (Draw(component.ref, component.key, rail, amps, "stated"),), (), span)


def unknown_rows(table: Table, parts: Iterable[Part]) -> Iterator[str]:
    """References whose row names no part that a rule knows, one line each."""
    known = {part.ref for part in parts}
    for row in table.rows:
        for ref in row.refs:
            if ref not in known:
                yield f"{ref} {row.part or row.value}: no rule knows it ({row.place})"
