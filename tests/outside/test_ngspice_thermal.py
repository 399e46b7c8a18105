"""Thermal networks against ngspice: 1 A stands for 1 W, 1 V for 1 K, 1 Ω for 1 K/W, 1 F for 1 J/K."""

from __future__ import annotations

import random
import subprocess
import sys
from pathlib import Path

import pytest
from conftest import need

from analyzer.heat import transient

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "heat"))

from heat_kit import Bench, close, number

from analyzer.quantity import Span
from analyzer.settings import Coupling, PartStatement, Settings

pytestmark = pytest.mark.outside


def spice(deck: list[str], tmp_path: Path) -> dict[str, float]:
    """Run a deck whose control section prints "name = value" lines."""
    program = need("ngspice")
    file = tmp_path / "net.cir"
    file.write_text("\n".join(["* thermal network", *deck, ".end", ""]), encoding="utf-8")
    run = subprocess.run([program, "-b", str(file)], capture_output=True, text=True, timeout=120, check=False)
    found = {}
    for line in run.stdout.splitlines():
        name, mark, value = line.partition("=")
        if mark and value.split():
            try:
                found[name.strip().lower()] = float(value.split()[0])
            except ValueError:
                continue
    assert found, run.stdout + run.stderr
    return found


@pytest.mark.parametrize("seed", range(4))
def test_chain_of_junction_case_sink(seed: int, tmp_path: Path) -> None:
    rng = random.Random(seed)
    jc, cs, sa = rng.uniform(0.5, 5), rng.uniform(0.2, 2.5), rng.uniform(5, 20)
    # enough heat for the sink to stand above the 75 K it is rated at, where its θ is the catalogue's
    watts, ambient = 80.0 / sa * rng.uniform(1.0, 2.0), rng.uniform(-20, 60)
    deck = [f"Vair air 0 {ambient}", f"R1 j c {jc}", f"R2 c s {cs}", f"R3 s air {sa}", f"I1 0 j {watts}"]
    found = spice([*deck, ".control", "op", "print v(j)", ".endc"], tmp_path)
    chain = PartStatement(heat_sink=(number(jc, "K/W"), number(cs, "K/W"), number(sa, "K/W")))
    bench = Bench(vin=Span.exact(6.0), vout=Span.exact(5.0), draws=((Span.exact(watts), None),), statement=chain)
    worst = bench.in_air(ambient).entry().worst
    assert worst is not None
    assert worst.junction == pytest.approx(found["v(j)"], rel=0.005)


@pytest.mark.parametrize("seed", range(4))
def test_coupled_parts_on_one_board(seed: int, tmp_path: Path) -> None:
    # a star of three parts on a common board: Rii = ri + rb, Rij = rb
    rng = random.Random(seed)
    own, board, ambient = [rng.uniform(10, 60) for _ in range(3)], rng.uniform(2, 15), rng.uniform(0, 60)
    watts = [rng.uniform(0.05, 1.0) for _ in range(3)]
    deck = [f"Vair air 0 {ambient}", f"Rb b air {board}"]
    for n, (r, p) in enumerate(zip(own, watts, strict=True), 1):
        deck += [f"R{n} j{n} b {r}", f"I{n} 0 j{n} {p}"]
    found = spice([*deck, ".control", "op", "print v(j1) v(j2) v(j3)", ".endc"], tmp_path)
    benches = tuple(
        Bench(
            vin=Span.exact(6.0), vout=Span.exact(5.0), draws=((Span.exact(p), None),), theta=r + board, ref=f"U{n}"
        ).in_air(ambient)
        for n, (r, p) in enumerate(zip(own, watts, strict=True), 1)
    )
    pairs = tuple(Coupling(a, b, number(board, "K/W")) for a, b in (("U1", "U2"), ("U3", "U1"), ("U2", "U3")))
    entries = close(benches, Settings(site=benches[0].site, board=benches[0].board, coupling=pairs))
    for n, entry in enumerate(entries, 1):
        assert entry.worst is not None
        assert entry.worst.junction == pytest.approx(found[f"v(j{n})"], rel=0.005)


@pytest.mark.parametrize("seed", range(4))
def test_foster_network_in_time(seed: int, tmp_path: Path) -> None:
    rng = random.Random(seed)
    network = [(10 ** rng.uniform(-0.5, 1.5), 10 ** rng.uniform(-2.5, 0.0)) for _ in range(rng.randint(2, 5))]
    watts, period = rng.uniform(0.5, 10), 10 ** rng.uniform(-1.5, 0.0)
    on = period * rng.uniform(0.1, 0.7)
    edge = period * 1e-6
    periods = 2
    deck = [f"I1 0 n0 PULSE(0 {watts} 0 {edge} {edge} {on - edge} {period})"]
    for n, (r, tau) in enumerate(network):
        last = n == len(network) - 1
        below = "0" if last else f"n{n + 1}"
        deck += [f"R{n} n{n} {below} {r}", f"C{n} n{n} {below} {tau / r}"]
    at = [on, period, period + on]
    deck += [f".tran {period / 2000} {periods * period} 0 {period / 2000} uic", ".control", "run"]
    deck += [f"meas tran t{n} find v(n0) at={time}" for n, time in enumerate(at)]
    deck += [".endc"]
    found = spice(deck, tmp_path)
    steps = [(k * period + shift, power) for k in range(periods) for shift, power in ((0.0, watts), (on, 0.0))]
    for n, time in enumerate(at):
        assert transient.profile(network, steps, time) == pytest.approx(found[f"t{n}"], rel=0.005)


@pytest.mark.parametrize("seed", range(2))
def test_periodic_peak_and_valley_in_the_steady_state(seed: int, tmp_path: Path) -> None:
    rng = random.Random(100 + seed)
    network = [(rng.uniform(1, 10), 10 ** rng.uniform(-2.0, -1.0)) for _ in range(3)]
    watts, period = rng.uniform(1, 5), 0.05
    on, edge, periods = period * rng.uniform(0.2, 0.6), 1e-7, 30
    deck = [f"I1 0 n0 PULSE(0 {watts} 0 {edge} {edge} {on - edge} {period})"]
    for n, (r, tau) in enumerate(network):
        below = "0" if n == 2 else f"n{n + 1}"
        deck += [f"R{n} n{n} {below} {r}", f"C{n} n{n} {below} {tau / r}"]
    deck += [f".tran {period / 500} {periods * period} 0 {period / 500} uic", ".control", "run"]
    deck += [f"meas tran peak find v(n0) at={(periods - 1) * period + on}"]
    deck += [f"meas tran valley find v(n0) at={(periods - 1) * period}", ".endc"]
    found = spice(deck, tmp_path)
    assert transient.periodic_peak(network, watts, on, period) == pytest.approx(found["peak"], rel=0.005)
    assert transient.periodic_valley(network, watts, on, period) == pytest.approx(found["valley"], rel=0.005)
