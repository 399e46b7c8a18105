"""Golden ledgers: what the tool says of every fixture board and, in brief, of every shared board.

A change of behaviour shows as a difference here. After one that is meant, renew them and read the difference before
it is committed:  python tests/golden/golden.py
"""

from __future__ import annotations

import contextlib
import io
import os
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
ROOT = HERE.parent.parent
SHARED = Path(os.environ.get("HEATLEDGER_SHARED", ROOT.parent / "shared"))
WIDTH = "100"
FIXTURES = ("seedling_bench", "lane_lamp", "tide_logger")
PARTS = {"seedling_bench": ("U1", "U2", "U5"), "lane_lamp": ("U1", "U101", "U201"), "tide_logger": ("U1", "U2", "U3")}


def fixture_files() -> dict[str, list[str]]:
    """File of this folder → the command whose output it holds."""
    wanted = {}
    for board in FIXTURES:
        wanted[f"{board}.txt"] = ["audit", str(ROOT / "fixture_boards" / board)]
        wanted[f"{board}.json"] = [*wanted[f"{board}.txt"], "--json", "-"]
        wanted[f"{board}.rails.txt"] = ["rails", str(ROOT / "fixture_boards" / board)]
        wanted[f"{board}.gaps.txt"] = ["gaps", str(ROOT / "fixture_boards" / board)]
        for part in PARTS[board]:
            wanted[f"{board}.trail_{part}.txt"] = ["trail", part, str(ROOT / "fixture_boards" / board)]
    return wanted


def shared_files(shared: Path) -> dict[str, list[str]]:
    """The same for the shared boards: only the regulators, nothing of the boards themselves."""
    boards = sorted((shared / "boards").glob("*/project"))
    return {f"shared_{board.parent.name}.txt": ["audit", str(board), "--brief"] for board in boards}


def output(command: list[str]) -> str:
    """What a command prints, 100 columns wide."""
    from analyzer.cli import main

    screen = io.StringIO()
    before = {name: os.environ.get(name) for name in ("COLUMNS", "NO_COLOR")}
    os.environ |= {"COLUMNS": WIDTH, "NO_COLOR": "1"}
    try:
        with contextlib.redirect_stdout(screen):
            status = main(command)
    finally:
        for name, value in before.items():
            os.environ.pop(name) if value is None else os.environ.update({name: value})
    return f"{screen.getvalue()}exit status {status}\n"


def renew() -> None:
    """Write all golden files anew."""
    for name, command in (fixture_files() | shared_files(SHARED)).items():
        (HERE / name).write_text(output(command), encoding="utf-8")
        print(name)


if __name__ == "__main__":
    sys.path.insert(0, str(ROOT))
    renew()
