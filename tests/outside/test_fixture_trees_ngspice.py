"""The tree of currents of each fixture board against an ngspice operating point of an equivalent circuit, to 0.1 %.

The netlists are drawn by hand from the schematics at their nominal figures: loads are current sources, resistors and
diodes stand as they are, an ideal source holds each regulated rail, and each regulator takes from its input what its
topology takes (load and ground current, or output power over efficiency and input voltage).
"""

from __future__ import annotations

import re
import subprocess
from pathlib import Path

import pytest
from conftest import ROOT, need

from analyzer.audit import audit

pytestmark = pytest.mark.outside

SEEDLING = """
v24 n24 0 24
v5 n5 0 5
v33 n33 0 3.3
v12 n12 0 12.0295833333
* L1 and R9 (not fitted) do not matter to the currents; FB1 joins 3V3 and 3V3A
iu3 n33 0 45m
iu4 n33 0 6m
bu2 n5 0 I = -i(v33) + 60u
r3 n5 lamp 1k
vd1 lamp lampk 2.6
rd1 lampk 0 1u
r1 n5 fb5 105k
r2 fb5 0 20k
bu1 n24 0 I = -i(v5) * 5 / (0.86 * 24)
iu6 n12 0 80m
r4 n12 adj 240
r5 adj 0 2050
bu5 n24 0 I = -i(v12) + 50u
"""

LANE = """
vin nin 0 12
* D1: 0.35 V
vd1 nin n12 0.35
v5l v5l 0 5
v5r v5r 0 5
iu102 v5l 0 20m
iu202 v5r 0 20m
r101 v5l la 150
vd101 la ka 3.1
ra ka 0 1u
r201 v5r lb 150
vd201 lb kb 3.1
rb kb 0 1u
bu101 n12 0 I = -i(v5l) + 60u
bu201 n12 0 I = -i(v5r) + 60u
* U1 without the load nobody stated: its ground current
bu1 n12 0 I = 60u
"""

TIDE = """
vbat nbat 0 3.7
v9 n9 0 9
v5 n5 0 5
vm5 0 nm5 5
* nobody stated a current: what is left is what the regulators and the divider take themselves
bu3 n5 0 I = -i(vm5) + 0.5m
bu2 n9 0 I = -i(v5) + 60u
r1 n9 fb 140k
r2 fb 0 10k
bu1 nbat 0 I = -i(v9) * 9 / (0.84 * 3.7)
"""

BOARDS = {
    "seedling_bench": (SEEDLING, {"+24V": "v24", "+5V": "v5", "+3V3": "v33", "+12V": "v12"}),
    "lane_lamp": (LANE, {"+12V_IN": "vin", "+12V": "vd1", "/Left/V5": "v5l", "/Right/V5": "v5r"}),
    "tide_logger": (TIDE, {"VBAT": "vbat", "+9V": "v9", "+5V": "v5"}),
}


def operating_point(netlist: str, folder: Path) -> dict[str, float]:
    """Currents that the voltage sources deliver [A]."""
    file = folder / "board.cir"
    text = f"board\n{netlist}\n.options reltol=1e-6\n.control\nop\nprint all\n.endc\n.end\n"
    file.write_text(text, encoding="utf-8")
    done = subprocess.run(
        [str(need("ngspice")), "-b", str(file)], capture_output=True, text=True, timeout=60, check=False
    )
    found = re.findall(r"^(\w+)#branch = (\S+)$", done.stdout, re.MULTILINE)
    assert found, done.stdout + done.stderr
    return {name: float(value) for name, value in found}


@pytest.mark.parametrize("board", BOARDS)
def test_every_rail_carries_what_ngspice_finds(board: str, tmp_path: Path) -> None:
    netlist, sources = BOARDS[board]
    amps = operating_point(netlist, tmp_path)
    loads = audit(ROOT / "fixture_boards" / board).ledger.loads
    for rail, source in sources.items():
        assert loads[rail].known.nominal == pytest.approx(abs(amps[source]), rel=1e-3), rail
