"""Writes small KiCad projects in the file formats of KiCad 6, 8 and 9: the drawings of the fixture boards.

Parts stand on a grid; every pin has a short wire that ends in a power symbol or a label. Identifiers follow from names,
so that the same description gives the same bytes.
"""

from __future__ import annotations

import json
import uuid
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

NAMESPACE = uuid.UUID("6f3a1f5e-2f0b-5d3c-9a51-7d0a6e3f1c22")
STUB = 2.54


@dataclass(frozen=True)
class Shape:
    """A symbol: pins as (number, name, type, side, slot); sides "l", "r", "t", "b"; slots count from the middle."""

    pins: tuple[tuple[str, str, str, str, float], ...]
    half_width: float = 7.62
    half_height: float = 7.62
    letter: str = "U"
    hide_names: bool = False


TWO_PIN = Shape((("1", "~", "passive", "t", 0), ("2", "~", "passive", "b", 0)), 1.27, 1.27, "R", True)
DIODE = Shape((("1", "K", "passive", "b", 0), ("2", "A", "passive", "t", 0)), 1.27, 1.27, "D", True)


@dataclass(frozen=True)
class Part:
    """A placed part: reference(s), symbol name, value, position, nets by pin number, and its fields."""

    ref: str | tuple[str, ...]
    symbol: str
    value: str
    at: tuple[float, float]
    nets: Mapping[str, str]
    footprint: str = ""
    fields: Mapping[str, str] = field(default_factory=dict)
    description: str = ""
    dnp: bool = False


@dataclass(frozen=True)
class Sheet:
    """A sub-sheet placed on the root: instance names, file, position, and pins as (name, net of each instance)."""

    names: tuple[str, ...]
    file: str
    at: tuple[tuple[float, float], ...]
    pins: Mapping[str, tuple[str, ...]]


@dataclass(frozen=True)
class Drawing:
    """One sheet file: its parts, free texts, hierarchical labels (nets of sheet pins) and sub-sheets."""

    file: str
    parts: Sequence[Part]
    texts: Sequence[tuple[str, tuple[float, float]]] = ()
    ports: Sequence[str] = ()
    sheets: Sequence[Sheet] = ()


@dataclass(frozen=True)
class Project:
    """A whole project: name, file format, symbols by name, power nets, drawings (root first)."""

    name: str
    version: int
    shapes: Mapping[str, Shape]
    power: Sequence[str]
    drawings: Sequence[Drawing]


def identifier(*words: str) -> str:
    return str(uuid.uuid5(NAMESPACE, "/".join(words)))


def number(value: float) -> str:
    return f"{value:.4f}".rstrip("0").rstrip(".") or "0"


def quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"').replace("\n", "\\n") + '"'


class Writer:
    """Writes one project."""

    def __init__(self, project: Project) -> None:
        self.project = project
        self.old = project.version < 20221002
        self.hide = "hide" if project.version < 20241004 else "(hide yes)"
        self.root = project.drawings[0]
        self.root_id = identifier(project.name, "root")
        self.instances: list[str] = []
        self.flags = 0

    def files(self) -> dict[str, str]:
        """Name → content of every file of the project."""
        found = {drawing.file: self.sheet(drawing) for drawing in self.project.drawings}
        pro = {
            "board": {},
            "meta": {"filename": f"{self.project.name}.kicad_pro", "version": 1},
            "schematic": {"legacy_lib_dir": "", "legacy_lib_list": []},
            "sheets": [],
            "text_variables": {},
        }
        found[f"{self.project.name}.kicad_pro"] = json.dumps(pro, indent=2) + "\n"
        return found

    def paths(self, drawing: Drawing) -> list[str]:
        """Instance paths of a sheet file, without the root for KiCad 6."""
        if drawing is self.root:
            return [""]
        return [
            "/" + identifier(self.project.name, "sheet", name)
            for sheet in self.root.sheets
            if sheet.file == drawing.file
            for name in sheet.names
        ]

    def sheet(self, drawing: Drawing) -> str:
        name = self.project.name
        file_id = self.root_id if drawing is self.root else identifier(name, "file", drawing.file)
        generator = "eeschema" if self.project.version < 20231120 else '"eeschema"'
        lines = [f"(kicad_sch (version {self.project.version}) (generator {generator})"]
        if self.project.version >= 20231120:
            lines.append(f'  (generator_version "{"9.0" if self.project.version >= 20250114 else "8.0"}")')
        lines += [f"  (uuid {self.id_text(file_id)})", '  (paper "A3")', "  (lib_symbols"]
        used = dict.fromkeys(part.symbol for part in drawing.parts)
        lines += [self.library(symbol) for symbol in used]
        nets = dict.fromkeys(net for part in drawing.parts for net in part.nets.values())
        nets.update(dict.fromkeys(net for sheet in drawing.sheets for ends in sheet.pins.values() for net in ends))
        lines += [self.power_symbol(net) for net in nets if net in self.project.power]
        lines.append("  )")
        for part in drawing.parts:
            lines += self.part(drawing, part)
        for number_, (text, at) in enumerate(drawing.texts):
            where = f"(at {number(at[0])} {number(at[1])} 0)"
            text_id = self.id_text(identifier(name, drawing.file, "text", str(number_)))
            lines.append(f"  (text {quoted(text)} {where} (effects (font (size 1.27 1.27)) (justify left bottom)) (uuid {text_id}))")
        for sheet in drawing.sheets:
            lines += self.sub_sheets(drawing, sheet)
        if drawing is self.root:
            lines.append('  (sheet_instances (path "/" (page "1"))')
            if self.old:
                for sheet in drawing.sheets:
                    for page, sub in enumerate(sheet.names):
                        lines.append(f'    (path "/{identifier(name, "sheet", sub)}" (page "{page + 2}"))')
            lines.append("  )")
            if self.old:
                lines += ["  (symbol_instances", *self.instances, "  )"]
        lines.append(")")
        return "\n".join(lines) + "\n"

    def id_text(self, text: str) -> str:
        return text if self.project.version < 20231120 else f'"{text}"'

    def effects(self, hidden: bool = False, size: float = 1.27) -> str:
        hide = f" {self.hide}" if hidden else ""
        return f"(effects (font (size {size} {size})){hide})"

    def property(self, key: str, value: str, index: int, at: tuple[float, float], hidden: bool = False) -> str:
        numbered = f" (id {index})" if self.old else ""
        where = f"(at {number(at[0])} {number(at[1])} 0)"
        return f"    (property {quoted(key)} {quoted(value)}{numbered} {where} {self.effects(hidden)})"

    def library(self, symbol: str) -> str:
        shape = self.project.shapes[symbol]
        w, h = shape.half_width, shape.half_height
        names = f"(pin_names (offset 0.254){' ' + self.hide if shape.hide_names else ''})"
        numbers = f"(pin_numbers {self.hide}) " if shape.hide_names else ""
        lines = [f'    (symbol "fixture:{symbol}" {numbers}{names} (in_bom yes) (on_board yes)']
        for index, (key, value) in enumerate(
            (("Reference", shape.letter), ("Value", symbol), ("Footprint", ""), ("Datasheet", ""))
        ):
            lines.append("  " + self.property(key, value, index, (0, h + 2.54 + index), index > 1))
        lines.append(
            f'      (symbol "{symbol}_0_1" (rectangle (start {number(-w)} {number(h)}) (end {number(w)} {number(-h)})'
            " (stroke (width 0.254) (type default)) (fill (type background))))"
        )
        lines.append(f'      (symbol "{symbol}_1_1"')
        for pin_number, pin_name, kind, side, slot in shape.pins:
            x, y, angle = pin_place(shape, side, slot)
            lines.append(
                f"        (pin {kind} line (at {number(x)} {number(y)} {angle}) (length {number(STUB)})"
                f" (name {quoted(pin_name)} {self.effects()}) (number {quoted(pin_number)} {self.effects()}))"
            )
        lines.append("      )\n    )")
        return "\n".join(lines)

    def power_symbol(self, net: str) -> str:
        lines = [f'    (symbol "fixture:{net}" (power) (pin_names (offset 0)) (in_bom yes) (on_board yes)']
        for index, (key, value) in enumerate((("Reference", "#PWR"), ("Value", net), ("Footprint", ""), ("Datasheet", ""))):
            lines.append("  " + self.property(key, value, index, (0, 2.54), index != 1))
        bar = "(polyline (pts (xy -1.27 0) (xy 1.27 0)) (stroke (width 0.254) (type default)) (fill (type none)))"
        lines.append(f'      (symbol "{net}_0_1" {bar})')
        pin = f"(pin power_in line (at 0 0 90) (length 0) {self.hide}"
        lines.append(
            f'      (symbol "{net}_1_1" {pin} (name {quoted(net)} {self.effects()}) (number "1" {self.effects()})))\n    )'
        )
        return "\n".join(lines)

    def part(self, drawing: Drawing, part: Part) -> list[str]:
        shape = self.project.shapes[part.symbol]
        x, y = part.at
        refs = (part.ref,) if isinstance(part.ref, str) else part.ref
        part_id = identifier(self.project.name, drawing.file, refs[0])
        lines = self.symbol_head(f"fixture:{part.symbol}", part.at, part_id, dnp=part.dnp)
        side = shape.half_width + 1.27 if shape.hide_names else -shape.half_width
        top = y - shape.half_height - 3.81 if not shape.hide_names else y - 1.27
        fields = {**part.fields}
        if part.description and not self.old:
            fields["Description"] = part.description
        lines.append(self.property("Reference", refs[0], 0, (x + side, top)))
        lines.append(self.property("Value", part.value, 1, (x + side, top + 2.54)))
        lines.append(self.property("Footprint", part.footprint, 2, (x, y), True))
        lines.append(self.property("Datasheet", "~", 3, (x, y), True))
        for index, (key, value) in enumerate(fields.items(), 4):
            lines.append(self.property(key, value, index, (x, y), key == "Description"))
        for pin_number, *_ in shape.pins:
            lines.append(f'    (pin "{pin_number}" (uuid {self.id_text(identifier(part_id, pin_number))}))')
        lines += self.instance(drawing, part_id, refs, part.value, part.footprint)
        lines.append("  )")
        for pin_number, _, _, pin_side, slot in shape.pins:
            net = part.nets.get(pin_number)
            px, py, _ = pin_place(shape, pin_side, slot)
            here = (x + px, y - py)
            if net is None:
                mark = self.id_text(identifier(part_id, pin_number, "open"))
                lines.append(f"  (no_connect (at {number(here[0])} {number(here[1])}) (uuid {mark}))")
            else:
                lines += self.connect(drawing, net, here, pin_side, f"{part_id}/{pin_number}")
        return lines

    def symbol_head(self, lib_id: str, at: tuple[float, float], part_id: str, *, dnp: bool = False) -> list[str]:
        flags = "(in_bom yes) (on_board yes)"
        if self.project.version >= 20230409:
            flags = "(exclude_from_sim no) " + flags
        if self.project.version >= 20220914:
            flags += f" (dnp {'yes' if dnp else 'no'})"
        where = f"(at {number(at[0])} {number(at[1])} 0)"
        return [f"  (symbol (lib_id {quoted(lib_id)}) {where} (unit 1) {flags} (uuid {self.id_text(part_id)})"]

    def instance(self, drawing: Drawing, part_id: str, refs: Sequence[str], value: str, footprint: str) -> list[str]:
        paths = self.paths(drawing)
        names = [refs[n] if len(refs) > 1 else refs[0] for n in range(len(paths))]
        if self.old:
            for path, ref in zip(paths, names, strict=True):
                self.instances.append(
                    f'    (path "{path}/{part_id}" (reference {quoted(ref)}) (unit 1)'
                    f" (value {quoted(value)}) (footprint {quoted(footprint)}))"
                )
            return []
        lines = [f"    (instances (project {quoted(self.project.name)}"]
        for path, ref in zip(paths, names, strict=True):
            lines.append(f'      (path "/{self.root_id}{path}" (reference {quoted(ref)}) (unit 1))')
        return [*lines, "    ))"]

    def connect(self, drawing: Drawing, net: str, here: tuple[float, float], side: str, key: str) -> list[str]:
        dx, dy = {"l": (-STUB, 0), "r": (STUB, 0), "t": (0, -STUB), "b": (0, STUB)}[side]
        there = (here[0] + dx, here[1] + dy)
        ends = f"(xy {number(here[0])} {number(here[1])}) (xy {number(there[0])} {number(there[1])})"
        colour = " (color 0 0 0 0)" if self.old else ""
        wire_id = self.id_text(identifier(key, "wire"))
        lines = [f"  (wire (pts {ends}) (stroke (width 0) (type default){colour}) (uuid {wire_id}))"]
        if net in self.project.power:
            self.flags += 1
            ref = f"#PWR{self.flags:03d}"
            part_id = identifier(key, "power")
            lines += self.symbol_head(f"fixture:{net}", there, part_id)
            lines.append(self.property("Reference", ref, 0, there, True))
            lines.append(self.property("Value", net, 1, (there[0], there[1] + (3.81 if side == "b" else -2.54))))
            lines.append(self.property("Footprint", "", 2, there, True))
            lines.append(self.property("Datasheet", "", 3, there, True))
            lines.append(f'    (pin "1" (uuid {self.id_text(identifier(part_id, "pin"))}))')
            refs = [f"#PWR{self.flags:03d}{chr(97 + n)}" for n in range(len(self.paths(drawing)))]
            lines += self.instance(drawing, part_id, refs if len(refs) > 1 else [ref], net, "")
            return [*lines, "  )"]
        angle = {"l": 180, "r": 0, "t": 90, "b": 270}[side]
        justify = "right" if side in ("l", "b") else "left"
        kind = "hierarchical_label" if net in drawing.ports else "label"
        shape = " (shape passive)" if kind == "hierarchical_label" else ""
        label_id = self.id_text(identifier(key, "label"))
        where = f"(at {number(there[0])} {number(there[1])} {angle})"
        effects = f"(effects (font (size 1.27 1.27)) (justify {justify}))"
        lines.append(f"  ({kind} {quoted(net)}{shape} {where} {effects} (uuid {label_id}))")
        return lines

    def sub_sheets(self, drawing: Drawing, sheet: Sheet) -> list[str]:
        lines = []
        name_key, file_key = ("Sheet name", "Sheet file") if self.old else ("Sheetname", "Sheetfile")
        for number_, (name, at) in enumerate(zip(sheet.names, sheet.at, strict=True)):
            sheet_id = identifier(self.project.name, "sheet", name)
            height = 5.08 * (len(sheet.pins) + 1)
            lines.append(
                f"  (sheet (at {number(at[0])} {number(at[1])}) (size 25.4 {number(height)})"
                " (stroke (width 0.1524) (type solid)) (fill (color 0 0 0 0.0000))"
                f" (uuid {self.id_text(sheet_id)})"
            )
            lines.append(self.property(name_key, name, 0, (at[0], at[1] - 1)))
            lines.append(self.property(file_key, sheet.file, 1, (at[0], at[1] + height + 1)))
            places = []
            for slot, (pin, nets) in enumerate(sheet.pins.items()):
                here = (at[0], at[1] + 5.08 * (slot + 1))
                pin_id = self.id_text(identifier(sheet_id, pin))
                where = f"(at {number(here[0])} {number(here[1])} 180)"
                lines.append(
                    f"    (pin {quoted(pin)} passive {where}"
                    f" (effects (font (size 1.27 1.27)) (justify left)) (uuid {pin_id}))"
                )
                places.append((nets[number_], here, f"{sheet_id}/{pin}"))
            if not self.old:
                lines.append(
                    f'    (instances (project {quoted(self.project.name)} (path "/{self.root_id}" (page "{number_ + 2}"))))'
                )
            lines.append("  )")
            for net, here, key in places:
                lines += self.connect(drawing, net, here, "l", key)
        return lines


def pin_place(shape: Shape, side: str, slot: float) -> tuple[float, float, int]:
    """Connection point of a pin in library coordinates (y up) and the direction towards the body."""
    w, h = shape.half_width + STUB, shape.half_height + STUB
    return {
        "l": (-w, -slot * STUB, 0),
        "r": (w, -slot * STUB, 180),
        "t": (slot * STUB, h, 270),
        "b": (slot * STUB, -h, 90),
    }[side]


def write(project: Project, folder: Path) -> None:
    """Write all files of a project into a folder."""
    folder.mkdir(parents=True, exist_ok=True)
    for name, text in Writer(project).files().items():
        (folder / name).write_text(text, encoding="utf-8")
