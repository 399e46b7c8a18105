"""Seven real boards against what KiCad 10.0.7 exports from them: nets pin for pin, names, parts and fields."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from test_connectivity_cases import kicads, ours

from analyzer.circuit import Component
from analyzer.reading import read

pytestmark = pytest.mark.boards

# root sheet and number of parts as the README of the boards lists them
BOARDS = {
    "esp-rust-board": ("esp-rust-board", 55),
    "buspirate5-rev10a": ("REV10a", 220),
    "glasgow-revc": ("glasgow", 257),
    "castor-pollux": ("mainboard", 191),
    "kria-k26-devboard": ("kria-k26-devboard", 654),
    "latentred-lcbringup": ("lcbringup", 207),
    "helium": ("board", 64),
}
COPPER = {"esp-rust-board": 2, "buspirate5-rev10a": 4, "glasgow-revc": 4, "latentred-lcbringup": 4, "helium": 2}


def schematic(shared: Path, board: str) -> Path:
    return shared / "boards" / board / "project" / f"{BOARDS[board][0]}.kicad_sch"


@pytest.mark.parametrize("board", BOARDS)
def test_schematic_equals_kicad_10(board: str, shared: Path) -> None:
    circuit = read(schematic(shared, board))
    assert ours(circuit) == kicads(shared / "boards" / board / "kicad10.net")
    assert circuit.complete
    assert len(circuit.components) == len(circuit.by_key) == BOARDS[board][1]


@pytest.mark.parametrize("board", COPPER)
def test_copper_layers_equal_the_count_in_the_board_file(board: str, shared: Path) -> None:
    path = schematic(shared, board)
    layers = read(path).copper_layers
    assert layers is not None
    head = path.with_suffix(".kicad_pcb").read_text(encoding="utf-8")[:20_000]
    assert layers.span.nominal == COPPER[board] == len(re.findall(r'"(?:F|B|In\d+)\.Cu" (?:signal|power)', head))
    assert layers.grade == "derived"
    assert path.with_suffix(".kicad_pcb").name in layers.source


def of_part(part: Component) -> dict[str, object]:
    """What a netlist can hold of a part."""
    return {
        "value": part.value,
        "footprint": part.footprint,
        "description": part.description,
        "keywords": part.keywords,
        "fitted": part.fitted,
        "in_bom": part.in_bom,
        # KiCad 10 adds an empty Description to every part
        "fields": {name: text for name, text in part.fields.items() if name != "Description" or text},
        "pins": [(pin.number, pin.name, pin.kind, pin.net) for pin in part.pins],
        "sheet": part.place.sheet,
    }


# netlists name the copy of the library symbol kept in the file, schematics the symbol it was copied from
COPIED = {"J202": "TYPE-C-31-M-12_2", "SW1": "Tactile_Switch_1"}


@pytest.mark.parametrize("form", ["net", "xml"])
@pytest.mark.parametrize("board", BOARDS)
def test_netlist_gives_the_same_circuit_as_the_schematic(board: str, form: str, shared: Path) -> None:
    drawn = read(schematic(shared, board))
    listed = read(shared / "boards" / board / f"kicad10.{form}")
    assert ours(listed) == ours(drawn)
    assert {net.name: net.is_named for net in listed.nets} == {net.name: net.is_named for net in drawn.nets}
    assert listed.board == drawn.board
    assert [part.ref for part in listed.components] == [part.ref for part in drawn.components]
    for there, here in zip(listed.components, drawn.components, strict=True):
        expected = of_part(here)
        if here.place.sheet != there.place.sheet:
            # a part with units on several sheets: KiCad names another of them
            assert len({part.place.sheet for part in (here, there)}) == 2
            expected["sheet"] = there.place.sheet
        assert of_part(there) == expected, here.ref
        assert there.lib_id in {here.lib_id, COPIED.get(here.ref)}
    assert listed.cannot_contain
    assert [finding.name for finding in listed.findings] == ["netlist-only"]


@pytest.mark.parametrize("board", BOARDS)
def test_identity_of_a_part_with_one_symbol_survives_the_way_through_a_netlist(board: str, shared: Path) -> None:
    drawn = {part.ref: part for part in read(schematic(shared, board)).components}
    listed = {part.ref: part for part in read(shared / "boards" / board / "kicad10.net").components}
    several = {ref for ref in drawn if listed[ref].key != drawn[ref].key}
    # only parts of several units, whose list of uuids has no order of its own
    text = (shared / "boards" / board / "kicad10.net").read_text(encoding="utf-8")
    for ref in several:
        start = text.index(f'(ref "{ref}")')
        assert re.search(r'\(tstamps "[^)]*" "|\(name "[B-Z]"\)', text[start : text.index("(comp", start + 1)]), ref
