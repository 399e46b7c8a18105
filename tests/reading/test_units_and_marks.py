"""Units become parts, references are never merged silently, marks and fields are read as KiCad means them."""

from __future__ import annotations

from pathlib import Path

import pytest
from sketch import TP, R, label, library, part, pin, save, schematic, wire

from analyzer.circuit import Circuit
from analyzer.errors import InputError
from analyzer.reading import read, variants
from analyzer.settings import Settings

DUAL = library(
    "D",
    units={
        "0_1": pin("8", "V+", at=(0, -20)),
        "1_1": pin("1", "OUT", at=(0, 0)) + pin("2", "IN", at=(5, 0)),
        "2_1": pin("7", "OUT", at=(0, 0)) + pin("6", "IN", at=(5, 0)),
        "3_1": pin("4", "V-", at=(0, 0)),
    },
)


def circuit_of(folder: Path, *items: str, libs: tuple[str, ...] = (TP, R, DUAL), version: int = 20250114) -> Circuit:
    return read(save(folder, "p", schematic(*items, libs=libs, version=version)))


def findings(circuit: Circuit) -> list[tuple[str, str]]:
    return [(finding.name, finding.message) for finding in circuit.findings]


def test_units_of_one_reference_are_one_part(tmp_path: Path) -> None:
    circuit = circuit_of(
        tmp_path,
        part("U1", "D", (100, 0), unit=2, uuid="second"),
        part("U1", "D", (50, 0), unit=1, uuid="first"),
        part("U1", "D", (150, 0), unit=3, uuid="third"),
        wire((50, 20), (150, 20)),
        wire((100, 20), (150, 20)),
    )
    (chip,) = circuit.components
    assert chip.key == "/first"
    assert (chip.place.x_mm, chip.place.y_mm) == (50, 0)
    assert [(each.number, each.name, each.net) for each in chip.pins] == [
        ("1", "OUT", "unconnected-(U1A-OUT-Pad1)"),
        ("2", "IN", "unconnected-(U1A-IN-Pad2)"),
        ("4", "V-", "unconnected-(U1C-V--Pad4)"),
        ("6", "IN", "unconnected-(U1B-IN-Pad6)"),
        ("7", "OUT", "unconnected-(U1B-OUT-Pad7)"),
        ("8", "V+", "Net-(U1A-V+)"),
    ]
    assert circuit.findings == ()


def test_unit_that_is_not_placed_is_noted(tmp_path: Path) -> None:
    circuit = circuit_of(
        tmp_path,
        part("U1", "D", (50, 0)),
        part("U1", "D", (100, 0), unit=3, uuid="c"),
        label("X", (50, 20)),
        label("X", (100, 20)),
    )
    assert findings(circuit) == [("unit-not-placed", "U1: unit 2 of 't:D' is not placed")]


def test_common_pin_on_two_nets_counts_on_both_and_is_reported(tmp_path: Path) -> None:
    circuit = circuit_of(
        tmp_path,
        part("U1", "D", (50, 0)),
        part("U1", "D", (100, 0), unit=2, uuid="b"),
        part("U1", "D", (150, 0), unit=3, uuid="c"),
        label("+5V", (50, 20)),
        label("+3V3", (100, 20)),
        label("+3V3", (150, 20)),
    )
    assert findings(circuit) == [("pad-on-two-nets", "U1.8 is on /+5V and /+3V3")]
    (chip,) = circuit.components
    supply = chip.pins[-1]
    assert (supply.number, supply.net, supply.more_nets) == ("8", "/+5V", ("/+3V3",))
    assert {net.name for net in circuit.nets if (chip.key, "8") in net.pins} == {"/+5V", "/+3V3"}


def test_two_symbols_of_one_reference_stay_two_parts(tmp_path: Path) -> None:
    circuit = circuit_of(tmp_path, part("R1", "R", (0, 0), uuid="a"), part("R1", "R", (50, 0), uuid="b"))
    assert [each.key for each in circuit.by_ref["R1"]] == ["/a", "/b"]
    assert findings(circuit) == [("reference-twice", "R1 is used by 2 symbols (sheet /, /)")]
    assert circuit.findings[0].weight == "open"


def test_one_unit_placed_twice_is_a_doubled_reference(tmp_path: Path) -> None:
    circuit = circuit_of(
        tmp_path,
        part("U1", "D", (0, 0), uuid="a"),
        part("U1", "D", (50, 0), uuid="b"),
        part("U1", "D", (90, 0), unit=2, uuid="c"),
    )
    assert [(each.key, [pad.number for pad in each.pins]) for each in circuit.components] == [
        ("/a", ["1", "2", "6", "7", "8"]),
        ("/b", ["1", "2", "8"]),
    ]
    assert "reference-twice" in dict(findings(circuit))


def test_symbols_of_different_kind_with_one_reference_stay_apart(tmp_path: Path) -> None:
    other = library("E", units={"1_1": pin("1", "A"), "2_1": pin("2", "B")})
    circuit = circuit_of(
        tmp_path, part("U1", "D", (0, 0), uuid="a"), part("U1", "E", (50, 0), unit=2, uuid="b"), libs=(DUAL, other)
    )
    assert len(circuit.components) == 2
    assert "reference-twice" in dict(findings(circuit))


@pytest.mark.parametrize("ref", ["U?", "U", ""])
def test_parts_without_number_are_kept_by_uuid_and_noted(tmp_path: Path, ref: str) -> None:
    circuit = circuit_of(tmp_path, part(ref, "R", (0, 0), uuid="a"), part(ref, "R", (50, 0), uuid="b"))
    assert [each.key for each in circuit.components] == ["/a", "/b"]
    assert findings(circuit) == [("not-annotated", f"'{ref}' has no number; kept as a part of its own")] * 2


def test_references_with_a_hash_are_no_parts_and_power_symbols_without_one_are(tmp_path: Path) -> None:
    power = library("V", pin("1", "V", "power_in"), power="(power)")
    circuit = circuit_of(
        tmp_path, part("#X1", "TP", (0, 0)), part("#PWR1", "V", (0, 0)), part("PWR2", "V", (9, 0)), libs=(TP, power)
    )
    assert [each.ref for each in circuit.components] == ["PWR2"]


def test_unknown_unit_makes_the_circuit_incomplete(tmp_path: Path) -> None:
    circuit = circuit_of(tmp_path, part("U1", "D", (0, 0), unit=7))
    assert not circuit.complete
    assert findings(circuit)[0] == ("unit-unknown", "U1: library symbol 't:D' has no unit 7")


@pytest.mark.parametrize(
    ("version", "token", "declared", "pad"),
    [
        (20211123, "(convert 2)", "", "2"),
        (20250114, "(convert 1)", "", "1"),
        (20260101, "(body_style 2)", "(body_styles demorgan)", "2"),
        (20260101, "(body_style 1)", "", "1"),
        (20260101, "(body_style 2)", "", None),
    ],
)
def test_body_style_chooses_the_pins(tmp_path: Path, version: int, token: str, declared: str, pad: str | None) -> None:
    lib = library("S", power=declared, units={"1_1": pin("1", "A"), "1_2": pin("2", "B")})
    circuit = circuit_of(tmp_path, part("U1", "S", (0, 0), more=token), libs=(lib,), version=version)
    assert [each.number for each in circuit.components[0].pins] == ([pad] if pad else [])
    assert circuit.complete is (pad is not None)


def test_library_name_of_a_changed_copy_beats_the_symbol_name(tmp_path: Path) -> None:
    copy = library("R_1", pin("A", "~"))
    circuit = circuit_of(tmp_path, part("R1", "R", (0, 0), more='(lib_name "t:R_1")'), libs=(R, copy))
    assert [each.number for each in circuit.components[0].pins] == ["A"]
    assert circuit.components[0].lib_id == "t:R"


def test_derived_library_symbol_has_its_parents_pins(tmp_path: Path) -> None:
    child = '(symbol "t:R_small" (extends "R") (property "Value" "R_small" (at 0 0 0)))'
    circuit = circuit_of(tmp_path, part("R1", "R_small", (0, 0)), libs=(R, child))
    assert [each.number for each in circuit.components[0].pins] == ["1", "2"]


@pytest.mark.parametrize(
    ("number", "pads"),
    [
        ("[1-3,5]", ["1", "2", "3", "5"]),
        ("[A1-A3]", ["A1", "A2", "A3"]),
        ("[4]", ["4"]),
        ("[7", ["[7"]),
        ("[9-6]", ["[9-6]"]),
        ("[A1-B3]", ["[A1-B3]"]),
        ("[1-99999]", ["[1-99999]"]),
        ("[]", ["[]"]),
    ],
)
def test_stacked_pads(tmp_path: Path, number: str, pads: list[str]) -> None:
    lib = library("S", pin(number, "GND"))
    circuit = circuit_of(tmp_path, part("U1", "S", (0, 0)), part("TP1", "TP", (0, 0)), libs=(lib, TP))
    assert [each.number for each in circuit.by_ref["U1"][0].pins] == pads
    assert [len(net.pins) for net in circuit.nets] == [len(pads) + 1]


def test_pads_without_number_are_left_out(tmp_path: Path) -> None:
    lib = library("S", pin("", "A"), pin("~", "B", at=(5, 0)), pin("1", "C", at=(9, 0)))
    circuit = circuit_of(tmp_path, part("U1", "S", (0, 0)), libs=(lib,))
    assert [each.number for each in circuit.components[0].pins] == ["1"]


@pytest.mark.parametrize(("version", "name"), [(20250114, ""), (20250318, "~")])
def test_tilde_is_no_name_in_older_files(tmp_path: Path, version: int, name: str) -> None:
    fields = {"Datasheet": "~"}
    circuit = circuit_of(tmp_path, part("R1", "R", (0, 0), fields=fields), version=version)
    assert {each.name for each in circuit.components[0].pins} == {name}
    assert circuit.components[0].fields["Datasheet"] == name


@pytest.mark.parametrize(
    ("lib", "joined"),
    [
        ('(jumper_pin_groups ("1" "2"))', [{"TP1", "TP2"}, {"TP3"}]),
        ('(jumper_pin_groups ("1" "2" "3"))', [{"TP1", "TP2", "TP3"}]),
        ("(duplicate_pin_numbers_are_jumpers yes)", [{"TP1"}, {"TP2"}, {"TP3"}]),
        ("", [{"TP1"}, {"TP2"}, {"TP3"}]),
    ],
)
def test_jumper_pins_join_their_nets(tmp_path: Path, lib: str, joined: list[set[str]]) -> None:
    jumper = library("J", pin("1", "A"), pin("2", "B", at=(5, 0)), pin("3", "C", at=(10, 0)), power=lib)
    taps = [part(f"TP{n}", "TP", (5 * (n - 1), 0)) for n in (1, 2, 3)]
    circuit = circuit_of(tmp_path, part("JP1", "J", (0, 0)), *taps, libs=(jumper, TP))
    found = [{circuit.by_key[key].ref for key, _ in net.pins} - {"JP1"} for net in circuit.nets]
    assert sorted(found, key=sorted) == joined


def test_pins_of_one_number_join_where_the_symbol_says_so(tmp_path: Path) -> None:
    jumper = library("J", pin("1", "A"), pin("1", "A", at=(5, 0)), power="(duplicate_pin_numbers_are_jumpers yes)")
    circuit = circuit_of(
        tmp_path, part("JP1", "J", (0, 0)), part("TP1", "TP", (0, 0)), part("TP2", "TP", (5, 0)), libs=(jumper, TP)
    )
    assert [len(net.pins) for net in circuit.nets] == [3]
    assert circuit.findings == ()


def test_alternate_function_of_a_pin_shows_but_does_not_name_the_net(tmp_path: Path) -> None:
    lib = library("M", pin("1", "PA0", "bidirectional", more='(alternate "RXD" input line)'))
    drawn = part("U1", "M", (0, 0), more='(pin "1" (uuid "x") (alternate "RXD"))')
    circuit = circuit_of(tmp_path, drawn, part("TP1", "TP", (0, 0)), libs=(lib, TP))
    (only,) = circuit.by_ref["U1"][0].pins
    assert (only.name, only.kind, only.net) == ("RXD", "input", "Net-(U1-PA0)")


@pytest.mark.parametrize(
    ("more", "marks"),
    [
        ("", (True, True, True)),
        ("(in_bom yes) (on_board yes) (dnp no)", (True, True, True)),
        ("(dnp yes)", (False, True, True)),
        ("(in_bom no)", (True, False, True)),
        ("(on_board no)", (True, True, False)),
    ],
)
def test_marks_of_a_symbol(tmp_path: Path, more: str, marks: tuple[bool, bool, bool]) -> None:
    (found,) = circuit_of(tmp_path, part("R1", "R", (0, 0), more=more)).components
    assert (found.fitted, found.in_bom, found.on_board) == marks


def test_fields_and_library_texts_of_a_part(tmp_path: Path) -> None:
    texts = '(property "ki_keywords" "R res" (at 0 0 0)) (property "ki_description" "A resistor" (at 0 0 0))'
    lib = R.replace('(property "Value"', f'{texts} (property "Value"')
    fields = {"Footprint": "R_0603", "MPN": "R-1", "I_load": "5mA"}
    (found,) = circuit_of(tmp_path, part("R1", "R", (0, 0), value="1k", fields=fields), libs=(lib,)).components
    assert (found.value, found.footprint, found.lib_id) == ("1k", "R_0603", "t:R")
    assert dict(found.fields) == {"MPN": "R-1", "I_load": "5mA"}
    assert (found.description, found.keywords) == ("A resistor", "R res")


def test_private_fields_are_read_by_their_name(tmp_path: Path) -> None:
    private = '(property private "Cost" "3" (at 0 0 0))'
    drawn = part("R1", "R", (0, 0)).replace('(property "Footprint"', f'{private} (property "Footprint"')
    assert circuit_of(tmp_path, drawn).components[0].fields["Cost"] == "3"


@pytest.mark.parametrize(
    ("fields", "value", "fitted"),
    [
        ({"CONFIG": "-ENV"}, "1k", False),
        ({"CONFIG": " -ENV "}, "1k", False),
        ({"CONFIG": "+ENV"}, "1k", True),
        ({}, "DNF", False),
        ({}, "DNF2", True),
    ],
)
def test_own_ways_of_saying_not_fitted(tmp_path: Path, fields: dict[str, str], value: str, fitted: bool) -> None:
    path = save(tmp_path, "p", schematic(part("R1", "R", (0, 0), value=value, fields=fields)))
    own = Settings(unfitted_fields={"CONFIG": ("-ENV", "DNP")}, unfitted_values=("DNF", "NC"))
    assert read(path, settings=own).components[0].fitted is fitted
    assert read(path).components[0].fitted is True


AREA = "(rule_area (in_bom {bom}) (on_board yes) (dnp {dnp}) (polyline (pts {points})))"
SQUARE = "(xy -5 -5) (xy 5 -5) (xy 5 5) (xy -5 5)"


@pytest.mark.parametrize(
    ("version", "area", "marks"),
    [
        (20260306, AREA.format(bom="yes", dnp="yes", points=SQUARE), {"R1": (False, True), "R2": (True, True)}),
        (20260306, AREA.format(bom="no", dnp="no", points=SQUARE), {"R1": (True, False), "R2": (True, True)}),
        # before 20250610 rule areas carried no marks
        (20250114, AREA.format(bom="no", dnp="yes", points=SQUARE), {"R1": (True, True), "R2": (True, True)}),
        # an area that only cuts through the symbol touches it; one beside it does not
        (
            20260306,
            AREA.format(bom="yes", dnp="yes", points="(xy -1 -9) (xy 1 -9) (xy 1 9) (xy -1 9)"),
            {"R1": (False, True), "R2": (True, True)},
        ),
        (
            20260306,
            AREA.format(bom="yes", dnp="yes", points="(xy 20 -9) (xy 22 -9) (xy 22 9)"),
            {"R1": (True, True), "R2": (True, True)},
        ),
    ],
)
def test_rule_area_marks_what_it_touches(
    tmp_path: Path, version: int, area: str, marks: dict[str, tuple[bool, bool]]
) -> None:
    circuit = circuit_of(tmp_path, part("R1", "R", (0, 0)), part("R2", "R", (50, 0)), area, version=version)
    assert {each.ref: (each.fitted, each.in_bom) for each in circuit.components} == marks


def variant_board(folder: Path, version: int) -> Path:
    return save(
        folder,
        "p",
        schematic(
            part("R1", "R", (0, 0), value="1k", variant='(variant (name "LOW") (dnp yes))'),
            part(
                "R2",
                "R",
                (20, 0),
                value="1k",
                variant='(variant (name "LOW") (field (name "Value") (value "10k"))'
                ' (field (name "I_load") (value "5mA")))',
            ),
            part("R3", "R", (40, 0), variant='(variant (name "LOW") (in_bom no))'),
            part("R4", "R", (60, 0), more="(dnp yes)", variant='(variant (name "LOW") (dnp no) (on_board no))'),
            part("R5", "R", (80, 0), variant='(variant (name "OTHER") (dnp yes))'),
            version=version,
        ),
        '{"schematic": {"variants": [{"name": "LOW", "description": "x"}, {"name": "OTHER"}]}}',
    )


@pytest.mark.parametrize(("version", "r3_in_bom"), [(20260306, False), (20260101, True)])
def test_design_variant(tmp_path: Path, version: int, r3_in_bom: bool) -> None:
    # before 20260306 KiCad wrote in_bom of variants the wrong way round
    path = variant_board(tmp_path, version)
    assert variants(path) == variants(tmp_path) == ("LOW", "OTHER")
    base = {each.ref: (each.value, each.fitted, each.in_bom, each.on_board) for each in read(path).components}
    low = {
        each.ref: (each.value, each.fitted, each.in_bom, each.on_board) for each in read(path, variant="LOW").components
    }
    assert base["R1"] == ("1k", True, True, True)
    assert low["R1"] == ("1k", False, True, True)
    assert low["R2"] == ("10k", True, True, True)
    assert low["R3"] == ("R", True, r3_in_bom, True)
    assert base["R4"] == ("R", False, True, True)
    assert low["R4"] == ("R", True, True, False)
    assert low["R5"] == base["R5"] == ("R", True, True, True)
    assert read(path, variant="LOW").by_ref["R2"][0].fields["I_load"] == "5mA"


def test_unknown_variant_is_an_error_with_the_near_spelling(tmp_path: Path) -> None:
    path = variant_board(tmp_path, 20260306)
    with pytest.raises(InputError, match=r"there is no design variant 'LOV'\. Did you mean 'LOW'"):
        read(path, variant="LOV")
    with pytest.raises(InputError, match="Defined: LOW, OTHER"):
        read(path, variant="")


BODY = (
    "(rectangle (start -9 -1) (end 9 1)) (circle (center 0 0) (radius 12))"
    " (polyline (pts (xy -1 -1) (xy 14 0))) (arc (start 0 0) (mid 1 1) (end 2 0))"
)


@pytest.mark.parametrize(
    ("points", "touched"),
    [
        # the symbol's body reaches 14 mm to the right and 12 mm up, down and to the left
        ("(xy 13 -1) (xy 20 -1) (xy 20 1) (xy 13 1)", True),
        ("(xy -20 -1) (xy -11 -1) (xy -11 1) (xy -20 1)", True),
        ("(xy -1 11) (xy 1 11) (xy 0 20)", True),
        ("(xy -1 13) (xy 1 13) (xy 0 20)", False),
        ("(xy 15 -1) (xy 20 -1) (xy 20 1)", False),
        # an area around everything
        ("(xy -99 -99) (xy 99 -99) (xy 99 99) (xy -99 99)", True),
        ("(xy 0 0) (xy 1 1)", False),
    ],
)
def test_rule_area_touches_the_body_of_a_symbol(tmp_path: Path, points: str, touched: bool) -> None:
    lib = library("B", units={"0_1": BODY, "1_1": pin("1", "A")})
    area = AREA.format(bom="yes", dnp="yes", points=points)
    circuit = circuit_of(tmp_path, part("U1", "B", (0, 0)), area, libs=(lib,), version=20260306)
    assert circuit.components[0].fitted is not touched
