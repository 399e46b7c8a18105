"""Coverage-guided fuzzing of every reader, by atheris: python tests/fuzz/run.py --seconds 5 [--target NAME]

Each target runs in a process of its own. A find ends it, is kept in `--finds`, and makes the exit status 1; what takes
longer than half a minute of the clock or two gigabytes is a find too.
"""

from __future__ import annotations

import argparse
import re
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

HERE = Path(__file__).resolve().parent
SLOWEST_SECONDS = 30
MOST_MEGABYTES = 2048
LONGEST_INPUT = 65_536


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.split("\n", 1)[0])
    parser.add_argument("--seconds", type=int, default=5, help="time for each target")
    parser.add_argument("--target", help="only this target")
    parser.add_argument("--finds", type=Path, default=Path("fuzz_finds"), help="where inputs that fail are kept")
    parser.add_argument("--child", help=argparse.SUPPRESS)
    parser.add_argument("--corpus", type=Path, help=argparse.SUPPRESS)
    arguments = parser.parse_args()
    if arguments.child:
        _fuzz(arguments.child, arguments.corpus, arguments.finds, arguments.seconds)
    names = [arguments.target] if arguments.target else _names()
    started, runs, finds = time.monotonic(), 0, 0
    for name in names:
        done, found, last = _run(name, arguments.seconds, arguments.finds)
        runs, finds = runs + done, finds + found
        print(f"{name}: {done} executions, {found} finds{last}", flush=True)
    print(f"fuzz executions={runs} finds={finds} targets={len(names)} seconds={time.monotonic() - started:.0f}")
    return 1 if finds else 0


def _names() -> list[str]:
    text = (HERE / "targets.py").read_text(encoding="utf-8")
    return re.findall(r'^    "(\w+)": \(', text.partition("TARGETS:")[2], re.MULTILINE)


def _run(name: str, seconds: int, finds: Path) -> tuple[int, int, str]:
    """(executions, finds, last line of a failure) of one target."""
    corpus = Path(tempfile.mkdtemp(prefix=f"fuzz-{name}-"))
    finds.mkdir(parents=True, exist_ok=True)
    command = [sys.executable, __file__, "--child", name, "--corpus", str(corpus), "--finds", str(finds)]
    done = subprocess.run(
        [*command, "--seconds", str(seconds)], capture_output=True, text=True, errors="replace", check=False
    )
    shutil.rmtree(corpus, ignore_errors=True)
    counts = re.findall(r"^#(\d+)\s", done.stderr, re.MULTILINE) + re.findall(r"Done (\d+) runs", done.stderr)
    failed = done.returncode != 0
    last = ""
    if failed:
        reasons = re.findall(r"^(?:\w+(?:\.\w+)*(?:Error|Exception)\b.*|==\d+== ?ERROR.*)$", done.stderr, re.MULTILINE)
        last = f": {reasons[-1] if reasons else done.stderr.strip().splitlines()[-1:]}"
    return max((int(count) for count in counts), default=0), int(failed), last


def _fuzz(name: str, corpus: Path, finds: Path, seconds: int) -> None:
    import atheris

    with atheris.instrument_imports(include=["analyzer"]):
        sys.path.insert(0, str(HERE))
        from targets import TARGETS
    target, seeds = TARGETS[name]
    for number, seed in enumerate(seeds()):
        target(seed)  # what is imported at first use does not count as time of an input
        (corpus / f"seed{number}").write_bytes(seed[:LONGEST_INPUT] if name != "workbook" else seed)
    atheris.Setup(
        [
            sys.argv[0],
            str(corpus),
            f"-max_total_time={seconds}",
            f"-max_len={LONGEST_INPUT}",
            f"-timeout={SLOWEST_SECONDS}",
            f"-rss_limit_mb={MOST_MEGABYTES}",
            f"-dict={HERE / 'words.dict'}",
            f"-artifact_prefix={finds}/{name}-",
            "-print_final_stats=1",
            "-seed=1",
        ],
        target,
    )
    atheris.Fuzz()


if __name__ == "__main__":
    raise SystemExit(main())
