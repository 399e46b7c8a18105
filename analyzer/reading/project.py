"""Finding the project behind a path, and what its `.kicad_pro` says that matters for the netlist."""

from __future__ import annotations

import difflib
import json
import os
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.findings import reading as kinds
from analyzer.reading.files import Files, read_regular
from analyzer.reading.hierarchy import Root
from analyzer.reading.names import UnitStyle
from analyzer.reading.plain_text import check_kind, decode
from analyzer.reading.report import Report

NETLIST_SUFFIXES = {".net", ".xml"}


@dataclass(frozen=True, slots=True)
class Project:
    """A KiCad project.

    Attributes:
        name: Its name: that of the project file, else of the root sheet.
        folder: Its folder.
        roots: Top-level sheets, the main one first.
        variables: Text variables.
        aliases: Bus aliases.
        variants: Names of the design variants.
        unit_style: How units are written behind references.
    """

    name: str
    folder: Path
    roots: tuple[Root, ...]
    variables: Mapping[str, str] = field(default_factory=dict)
    aliases: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    variants: tuple[str, ...] = ()
    unit_style: UnitStyle = field(default_factory=UnitStyle)


def find_schematic(path: Path) -> Path:
    """The root schematic or project file a path means.

    Args:
        path: A `.kicad_sch`, a `.kicad_pro`, or a folder with exactly one project.

    Raises:
        InputError: If nothing is there, or several projects are.
    """
    if not os.path.isdir(path):
        if path.suffix == ".sch":
            remedy = "Open and save it in KiCad 6 or newer, or give its netlist (.net or .xml)."
            raise InputError(Fault("this is a schematic of KiCad 5 or older", str(path), remedy=remedy))
        if path.suffix not in {".kicad_sch", ".kicad_pro"}:
            raise InputError(_other_kind(path))
        return path
    projects = _listed(path, ".kicad_pro")
    if len(projects) > 1:
        raise InputError(_several(path, projects))
    if projects:
        return projects[0]
    sheets = _listed(path, ".kicad_sch")
    if len(sheets) == 1:
        return sheets[0]
    if sheets:
        raise InputError(_several(path, sheets))
    if any(each.suffix in {".sch", ".pro"} for each in path.iterdir()):
        remedy = "Open and save it in KiCad 6 or newer, or give its netlist (.net or .xml)."
        raise InputError(Fault("only a project of KiCad 5 or older is in this folder", str(path), remedy=remedy))
    raise InputError(Fault("no KiCad project is in this folder", str(path), remedy="Give a .kicad_pro or .kicad_sch."))


def _other_kind(path: Path) -> Fault:
    name = path.name
    remedy = "Give a .kicad_pro, a .kicad_sch, a netlist (.net, .xml), or a folder with one project."
    start = decode(read_regular(path, limits.SHEET_BYTES, name), name)
    try:
        check_kind(start, name, "kicad_sch")
    except InputError as error:
        return replace(error.faults[0], remedy=remedy)
    return Fault("this is a schematic, but its name does not end in .kicad_sch", name, remedy="Rename it.")


def check_variant(variant: str | None, known: tuple[str, ...], file: str) -> None:
    """Refuse a variant the design does not define: reading another one in its place could hide a fault.

    Raises:
        InputError: If it is not among those known.
    """
    if variant is not None and variant not in known:
        near = difflib.get_close_matches(variant, known, 1)
        remedy = f"Did you mean '{near[0]}'?" if near else f"Defined: {', '.join(known) or 'none'}."
        raise InputError(Fault(f"there is no design variant '{variant}'", file, remedy=remedy))


def load_project(path: Path, files: Files, report: Report) -> Project:
    """What is known of the project of a schematic or project file.

    Args:
        path: The `.kicad_sch` or `.kicad_pro`.
        files: The project's files.
        report: Takes what is wrong with the project file.

    Raises:
        InputError: If a project file was asked for and its root sheet is missing.
    """
    project_file = path.with_suffix(".kicad_pro")
    root = path.with_suffix(".kicad_sch")
    plain = Project(path.stem, path.parent, (Root(root),))
    _note_open(path, report)
    if not os.path.isfile(project_file):
        others = _listed(path.parent, ".kicad_pro")
        message = f"no {project_file.name} beside the schematic"
        if others:
            message += f"; {others[0].name} is another project, perhaps the one this sheet belongs to"
        report.add(kinds.PROJECT_MISSING, path.name, message, files.name(root))
        return plain
    try:
        content = json.loads(files.read(project_file, limits.PROJECT_FILE_BYTES).decode("utf-8-sig"))
    except InputError as error:
        _unusable(report, project_file.name, error.faults[0].what)
        return plain
    except (UnicodeDecodeError, json.JSONDecodeError, RecursionError) as error:
        _unusable(report, project_file.name, f"it is no JSON ({str(error).partition(chr(10))[0]})")
        return plain
    if not isinstance(content, dict):
        _unusable(report, project_file.name, "it holds no JSON object")
        return plain
    return _Reader(project_file.name, report).project(plain, content)


def _listed(folder: Path, suffix: str) -> list[Path]:
    try:
        found = sorted(each for each in folder.iterdir() if each.suffix == suffix)
    except OSError:
        return []
    return [each for each in found if not each.name.startswith(("_autosave", ".", "~"))]


def _several(path: Path, found: list[Path]) -> Fault:
    shown = ", ".join(each.name for each in found[:5]) + (", ..." if len(found) > 5 else "")
    return Fault(f"several projects are in this folder: {shown}", str(path), remedy="Name one of them.")


def _note_open(path: Path, report: Report) -> None:
    folder = path.parent
    for name in (f"~{path.stem}.kicad_sch.lck", f"~{path.stem}.kicad_pro.lck", f"_autosave-{path.stem}.kicad_sch"):
        if os.path.exists(folder / name):
            report.add(kinds.OPEN_IN_EDITOR, path.stem, f"{name} exists: the saved state was read", name)
            return


def _unusable(report: Report, name: str, why: str) -> None:
    report.add(kinds.PROJECT_UNREADABLE, name, f"{name} could not be used: {why}", name)


class _Reader:
    """Takes entries out of a project file; entries of a wrong type become a finding, null means absent."""

    def __init__(self, name: str, report: Report) -> None:
        self._name = name
        self._report = report

    def project(self, plain: Project, content: dict[str, Any]) -> Project:
        schematic = self._entry(content, "schematic", dict) or {}
        texts = self._entry(content, "text_variables", dict) or {}
        first = self._entry(schematic, "subpart_first_id", int)
        separator = self._entry(schematic, "subpart_id_separator", int)
        return replace(
            plain,
            roots=self._roots(plain, schematic),
            variables={key: value for key, value in texts.items() if isinstance(value, str)},
            aliases=self._aliases(schematic),
            variants=tuple(
                each["name"]
                for each in self._entry(schematic, "variants", list) or []
                if isinstance(each, dict) and isinstance(each.get("name"), str)
            ),
            unit_style=UnitStyle(_sign(separator) if separator else "", _sign(first) if first else "A"),
        )

    def _entry(self, holder: dict[str, Any], key: str, kind: type) -> Any:
        value = holder.get(key)
        if value is None:
            return None
        if not isinstance(value, kind) or (kind is int and isinstance(value, bool)):
            _unusable(self._report, self._name, f"'{key}' is no {_KINDS[kind]}")
            return None
        return value

    def _aliases(self, schematic: dict[str, Any]) -> dict[str, tuple[str, ...]]:
        aliases = self._entry(schematic, "bus_aliases", dict) or {}
        return {
            name: tuple(member for member in members if isinstance(member, str))
            for name, members in aliases.items()
            if isinstance(members, list)
        }

    def _roots(self, plain: Project, schematic: dict[str, Any]) -> tuple[Root, ...]:
        roots: list[Root] = []
        for each in self._entry(schematic, "top_level_sheets", list) or []:
            if not isinstance(each, dict) or not isinstance(each.get("filename"), str):
                _unusable(self._report, self._name, "an entry of 'top_level_sheets' has no file name")
                continue
            name, uuid = each.get("name"), each.get("uuid")
            roots.append(
                Root(
                    plain.folder / each["filename"].replace("\\", "/"),
                    name if isinstance(name, str) and name else Path(each["filename"]).stem,
                    uuid if isinstance(uuid, str) else "",
                )
            )
        asked = plain.roots[0].path
        if len(roots) > 1 and (not os.path.exists(asked) or any(_same(root.path, asked) for root in roots)):
            return tuple(roots)
        if len(roots) == 1 and not os.path.exists(asked):
            return (replace(roots[0], name=""),)
        return plain.roots


_KINDS = {dict: "object", list: "list", int: "number"}


def _same(one: Path, other: Path) -> bool:
    return one.resolve() == other.resolve()


def _sign(code: int) -> str:
    return chr(code) if 32 < code < 127 else ""
