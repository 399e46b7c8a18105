"""From placed symbols and named nets to the circuit: units become parts, pins get their nets."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable

from analyzer.circuit import Component, Net, Pin, natural_key
from analyzer.findings import reading as kinds
from analyzer.reading.joins import Netting
from analyzer.reading.library import pads_of
from analyzer.reading.netlisting import NetNames
from analyzer.reading.placement import PlacedPin, Placement
from analyzer.reading.report import Report
from analyzer.settings import Settings

Part = tuple[Placement, ...]
"""The placed units of one part, first unit first."""

ExpandFor = Callable[[Placement, str], str]
"""Puts text variables into a field of a placed symbol."""

_OWN = {"Reference", "Value", "Footprint"}


def group_units(placements: list[Placement], report: Report) -> list[Part]:
    """Bring the units of each part together; symbols that only share a reference stay apart.

    References that begin with "#" belong to power symbols and flags, not to parts.
    """
    by_reference: dict[str, list[Placement]] = defaultdict(list)
    for placement in placements:
        if not placement.reference.startswith("#"):
            by_reference[placement.reference].append(placement)
    parts: list[Part] = []
    for reference in sorted(by_reference, key=natural_key):
        members = sorted(by_reference[reference], key=lambda each: (each.unit, each.sheet.number, each.key))
        if not members[0].is_annotated:
            for member in members:
                parts.append((member,))
                place = member.sheet.drawing.place(member.symbol.at, member.sheet.name)
                message = f"'{reference}' has no number; kept as a part of its own"
                report.add(kinds.NOT_ANNOTATED, reference, message, place, key=member.key)
            continue
        groups: list[list[Placement]] = []
        for member in members:
            home = next((group for group in groups if _belongs(member, group)), None)
            if home is None:
                groups.append([member])
            else:
                home.append(member)
        if len(groups) > 1:
            sheets = ", ".join(group[0].sheet.name for group in groups)
            report.add(
                kinds.REFERENCE_TWICE,
                reference,
                f"{reference} is used by {len(groups)} symbols (sheet {sheets})",
                groups[1][0].sheet.drawing.place(groups[1][0].symbol.at, groups[1][0].sheet.name),
            )
        for group in groups:
            parts.append(tuple(group))
            _check_units(group, report)
    return parts


def _belongs(member: Placement, group: list[Placement]) -> bool:
    head = group[0]
    if head.symbol.lib_id != member.symbol.lib_id or head.library is None or member.library is None:
        return False
    return len(head.library.units) > 1 and all(other.unit != member.unit for other in group)


def _check_units(group: list[Placement], report: Report) -> None:
    head = group[0]
    if head.library is None or len(head.library.units) < 2:
        return
    missing = sorted(head.library.units - {each.unit for each in group})
    lost = [unit for unit in missing if head.library.pins_of(unit, head.symbol.style)]
    if lost:
        named = ", ".join(map(str, lost))
        message = f"{head.reference}: unit {named} of '{head.symbol.lib_id}' is not placed"
        place = head.sheet.drawing.place(head.symbol.at, head.sheet.name)
        report.add(kinds.UNIT_NOT_PLACED, head.reference, message, place, key=head.key)


def join_jumpers(parts: list[Part], netting: Netting) -> None:
    """Join the pads that a part joins inside."""
    for part in parts:
        library = part[0].library
        if library is None or not (library.jumper_groups or library.same_number_joins):
            continue
        by_pad: dict[str, list[PlacedPin]] = defaultdict(list)
        for unit in part:
            for placed in unit.pins:
                for pad in pads_of(placed.pin.number):
                    by_pad[pad].append(placed)
        groups = [[placed for pad in group for placed in by_pad.get(pad, ())] for group in library.jumper_groups]
        if library.same_number_joins:
            groups += by_pad.values()
        for group in groups:
            for placed in group[1:]:
                netting.joins.join(group[0].node, placed.node)


def build_components(
    parts: list[Part], netting: Netting, names: NetNames, expand: ExpandFor, settings: Settings, report: Report
) -> tuple[Component, ...]:
    """Make every part with its pins and their nets, in natural order of reference."""
    return tuple(_component(part, netting, names, expand, settings, report) for part in parts)


def build_nets(components: tuple[Component, ...], given: frozenset[str]) -> tuple[Net, ...]:
    """Make every net that has a pin of a part, in natural order of name."""
    on: dict[str, dict[tuple[str, str], None]] = defaultdict(dict)
    for component in components:
        for pin in component.pins:
            for net in (pin.net, *pin.more_nets):
                on[net][component.key, pin.number] = None
    return tuple(Net(name, tuple(on[name]), name in given) for name in sorted(on, key=natural_key))


def _component(
    part: Part, netting: Netting, names: NetNames, expand: ExpandFor, settings: Settings, report: Report
) -> Component:
    head = part[0]
    place = head.sheet.drawing.place(head.symbol.at, head.sheet.name)
    fields = {name: expand(head, text) for name, text in head.fields.items() if name not in _OWN}
    library_fields = head.library.fields if head.library is not None else {}
    value = expand(head, head.fields.get("Value", ""))
    flags = [all(unit.flags[at] for unit in part) for at in range(3)]
    return Component(
        key=head.key,
        ref=head.reference,
        value=value,
        lib_id=head.symbol.lib_id,
        footprint=expand(head, head.fields.get("Footprint", "")),
        fields=fields,
        description=_described(fields, library_fields),
        keywords=library_fields.get("ki_keywords", ""),
        pins=_pins(part, netting, names, report),
        place=place,
        fitted=flags[0] and not declared_unfitted(fields, value, settings),
        in_bom=flags[1],
        on_board=flags[2],
    )


def _described(fields: dict[str, str], library_fields: dict[str, str]) -> str:
    for text in (fields.get("Description"), library_fields.get("Description"), library_fields.get("ki_description")):
        if text and text.strip():
            return text
    return ""


def declared_unfitted(fields: dict[str, str], value: str, settings: Settings) -> bool:
    """Whether a field or the value says, by the user's own conventions, that the part is not fitted."""
    if value.strip() in settings.unfitted_values:
        return True
    return any(fields.get(name, "").strip() in values for name, values in settings.unfitted_fields.items())


def _pins(part: Part, netting: Netting, names: NetNames, report: Report) -> tuple[Pin, ...]:
    root = netting.joins.root
    pads: dict[str, list[tuple[PlacedPin, str]]] = defaultdict(list)
    for unit in part:
        for placed in unit.pins:
            if placed.pin.number:
                net = names.of_root[root(placed.node)]
                for pad in pads_of(placed.pin.number):
                    pads[pad].append((placed, net))
    pins: list[Pin] = []
    for pad in sorted(pads, key=natural_key):
        drawn = pads[pad]
        placed, _ = drawn[0]
        nets = list(dict.fromkeys(net for _, net in drawn))
        if len(nets) > 1:
            # a drawing of the pad that is left unconnected says nothing against the wired one
            nets.sort(key=lambda net: net.startswith("unconnected-("))
            _report_pad(part, pad, nets, report)
        owner = placed.owner
        alternate = owner.symbol.alternates.get(placed.pin.number, "")
        kind = placed.pin.alternates.get(alternate, placed.pin.kind)
        pins.append(Pin(pad, alternate or placed.pin.name, kind, nets[0], tuple(nets[1:])))
    return tuple(pins)


def _report_pad(part: Part, pad: str, nets: list[str], report: Report) -> None:
    head = part[0]
    place = head.sheet.drawing.place(head.symbol.at, head.sheet.name)
    shown = " and ".join(nets)
    report.add(kinds.PAD_ON_TWO_NETS, head.reference, f"{head.reference}.{pad} is on {shown}", place, key=head.key)
