"""Speed as ratios in one run: a whole audit against parsing alone, and start-up against a bare interpreter.

Run it by hand: python tests/benchmarks/speed.py PROJECT_FOLDER   (default: the kria board of the shared folder)
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent.parent
SHARED = Path(os.environ.get("HEATLEDGER_SHARED", ROOT.parent / "shared"))
ROUNDS = 7

PARSE = """
import pathlib, sys
from kiutils.utils.sexpr import parse_sexp
for file in pathlib.Path(sys.argv[1]).glob("*.kicad_sch"):
    parse_sexp(file.read_text(encoding="utf-8"))
"""


def seconds(command: list[str]) -> float:
    """Processor time of one whole process [s]: user and system, children included."""
    # compiled modules are kept between runs, as on a user's machine
    environment = {name: value for name, value in os.environ.items() if name != "PYTHONDONTWRITEBYTECODE"}
    process = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, env=environment)
    _, _, usage = os.wait4(process.pid, 0)
    process.returncode = 0
    return usage.ru_utime + usage.ru_stime


FRESH = """
import sys, tempfile, pathlib
from analyzer.cli import main
with tempfile.TemporaryDirectory() as out:
    main(["audit", sys.argv[1], "--workbook", str(pathlib.Path(out) / "board.xlsx")])
"""
"""An audit that writes a workbook where none stands."""


def ratio(name: str, measured: list[str], against: list[str]) -> None:
    """Print the median ratio of pairs run in turn, so that a drifting machine does not matter."""
    seconds(measured)
    pairs = [(seconds(measured), seconds(against)) for _ in range(ROUNDS)]
    ratios = sorted(a / b for a, b in pairs)
    print(
        f"{name}: {statistics.median(ratios):.2f} ({ratios[0]:.2f} to {ratios[-1]:.2f}); "
        f"{statistics.median(a for a, _ in pairs):.3f} s against {statistics.median(b for _, b in pairs):.3f} s"
    )


def main() -> None:
    folder = Path(sys.argv[1]) if len(sys.argv) > 1 else SHARED / "boards" / "kria-k26-devboard" / "project"
    tool = [sys.executable, "-m", "analyzer.cli"]
    audit, parse = ([sys.executable, "-c", code, str(folder)] for code in (FRESH, PARSE))
    ratio("audit with workbook / parse_sexp alone", audit, parse)
    ratio("heatledger --help / python -c pass", [*tool, "--help"], [sys.executable, "-c", "pass"])


if __name__ == "__main__":
    main()
