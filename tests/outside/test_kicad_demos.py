"""KiCad 6's demo projects (Debian's kicad-demos): the schematic against the pads of the board beside it.

KiCad's own 6.0 board files say which net each pad is on. Of 4,454 pads that are in both, all must share
their net with the same pads. Names are compared where a person gave them; automatic ones changed with KiCad 7.
"""

from __future__ import annotations

import re
from collections import defaultdict
from pathlib import Path

import pytest
from conftest import need

from analyzer.circuit import Circuit
from analyzer.reading import read
from analyzer.reading.sexpr import Node, every, first, parse, text

pytestmark = pytest.mark.outside

DEMOS = Path("/usr/share/kicad/demos")
PADS = {
    "complex_hierarchy": 164,
    "custom_pads_test": 6,
    "ecc83-pp": 33,
    "ecc83-pp_v2": 33,
    "flat_hierarchy": 238,
    "interf_u": 373,
    "kit-dev-coldfire-xilinx_5213": 803,
    "pic_programmer": 236,
    "sonde xilinx": 108,
    "StickHub": 266,
    "test_pads_inside_pads": 4,
    "carte_test": 259,
    "video": 1931,
}
AUTOMATIC = re.compile(r"(?:.*/)?(?:Net-\(|unconnected-\(|no_connect_)|$")

Pad = tuple[str, str]


def reference_of(footprint: Node) -> str:
    for key, word in (("property", "Reference"), ("fp_text", "reference")):
        for node in every(footprint, key):
            if node[1] == word:
                return text(node[2])
    return ""


def pads_of(board: Path) -> dict[Pad, str]:
    """(reference, pad) to net name of a KiCad 6 board; pads without net, number or reference left out."""
    tree = parse(board.read_bytes(), board.name, "kicad_pcb")
    pads: dict[Pad, str] = {}
    for footprint in every(tree, "footprint"):
        reference = reference_of(footprint)
        attributes = first(footprint, "attr") or []
        if reference in {"", "REF**"} or "board_only" in attributes:
            continue
        for pad in every(footprint, "pad"):
            number, net = text(pad[1]), first(pad, "net")
            if number:
                pads.setdefault((reference, number), text(net[2]) if net else "")
    return pads


def shared_nets(nets: dict[Pad, str], pads: set[Pad]) -> dict[Pad, frozenset[Pad]]:
    members: dict[str, set[Pad]] = defaultdict(set)
    for pad in pads:
        members[nets[pad] or f"none {pad}"].add(pad)
    return {pad: frozenset(members[nets[pad] or f"none {pad}"]) for pad in pads}


def nets_of(circuit: Circuit) -> dict[Pad, str]:
    return {(part.ref, pin.number): pin.net for part in circuit.components for pin in part.pins}


@pytest.mark.parametrize("name", PADS)
def test_demo_agrees_with_its_board(name: str) -> None:
    (board,) = need(DEMOS).rglob(f"{name}.kicad_pcb")
    circuit = read(board.with_suffix(".kicad_sch"))
    here, there = nets_of(circuit), pads_of(board)
    both = here.keys() & there.keys()
    assert len(both) == PADS[name]
    assert shared_nets(here, both) == shared_nets(there, both)
    slashed = {pad: net.replace("{slash}", "/") for pad, net in here.items()}
    wrong = {
        pad for pad in both if not AUTOMATIC.match(there[pad]) and slashed[pad] != there[pad].replace("{slash}", "/")
    }
    assert wrong == set()


def test_the_demos_have_4454_pads_in_both() -> None:
    assert sum(PADS.values()) == 4454
