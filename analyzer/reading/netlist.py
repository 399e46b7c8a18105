"""KiCad's netlists, XML and `.net` of KiCad 5 to 10, read into the same circuit as a schematic."""

from __future__ import annotations

import hashlib
import os
import re
from collections import defaultdict
from pathlib import Path

from analyzer import limits
from analyzer.circuit import Circuit, Component, InputFile, Net, Pin, Place, natural_key
from analyzer.errors import Fault, InputError
from analyzer.findings import reading as kinds
from analyzer.reading.assembly import declared_unfitted
from analyzer.reading.board_file import copper_layers
from analyzer.reading.files import Files, read_regular
from analyzer.reading.netlist_names import NameWriter
from analyzer.reading.netlist_tree import Branch, read_tree
from analyzer.reading.project import check_variant
from analyzer.reading.report import Report
from analyzer.settings import Settings

_AUTOMATIC = re.compile(r"(?:.*/)?(?:Net-\(|unconnected-\(|no_connect_)")
_PINFUNCTION_HAS_NUMBER = 10
"""From this KiCad on a node's pin function ends in "_" and the pad."""
_OWN = {"Reference", "Value", "Footprint"}


def schematic_beside(path: Path) -> Path | None:
    """The schematic a netlist was made from, if it lies in the same folder."""
    candidate = path.with_suffix(".kicad_sch")
    return candidate if os.path.isfile(candidate) else None


def read_netlist(path: Path, settings: Settings, variant: str | None = None) -> Circuit:
    """Read a netlist by itself.

    Args:
        path: The `.net` or `.xml`.
        settings: For the user's own ways of marking parts as not fitted.
        variant: Design variant to apply (netlists of KiCad 10).

    Raises:
        InputError: If the file is no netlist, damaged, or beyond the limits.
    """
    data = read_regular(path, limits.NETLIST_BYTES, path.name)
    root = read_tree(data, path.name)
    return _Reader(path, root, settings, variant).circuit(hashlib.sha256(data).hexdigest())


def names_of_variants(path: Path) -> tuple[str, ...]:
    """Names of the design variants a netlist lists.

    Raises:
        InputError: If the file is no netlist, damaged, or beyond the limits.
    """
    return _variants(read_tree(read_regular(path, limits.NETLIST_BYTES, path.name), path.name))


def _variants(root: Branch) -> tuple[str, ...]:
    holder = root.first("variants")
    return tuple(each.text_of("name") for each in (holder.all("variant") if holder else ()))


class _Reader:
    """Carries what the parts of one netlist have in common while it is read."""

    def __init__(self, path: Path, root: Branch, settings: Settings, variant: str | None) -> None:
        self._path = path
        self._root = root
        self._settings = settings
        self._variant = variant
        self._report = Report()
        check_variant(variant, _variants(root), path.name)
        design = root.first("design")
        self._tool = design.text_of("tool") if design else ""
        self._source = design.text_of("source") if design else ""
        major = re.search(r"Eeschema\s+\(?(\d+)\.", self._tool)
        self._major = int(major[1]) if major else 0
        self._is_old = root.text_of("version") == "D"
        self._written = NameWriter(root) if root.is_xml and not self._is_old else None

    def circuit(self, sha256: str) -> Circuit:
        parts = self._root.first("components")
        nets = self._root.first("nets")
        if parts is None or nets is None:
            fault = Fault("the netlist has no list of parts or nets", self._path.name, remedy="Export it again.")
            raise InputError(fault)
        comps = parts.all("comp")
        if len(comps) > limits.NETLIST_PARTS:
            raise InputError(Fault(f"more than {limits.NETLIST_PARTS} parts", self._path.name))
        nodes = self._nodes(nets)
        library = self._library()
        components: list[Component] = []
        seen: set[str] = set()
        for comp in sorted(comps, key=lambda each: natural_key(each.text_of("ref"))):
            ref = comp.text_of("ref")
            if ref in seen:
                message = f"{ref} is listed twice; its pins are shown with the first"
                self._report.add(kinds.REFERENCE_TWICE, ref, message, self._path.name, lost=True)
            pins = () if ref in seen else self._pins(ref, nodes.get(ref, {}), library.get(self._part(comp), {}))
            seen.add(ref)
            components.append(self._component(comp, ref, pins))
        for ref in sorted(nodes.keys() - seen, key=natural_key):
            message = f"the nets name {ref}, but the list of parts does not"
            self._report.add(kinds.BAD_ITEM, ref, message, self._path.name, lost=True)
        missing = self._cannot_contain()
        message = f"read from a netlist, which cannot contain: {'; '.join(missing)}"
        self._report.add(kinds.NETLIST_ONLY, self._path.name, message, self._path.name)
        files = Files(self._path.parent)
        return Circuit(
            board=Path(self._source.replace("\\", "/")).stem or self._path.stem,
            components=tuple(components),
            nets=_nets(components),
            findings=tuple(self._report.findings),
            complete=self._report.complete,
            inputs=(InputFile(self._path.name, sha256),),
            copper_layers=copper_layers(self._path, files, self._report),
            cannot_contain=missing,
        )

    def _nodes(self, nets: Branch) -> dict[str, dict[str, list[tuple[str, Branch]]]]:
        """Reference → pad → nets with the node that puts the pad on it."""
        nodes: dict[str, dict[str, list[tuple[str, Branch]]]] = defaultdict(lambda: defaultdict(list))
        count = 0
        for net in nets.all("net"):
            name = net.text_of("name")
            if self._written is not None:
                name = self._written.net(name)
            for node in net.all("node"):
                nodes[node.text_of("ref")][node.text_of("pin")].append((name, node))
                count += 1
            if count > limits.NETLIST_NODES:
                raise InputError(Fault(f"more than {limits.NETLIST_NODES} pins on nets", self._path.name))
        return nodes

    def _library(self) -> dict[tuple[str, str], dict[str, tuple[str, str]]]:
        """(library, symbol) → pad → (name, type)."""
        found: dict[tuple[str, str], dict[str, tuple[str, str]]] = {}
        holder = self._root.first("libparts")
        for part in holder.all("libpart") if holder else ():
            pins = part.first("pins")
            found[part.text_of("lib"), part.text_of("part")] = {
                pin.text_of("num"): ("" if pin.text_of("name") == "~" else pin.text_of("name"), pin.text_of("type"))
                for pin in (pins.all("pin") if pins else ())
            }
        return found

    def _part(self, comp: Branch) -> tuple[str, str]:
        source = comp.first("libsource")
        return (source.text_of("lib"), source.text_of("part")) if source else ("", "")

    def _pins(
        self, ref: str, nodes: dict[str, list[tuple[str, Branch]]], library: dict[str, tuple[str, str]]
    ) -> tuple[Pin, ...]:
        # KiCad 5 leaves unconnected pins out of the nets; later ones give each a net
        pads = nodes.keys() | library.keys() if self._is_old else nodes.keys()
        pins: list[Pin] = []
        for pad in sorted(pads, key=natural_key):
            name, kind = library.get(pad, ("", ""))
            if pad not in nodes:
                pins.append(Pin(pad, name, kind, f"unconnected-({ref}-Pad{pad})"))
                continue
            drawn = nodes[pad]
            net, node = drawn[0]
            kind = node.text_of("pintype").partition("+")[0] or kind
            # from KiCad 6 on a node says its pin's name, or the pin has none; KiCad 5 leaves it to the library
            shown = name if self._is_old else self._pin_function(node.text_of("pinfunction"), pad)
            more = tuple(dict.fromkeys(other for other, _ in drawn[1:] if other != net))
            if more:
                message = f"{ref}.{pad} is on {' and '.join((net, *more))}"
                self._report.add(kinds.PAD_ON_TWO_NETS, ref, message, self._path.name)
            pins.append(Pin(pad, shown, kind, net, more))
        return tuple(pins)

    def _pin_function(self, text: str, pad: str) -> str:
        if self._major >= _PINFUNCTION_HAS_NUMBER:
            text = text.removesuffix(f"_{pad}")
        return "" if text == "~" else text

    def _component(self, comp: Branch, ref: str, pins: tuple[Pin, ...]) -> Component:
        fields = {"Datasheet": sheet} if (sheet := comp.text_of("datasheet")) else {}
        holder = comp.first("fields")
        for entry in holder.all("field") if holder else ():
            fields[entry.text_of("name")] = entry.text
        value, footprint = comp.text_of("value"), comp.text_of("footprint")
        marks = {each.text_of("name"): each.text_of("value") for each in comp.all("property")}
        fitted, in_bom = "dnp" not in marks, "exclude_from_bom" not in marks
        changes, changed = self._variant_of(comp)
        if "dnp" in changes:
            fitted = changes["dnp"] != "1"
        if "exclude_from_bom" in changes:
            in_bom = changes["exclude_from_bom"] != "1"
        fields |= changed
        value, footprint = changed.get("Value", value), changed.get("Footprint", footprint)
        fields = {name: text for name, text in fields.items() if name not in _OWN}
        library, part = self._part(comp)
        source = comp.first("libsource")
        path = comp.first("sheetpath")
        stamps = (comp.text_of("tstamps") or comp.text_of("tstamp")).split()
        sheet_key = path.text_of("tstamps") if path else "/"
        sheet_name = (path.text_of("names") if path else "") or "/"
        if self._written is not None:
            sheet_name = self._written.sheet(sheet_name)
        return Component(
            key=f"{sheet_key}{stamps[0] if stamps else ref}",
            ref=ref,
            value=value,
            lib_id=f"{library}:{part}" if library else part,
            footprint=footprint,
            fields=fields,
            description=fields.get("Description") or (source.text_of("description") if source else ""),
            keywords=marks.get("ki_keywords", ""),
            pins=pins,
            place=Place(marks.get("Sheetfile") or self._path.name, sheet_name),
            fitted=fitted and not declared_unfitted(fields, value, self._settings),
            in_bom=in_bom,
            on_board="exclude_from_board" not in marks,
        )

    def _variant_of(self, comp: Branch) -> tuple[dict[str, str], dict[str, str]]:
        """Marks and fields the chosen variant changes for a part."""
        holder = comp.first("variants") if self._variant is not None else None
        for each in holder.all("variant") if holder else ():
            if each.text_of("name") == self._variant:
                fields = each.first("fields")
                return (
                    {mark.text_of("name"): mark.text_of("value") for mark in each.all("property")},
                    {entry.text_of("name"): entry.text for entry in (fields.all("field") if fields else ())},
                )
        return {}, {}

    def _cannot_contain(self) -> tuple[str, ...]:
        missing = ["free texts of the sheets", "positions of parts"]
        if self._is_old:
            missing.append("marks of parts as not fitted or excluded")
        if self._root.is_xml:
            components = self._root.first("components")
            comps = components.all("comp") if components else ()
            if not any(mark.text_of("name") == "exclude_from_bom" for comp in comps for mark in comp.all("property")):
                missing.append("parts and sheets excluded from the bill of materials, if written for a BOM script")
        else:
            missing.append("parts excluded from the board")
        return tuple(missing)


def _nets(components: list[Component]) -> tuple[Net, ...]:
    on: dict[str, list[tuple[str, str]]] = defaultdict(list)
    for component in components:
        for pin in component.pins:
            for net in (pin.net, *pin.more_nets):
                on[net].append((component.key, pin.number))
    return tuple(Net(name, tuple(on[name]), not _AUTOMATIC.match(name)) for name in sorted(on, key=natural_key))
