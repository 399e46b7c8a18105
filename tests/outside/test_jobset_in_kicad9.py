"""The jobset run by KiCad 9's command line, which starts the real tool inside KiCad's own folder.

Measured with KiCad 9.0.2 and relied on here: the command of an execute job runs without a shell and with an empty
JOBSET_OUTPUT_WORK_PATH, though ${KIPRJMOD} is expanded; a status of 5 fails the job and the run (kicad-cli ends in 6).
"""

from __future__ import annotations

import importlib.util
import json
import os
import shutil
import subprocess
from collections.abc import Iterator
from pathlib import Path

import pytest
from conftest import ROOT, need

pytestmark = pytest.mark.outside

KICAD9 = Path("/opt/kicad9")
PACKAGES = (
    "kiutils pint flexcache flexparser platformdirs typing_extensions openpyxl et_xmlfile rich markdown_it mdurl"
    " pygments xlsxwriter"
).split()
"""What the tool runs on, all of it pure Python, so that the Python beside KiCad can load the copies."""

START = """#!/bin/sh
PYTHONDONTWRITEBYTECODE=1 PYTHONPATH="{tool}" exec /usr/bin/python3 -m analyzer.cli "$@"
"""


@pytest.fixture(scope="module")
def tool() -> Iterator[str]:
    """The tool installed inside KiCad's folder; gives its path as seen from there."""
    need(KICAD9 / "usr" / "bin" / "kicad-cli")
    # a folder of its own for each process that runs tests
    folder = KICAD9 / "opt" / f"heatledger-{os.getpid()}"
    inside, start = f"/{folder.relative_to(KICAD9)}", folder / "bin" / "heatledger"
    start.parent.mkdir(parents=True)
    for name in PACKAGES:
        spec = importlib.util.find_spec(name)
        assert spec is not None, name
        source = Path(spec.origin or "")
        if source.name == "__init__.py":
            shutil.copytree(source.parent, folder / name, ignore=shutil.ignore_patterns("__pycache__"))
        else:
            shutil.copy(source, folder / source.name)
    for name in ("analyzer", "rules"):
        shutil.copytree(ROOT / name, folder / name, ignore=shutil.ignore_patterns("__pycache__"))
    start.write_text(START.format(tool=inside), encoding="utf-8")
    start.chmod(0o755)
    yield inside
    shutil.rmtree(folder)


def run_jobset(tool: str, board: str, folder: str) -> tuple[subprocess.CompletedProcess[str], Path]:
    """Run the shipped jobset on a copy of a fixture board; gives the outcome and the job's output folder."""
    work = KICAD9 / "tmp" / folder
    shutil.rmtree(work, ignore_errors=True)
    shutil.copytree(ROOT / "fixture_boards" / board, work)
    shutil.copy(ROOT / "analyzer" / "kicad" / "heatledger.kicad_jobset", work)
    command = [str(ROOT / ".ci" / "kicad9"), "cli", "jobset", "run", "-f", f"/tmp/{folder}/heatledger.kicad_jobset"]
    environment = {**os.environ, "PATH": f"{tool}/bin{os.pathsep}{os.environ['PATH']}"}
    # started from elsewhere, as a release machine would
    done = subprocess.run(
        [*command, f"/tmp/{folder}/{board}.kicad_pro"],
        cwd="/",
        env=environment,
        capture_output=True,
        encoding="utf-8",
        check=False,
    )
    return done, work / "heatledger"


@pytest.mark.parametrize("folder", ["heatledger-job", "heatledger job Wärme"])
def test_the_jobset_delivers_netlist_workbook_and_ledger(tool: str, folder: str) -> None:
    done, out = run_jobset(tool, "lane_lamp", folder)
    assert done.returncode == 0, done.stdout + done.stderr
    ledger = json.loads((out / "lane_lamp.json").read_text(encoding="utf-8"))
    # the verdicts of the board's hand-made EXPECTED.md
    assert {entry["ref"]: entry["verdict"] for entry in ledger["entries"]} == {
        "U1": "open",
        "U101": "tight",
        "U201": "tight",
    }
    assert (out / "lane_lamp.xlsx").read_bytes()[:2] == b"PK"
    assert '<comp ref="U101">' in (out / "lane_lamp.xml").read_text(encoding="utf-8")
    shutil.rmtree(out.parent)


def test_a_part_over_its_limit_fails_the_run_and_still_delivers(tool: str) -> None:
    done, out = run_jobset(tool, "seedling_bench", "heatledger-over")
    assert done.returncode == 6, done.stdout + done.stderr
    ledger = json.loads((out / "seedling_bench.json").read_text(encoding="utf-8"))
    assert [entry["ref"] for entry in ledger["entries"] if entry["verdict"] == "over"] == ["U5"]
    assert (out / "seedling_bench.xlsx").is_file()
    shutil.rmtree(out.parent)
