"""Recognition on seven real boards against hand-made truth: nothing missed, no trap taken for a regulator."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from analyzer.part import Part
from analyzer.reading import read
from analyzer.recognise import load_rulebook, recognise
from analyzer.rule import Topology
from analyzer.settings import Settings

pytestmark = pytest.mark.boards

KINDS = {
    "ldo": {Topology.LINEAR},
    "ldo-adj": {Topology.LINEAR},
    "ldo DNP": {Topology.LINEAR},
    "buck": {Topology.BUCK},
    "buck module (integrated inductor)": {Topology.BUCK, Topology.MODULE},
    "isolated dc-dc module": {Topology.MODULE},
    "charger-linear": {Topology.CHARGER},
    "shunt reference": {Topology.SHUNT},
}
BOARDS = {
    "buspirate5-rev10a": 2,
    "castor-pollux": 2,
    "esp-rust-board": 2,
    "glasgow-revc": 4,
    "helium": 0,
    "kria-k26-devboard": 13,
    "latentred-lcbringup": 5,
}
BOOK = load_rulebook()


def recognised(shared: Path, board: str) -> dict[str, Part]:
    circuit = read(shared / "boards" / board / "project", settings=Settings())
    parts, _ = recognise(circuit, BOOK, Settings())
    return {part.ref: part for part in parts}


@pytest.mark.parametrize("board", BOARDS)
def test_every_regulator_and_nothing_else(shared: Path, board: str) -> None:
    truth = tomllib.loads((shared / "boards" / board / "truth.toml").read_text(encoding="utf-8"))
    rows = {row["ref"]: row for row in truth.get("regulator", ())}
    assert len(rows) == BOARDS[board]
    parts = recognised(shared, board)
    assert {ref for ref, part in parts.items() if part.topology.regulates} == set(rows)
    for ref, row in rows.items():
        assert parts[ref].topology in KINDS[row["kind"]], ref
        volts = parts[ref].channels[0].volts
        # a voltage read from a name must be the true one; elsewhere it is left to divider and settings
        # (a shunt element's is the voltage across it, whichever way round it is wired)
        true = abs(row["vout_v"]) if parts[ref].topology is Topology.SHUNT else row["vout_v"]
        assert volts is None or volts.span.nominal == pytest.approx(true, rel=0.01), ref


def test_passages_are_told_from_regulators(shared: Path) -> None:
    kria = recognised(shared, "kria-k26-devboard")
    assert {ref: part.topology for ref, part in kria.items() if not part.topology.regulates} == {
        "U6": Topology.POWER_MUX,
        "U16": Topology.LOAD_SWITCH,
        "U18": Topology.LOAD_SWITCH,
        "U56": Topology.IDEAL_DIODE,
        "U57": Topology.IDEAL_DIODE,
        "U58": Topology.IDEAL_DIODE,
    }
