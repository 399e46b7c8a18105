"""How long a large workbook takes: 5,000 parts on 200 regulators written, read back, and opened in LibreOffice.

Run it by hand: python tests/benchmarks/workbook.py [OUT.xlsx]   (with OUT.xlsx and soffice it is opened and saved too)
"""

from __future__ import annotations

import shutil
import subprocess
import sys
import tempfile
import time
from dataclasses import replace
from pathlib import Path

import openpyxl

from analyzer.audit import audit
from analyzer.load import Draw, RailLoad
from analyzer.output.workbook.build import build
from analyzer.output.workbook.typed import NOTHING
from analyzer.output.workbook.typed_reading import read_typed
from analyzer.quantity import total
from analyzer.rail import Feed

ROOT = Path(__file__).resolve().parent.parent.parent
REGULATORS, PARTS = 200, 5000


def main() -> None:
    result = audit(ROOT / "fixture_boards" / "seedling_bench")
    entry = next(entry for entry in result.ledger.entries if entry.ref == "U2")
    rail = next(rail for rail in result.ledger.rails if rail.name == "+3V3")
    draw = result.ledger.loads["+3V3"].draws[0]
    entries, rails, loads, names = [], [], {}, {}
    for n in range(REGULATORS):
        name = f"+R{n}"
        outputs = tuple(replace(output, rail=name) for output in entry.outputs)
        entries.append(replace(entry, key=f"/r{n}", ref=f"U{n + 1}", outputs=outputs))
        rails.append(replace(rail, name=name, feeds=(Feed(f"U{n + 1}", "regulator"),)))
        draws: list[Draw] = []
        for k in range(PARTS // REGULATORS):
            draws.append(replace(draw, ref=f"U{1000 + n * 25 + k}", key=f"/d{n}/{k}", rail=name))
            names[draws[-1].key] = ("PART", "/")
        loads[name] = RailLoad(name, tuple(draws), (), total([one.amps.span for one in draws]))
    ledger = replace(result.ledger, entries=tuple(entries), rails=tuple(rails), loads=loads, names=names)
    build(result.ledger, result.settings, NOTHING, "warm.xlsx")
    start = time.perf_counter()
    data = build(ledger, result.settings, NOTHING, "large.xlsx")
    print(f"{PARTS} parts on {REGULATORS} regulators: {time.perf_counter() - start:.2f} s, {len(data) // 1024} kB")
    if len(sys.argv) > 1:
        file = Path(sys.argv[1])
        file.write_bytes(data)
        start = time.perf_counter()
        read_typed(file)
        print(f"what was typed read back: {time.perf_counter() - start:.2f} s")
        opened(file)


def opened(file: Path) -> None:
    """Open the workbook in LibreOffice and save it again, and say how long both took and how many cells are errors."""
    program = shutil.which("soffice")
    if program is None:
        return
    with tempfile.TemporaryDirectory() as name:
        profile = f"-env:UserInstallation=file://{name}/profile"
        command = [program, profile, "--headless", "--convert-to", "xlsx", "--outdir", f"{name}/out", str(file)]
        start = time.perf_counter()
        subprocess.run(command, check=True, capture_output=True, timeout=600)
        took = time.perf_counter() - start
        book = openpyxl.load_workbook(Path(name) / "out" / file.name, data_only=True, read_only=True)
        cells = [
            cell for sheet in book for row in sheet.iter_rows(values_only=True) for cell in row if cell is not None
        ]
        book.close()
    wrong = sum(1 for cell in cells if str(cell).startswith(("#", "Err:")))
    print(f"opened in LibreOffice and saved: {took:.1f} s, {len(cells)} cells, {wrong} errors")


if __name__ == "__main__":
    main()
