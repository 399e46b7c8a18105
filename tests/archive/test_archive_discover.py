"""Which projects of an archive are found."""

from __future__ import annotations

from pathlib import Path

from analyzer.archive.discover import find_projects


def project(folder: Path, name: str, schematic: bool = True) -> Path:
    folder.mkdir(parents=True, exist_ok=True)
    (folder / f"{name}.kicad_pro").write_text("{}", encoding="utf-8")
    if schematic:
        (folder / f"{name}.kicad_sch").write_text("(kicad_sch)", encoding="utf-8")
    return folder / f"{name}.kicad_pro"


def test_projects_are_found_at_any_depth_in_natural_order(tmp_path: Path) -> None:
    ten = project(tmp_path / "b10", "x")
    two = project(tmp_path / "b2" / "deep" / "er", "y")
    assert find_projects([tmp_path]) == (two, ten)


def test_backups_autosaves_vendored_copies_and_projects_without_a_schematic_are_left_out(tmp_path: Path) -> None:
    real = project(tmp_path / "real", "r")
    project(tmp_path / "real" / "r-backups", "r")
    project(tmp_path / "node_modules" / "m", "m")
    project(tmp_path / "vendor", "v")
    project(tmp_path / ".git", "g")
    project(tmp_path / "real", "_autosave-r")
    project(tmp_path / "layout-only", "l", schematic=False)
    assert find_projects([tmp_path]) == (real,)


def test_a_project_named_twice_is_found_once(tmp_path: Path) -> None:
    real = project(tmp_path / "real", "r")
    assert find_projects([tmp_path, tmp_path / "real", real]) == (real,)


def test_a_loop_of_links_ends(tmp_path: Path) -> None:
    real = project(tmp_path / "real", "r")
    (tmp_path / "real" / "again").symlink_to(tmp_path)
    assert find_projects([tmp_path]) == (real,)
