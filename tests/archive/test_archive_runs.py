"""Whole archives: in this process, in worker processes, on a cluster; one broken board changes nothing else."""

from __future__ import annotations

import json
import os
import shutil
import signal
import subprocess
import sys
import zipfile
from pathlib import Path

import jsonschema
import openpyxl
import pytest
from conftest import ROOT

from analyzer.archive.pool import DIED, run
from analyzer.archive.work import Job, Outcome

BOARDS = ("seedling_bench", "lane_lamp", "tide_logger")


def archive(folder: Path, copies: int = 1) -> Path:
    """A folder of copies of the fixture boards."""
    for number in range(copies):
        for board in BOARDS:
            shutil.copytree(ROOT / "fixture_boards" / board, folder / f"y{number}" / board)
    return folder


def heatledger(*arguments: str, cwd: Path) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, "NO_COLOR": "1", "COLUMNS": "100", "SOURCE_DATE_EPOCH": "1796083200"}
    environment["PYTHONPATH"] = str(ROOT)
    command = [sys.executable, "-m", "analyzer.cli", *arguments]
    return subprocess.run(command, cwd=cwd, env=environment, capture_output=True, encoding="utf-8", check=False)


@pytest.mark.parametrize("workers", ["1", "2"])
def test_boards_are_ranked_by_worst_margin_whatever_the_workers(tmp_path: Path, workers: str) -> None:
    archive(tmp_path / "in")
    done = heatledger("audit", "in", "--out", "out", "--workers", workers, cwd=tmp_path)
    assert done.returncode == 5
    result = json.loads((tmp_path / "out" / "archive.json").read_text(encoding="utf-8"))
    schema = json.loads((ROOT / "analyzer" / "output" / "schema" / "archive-1.json").read_text(encoding="utf-8"))
    jsonschema.validators.validator_for(schema)(schema).validate(result)
    assert [(board["board"], board["worst_part"], board["gaps"]) for board in result["boards"]] == [
        ("seedling_bench/seedling_bench", "U5", 0),
        ("lane_lamp/lane_lamp", "U101", 1),
        ("tide_logger/tide_logger", "U3", 3),
    ]
    # of tide_logger currents are missing: what is known leaves at most so much
    assert [board["worst_is_bound"] for board in result["boards"]] == [False, False, True]
    assert done.stdout.splitlines()[2].split(":")[0].split("  ")[-2:] == [
        "at most +73.7 K U3",
        "tide_logger/tide_logger",
    ]
    assert done.stdout.splitlines()[3] == "3 boards, 0 failed: 1 over, 4 open, 2 tight, 2 clear"
    for board in BOARDS:
        assert (tmp_path / "out" / board / board / "ledger.xlsx").is_file()
    book = openpyxl.load_workbook(tmp_path / "out" / "archive.xlsx", read_only=True)
    assert [sheet.title for sheet in book] == ["Boards", "Entries", "Gaps", "Changes"]
    assert sum(1 for _ in book["Entries"].iter_rows()) == 1 + 9
    book.close()


def test_the_number_of_workers_changes_no_byte(tmp_path: Path) -> None:
    archive(tmp_path / "in")
    for workers in ("1", "2"):
        heatledger("audit", "in", "--out", f"out{workers}", "--workers", workers, cwd=tmp_path)
    one, two = tmp_path / "out1", tmp_path / "out2"
    files = sorted(path.relative_to(one) for path in one.rglob("*") if path.is_file())
    assert len(files) == 2 + 2 * len(BOARDS)
    for file in files:
        assert (one / file).read_bytes() == (two / file).read_bytes(), file


def test_one_broken_board_changes_nothing_else(tmp_path: Path) -> None:
    archive(tmp_path / "in")
    heatledger("audit", "in", "--out", "whole", "--workers", "2", cwd=tmp_path)
    broken = tmp_path / "in" / "y0" / "broken"
    broken.mkdir()
    (broken / "broken.kicad_pro").write_text("{}", encoding="utf-8")
    (broken / "broken.kicad_sch").write_text('(kicad_sch (version 20231120) (uuid "a")', encoding="utf-8")
    done = heatledger("audit", "in", "--out", "more", "--workers", "2", cwd=tmp_path)
    assert done.returncode == 3
    assert "failed  broken/broken: " in done.stdout
    for board in BOARDS:
        for name in ("ledger.json", "ledger.xlsx"):
            place = Path(board) / board / name
            assert (tmp_path / "whole" / place).read_bytes() == (tmp_path / "more" / place).read_bytes()


def test_since_an_earlier_run_what_changed_is_told(tmp_path: Path) -> None:
    archive(tmp_path / "in")
    heatledger("audit", "in", "--out", "before", cwd=tmp_path)
    settings = tmp_path / "in" / "y0" / "lane_lamp" / "heatledger.toml"
    settings.write_text(settings.read_text(encoding="utf-8").replace("..60", "..40"), encoding="utf-8")
    done = heatledger("audit", "in", "--out", "after", "--since", "before/archive.json", cwd=tmp_path)
    changed = [line for line in done.stdout.splitlines() if line.startswith("better")]
    # 20 K less ambient is 20 K more margin: 14.2 K becomes 34.2 K
    assert changed[1:] == [
        "better: lane_lamp/lane_lamp U101 /Left/: tight (+14.2 K) → clear (+34.2 K)",
        "better: lane_lamp/lane_lamp U201 /Right/: tight (+14.2 K) → clear (+34.2 K)",
    ]


def test_several_projects_without_a_folder_for_results_are_a_usage_error(tmp_path: Path) -> None:
    archive(tmp_path / "in")
    done = heatledger("audit", "in", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (1, "")
    assert (
        done.stderr
        == "heatledger: several projects give several results. Name a folder for their results: --out DIR.\n"
    )


@pytest.mark.parametrize(
    "option", [("--workbook", "a.xlsx"), ("--currents", "a.xlsx"), ("--variant", "all"), ("--allow-outside",)]
)
def test_what_means_one_board_is_refused_for_many_and_not_left_undone(tmp_path: Path, option: tuple[str, ...]) -> None:
    archive(tmp_path / "in")
    done = heatledger("audit", "in", "--out", "out", *option, cwd=tmp_path)
    said = f"heatledger: {option[0]} goes with a single board, not with several projects."
    assert (done.returncode, done.stderr) == (1, f"{said} Leave it out, or audit that board by itself.\n")
    assert not (tmp_path / "out").exists()


def test_a_folder_without_projects_is_an_input_error(tmp_path: Path) -> None:
    (tmp_path / "in").mkdir()
    done = heatledger("audit", "in", "--out", "out", cwd=tmp_path)
    assert done.returncode == 3
    assert "no KiCad project in or below it" in done.stderr


KILLER = """
import analyzer.archive.work as module

real = module._work

def fatal(job):
    if "lane" in job.label:
        import os, signal
        os.kill(os.getpid(), signal.SIGKILL)
    return real(job)

module._work = fatal
"""


def test_a_worker_that_dies_takes_only_its_own_board(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "site").mkdir()
    (tmp_path / "site" / "sitecustomize.py").write_text(KILLER, encoding="utf-8")
    monkeypatch.setenv("PYTHONPATH", os.pathsep.join([str(tmp_path / "site"), str(ROOT)]))
    jobs = [Job(ROOT / "fixture_boards" / board / f"{board}.kicad_pro", board, tmp_path / board) for board in BOARDS]
    found = {outcome.label: outcome for outcome in run(jobs, 2)}
    assert set(found) == set(BOARDS)
    assert found["lane_lamp"] == Outcome("lane_lamp", 2, fault=DIED)
    assert {board: found[board].status for board in BOARDS if board != "lane_lamp"} == {
        "seedling_bench": 5,
        "tide_logger": 0,
    }


@pytest.mark.filterwarnings("ignore")
def test_a_cluster_of_two_workers_gives_the_same_ledgers(tmp_path: Path) -> None:
    distributed = pytest.importorskip("distributed")
    archive(tmp_path / "in")
    heatledger("audit", "in", "--out", "here", "--workers", "1", cwd=tmp_path)
    with distributed.LocalCluster(n_workers=2, threads_per_worker=1, dashboard_address=None) as cluster:
        done = heatledger("audit", "in", "--out", "there", "--cluster", cluster.scheduler_address, cwd=tmp_path)
    assert done.returncode == 5, done.stderr
    for board in BOARDS:
        place = Path(board) / board / "ledger.json"
        assert (tmp_path / "here" / place).read_bytes() == (tmp_path / "there" / place).read_bytes()


def test_ctrl_c_ends_in_one_line_and_leaves_finished_results_whole(tmp_path: Path) -> None:
    archive(tmp_path / "in", copies=8)
    command = [sys.executable, "-m", "analyzer.cli", "audit", "in", "--out", "out", "--workers", "2"]
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    # its own session, so that the key reaches parent and workers alike, as in a terminal
    with subprocess.Popen(
        command, cwd=tmp_path, env=environment, stderr=subprocess.PIPE, encoding="utf-8", start_new_session=True
    ) as process:
        assert process.stderr is not None
        first = [process.stderr.readline() for _ in range(3)]
        os.killpg(process.pid, signal.SIGINT)
        rest = process.stderr.read()
        assert process.wait(timeout=30) == 130
    assert [line.partition("]")[0] for line in first] == ["[1/24", "[2/24", "[3/24"]
    assert rest.splitlines()[-1] == "heatledger: interrupted; what was finished is whole"
    assert "Traceback" not in rest
    finished = sorted((tmp_path / "out").rglob("ledger.*"))
    assert 6 <= len(finished) < 48
    for file in finished:
        if file.suffix == ".json":
            assert json.loads(file.read_text(encoding="utf-8"))["schema"].startswith("heatledger/")
        else:
            assert zipfile.ZipFile(file).testzip() is None
    assert not list((tmp_path / "out").rglob("*.tmp*"))
    assert not (tmp_path / "out" / "archive.json").exists()
