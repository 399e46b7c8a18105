"""The ledger from KiCad's exported netlists equals the ledger from the schematic, but for what such files cannot hold.

They hold no free texts (suggestions beside gaps), no positions, no sheets' own files (inputs, places in sources), no
copper layers and no typed library data beyond the description; they name a part's sheet, value, fields, pins and nets.
"""

from __future__ import annotations

import json
import re
import shutil
from pathlib import Path
from typing import Any

import pytest

from analyzer.audit import audit
from analyzer.output.ledger_json import as_document

pytestmark = pytest.mark.boards

BOARDS = (
    "buspirate5-rev10a",
    "castor-pollux",
    "esp-rust-board",
    "glasgow-revc",
    "helium",
    "kria-k26-devboard",
    "latentred-lcbringup",
)
SETTINGS = "[board]\nboard_class = '1s'\n"
"""States the class of board, for a netlist cannot tell the copper layers."""


def document(path: Path, settings: Path) -> dict[str, Any]:
    return json.loads(json.dumps(as_document(audit(path, settings_file=settings).ledger)))


def comparable(ledger: dict[str, Any]) -> dict[str, Any]:
    """What both kinds of input can know, in an order that does not depend on sources."""
    entries = {
        entry["ref"]: {
            key: entry[key]
            for key in (
                "part",
                "value",
                "kind",
                "fitted",
                "rule",
                "package",
                "input",
                "outputs",
                "dissipation_watts",
                "theta_k_per_w",
                "junction_celsius",
                "limit_celsius",
                "margin_kelvin",
                "headroom_amps",
                "greatest_load_amps",
                "verdict",
                "grade",
            )
        }
        for entry in ledger["entries"]
    }
    rails = {
        rail["name"]: {key: rail[key] for key in ("nets", "volts", "feeds", "known_amps", "complete")}
        for rail in ledger["rails"]
    }
    gaps = sorted((gap["ref"], gap["rail"], gap["value"]) for gap in ledger["gaps"])
    return {"entries": entries, "rails": rails, "gaps": gaps}


TEXTS_MATTER = {"latentred-lcbringup"}
"""Boards whose regulators' reference voltages stand in free texts only, which no netlist holds."""


def without_volts(ledger: dict[str, Any]) -> dict[str, Any]:
    """The ledger without the voltages that follow from free texts, and what is computed from them."""
    kept = ("part", "value", "kind", "fitted", "rule", "package", "verdict", "grade")
    return {
        "entries": {ref: {key: entry[key] for key in kept} for ref, entry in ledger["entries"].items()},
        "rails": {name: {key: rail[key] for key in ("nets", "feeds")} for name, rail in ledger["rails"].items()},
        "gaps": ledger["gaps"],
    }


def rounded(value: Any) -> Any:
    """Numbers to 12 digits: sums in another order differ in their last."""
    if isinstance(value, float):
        return float(f"{value:.12g}")
    if isinstance(value, dict):
        return {key: rounded(inner) for key, inner in value.items()}
    return [rounded(inner) for inner in value] if isinstance(value, list) else value


@pytest.mark.parametrize("ending", ["net", "xml"])
@pytest.mark.parametrize("board", BOARDS)
def test_both_inputs_give_the_same_ledger(shared: Path, tmp_path: Path, board: str, ending: str) -> None:
    settings = tmp_path / "heatledger.toml"
    settings.write_text(SETTINGS, encoding="utf-8")
    folder = shared / "boards" / board
    root = re.search(r'local_root = "(.+)"', (folder / "truth.toml").read_text(encoding="utf-8"))
    assert root is not None
    # a folder of its own, or the reader would prefer the schematic beside it
    alone = tmp_path / f"board.{ending}"
    shutil.copy(folder / f"kicad10.{ending}", alone)
    from_schematic = comparable(document(folder / root[1], settings))
    from_netlist = comparable(document(alone, settings))
    if board in TEXTS_MATTER:
        from_schematic, from_netlist = without_volts(from_schematic), without_volts(from_netlist)
    assert rounded(from_netlist) == rounded(from_schematic)
