"""How long the thermal stage takes: 1,000 entries with corners and remedies, and 10,000 samples of one entry.

Run it by hand: python tests/benchmarks/heat.py
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent.parent))
sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "heat"))

from heat_kit import Bench, close

from analyzer.quantity import Span
from analyzer.settings import Settings


def main() -> None:
    bench = Bench(
        vin=Span(10.8, 12.0, 13.2),
        vout=Span(4.9, 5.0, 5.1),
        draws=((Span(0.05, 0.1, 0.2), None),),
        figures={"quiescent": Span(0.001, 0.002, 0.005), "dropout": 0.3, "junction_max": 125.0},
        theta=Span(50.0, 55.0, 60.0),
    ).in_air(Span(0.0, 25.0, 60.0), 1500.0)
    many = tuple(bench.but(ref=f"U{n}") for n in range(1, 1001))
    settings = Settings(site=bench.site, board=bench.board)
    start = time.perf_counter()
    entries = close(many, settings)
    print(
        f"{len(entries)} entries, {sum(len(e.remedies) for e in entries)} remedies: {time.perf_counter() - start:.2f} s"
    )
    start = time.perf_counter()
    close((bench,), settings)
    plain = time.perf_counter() - start
    start = time.perf_counter()
    close((bench.but(seed=1),), settings)
    print(f"10,000 samples of one entry: {time.perf_counter() - start - plain:.2f} s")


if __name__ == "__main__":
    main()
