"""The tree of currents against ngspice operating points of equivalent circuits."""

from __future__ import annotations

import random
import re
import subprocess
from pathlib import Path

import pytest
from conftest import need
from draws_kit import chip, circuit, evidence, loads, part, rails, vreg, wire

from analyzer.evidence import Evidence
from analyzer.quantity import Span
from analyzer.rail import Wiring
from analyzer.rule import Topology

pytestmark = pytest.mark.outside

GROUND = 0.0013
EFFICIENCY = 0.87


def takes(volts: dict[str, float]):
    """Ideal loss figures: linear parts add a ground current, switching ones have one efficiency."""

    def of(wiring: Wiring, load: Span) -> Evidence | None:
        if wiring.channel.topology is Topology.LINEAR:
            return evidence(load + Span.exact(GROUND))
        return evidence(load.scaled(volts[wiring.output_rail] / (EFFICIENCY * volts[wiring.input_rail])))

    return of


def operating_point(netlist: list[str], tmp_path: Path) -> dict[str, float]:
    """Currents of the voltage sources [A], by ngspice."""
    file = tmp_path / "tree.cir"
    file.write_text(
        "\n".join(["tree", *netlist, ".options reltol=1e-6", ".control", "op", "print all", ".endc", ".end"])
    )
    run = subprocess.run([str(need("ngspice")), "-b", str(file)], capture_output=True, text=True, timeout=60)
    found = re.findall(r"^(\w+)#branch = (\S+)$", run.stdout, re.MULTILINE)
    assert found, run.stdout + run.stderr
    return {name: -float(value) for name, value in found}


def random_tree(seed: int):
    """A board of up to eight regulators, with loads, dividers, bleeders and resistors between, and its netlist."""
    pick = random.Random(seed)
    volts = {"VIN": 24.0}
    components, wirings, netlist = [], [], ["vVIN VIN 0 24"]
    for n in range(1, pick.randint(2, 8) + 1):
        above = pick.choice(sorted(volts))
        below = f"V{n}"
        volts[below] = round(volts[above] * pick.uniform(0.2, 0.9), 3)
        topology = pick.choice((Topology.LINEAR, Topology.BUCK))
        reg = vreg(f"U{n}", above, below)
        components.append(reg)
        wirings.append(wire(reg, above, below, topology))
        netlist.append(f"v{below} {below} 0 {volts[below]}")  # the ideal output; its current is the load
        if topology is Topology.LINEAR:
            netlist.append(f"b{below} {above} 0 I = -i(v{below}) + {GROUND}")
        else:
            netlist.append(f"b{below} {above} 0 I = -i(v{below}) * {volts[below] / (EFFICIENCY * volts[above])!r}")
    ref = 100
    for rail in sorted(volts):
        for _ in range(pick.randint(1, 2)):
            ref += 1
            amps = round(pick.uniform(0.001, 0.5), 6)
            components.append(chip(f"U{ref}", rail, fields={"I_load": f"{amps} A"}))
            netlist.append(f"i{ref} {rail} 0 {amps}")
        for _ in range(pick.randint(0, 3)):
            ref += 2
            ohms = [round(pick.uniform(50, 5000), 1) for _ in range(4)]
            tap, inner = f"T{ref}", f"M{ref}"
            fitted = pick.random() < 0.7
            for k, (a, b) in enumerate(((rail, tap), (tap, inner), (inner, "GND"), (tap, "GND"))):
                is_in = fitted or k != 3
                components.append(part(f"R{ref}{k}", [a, b], f"{ohms[k]}R", fitted=is_in))
                if is_in:
                    netlist.append(f"r{ref}{k} {a} {b.replace('GND', '0')} {ohms[k]}")
    return circuit(*components), rails(volts, wirings), volts, netlist


@pytest.mark.parametrize("seed", range(25))
def test_random_trees(seed, tmp_path):
    board, known, volts, netlist = random_tree(seed)
    spice = operating_point(netlist, tmp_path)
    found = loads(board, known, takes=takes(volts))
    for rail in volts:
        assert found.by_rail[rail].is_complete
        assert found.by_rail[rail].known.nominal == pytest.approx(spice[f"v{rail.lower()}"], rel=1e-3), rail


def test_resistors_between_rails(tmp_path):
    u1, u2 = vreg("U1", "VIN", "V5"), vreg("U2", "VIN", "V3")
    pairs = [("V5", "V3", 47.0), ("V5", "X", 100.0), ("X", "V3", 220.0), ("X", "GND", 330.0), ("V3", "GND", 68.0)]
    components = [part(f"R{n}", [a, b], f"{ohms}R") for n, (a, b, ohms) in enumerate(pairs)]
    netlist = ["vV5 V5 0 5", "vV3 V3 0 3.3"]
    netlist += [f"r{n} {a} {b.replace('GND', '0')} {ohms}" for n, (a, b, ohms) in enumerate(pairs)]
    spice = operating_point(netlist, tmp_path)
    board = circuit(u1, u2, *components)
    found = loads(board, rails({"VIN": 12, "V5": 5, "V3": 3.3}, [wire(u1, "VIN", "V5"), wire(u2, "VIN", "V3")]))
    for rail in ("V5", "V3"):
        assert found.by_rail[rail].known.nominal == pytest.approx(spice[f"v{rail.lower()}"], rel=1e-3)
    # conservation: what the rails give is what flows to ground through R3 and R4
    given = sum(found.by_rail[rail].known.nominal for rail in ("V5", "V3"))
    x = (5 / 100 + 3.3 / 220) / (1 / 100 + 1 / 220 + 1 / 330)
    assert given == pytest.approx(x / 330 + 3.3 / 68, rel=1e-9)
