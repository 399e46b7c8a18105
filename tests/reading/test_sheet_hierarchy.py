"""Sheets below sheets: files found or not, cycles, repeated use, names, and what is inherited from above."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from sketch import ROOT, TP, label, part, save, schematic, sheet, wire

from analyzer import limits
from analyzer.circuit import Circuit
from analyzer.reading import read

CHILD = "00000000-0000-4000-8000-000000000002"


def nets(circuit: Circuit) -> dict[str, set[str]]:
    """Net name to its pins as "REF.PAD"."""
    parts = circuit.by_key
    return {net.name: {f"{parts[key].ref}.{pin}" for key, pin in net.pins} for net in circuit.nets}


def messages(circuit: Circuit, name: str) -> list[str]:
    return [finding.message for finding in circuit.findings if finding.name == name]


def test_sheet_used_twice_gives_two_parts_with_their_own_references(tmp_path: Path) -> None:
    inner = part("C1", "TP", (0, 0), path=f"/{ROOT}/one").replace(
        "(instances (project", f'(instances (project "p" (path "/{ROOT}/two" (reference "C2") (unit 1))) (project'
    )
    save(tmp_path, "child", schematic(inner, label("OUT", (0, 0), "hierarchical_label"), uuid=CHILD), None)
    root = schematic(
        sheet("a", "child.kicad_sch", ("OUT", (10, 10)), uuid="one"),
        sheet("b", "child.kicad_sch", ("OUT", (50, 10)), uuid="two"),
        part("TP1", "TP", (10, 10)),
        part("TP2", "TP", (50, 10)),
    )
    circuit = read(save(tmp_path, "p", root))
    assert nets(circuit) == {"/a/OUT": {"C1.1", "TP1.1"}, "/b/OUT": {"C2.1", "TP2.1"}}
    assert {part.key: (part.ref, part.place.sheet) for part in circuit.components} == {
        "/one/C1": ("C1", "/a/"),
        "/two/C1": ("C2", "/b/"),
        "/TP1": ("TP1", "/"),
        "/TP2": ("TP2", "/"),
    }
    assert [file.path for file in circuit.inputs] == ["child.kicad_sch", "p.kicad_pro", "p.kicad_sch"]


def test_missing_sheet_is_reported_and_the_circuit_incomplete(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", schematic(sheet("psu", "psu.kicad_sch"), part("TP1", "TP", (0, 0)))))
    assert not circuit.complete
    (finding,) = [each for each in circuit.findings if each.name == "sheet-missing"]
    assert finding.message == "sheet file 'psu.kicad_sch' does not exist (tried psu.kicad_sch)"
    assert finding.where == "p.kicad_sch sheet / at (200, 200) mm"
    assert finding.weight == "open"
    assert "TP1" in circuit.by_ref


def test_missing_sheet_whose_name_differs_in_case_gets_a_hint(tmp_path: Path) -> None:
    save(tmp_path, "Psu", schematic(uuid=CHILD), None)
    circuit = read(save(tmp_path, "p", schematic(sheet("psu", "psu.kicad_sch"))))
    assert "there is 'Psu.kicad_sch': upper and lower case differ" in messages(circuit, "sheet-missing")[0]


def test_variables_in_sheet_files_are_not_expanded_as_in_kicad(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", schematic(sheet("psu", "${KIPRJMOD}/psu.kicad_sch"))))
    assert "KiCad does not expand variables in sheet file names" in messages(circuit, "sheet-missing")[0]


def test_backslashes_in_sheet_files_are_accepted(tmp_path: Path) -> None:
    save(tmp_path / "sub", "c", schematic(part("TP9", "TP", (0, 0), path=f"/{ROOT}/s"), uuid=CHILD), None)
    circuit = read(save(tmp_path, "p", schematic(sheet("s", "sub\\\\c.kicad_sch"))))
    assert [each.ref for each in circuit.components] == ["TP9"]
    assert circuit.complete


def test_sheet_files_are_relative_to_their_parent_sheet(tmp_path: Path) -> None:
    save(tmp_path / "sub", "b", schematic(part("TP9", "TP", (0, 0), path=f"/{ROOT}/s/t"), uuid=CHILD), None)
    save(tmp_path / "sub", "a", schematic(sheet("t", "b.kicad_sch"), uuid=CHILD), None)
    circuit = read(save(tmp_path, "p", schematic(sheet("s", "sub/a.kicad_sch"))))
    assert [(each.ref, each.place.sheet, each.place.file) for each in circuit.components] == [
        ("TP9", "/s/t/", "sub/b.kicad_sch")
    ]


def test_cycle_is_named_and_cut(tmp_path: Path) -> None:
    save(tmp_path, "a", schematic(sheet("b", "b.kicad_sch"), part("TP1", "TP", (0, 0)), uuid=CHILD), None)
    save(tmp_path, "b", schematic(sheet("a", "a.kicad_sch"), uuid=CHILD), None)
    circuit = read(save(tmp_path, "p", schematic(sheet("a", "a.kicad_sch"))))
    assert messages(circuit, "sheet-cycle") == ["sheet cycle: a.kicad_sch -> b.kicad_sch -> a.kicad_sch"]
    assert not circuit.complete
    assert len(circuit.components) == 1


def test_sheet_that_contains_itself(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", schematic(sheet("me", "./p.kicad_sch"), part("TP1", "TP", (0, 0)))))
    assert messages(circuit, "sheet-cycle") == ["sheet cycle: p.kicad_sch -> p.kicad_sch"]
    assert len(circuit.components) == 1


def test_doubling_hierarchy_stops_at_the_limit(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, "SHEET_INSTANCES", 100)
    for level in range(30):
        below = f"l{level + 1}.kicad_sch"
        save(tmp_path, f"l{level}", schematic(sheet("x", below), sheet("y", below), uuid=f"u{level}"), None)
    save(tmp_path, "l30", schematic(part("TP1", "TP", (0, 0)), uuid="u30"), None)
    circuit = read(tmp_path / "l0.kicad_sch")
    assert messages(circuit, "limit-reached") == ["more than 100 sheet instances or 64 levels of sheets"]
    assert not circuit.complete


def test_depth_limit(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, "SHEET_DEPTH", 5)
    for level in range(8):
        save(tmp_path, f"l{level}", schematic(sheet("x", f"l{level + 1}.kicad_sch"), uuid=f"u{level}"), None)
    circuit = read(tmp_path / "l0.kicad_sch")
    assert len(messages(circuit, "limit-reached")) == 1


def test_damaged_sheet_below_is_a_finding_with_its_place(tmp_path: Path) -> None:
    save(tmp_path, "c", "(kicad_sch (version 20250114)\n(symbol", None)
    circuit = read(save(tmp_path, "p", schematic(sheet("s", "c.kicad_sch"), part("TP1", "TP", (0, 0)))))
    assert messages(circuit, "sheet-unreadable") == [
        "c.kicad_sch could not be read: the file ends inside (symbol ... opened at line 2"
    ]
    assert not circuit.complete


def test_sheets_outside_the_project_are_opened_only_if_allowed(tmp_path: Path) -> None:
    save(tmp_path / "other", "c", schematic(part("TP9", "TP", (0, 0), path=f"/{ROOT}/s"), uuid=CHILD), None)
    path = save(tmp_path / "p", "p", schematic(sheet("s", "../other/c.kicad_sch")))
    refused = read(path)
    assert messages(refused, "sheet-outside") == [
        "sheet file '../other/c.kicad_sch' lies outside the project folder and was not opened"
    ]
    assert not refused.complete
    assert refused.components == ()
    assert "--allow-outside" in refused.findings[0].remedy
    allowed = read(path, allow_outside=True)
    assert [each.ref for each in allowed.components] == ["TP9"]
    assert allowed.complete


def test_symbolic_link_out_of_the_project_is_outside(tmp_path: Path) -> None:
    outer = save(tmp_path / "other", "c", schematic(uuid=CHILD), None)
    path = save(tmp_path / "p", "p", schematic(sheet("s", "c.kicad_sch")))
    (tmp_path / "p" / "c.kicad_sch").symlink_to(outer)
    assert len(messages(read(path), "sheet-outside")) == 1


def test_project_named_by_a_symbolic_link_is_read(tmp_path: Path) -> None:
    real = save(tmp_path / "real", "p", schematic(part("TP1", "TP", (0, 0))))
    (tmp_path / "link").mkdir()
    (tmp_path / "link" / "p.kicad_sch").symlink_to(real)
    assert len(read(tmp_path / "link" / "p.kicad_sch").components) == 1


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="the platform has no FIFOs")
def test_sheet_that_is_a_fifo_is_not_waited_for(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "c.kicad_sch")
    circuit = read(save(tmp_path, "p", schematic(sheet("s", "c.kicad_sch"))))
    assert messages(circuit, "sheet-unreadable") == ["c.kicad_sch could not be read: not a regular file"]


def test_flags_of_a_sheet_hold_for_everything_below(tmp_path: Path) -> None:
    path = f"/{ROOT}/s"
    save(tmp_path, "d", schematic(part("TP8", "TP", (0, 0), path=f"{path}/d"), uuid="d"), None)
    save(tmp_path, "c", schematic(part("TP9", "TP", (0, 0), path=path), sheet("d", "d.kicad_sch"), uuid=CHILD), None)
    marks = "(exclude_from_sim no) (in_bom no) (on_board yes) (dnp yes)"
    circuit = read(save(tmp_path, "p", schematic(sheet("s", "c.kicad_sch", more=marks), part("TP1", "TP", (0, 0)))))
    assert {each.ref: (each.fitted, each.in_bom, each.on_board) for each in circuit.components} == {
        "TP1": (True, True, True),
        "TP8": (False, False, True),
        "TP9": (False, False, True),
    }


def test_two_sheets_of_one_name_short_their_nets_and_are_reported(tmp_path: Path) -> None:
    inner = part("C1", "TP", (0, 0), path=f"/{ROOT}/one").replace(
        "(instances (project", f'(instances (project "p" (path "/{ROOT}/two" (reference "C2") (unit 1))) (project'
    )
    save(tmp_path, "c", schematic(inner, label("LOC", (0, 0)), uuid=CHILD), None)
    root = schematic(sheet("s", "c.kicad_sch", uuid="one"), sheet("s", "c.kicad_sch", uuid="two"))
    circuit = read(save(tmp_path, "p", root))
    # KiCad's own netlist has one net /s/LOC too
    assert nets(circuit) == {"/s/LOC": {"C1.1", "C2.1"}}
    assert messages(circuit, "sheet-name-twice") == [
        "two sheets on / are named 's'; KiCad joins their equally named nets"
    ]


def test_sheet_pin_without_label_label_without_pin_and_doubled_pin_are_reported(tmp_path: Path) -> None:
    save(
        tmp_path, "c", schematic(label("IN", (0, 0), "hierarchical_label"), part("TP9", "TP", (0, 0)), uuid=CHILD), None
    )
    root = schematic(sheet("s", "c.kicad_sch", ("OUT", (10, 10)), ("OUT", (10, 20))))
    assert messages(read(save(tmp_path, "p", root)), "sheet-pin-loose") == [
        "sheet 's' has 2 pins named 'OUT'",
        "sheet pin 'OUT' of 's' has no hierarchical label on its sheet",
        "hierarchical label 'IN' of sheet 's' has no sheet pin",
    ]


def test_french_sheet_fields_are_known_by_their_place(tmp_path: Path) -> None:
    inner = part("TP9", "TP", (0, 0), path=f"/{ROOT}/s")
    save(tmp_path, "c", schematic(inner, label("N", (0, 0)), uuid=CHILD), None)
    symbol = sheet("s", "c.kicad_sch").replace("Sheetname", "Nom feuille").replace("Sheetfile", "Fichier de feuille")
    assert nets(read(save(tmp_path, "p", schematic(symbol)))) == {"/s/N": {"TP9.1"}}


def test_slash_in_a_sheet_name_does_not_look_like_a_level(tmp_path: Path) -> None:
    inner = part("TP9", "TP", (0, 0), path=f"/{ROOT}/s")
    save(tmp_path, "c", schematic(inner, label("A/B", (0, 0)), uuid=CHILD), None)
    symbol = sheet("DC/DC ", "c.kicad_sch", uuid="s")
    assert nets(read(save(tmp_path, "p", schematic(symbol)))) == {"/DC{slash}DC/A{slash}B": {"TP9.1"}}


def test_several_top_level_sheets(tmp_path: Path) -> None:
    project = """{"schematic": {"top_level_sheets": [
        {"filename": "p.kicad_sch", "name": "A", "uuid": "x"},
        {"filename": "q.kicad_sch", "name": "B", "uuid": "y"}]}}"""
    other = schematic(
        part("TP2", "TP", (0, 0), path="/q"),
        part("TP3", "TP", (9, 0), path="/q"),
        label("G", (0, 0), "global_label"),
        label("L", (9, 0)),
        uuid="q",
    )
    save(tmp_path, "q", other, None)
    root = schematic(
        part("TP1", "TP", (0, 0)), part("TP4", "TP", (9, 0)), label("G", (0, 0), "global_label"), label("L", (9, 0))
    )
    circuit = read(save(tmp_path, "p", root, project))
    assert nets(circuit) == {"G": {"TP1.1", "TP2.1"}, "/A/L": {"TP4.1"}, "/B/L": {"TP3.1"}}
    assert circuit.by_ref["TP2"][0].key == "/q/TP2"


def test_missing_further_top_level_sheet_is_reported(tmp_path: Path) -> None:
    project = """{"schematic": {"top_level_sheets": [
        {"filename": "p.kicad_sch", "name": "A"}, {"filename": "q.kicad_sch", "name": "B"}]}}"""
    circuit = read(save(tmp_path, "p", schematic(part("TP1", "TP", (0, 0)), wire((0, 0), (5, 0))), project))
    assert len(messages(circuit, "sheet-missing")) == 1
    assert not circuit.complete


def test_old_files_take_references_from_the_root_file(tmp_path: Path) -> None:
    # format 20211123: no instances in symbols, a table of uuid paths in the root file
    bare = part("R?", "TP", (0, 0), uuid="sym", value="X").partition(" (instances")[0] + ")"
    save(tmp_path, "c", schematic(bare, version=20211123, uuid=CHILD), None)
    table = (
        '(symbol_instances (path "/one/sym" (reference "R1") (unit 1) (value "1k") (footprint "F1"))'
        ' (path "/two/sym" (reference "R2") (unit 1) (value "2k") (footprint "F2")))'
    )
    root = schematic(
        sheet("a", "c.kicad_sch", uuid="one"), sheet("b", "c.kicad_sch", uuid="two"), table, version=20211123
    )
    circuit = read(save(tmp_path, "p", root))
    assert [(each.ref, each.value, each.footprint) for each in circuit.components] == [
        ("R1", "1k", "F1"),
        ("R2", "2k", "F2"),
    ]


@pytest.mark.parametrize(
    ("uses", "expected"),
    [
        ([("p", f"/{ROOT}", "R1"), ("other", f"/{ROOT}", "R2")], "R1"),
        ([("other", f"/{ROOT}", "R2"), ("p", f"/{ROOT}", "R1")], "R1"),
        ([("other", f"/{ROOT}", "R2"), ("third", f"/{ROOT}", "R3")], "R2"),
        ([("other", "/elsewhere", "R8"), ("third", "/nowhere", "R9")], "R8"),
        ([("other", "/elsewhere", "R8"), ("third", f"/{ROOT}", "R3")], "R3"),
        ([("p", f"/{ROOT}/stale", "R7"), ("p", f"/{ROOT}", "R1")], "R1"),
        ([], "R5"),
    ],
)
def test_reference_is_that_of_this_project_and_path(
    tmp_path: Path, uses: list[tuple[str, str, str]], expected: str
) -> None:
    drawn = " ".join(f'(project "{name}" (path "{path}" (reference "{ref}") (unit 1)))' for name, path, ref in uses)
    symbol = part("R5", "TP", (0, 0)).partition(" (instances")[0] + (f" (instances {drawn}))" if uses else ")")
    assert [each.ref for each in read(save(tmp_path, "p", schematic(symbol, libs=(TP,)))).components] == [expected]


def loose_pin_board(folder: Path, *labels: str, pins: int = 1) -> Circuit:
    """A parent with TP1 under `labels`, and sheet pins named VCC that are wired to nothing; TP2 is inside."""
    for number in range(pins):
        inner = part(f"TP{number + 2}", "TP", (0, 0), path=f"/{ROOT}/s{number}")
        save(folder, f"c{number}", schematic(inner, label("VCC", (0, 0), "hierarchical_label"), uuid=CHILD), None)
    sheets = [sheet(f"s{n}", f"c{n}.kicad_sch", ("VCC", (50 * n + 50, 50))) for n in range(pins)]
    return read(save(folder, "p", schematic(*sheets, part("TP1", "TP", (0, 0)), *labels)))


@pytest.mark.parametrize("kind", ["label", "global_label"])
def test_loose_sheet_pin_does_not_join_the_label_of_its_name(tmp_path: Path, kind: str) -> None:
    circuit = loose_pin_board(tmp_path, label("VCC", (0, 0), kind))
    name = "/VCC" if kind == "label" else "VCC"
    assert nets(circuit) == {name: {"TP1.1"}, "/s0/VCC": {"TP2.1"}}


def test_loose_sheet_pin_joins_the_net_on_which_its_name_comes_second(tmp_path: Path) -> None:
    # as KiCad 9 does, measured
    circuit = loose_pin_board(tmp_path, label("VCC", (0, 0)), label("A", (0, 0)))
    assert nets(circuit) == {"/A": {"TP1.1", "TP2.1"}}
    assert messages(circuit, "sheet-pin-loose") == [
        "sheet pin 'VCC' is not wired to the net that also bears its name; KiCad joins them"
    ]


def test_several_loose_sheet_pins_of_that_name_stay_apart_and_are_reported(tmp_path: Path) -> None:
    circuit = loose_pin_board(tmp_path, label("VCC", (0, 0)), label("A", (0, 0)), pins=2)
    assert nets(circuit) == {"/A": {"TP1.1"}, "/s0/VCC": {"TP2.1"}, "/s1/VCC": {"TP3.1"}}
    assert messages(circuit, "sheet-pin-loose") == [
        "2 sheet pins 'VCC' are not wired to the net of that name; KiCad joins one of them"
    ]


def test_equal_names_of_unrelated_sheet_pins_are_told_apart(tmp_path: Path) -> None:
    save(tmp_path, "c", schematic(uuid=CHILD), None)
    root = schematic(
        sheet("a", "c.kicad_sch", ("N", (50, 50))),
        sheet("b", "c.kicad_sch", ("N", (90, 50)), uuid="b"),
        part("TP1", "TP", (50, 50)),
        part("TP2", "TP", (90, 50)),
    )
    assert nets(read(save(tmp_path, "p", root))) == {"/N": {"TP1.1"}, "/N_1": {"TP2.1"}}


def test_net_with_two_names_that_hold_everywhere_is_reported(tmp_path: Path) -> None:
    items = [part("TP1", "TP", (0, 0)), label("VBUS", (0, 0), "global_label"), label("+5V", (0, 0), "global_label")]
    circuit = read(save(tmp_path, "p", schematic(*items)))
    assert nets(circuit) == {"+5V": {"TP1.1"}}
    assert messages(circuit, "net-with-several-names") == ["net +5V bears several names: +5V, VBUS"]


def test_sheet_path_that_is_no_path(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", schematic(sheet("s", "a\\u0000b.kicad_sch".replace("\\u0000", "\x7f" * 300)))))
    assert not circuit.complete
    assert circuit.findings[0].name in {"sheet-missing", "sheet-unreadable"}
