"""Which projects lie below a folder, leaving out what nobody designs: backups, autosaves, vendored copies."""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path

from analyzer.circuit import natural_key

VENDORED = frozenset(
    {
        ".git",
        ".hg",
        ".svn",
        ".history",
        "node_modules",
        "vendor",
        "vendored",
        "third_party",
        "third-party",
        "site-packages",
    }
)
"""Folder names whose content belongs to somebody else or to a tool; common practice."""

BACKUP_ENDINGS = ("-backups", "-bak", ".bak", "_old", "~")
"""How KiCad ("NAME-backups") and people name folders of old copies."""

AUTOSAVE_PREFIXES = ("_autosave-", "_saved_", "~")


def find_projects(roots: Iterable[Path]) -> tuple[Path, ...]:
    """Every project at or below `roots`, as the path of its `.kicad_pro` or root `.kicad_sch`, sorted naturally.

    A `.kicad_pro` counts when a schematic of the same name lies beside it. Root files given by name are taken
    as they are. Symbolic links to folders are not followed, so that a loop of links cannot trap the walk.
    """
    found: dict[Path, None] = {}
    for root in roots:
        for project in _below(root) if root.is_dir() else (root,):
            found[project] = None
    return tuple(sorted(found, key=lambda path: natural_key(path.as_posix())))


def is_archive(paths: Sequence[Path]) -> bool:
    """Whether `paths` ask for several projects: more than one path, or a folder without a project of its own."""
    if len(paths) != 1:
        return True
    (path,) = paths
    return path.is_dir() and not any(path.glob("*.kicad_pro")) and not any(path.glob("*.kicad_sch"))


def _below(root: Path) -> Iterator[Path]:
    for folder, names, files in os.walk(root):
        names[:] = sorted(name for name in names if not _is_skipped(name))
        for name in files:
            if not name.endswith(".kicad_pro") or name.startswith(AUTOSAVE_PREFIXES):
                continue
            project = Path(folder) / name
            if project.with_suffix(".kicad_sch").is_file():
                yield project


def _is_skipped(name: str) -> bool:
    return name in VENDORED or name.lower().endswith(BACKUP_ENDINGS) or name.startswith(AUTOSAVE_PREFIXES)
