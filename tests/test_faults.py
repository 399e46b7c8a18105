"""Killed, full, read-only, without a home: nothing is lost, nothing is half, the next run is fine."""

from __future__ import annotations

import json
import os
import random
import resource
import shutil
import signal
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest
from conftest import ROOT

KILLS = int(os.environ.get("HEATLEDGER_KILLS", "16"))
"""100 take about a minute: HEATLEDGER_KILLS=100."""


def command(*extra: str) -> list[str]:
    return [sys.executable, "-m", "analyzer.cli", "audit", ".", "--workbook", "b.xlsx", "--json", "b.json", *extra]


ENVIRONMENT = {"PATH": os.environ.get("PATH", os.defpath), "PYTHONPATH": str(ROOT), "PYTHONDONTWRITEBYTECODE": "1"}


def run(board: Path, **options: object) -> subprocess.CompletedProcess[str]:
    merged: dict[str, object] = {"env": ENVIRONMENT, "capture_output": True, "encoding": "utf-8", **options}
    return subprocess.run(command(), cwd=board, check=False, **merged)  # type: ignore[call-overload,no-any-return]


@pytest.fixture
def board(tmp_path: Path) -> Path:
    return Path(shutil.copytree(ROOT / "fixture_boards" / "lane_lamp", tmp_path / "board"))


def test_killed_at_any_moment_the_files_are_whole_and_the_next_run_is_fine(board: Path) -> None:
    assert run(board).returncode == 0
    inputs = {path.name: path.read_bytes() for path in board.iterdir() if not path.name.startswith("b.")}
    ledger = (board / "b.json").read_bytes()
    dice = random.Random(20261201)
    for number in range(KILLS):
        with subprocess.Popen(
            command(), cwd=board, env=ENVIRONMENT, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL
        ) as process:
            try:
                process.wait(timeout=dice.uniform(0.05, 0.8))
            except subprocess.TimeoutExpired:
                process.send_signal(signal.SIGKILL if number % 2 else signal.SIGTERM)
        assert (board / "b.json").read_bytes() == ledger
        assert zipfile.ZipFile(board / "b.xlsx").testzip() is None
    assert {name: (board / name).read_bytes() for name in inputs} == inputs
    assert run(board).returncode == 0
    assert (board / "b.json").read_bytes() == ledger


def test_a_full_disk_leaves_the_old_files_and_ends_in_4(board: Path) -> None:
    assert run(board).returncode == 0
    before = {name: (board / name).read_bytes() for name in ("b.xlsx", "b.json")}
    names = sorted(path.name for path in board.iterdir())

    def small() -> None:
        # writes beyond this fail as they do on a full disk; the signal would end the process instead
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        resource.setrlimit(resource.RLIMIT_FSIZE, (4096, 4096))

    done = run(board, preexec_fn=small)
    assert done.returncode == 4
    assert done.stderr.startswith("heatledger: b.xlsx: cannot be written (File too large")
    assert "Traceback" not in done.stderr
    assert {name: (board / name).read_bytes() for name in before} == before
    assert sorted(path.name for path in board.iterdir()) == names


def test_without_home_terminal_or_standard_input_it_runs(board: Path) -> None:
    bare = {name: value for name, value in ENVIRONMENT.items() if name != "HOME"}
    done = run(board, env=bare, stdin=subprocess.DEVNULL, start_new_session=True)
    assert (done.returncode, done.stderr) == (0, "")
    assert len(json.loads((board / "b.json").read_text(encoding="utf-8"))["entries"]) == 3
