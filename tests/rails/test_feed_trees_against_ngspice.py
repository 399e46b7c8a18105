"""Random feed trees, written as KiCad files and read back, against ngspice operating points of equivalent circuits."""

from __future__ import annotations

import random
import re
import subprocess
from pathlib import Path

import pytest
from conftest import need
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from rails_bench import figure, recognised, rulebook
from sheet_writer import Placed, write_sheet

from analyzer.rails import find_rails
from analyzer.reading import read
from analyzer.rule import Topology
from analyzer.settings import Settings

pytestmark = pytest.mark.outside

E24 = (1.0, 1.1, 1.2, 1.5, 1.8, 2.2, 2.7, 3.3, 4.7, 5.6, 6.8, 8.2)


class Tree:
    """A random board: regulators in a tree, dividers of series and parallel resistors, links, unfitted parts."""

    def __init__(self, seed: int) -> None:
        self.pick = random.Random(seed)
        self.parts: list[Placed] = []
        self.spice = ["vin VIN 0 24"]
        self.reference: dict[str, tuple[float, str, float]] = {}
        self.rails = ["VIN"]
        self.outputs: list[str] = []
        self.count = 0
        for number in range(1, self.pick.randint(2, 6) + 1):
            self.regulator(number)

    def ref(self, letters: str) -> str:
        self.count += 1
        return f"{letters}{self.count}"

    def resistor(self, one: str, other: str, ohms: float, fitted: bool = True) -> None:
        ref = self.ref("R")
        self.parts.append(Placed("R", ref, f"{ohms:.10g}", {"1": one, "2": other}, fitted))
        if fitted:
            self.spice.append(f"r{ref} {one} {other} {max(ohms, 1e-6):.10g}")

    def value(self, decade: float) -> float:
        return self.pick.choice(E24) * decade

    def compound(self, one: str, other: str, decade: float, depth: int = 0) -> None:
        """One resistor, or two compounds in series (through a link at times) or in parallel."""
        shape = self.pick.choice(("one", "one", "series", "parallel")) if depth < 3 else "one"
        if shape == "one":
            self.resistor(one, other, self.value(decade))
        elif shape == "series":
            middle = f"N{self.ref('')}"
            self.compound(one, middle, decade, depth + 1)
            if self.pick.random() < 0.4:
                beyond = f"N{self.ref('')}"
                self.resistor(middle, beyond, 0.0)
                middle = beyond
            self.compound(middle, other, decade, depth + 1)
        else:
            self.compound(one, other, decade, depth + 1)
            self.compound(one, other, decade, depth + 1)
        if self.pick.random() < 0.2:
            self.resistor(one, other, self.value(decade / 10), fitted=False)

    def regulator(self, number: int) -> None:
        ref = f"U{number}"
        above, out, tap, rail = self.pick.choice(self.rails), f"OUT{number}", f"TAP{number}", f"RAIL{number}"
        upper = self.pick.random() < 0.3
        volts = self.pick.choice((0.6, 0.8, 1.2, 1.25))
        amps = self.pick.choice((0.0, 1e-7, 2e-6))
        self.reference[ref] = (volts, "upper" if upper else "lower", amps)
        self.parts.append(
            Placed("XREG", ref, "XREG", {"VIN": above, "GND": "GND", "VOUT": out, "FB": tap, "EN": above})
        )
        sense = self.pick.choice((out, rail))
        self.compound(sense, tap, 1e3)
        self.compound(tap, "GND", 1e3)
        if self.pick.random() < 0.5:
            self.parts.append(Placed("C", self.ref("C"), "10u", {"1": out, "2": "GND"}))
        link = self.pick.choice(("0R", "bead"))
        if link == "0R":
            self.resistor(out, rail, 0.0)
        else:
            bead = self.ref("FB")
            self.parts.append(Placed("FB", bead, "600R@100MHz", {"1": out, "2": rail}))
            self.spice.append(f"r{bead} {out} {rail} 1e-6")
        # an ideal amplifier of gain 1e6 is the regulator; a source that carries nothing is its reference
        if upper:
            self.spice += [f"vr{ref} X{number} {tap} {volts}", f"e{ref} {out} 0 X{number} {sense} 1e6"]
        else:
            self.spice += [f"vr{ref} X{number} 0 {volts}", f"e{ref} {out} 0 X{number} {tap} 1e6"]
        self.spice.append(f"i{ref} {'0 ' + tap if upper else tap + ' 0'} {amps}")
        self.spice.append(f"rl{ref} {rail} 0 {self.value(1e4)}")
        self.rails.append(rail)
        self.outputs.append(rail)

    def operating_point(self, folder: Path) -> dict[str, float]:
        """Node voltages by ngspice."""
        nodes = " ".join(f"v({rail})" for rail in self.outputs)
        lines = [line.replace(" GND ", " 0 ") for line in self.spice]
        file = folder / "tree.cir"
        file.write_text(
            "\n".join(["tree", *lines, ".options reltol=1e-7", ".control", "op", f"print {nodes}", ".endc", ".end"]),
            encoding="utf-8",
        )
        run = subprocess.run([str(need("ngspice")), "-b", str(file)], capture_output=True, text=True, timeout=60)
        found = {
            name.upper(): float(value)
            for name, value in re.findall(r"^v\((\w+)\) = (\S+)$", run.stdout, re.MULTILINE | re.IGNORECASE)
        }
        assert set(found) == set(self.outputs), run.stdout + run.stderr
        return found


@given(seed=st.integers(0, 10_000))
@settings(max_examples=15, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_inferred_voltages_equal_the_operating_point(tmp_path: Path, seed: int) -> None:
    tree = Tree(seed)
    sheet = tmp_path / "tree.kicad_sch"
    write_sheet(sheet, tree.parts)
    circuit = read(sheet, settings=Settings())
    parts = []
    for ref, (volts, across, amps) in tree.reference.items():
        parts.append(
            recognised(
                circuit.by_ref[ref][0],
                Topology.LINEAR,
                reference=volts,
                across=across,
                figures={"feedback_current": figure(amps, "A")},
            )
        )
    stated = figure(24.0)
    rails = find_rails(circuit, tuple(parts), rulebook(), Settings(supplies={"VIN": stated}))
    measured = tree.operating_point(tmp_path)
    for name, volts in measured.items():
        rail = rails.by_name[rails.of_net[name]]
        assert rail.volts is not None, (name, rail.why_open)
        assert rail.volts.span.nominal == pytest.approx(volts, rel=1e-3), name
    for wiring in rails.wirings:
        assert wiring.input_rail is not None
        assert rails.by_name[wiring.input_rail].volts is not None
