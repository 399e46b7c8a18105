"""Archives: throughput of two workers against one, memory of the parent and growth of cost with the number of boards.

Run it by hand: python tests/benchmarks/archive.py [BOARDS]   (default 200; copies of the fixture boards and, where the
shared folder is there, of its boards below 3 MB)
"""

from __future__ import annotations

import math
import os
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent.parent
SHARED = Path(os.environ.get("HEATLEDGER_SHARED", ROOT.parent / "shared"))
LARGEST = 3_000_000

PARENT = """
import contextlib, io, resource, sys
from analyzer.cli import main
with contextlib.redirect_stdout(io.StringIO()), contextlib.redirect_stderr(io.StringIO()):
    status = main(["audit", sys.argv[1], "--out", sys.argv[2], "--workers", sys.argv[3]])
print(status, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)
"""


def sources() -> list[Path]:
    """Project folders to copy from."""
    found = [path.parent for path in sorted((ROOT / "fixture_boards").glob("*/*.kicad_pro"))]
    shared = sorted(SHARED.glob("boards/*/project"))
    return found + [one for one in shared if sum(file.stat().st_size for file in one.glob("*.kicad_sch")) < LARGEST]


def fill(folder: Path, count: int) -> None:
    """`count` projects below `folder`."""
    known = sources()
    for number in range(count):
        source = known[number % len(known)]
        shutil.copytree(source, folder / f"b{number:04}", ignore=shutil.ignore_patterns("*.kicad_pcb", "*.step", "3d*"))


def measure(folder: Path, out: Path, workers: int) -> tuple[float, int]:
    """Wall time [s] and peak memory of the parent process [MB]."""
    start = time.perf_counter()
    command = [sys.executable, "-c", PARENT, str(folder), str(out), str(workers)]
    done = subprocess.run(command, capture_output=True, text=True, check=True)
    _, kilobytes = done.stdout.split()
    return time.perf_counter() - start, int(kilobytes) // 1024


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    with tempfile.TemporaryDirectory() as name:
        top = Path(name)
        times: dict[int, float] = {}
        for size in (count // 4, count // 2, count):
            fill(top / f"in{size}", size)
            times[size], memory = measure(top / f"in{size}", top / f"two{size}", 2)
            print(f"{size} boards, 2 workers: {times[size]:.1f} s, parent {memory} MB")
        alone, memory = measure(top / f"in{count}", top / "one", 1)
        print(f"{count} boards, 1 worker: {alone:.1f} s, its process {memory} MB")
        print(f"two workers / one: {alone / times[count]:.2f} × the throughput")
        print(f"cost grows with the number of boards to the power {math.log(times[count] / times[count // 4], 4):.2f}")


if __name__ == "__main__":
    main()
