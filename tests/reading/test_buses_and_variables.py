"""Bus texts and their members, buses through sheets, and text variables."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from sketch import ROOT, TP, label, part, save, schematic, sheet, wire

from analyzer import limits
from analyzer.circuit import Circuit
from analyzer.reading import read
from analyzer.reading.buses import BusError, read_bus
from analyzer.reading.variables import VariableCycleError, put_in

CHILD = "00000000-0000-4000-8000-000000000002"
ALIASES = {"MEM": ("A[0..1]", "CK"), "ALL": ("MEM", "X")}


def nets(circuit: Circuit) -> dict[str, str]:
    parts = circuit.by_key
    return {net.name: " ".join(sorted(parts[key].ref for key, _ in net.pins)) for net in circuit.nets}


@pytest.mark.parametrize(
    ("text", "members"),
    [
        ("D[0..2]", "D0 D1 D2"),
        ("D[2..0]", "D0 D1 D2"),
        ("D[4..6]", "D4 D5 D6"),
        ("~{D[0..1]}", "~{D0} ~{D1}"),
        ("D[0..1]+", "D0+ D1+"),
        ("D[0..1]P", "D0P D1P"),
        ("USB{DP DM}", "USB.DP USB.DM"),
        ("USB{DP,DM}", "USB.DP USB.DM"),
        ("{DP DM}", "DP DM"),
        ("M{A[0..1] CK}", "M.A0 M.A1 M.CK"),
        ("{MEM}", "A0 A1 CK"),
        ("P{MEM}", "P.A0 P.A1 P.CK"),
        ("{ALL}", "A0 A1 CK X"),
        ("U{~{CS} SCK}", "U.~{CS} U.SCK"),
        ("D[3..3]", None),
        ("D[0-1]", None),
        ("D[0..1]_P", None),
        ("D A[0..1]", None),
        ("G{H{A B} C}", None),
        ("MEM", None),
        ("~{RESET}", None),
        ("V_{IN}", None),
        ("${VAR}", None),
        ("VCC", None),
        ("", None),
        ("A}", None),
    ],
)
def test_bus_text(text: str, members: str | None) -> None:
    bus = read_bus(text, ALIASES)
    assert (None if bus is None else " ".join(bus.members)) == members


@pytest.mark.parametrize(
    ("text", "aliases", "message"),
    [
        ("D[0..999999999]", {}, "bus 'D[0..999999999]' has 1000000000 members; at most 4096 are read"),
        ("{A[0..4000] B[0..4000]}", {}, "a bus has more than 4096 members"),
        ("{LOOP}", {"LOOP": ("X", "LOOP")}, "bus alias 'LOOP' contains itself"),
        ("{A}", {"A": ("B",), "B": ("A",)}, "bus alias 'A' contains itself"),
    ],
)
def test_bus_that_cannot_be_expanded(text: str, aliases: dict[str, tuple[str, ...]], message: str) -> None:
    with pytest.raises(BusError, match=message.replace("[", r"\[").replace(".", r"\.")):
        read_bus(text, aliases)


def test_aliases_that_multiply_end_quickly() -> None:
    aliases = {f"L{n}": (f"L{n + 1}", f"L{n + 1}") for n in range(40)}
    start = time.perf_counter()
    with pytest.raises(BusError):
        read_bus("{L0}", aliases)
    assert time.perf_counter() - start < 1


def test_bus_limit_in_a_drawing_makes_it_incomplete(tmp_path: Path) -> None:
    circuit = read(
        save(
            tmp_path,
            "p",
            schematic(label("D[0..99999]", (0, 0)), wire((0, 0), (9, 0), "bus"), part("TP1", "TP", (5, 5))),
        )
    )
    assert [finding.name for finding in circuit.findings] == ["bus-not-understood"]
    assert not circuit.complete


def bus_board(folder: Path, outside: str | None, pin: str, inside: str, inner: list[str], outer: list[str]) -> Circuit:
    """A sheet with a bus pin; test points C0, C1... inside and P0, P1... outside, each on a label."""
    path = f"/{ROOT}/sub"
    drawn = [label(inside, (0, 0), "hierarchical_label"), wire((0, 0), (30, 0), "bus")]
    for number, text in enumerate(inner):
        drawn += [part(f"C{number}", "TP", (0, 50 + 10 * number), path=path), label(text, (0, 50 + 10 * number))]
    save(folder, "c", schematic(*drawn, uuid=CHILD), None)
    root = [sheet("sub", "c.kicad_sch", (pin, (100, 0))), wire((100, 0), (150, 0), "bus")]
    if outside is not None:
        root.append(label(outside, (120, 0)))
    for number, text in enumerate(outer):
        root += [part(f"P{number}", "TP", (0, 50 + 10 * number)), label(text, (0, 50 + 10 * number))]
    return read(save(folder, "p", schematic(*root)))


@pytest.mark.parametrize(
    ("outside", "pin", "inside", "inner", "outer", "expected"),
    [
        # vectors join by index, whatever their names, directions and lengths
        ("X[0..1]", "D[0..1]", "D[0..1]", ["D0", "D1"], ["X0", "X1"], {"/X0": "C0 P0", "/X1": "C1 P1"}),
        ("X[2..0]", "D[0..2]", "D[0..2]", ["D0", "D2"], ["X0", "X2"], {"/X0": "C0 P0", "/X2": "C1 P1"}),
        ("X[4..5]", "D[0..1]", "D[0..1]", ["D0", "D1"], ["X4", "X5"], {"/X4": "C0 P0", "/X5": "C1 P1"}),
        ("X[0..1]", "D[0..2]", "D[0..2]", ["D1", "D2"], ["X1"], {"/X1": "C0 P0", "/sub/D2": "C1"}),
        (None, "D[0..1]", "D[0..1]", ["D0", "D1"], ["D0"], {"/sub/D0": "C0 P0", "/sub/D1": "C1"}),
        # groups join by member, whatever the order
        ("V{DM DP}", "U{DP DM}", "U{DP DM}", ["U.DP", "U.DM"], ["V.DP", "V.DM"], {"/V.DP": "C0 P0", "/V.DM": "C1 P1"}),
        ("{DP DM}", "{DP DM}", "{DP DM}", ["DP", "DM"], ["DP", "DM"], {"/DP": "C0 P0", "/DM": "C1 P1"}),
        # another text on pin and label: not the same bus
        (None, "D[0..1]", "E[0..1]", ["E0"], ["D0"], {"/sub/E0": "C0", "/D0": "P0"}),
    ],
)
def test_bus_through_a_sheet_pin(
    tmp_path: Path,
    outside: str | None,
    pin: str,
    inside: str,
    inner: list[str],
    outer: list[str],
    expected: dict[str, str],
) -> None:
    assert nets(bus_board(tmp_path, outside, pin, inside, inner, outer)) == expected


def test_two_labels_on_one_bus_join_their_members(tmp_path: Path) -> None:
    circuit = read(
        save(
            tmp_path,
            "p",
            schematic(
                wire((0, 0), (50, 0), "bus"),
                label("X[0..1]", (10, 0)),
                label("Y[5..6]", (20, 0)),
                part("TP1", "TP", (0, 50)),
                label("X1", (0, 50)),
                part("TP2", "TP", (0, 60)),
                label("Y6", (0, 60)),
            ),
        )
    )
    assert nets(circuit) == {"/X1": "TP1 TP2"}


def test_wire_laid_on_a_bus_does_not_join(tmp_path: Path) -> None:
    items = [
        wire((0, 0), (50, 0), "bus"),
        wire((20, 0), (20, 20)),
        part("TP1", "TP", (20, 20)),
        label("D[0..1]", (0, 0)),
    ]
    items += [part("TP2", "TP", (90, 90)), label("D0", (90, 90))]
    assert nets(read(save(tmp_path, "p", schematic(*items)))) == {"unconnected-(TP1-Pad1)": "TP1", "/D0": "TP2"}


@pytest.mark.parametrize("home", ["sheet", "project"])
def test_alias_of_any_file_counts_everywhere(tmp_path: Path, home: str) -> None:
    alias = '(bus_alias "MEM" (members "A0" "CK"))' if home == "sheet" else ""
    project = '{"schematic": {"bus_aliases": {"MEM": ["A0", "CK"]}}}' if home == "project" else "{}"
    inner = [
        part("C0", "TP", (0, 50), path=f"/{ROOT}/sub"),
        label("A0", (0, 50)),
        label("{MEM}", (0, 0), "hierarchical_label"),
    ]
    save(tmp_path, "c", schematic(*inner, uuid=CHILD), None)
    root = [sheet("sub", "c.kicad_sch", ("{MEM}", (100, 0))), alias, part("P0", "TP", (0, 50)), label("A0", (0, 50))]
    circuit = read(save(tmp_path, "p", schematic(*root), project))
    assert nets(circuit) == {"/sub/A0": "C0 P0"}
    assert circuit.complete


def test_alias_nobody_defines_is_reported(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", schematic(label("{MEM}", (0, 0)), wire((0, 0), (9, 0), "bus"))))
    assert [finding.message for finding in circuit.findings] == [
        "bus '{MEM}' has the single member 'MEM': an alias that is not defined?"
    ]
    assert not circuit.complete


@pytest.mark.parametrize(
    ("source", "expected"),
    [
        ("plain", "plain"),
        ("${A}", "1"),
        ("x${A}y${A}z", "x1y1z"),
        ("${NEST}", "1_2"),
        ("${UNKNOWN} ${A}", "${UNKNOWN} 1"),
        ("@{1+2}", "3"),
        ("@{${A} + 2*3}", "7"),
        ("@{-(1.5)}", "-1.5"),
        ("@{1/0}", "@{1/0}"),
        ("@{__import__('os')}", "@{__import__('os')}"),
        ("@{9**9**9}", "@{9**9**9}"),
        ("@{" + "(" * 500 + "}", "@{" + "(" * 500 + "}"),
    ],
)
def test_putting_variables_in(source: str, expected: str) -> None:
    values = {"A": "1", "B": "2", "NEST": "${A}_${B}"}
    assert put_in(source, values.get) == expected


@pytest.mark.parametrize(
    "values",
    [
        {"A": "${A}"},
        {"A": "${B}", "B": "${A}"},
        {f"{chr(65 + n)}": f"${{{chr(66 + n)}}}" for n in range(20)},
        {**{f"{chr(65 + n)}": f"${{{chr(66 + n)}}}" * 50 for n in range(5)}, "F": "x"},
    ],
)
def test_variables_in_circles_or_beyond_the_limits(values: dict[str, str]) -> None:
    start = time.perf_counter()
    with pytest.raises(VariableCycleError):
        put_in("${A}", values.get)
    assert time.perf_counter() - start < 1


def test_variable_limits_are_those_stated() -> None:
    assert limits.VARIABLE_DEPTH == 16
    chain = {f"V{n}": f"${{V{n + 1}}}" for n in range(15)} | {"V15": "end"}
    assert put_in("${V0}", chain.get) == "end"


def test_variables_of_project_sheet_symbol_and_other_parts(tmp_path: Path) -> None:
    project = '{"text_variables": {"RAIL": "+3V3", "AUX": "${RAIL}_AUX"}}'
    path = f"/{ROOT}/s"
    fields = {"Note": "${VALUE}/${Reference}/${SHEETNAME}/${R9:Value}/${CH}/${NOPE}", "MPN": "R-${VALUE}"}
    inner = part("R1", "TP", (0, 0), value="10k", fields=fields, path=path)
    save(tmp_path, "c", schematic(inner, label("${AUX}_${CH}", (0, 0)), uuid=CHILD), None)
    symbol = sheet("s", "c.kicad_sch").replace(
        '(property "Sheetfile"', '(property "CH" "7" (at 0 0 0)) (property "Sheetfile"'
    )
    title = '(title_block (title "Demo") (rev "B"))'
    notes = '(text "rail ${RAIL} of ${TITLE} ${REVISION}" (at 5 6 0)) (text_box "box" (at 7 8 0) (size 9 9))'
    root = schematic(symbol, title, notes, part("R9", "TP", (50, 50), value="1k"))
    circuit = read(save(tmp_path, "p", root, project))
    assert {net.name for net in circuit.nets} == {"/s/+3V3_AUX_7", "unconnected-(R9-Pad1)"}
    assert circuit.by_ref["R1"][0].fields["Note"] == "10k/R1/s/1k/7/${NOPE}"
    assert circuit.by_ref["R1"][0].fields["MPN"] == "R-10k"
    assert [(note.text, note.place.x_mm, note.place.y_mm) for note in circuit.notes] == [
        ("rail +3V3 of Demo B", 5, 6),
        ("box", 7, 8),
    ]


def test_power_symbol_with_a_variable_as_value(tmp_path: Path) -> None:
    from sketch import library, pin

    power = library("PWR", pin("1", "x", "power_in"), power="(power)", reference="#PWR")
    root = schematic(part("#PWR1", "PWR", (0, 0), value="${RAIL}"), part("TP1", "TP", (0, 0)), libs=(power, TP))
    circuit = read(save(tmp_path, "p", root, '{"text_variables": {"RAIL": "+3V3"}}'))
    assert [net.name for net in circuit.nets] == ["+3V3"]


def test_variables_in_a_circle_are_left_as_written_and_reported(tmp_path: Path) -> None:
    root = schematic(part("TP1", "TP", (0, 0)), label("${A}", (0, 0)))
    circuit = read(save(tmp_path, "p", root, '{"text_variables": {"A": "${B}", "B": "${A}"}}'))
    assert [net.name for net in circuit.nets] == ["/${A}"]
    assert [finding.name for finding in circuit.findings] == ["variable-cycle"]


def test_table_cells_are_notes(tmp_path: Path) -> None:
    table = '(table (column_count 1) (cells (table_cell "Display" (at 1 1 0)) (table_cell "40 mA" (at 2 1 0))))'
    assert [note.text for note in read(save(tmp_path, "p", schematic(table))).notes] == ["Display", "40 mA"]
