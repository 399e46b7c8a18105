"""The tree of sheets: every use of every schematic file, with its path, name and inherited marks."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from analyzer import limits
from analyzer.errors import InputError
from analyzer.findings import reading as kinds
from analyzer.reading.drawing import Drawing, Flags, SheetSymbol, Usage, both
from analyzer.reading.files import Files, OutsideError
from analyzer.reading.report import Report
from analyzer.reading.sheet_file import read_drawing
from analyzer.reading.variants import changed_flags

ALL: Flags = (True, True, True)


@dataclass(frozen=True, slots=True)
class Root:
    """A top-level sheet: its file, and its name where a project has several ("" otherwise)."""

    path: Path
    name: str = ""
    uuid: str = ""


@dataclass(eq=False, slots=True)
class SheetInstance:
    """One use of one schematic file.

    Attributes:
        drawing: What is drawn in the file.
        path: Path of uuids from the root file down, as `(instances)` names it.
        key: The same without the root's uuid, ending in "/"; part of a part's identity.
        name: Path of sheet names, ending in "/"; "/" is the root.
        depth: 0 for a root.
        number: Position in the order of reading, from 1.
        symbol: The sheet symbol on the parent; None for a root.
        parent: The instance that symbol stands on.
        flags: Marks inherited from the sheet symbols above.
        children: Uses below, by position of the sheet symbol in the parent's drawing.
    """

    drawing: Drawing
    path: str
    key: str
    name: str
    depth: int
    number: int
    symbol: SheetSymbol | None = None
    parent: SheetInstance | None = None
    flags: Flags = ALL
    children: dict[int, SheetInstance] = field(default_factory=dict)


class Hierarchy:
    """Reads the files of a project sheet by sheet, each file once."""

    def __init__(self, files: Files, report: Report, variant: str | None = None) -> None:
        self._variant = variant
        self._files = files
        self._report = report
        self._drawings: dict[Path, Drawing | None] = {}
        self.instances: list[SheetInstance] = []

    def read(self, roots: Sequence[Root]) -> None:
        """Read all sheets below the roots into `instances`, parents before children.

        Raises:
            InputError: If the first root cannot be read; other sheets become findings.
        """
        for position, root in enumerate(roots):
            if position:
                drawing = self._drawing(root.path, f"top-level sheet {root.name}", root.path.name)
                if drawing is None:
                    continue
            else:
                drawing = self._read_first(root.path)
                self._drawings[root.path.resolve()] = drawing
            several = len(roots) > 1
            name = f"/{_in_path(root.name)}/" if several else "/"
            uuid = drawing.uuid or root.uuid
            top = SheetInstance(drawing, f"/{uuid}", f"/{uuid}/" if several else "/", name, 0, self._next())
            self.instances.append(top)
            self._below(top, root.path)

    def _read_first(self, path: Path) -> Drawing:
        return read_drawing(self._files.read(path, asked_for=True), self._files.name(path), self._report)

    def _below(self, top: SheetInstance, path: Path) -> None:
        # a stack instead of recursion; children are put on it in reverse so that they come off in file order
        waiting: list[tuple[SheetInstance, int, SheetSymbol, tuple[Path, ...]]] = []

        def queue(instance: SheetInstance, trail: tuple[Path, ...]) -> None:
            self._check_names(instance)
            sheets = list(enumerate(instance.drawing.sheets))
            waiting.extend((instance, position, sheet, trail) for position, sheet in reversed(sheets))

        queue(top, (path,))
        while waiting:
            parent, position, sheet, trail = waiting.pop()
            if len(self.instances) >= limits.SHEET_INSTANCES or len(trail) > limits.SHEET_DEPTH:
                self._report.add(
                    kinds.LIMIT_REACHED,
                    sheet.file,
                    f"more than {limits.SHEET_INSTANCES} sheet instances or {limits.SHEET_DEPTH} levels of sheets",
                    parent.drawing.place(sheet.at, parent.name),
                    lost=True,
                )
                return
            if not sheet.file:
                continue  # reported when its sheet symbol was read
            target = trail[-1].parent / sheet.file.replace("\\", "/")
            resolved = target.resolve()
            if any(resolved == above.resolve() for above in trail):
                names = [self._files.name(above) for above in trail]
                start = [above.resolve() for above in trail].index(resolved)
                chain = " -> ".join([*names[start:], names[start]])
                self._report.add(
                    kinds.SHEET_CYCLE,
                    names[start],
                    f"sheet cycle: {chain}",
                    parent.drawing.place(sheet.at, parent.name),
                    lost=True,
                )
                continue
            where = str(parent.drawing.place(sheet.at, parent.name))
            drawing = self._drawing(target, where, sheet.file)
            if drawing is None:
                continue
            usage = next((usage for usage in sheet.usages if usage.path == parent.path), None)
            child = SheetInstance(
                drawing,
                f"{parent.path}/{sheet.uuid}",
                f"{parent.key}{sheet.uuid}/",
                f"{parent.name}{_in_path(sheet.name)}/",
                parent.depth + 1,
                self._next(),
                sheet,
                parent,
                both(parent.flags, self._flags(sheet, usage, parent.drawing.version)),
            )
            parent.children[position] = child
            self.instances.append(child)
            queue(child, (*trail, target))

    def _flags(self, sheet: SheetSymbol, usage: Usage | None, version: int) -> Flags:
        if self._variant is None or usage is None:
            return sheet.flags
        return changed_flags(sheet.flags, usage.variants, self._variant, version)

    def _next(self) -> int:
        return len(self.instances) + 1

    def _drawing(self, path: Path, where: str, written: str) -> Drawing | None:
        try:
            resolved = path.resolve()
        except (OSError, ValueError, RuntimeError):
            self._report.add(kinds.SHEET_MISSING, written, f"'{written}' is no usable path", where, lost=True)
            return None
        if resolved not in self._drawings:
            self._drawings[resolved] = self._load(path, where, written)
        return self._drawings[resolved]

    def _load(self, path: Path, where: str, written: str) -> Drawing | None:
        name = self._files.name(path)
        try:
            return read_drawing(self._files.read(path), name, self._report)
        except OutsideError:
            message = f"sheet file '{written}' lies outside the project folder and was not opened"
            self._report.add(kinds.SHEET_OUTSIDE, written, message, where, lost=True)
        except InputError as error:
            if not os.path.exists(path):  # Path.exists raises for names that are too long
                message = f"sheet file '{written}' does not exist (tried {name}){_near_name(path)}"
                self._report.add(kinds.SHEET_MISSING, written, message, where, lost=True)
            else:
                fault = error.faults[0]
                self._report.add(
                    kinds.SHEET_UNREADABLE,
                    name,
                    f"{name} could not be read: {': '.join(part for part in (fault.place, fault.what) if part)}",
                    where,
                    remedy=fault.remedy,
                    lost=True,
                )
        return None

    def _check_names(self, instance: SheetInstance) -> None:
        seen: set[str] = set()
        for sheet in instance.drawing.sheets:
            if sheet.name in seen:
                self._report.add(
                    kinds.SHEET_NAME_TWICE,
                    sheet.name,
                    f"two sheets on {instance.name} are named '{sheet.name}'; KiCad joins their equally named nets",
                    instance.drawing.place(sheet.at, instance.name),
                )
            seen.add(sheet.name)


def _in_path(name: str) -> str:
    return name.strip().replace("/", "{slash}")


def _near_name(path: Path) -> str:
    if "${" in str(path):
        return "; KiCad does not expand variables in sheet file names"
    folder = path.parent
    if os.path.isdir(folder):
        for other in sorted(folder.iterdir()):
            if other.name.lower() == path.name.lower():
                return f"; there is '{other.name}': upper and lower case differ"
    return ""
