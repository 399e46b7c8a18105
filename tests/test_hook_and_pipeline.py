"""The hook and the pipeline that users copy, run as their hosts run them."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import jsonschema
import pytest
import yaml
from conftest import ROOT, need
from schema_store import published

TOOLS = Path(sys.executable).parent


def environment(home: Path) -> dict[str, str]:
    """What the host gives: our program and its own on the path, a home of its own."""
    return {
        "PATH": f"{TOOLS}{os.pathsep}{os.environ.get('PATH', os.defpath)}",
        "HOME": str(home),
        "GITHUB_STEP_SUMMARY": str(home / "summary.md"),
        "SOURCE_DATE_EPOCH": "1796083200",
    }


def project(folder: Path, board: str) -> Path:
    shutil.copytree(ROOT / "fixture_boards" / board, folder)
    return folder


def test_the_hook_fits_the_published_schema_of_such_files() -> None:
    hook = yaml.safe_load((ROOT / ".ci" / "pre-commit-config.yaml").read_text(encoding="utf-8"))
    jsonschema.Draft7Validator(published("JSON schema for .pre-commit-config.yaml")).validate(hook)


@pytest.mark.parametrize(("board", "status", "line"), [("lane_lamp", 0, "Passed"), ("seedling_bench", 1, "over  U5")])
def test_the_hook_holds_a_commit_back_while_a_part_is_over(tmp_path: Path, board: str, status: int, line: str) -> None:
    need("git")
    folder = project(tmp_path / "design", board)
    shutil.copy(ROOT / ".ci" / "pre-commit-config.yaml", folder / ".pre-commit-config.yaml")
    hosts = environment(tmp_path)
    for command in (["git", "init", "-q"], ["git", "add", "-A"]):
        subprocess.run(command, cwd=folder, env=hosts, check=True)
    run = [sys.executable, "-m", "pre_commit", "run"]
    done = subprocess.run(run, cwd=folder, env=hosts, capture_output=True, encoding="utf-8", check=False)
    assert done.returncode == status, done.stdout + done.stderr
    assert line in done.stdout


def test_the_hook_leaves_other_commits_alone(tmp_path: Path) -> None:
    need("git")
    folder = project(tmp_path / "design", "seedling_bench")
    shutil.copy(ROOT / ".ci" / "pre-commit-config.yaml", folder / ".pre-commit-config.yaml")
    hosts = environment(tmp_path)
    for command in (["git", "init", "-q"], ["git", "add", "EXPECTED.md", ".pre-commit-config.yaml"]):
        subprocess.run(command, cwd=folder, env=hosts, check=True)
    run = [sys.executable, "-m", "pre_commit", "run"]
    done = subprocess.run(run, cwd=folder, env=hosts, capture_output=True, encoding="utf-8", check=False)
    assert done.returncode == 0, done.stdout + done.stderr
    assert "(no files to check)Skipped" in done.stdout


@pytest.mark.parametrize(
    ("board", "status", "state"), [("lane_lamp", 5, "1 open, 2 tight"), ("seedling_bench", 5, "1 over")]
)
def test_the_pipeline_gates_and_keeps_its_results(tmp_path: Path, board: str, status: int, state: str) -> None:
    folder = project(tmp_path / "design", board)
    (job,) = yaml.safe_load((ROOT / ".ci" / "example-pipeline.yml").read_text(encoding="utf-8"))["jobs"].values()
    runs = {step["name"]: step["run"] for step in job["steps"] if "run" in step}
    assert list(runs) == ["install", "audit", "summary"]
    hosts = environment(tmp_path)
    # the host's shell for `run`
    shell = ["bash", "--noprofile", "--norc", "-eo", "pipefail", "-c"]
    audit = subprocess.run(
        [*shell, runs["audit"]], cwd=folder, env=hosts, capture_output=True, encoding="utf-8", check=False
    )
    assert audit.returncode == status, audit.stdout + audit.stderr
    assert state in audit.stdout
    subprocess.run([*shell, runs["summary"]], cwd=folder, env=hosts, check=True)
    assert (tmp_path / "summary.md").read_text(encoding="utf-8").startswith("#")
    kept = [line for step in job["steps"] if "with" in step for line in str(step["with"]).split("'")]
    for name in ("board.xlsx", "board.json", "board.sarif"):
        assert (folder / name).stat().st_size > 1000
        assert any(name in line for line in kept)
    assert json.loads((folder / "board.json").read_text(encoding="utf-8"))["board"] == board
