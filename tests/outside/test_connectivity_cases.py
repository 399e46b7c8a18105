"""Every small connectivity case against the netlist KiCad 10.0.7 itself exports from it: pins and names."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from analyzer.circuit import Circuit
from analyzer.reading import read
from analyzer.reading.sexpr import every, first, parse, word

pytestmark = pytest.mark.boards

Nets = dict[str, set[tuple[str, str]]]

SHARED = Path(os.environ.get("HEATLEDGER_SHARED", Path(__file__).resolve().parents[3] / "shared"))
CASES = sorted(path.name.removesuffix(".10.net") for path in (SHARED / "connectivity_cases").glob("*/*.10.net")) or [
    "none"
]

# the sheet's file was named by an absolute path, or through a folder name, of the machine KiCad ran on: missing here
MOVED = {"pa_abs", "pa_up"}
# KiCad names nets of parts without number after uuids it draws anew at each run
RANDOM_NAMES = {"dr"}


def kicads(path: Path) -> Nets:
    """The nets of a `.net` file: name to the set of (reference, pad)."""
    tree = parse(path.read_bytes(), path.name, "export")
    nets = first(tree, "nets")
    assert nets is not None
    return {
        word(net, "name"): {(word(node, "ref"), word(node, "pin")) for node in every(net, "node")}
        for net in every(nets, "net")
    }


def ours(circuit: Circuit) -> Nets:
    """The same of a circuit; like KiCad's file without parts excluded from the board."""
    parts = circuit.by_key
    nets = {net.name: {(parts[key].ref, pin) for key, pin in net.pins if parts[key].on_board} for net in circuit.nets}
    return {name: pins for name, pins in nets.items() if pins}


def partition(nets: Nets) -> set[frozenset[tuple[str, str]]]:
    return {frozenset(pins) for pins in nets.values()}


@pytest.mark.parametrize("case", CASES)
def test_case_equals_kicad_10(case: str, shared: Path) -> None:
    (reference,) = (shared / "connectivity_cases").glob(f"*/{case}.10.net")
    circuit = read(reference.with_name(f"{case}.kicad_sch"))
    found, expected = ours(circuit), kicads(reference)
    if case in MOVED:
        assert expected == {"G": {("TA", "1"), ("TB", "1")}}
        assert found == {"G": {("TA", "1")}}
        assert not circuit.complete
        return
    if case in RANDOM_NAMES:
        assert partition(found) == partition(expected)
        assert {name for name in found if "U?" not in name} == {name for name in expected if "U?" not in name}
        return
    assert found == expected


def test_all_cases_are_here(shared: Path) -> None:
    # 109 scenarios, several of them in a file for each format version
    assert len(CASES) == len(list((shared / "connectivity_cases").glob("*/*.10.net"))) >= 109
