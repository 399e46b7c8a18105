"""The same bytes wherever the tool runs, nothing over the network, nothing written that was not asked for."""

from __future__ import annotations

import hashlib
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from conftest import ROOT

BOARDS = ("seedling_bench", "lane_lamp", "tide_logger")
OUTPUTS = ("board.xlsx", "board.json", "board.sarif", "board.md")

NO_NETWORK = """
import socket, sys
def refuse(*arguments, **keywords):
    raise AssertionError("a socket was opened")
socket.socket.__init__ = refuse
socket.create_connection = socket.getaddrinfo = refuse
from analyzer.cli import main
sys.exit(main(sys.argv[1:]))
"""


def run(board: Path, variables: dict[str, str], start: tuple[str, ...] = ("-m", "analyzer.cli")) -> tuple[str, ...]:
    """Hashes of the console and of every output of one run."""
    files = [part for name in OUTPUTS for part in (f"--{_OPTION[name]}", name)]
    base = {"PATH": os.environ.get("PATH", os.defpath), "PYTHONPATH": str(ROOT), "SOURCE_DATE_EPOCH": "1796083200"}
    command = [sys.executable, *start, "audit", ".", *files]
    base |= {"PYTHONIOENCODING": "utf-8", "COLUMNS": "100", "HOME": str(board)}
    done = subprocess.run(command, cwd=board, env=base | variables, capture_output=True, check=False)
    assert done.returncode in (0, 5), done.stderr.decode()
    assert done.stderr == b""
    hashes = [hashlib.sha256(done.stdout).hexdigest()]
    for name in OUTPUTS:
        hashes.append(hashlib.sha256((board / name).read_bytes()).hexdigest())
        (board / name).unlink()
    return tuple(hashes)


_OPTION = {"board.xlsx": "workbook", "board.json": "json", "board.sarif": "sarif", "board.md": "page"}


@pytest.fixture(params=BOARDS)
def board(request: pytest.FixtureRequest, tmp_path: Path) -> Path:
    return Path(shutil.copytree(ROOT / "fixture_boards" / request.param, tmp_path / "board"))


def test_hash_seed_locale_time_zone_and_a_missing_home_change_no_byte(board: Path) -> None:
    first = run(board, {"PYTHONHASHSEED": "0"})
    for variables in (
        {"PYTHONHASHSEED": "1", "LC_ALL": "C", "TZ": "Pacific/Kiritimati"},
        {"PYTHONHASHSEED": "4242", "LC_ALL": "de_DE.UTF-8", "LANG": "de_DE.UTF-8", "TZ": "America/Los_Angeles"},
        {"PYTHONHASHSEED": "7", "LC_ALL": "tr_TR.UTF-8", "LANG": "tr_TR.UTF-8", "HOME": "/nowhere"},
    ):
        assert run(board, variables) == first, variables


def test_the_order_in_which_files_were_made_changes_no_byte(board: Path, tmp_path: Path) -> None:
    first = run(board, {})
    names = sorted(path.name for path in board.iterdir())
    shutil.move(board, tmp_path / "old")
    board.mkdir()
    for name in reversed(names):
        shutil.copy(tmp_path / "old" / name, board / name)
    assert run(board, {}) == first


def test_no_socket_is_opened(board: Path) -> None:
    assert run(board, {}, ("-c", NO_NETWORK)) == run(board, {})


def test_nothing_is_written_but_the_outputs_and_no_input_changes(board: Path) -> None:
    before = {path.name: (path.read_bytes(), path.stat().st_mtime_ns) for path in board.iterdir()}
    run(board, {"PYTHONDONTWRITEBYTECODE": "1"})
    assert {path.name: (path.read_bytes(), path.stat().st_mtime_ns) for path in board.iterdir()} == before
