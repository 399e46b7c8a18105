"""What joins and what does not, on one sheet. Expected nets follow KiCad's own behaviour, case by case."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sketch import TP, junction, label, library, no_connect, part, pin, save, schematic, wire

from analyzer.circuit import Circuit
from analyzer.reading import read
from analyzer.reading.geometry import turned


def circuit_of(folder: Path, *items: str, libs: tuple[str, ...] = (TP,), version: int = 20250114) -> Circuit:
    return read(save(folder, "p", schematic(*items, libs=libs, version=version)))


def nets(circuit: Circuit) -> dict[str, set[str]]:
    parts = circuit.by_key
    return {net.name: {f"{parts[key].ref}.{pad}" for key, pad in net.pins} for net in circuit.nets}


def groups(circuit: Circuit) -> list[str]:
    """The nets without their names."""
    return sorted(" ".join(sorted(pins)) for pins in nets(circuit).values())


def findings(circuit: Circuit) -> list[tuple[str, str]]:
    told = [(finding.name, finding.message) for finding in circuit.findings]
    return [each for each in told if each[0] != "not-annotated"]  # the test points bear letters


A, B, C = part("TPA", "TP", (0, 0)), part("TPB", "TP", (20, 0)), part("TPC", "TP", (10, 10))
APART = ["TPA.1", "TPB.1"]


@pytest.mark.parametrize(
    ("items", "expected"),
    [
        ((A, B, wire((0, 0), (20, 0))), ["TPA.1 TPB.1"]),
        ((A, B, wire((0, 0), (10, 0)), wire((10, 0), (20, 0))), ["TPA.1 TPB.1"]),
        ((A, part("TPB", "TP", (0, 0))), ["TPA.1 TPB.1"]),
        # a pin on the middle of a wire, and a wire's end on the middle of another, do not join
        ((A, C, wire((0, 0), (20, 0)), wire((10, 0), (10, 10))), ["TPA.1", "TPC.1"]),
        ((A, C, wire((0, 0), (20, 0)), wire((10, 0), (10, 10)), junction((10, 0))), ["TPA.1 TPC.1"]),
        ((A, part("TPB", "TP", (10, 0)), wire((0, 0), (20, 0))), APART),
        ((A, part("TPB", "TP", (10, 0)), wire((0, 0), (20, 0)), junction((10, 0))), ["TPA.1 TPB.1"]),
        # crossing wires join only at a junction
        ((A, C, wire((0, 0), (20, 0)), wire((10, -10), (10, 10))), ["TPA.1", "TPC.1"]),
        ((A, C, wire((0, 0), (20, 0)), wire((10, -10), (10, 10)), junction((10, 0))), ["TPA.1 TPC.1"]),
        # a label on the middle of a wire joins, also of two crossing wires, also of a slanted one
        ((A, B, wire((0, 0), (9, 0)), label("X", (5, 0)), label("X", (20, 0))), ["TPA.1 TPB.1"]),
        ((A, C, wire((0, 0), (20, 0)), wire((10, -10), (10, 10)), label("X", (10, 0))), ["TPA.1 TPC.1"]),
        ((A, B, wire((0, 0), (10, 10)), label("X", (5, 5)), label("X", (20, 0))), ["TPA.1 TPB.1"]),
        ((A, B, wire((0, 0), (10, 10)), label("X", (5, 6)), label("X", (20, 0))), APART),
        # capitals and blanks count
        ((A, B, label("vcc", (0, 0)), label("VCC", (20, 0))), APART),
        ((A, B, label("VCC ", (0, 0)), label("VCC", (20, 0))), APART),
        # 100 nm is KiCad's grid: 25.40004 is 25.4, 25.40006 is not
        ((A, part("TPB", "TP", (25.4, 0)), wire((0, 0), (25.40004, 0))), ["TPA.1 TPB.1"]),
        ((A, part("TPB", "TP", (25.4, 0)), wire((0, 0), (25.40006, 0))), APART),
        # a local label joins the global label and the hierarchical label of its text on the sheet
        ((A, B, label("X", (0, 0)), label("X", (20, 0), "global_label")), ["TPA.1 TPB.1"]),
        ((A, B, label("X", (0, 0)), label("X", (20, 0), "hierarchical_label")), ["TPA.1 TPB.1"]),
        ((A, B, label("A{slash}B", (0, 0)), label("A/B", (20, 0))), ["TPA.1 TPB.1"]),
    ],
)
def test_joins(tmp_path: Path, items: tuple[str, ...], expected: list[str]) -> None:
    assert groups(circuit_of(tmp_path, *items)) == expected


@pytest.mark.parametrize(
    ("items", "name"),
    [
        ((label("L", (0, 0)), label("G", (0, 0), "global_label"), label("H", (0, 0), "hierarchical_label")), "G"),
        ((label("B", (0, 0)), label("A", (0, 0)), label("AA", (0, 0), "hierarchical_label")), "/A"),
        ((label("H", (0, 0), "hierarchical_label"),), "/H"),
        ((label("A/B", (0, 0)),), "/A{slash}B"),
        ((label("", (0, 0)),), "/<NO NET>"),
        ((label("~{EN}", (0, 0)),), "/~{EN}"),
        ((), "Net-(TPA-Pad1)"),
    ],
)
def test_name_of_a_net(tmp_path: Path, items: tuple[str, ...], name: str) -> None:
    circuit = circuit_of(tmp_path, A, B, wire((0, 0), (20, 0)), *items)
    (net,) = circuit.nets
    assert net.name == name
    assert net.is_named is not name.startswith("Net-(")


def test_names_from_pins(tmp_path: Path) -> None:
    chip = library(
        "U",
        pin("1", "VOUT", at=(0, 0)),
        pin("2", "GND", at=(10, 0)),
        pin("3", "GND", at=(20, 0)),
        pin("4", "4", at=(30, 0)),
        pin("5", "A/B", at=(40, 0)),
        pin("6", "NC", "no_connect", at=(50, 0)),
        pin("7", "X", at=(60, 0)),
    )
    taps = [part(f"TP{x}", "TP", (x, 0)) for x in (0, 10, 20, 30, 40, 50, 60)]
    circuit = circuit_of(tmp_path, part("U1", "U", (0, 0)), *taps, no_connect((60, 0)), libs=(TP, chip))
    assert nets(circuit) == {
        "Net-(U1-VOUT)": {"U1.1", "TP0.1"},
        # a name two pins share gets the pad behind it, and then loses against none
        "Net-(TP10-Pad1)": {"U1.2", "TP10.1"},
        "Net-(TP20-Pad1)": {"U1.3", "TP20.1"},
        "Net-(TP30-Pad1)": {"U1.4", "TP30.1"},
        "Net-(U1-A{slash}B)": {"U1.5", "TP40.1"},
        # a pin of type no_connect is a net of its own, wired or not
        "unconnected-(U1-NC-Pad6)": {"U1.6"},
        "unconnected-(TP50-Pad1)": {"TP50.1"},
        "unconnected-(TP60-Pad1)": {"U1.7", "TP60.1"},
    }


def test_pins_of_flags_name_no_net_and_power_out_is_no_power_name(tmp_path: Path) -> None:
    flag = library("PWR_FLAG", pin("1", "pwr", "power_out"), power="(power)", reference="#FLG")
    circuit = circuit_of(
        tmp_path, A, part("#FLG01", "PWR_FLAG", (0, 0)), B, part("#FLG02", "PWR_FLAG", (20, 0)), libs=(TP, flag)
    )
    assert nets(circuit) == {"Net-(TPA-Pad1)": {"TPA.1"}, "Net-(TPB-Pad1)": {"TPB.1"}}


def power(name: str, *, kind: str = "(power)", hide: bool = False) -> str:
    return library(name, pin("1", name, "power_in", hide=hide), power=kind, reference="#PWR")


@pytest.mark.parametrize(
    ("version", "hide", "name"),
    [
        (20211123, True, "+3V3"),
        (20230121, True, "+3V3"),
        (20230121, False, "+3.3V"),
        (20230221, True, "+3.3V"),
        (20250114, True, "+3.3V"),
    ],
)
def test_power_symbol_names_the_net_by_value_or_in_old_files_by_its_hidden_pin(
    tmp_path: Path, version: int, hide: bool, name: str
) -> None:
    symbol = part("#PWR01", "+3V3", (0, 0), value="+3.3V")
    circuit = circuit_of(tmp_path, A, symbol, libs=(TP, power("+3V3", hide=hide)), version=version)
    assert nets(circuit) == {name: {"TPA.1"}}
    told = [message for kind, message in findings(circuit) if kind == "power-name-differs"]
    expected = ["power symbol '+3.3V' connects to net '+3V3', the name of its hidden pin"]
    assert told == (expected if name == "+3V3" else [])


@pytest.mark.parametrize("spelling", ["hide", "(hide yes)", "(hide)"])
def test_hidden_power_pin_of_a_part_joins_the_net_of_its_name(tmp_path: Path, spelling: str) -> None:
    gate = library(
        "G",
        pin("14", "VCC", "power_in").replace("(length 2.54)", f"(length 2.54) {spelling}"),
        pin("1", "IN", at=(9, 0)),
    )
    circuit = circuit_of(
        tmp_path,
        part("U1", "G", (50, 0)),
        part("U2", "G", (80, 0)),
        A,
        label("VCC", (0, 0), "global_label"),
        libs=(TP, gate),
    )
    assert nets(circuit)["VCC"] == {"U1.14", "U2.14", "TPA.1"}
    assert ("hidden-power-pin", "U1.14 joins the net VCC, invisibly") in findings(circuit)


def test_hidden_power_pin_wired_elsewhere_merges_the_two_nets(tmp_path: Path) -> None:
    gate = library("G", pin("14", "VCC", "power_in", hide=True))
    circuit = circuit_of(
        tmp_path,
        part("U1", "G", (0, 0)),
        part("U2", "G", (80, 0)),
        A,
        label("+3V3", (0, 0), "global_label"),
        libs=(TP, gate),
    )
    # among global names the label stands before the pin
    assert nets(circuit) == {"+3V3": {"U1.14", "U2.14", "TPA.1"}}


def test_visible_power_pin_is_an_ordinary_pin_and_reported_when_loose(tmp_path: Path) -> None:
    chip = library("G", pin("1", "VIN", "power_in"))
    circuit = circuit_of(tmp_path, part("U1", "G", (0, 0)), libs=(chip,))
    assert nets(circuit) == {"unconnected-(U1-VIN-Pad1)": {"U1.1"}}
    assert findings(circuit) == [("power-pin-unconnected", "U1.1 (VIN) is not connected")]


def test_local_power_stays_on_its_sheet_and_beats_a_local_label(tmp_path: Path) -> None:
    libs = (TP, power("VL", kind="(power local)"))
    circuit = circuit_of(tmp_path, A, part("#PWR01", "VL", (0, 0)), label("AA", (0, 0)), libs=libs)
    assert nets(circuit) == {"/VL": {"TPA.1"}}


def test_turning_and_mirroring_a_symbol(tmp_path: Path) -> None:
    # a pin 2 mm right of and 1 mm above the origin (library: y up; sheet: y down)
    lib = library("P", pin("1", "P", at=(2, 1)))
    ends = {
        ("0", ""): (2, -1),
        ("90", ""): (-1, -2),
        ("180", ""): (-2, 1),
        ("270", ""): (1, 2),
        ("0", "x"): (2, 1),
        ("90", "x"): (-1, 2),
        ("180", "x"): (-2, -1),
        ("270", "x"): (1, -2),
        ("0", "y"): (-2, -1),
        ("90", "y"): (1, -2),
        ("180", "y"): (2, 1),
        ("270", "y"): (-1, 2),
    }
    items = []
    for number, ((turn, mirror), (dx, dy)) in enumerate(ends.items()):
        more = f"(mirror {mirror})" if mirror else ""
        items += [part(f"P{number}", "P", (100, 20 * number), turn=turn, more=more)]
        items += [part(f"TP{number}", "TP", (100 + dx, 20 * number + dy))]
    circuit = circuit_of(tmp_path, *items, libs=(TP, lib))
    assert groups(circuit) == sorted(f"P{number}.1 TP{number}.1" for number in range(12))


@given(st.tuples(st.integers(-999, 999), st.integers(-999, 999)), st.integers(0, 3), st.sampled_from(["", "x", "y"]))
def test_four_quarter_turns_and_two_mirrorings_change_nothing(at: tuple[int, int], turns: int, mirror: str) -> None:
    assert turned(turned(at, turns, ""), 4 - turns, "") == at
    assert turned(turned(at, 0, mirror), 0, mirror) == at
    x, y = turned(at, turns, mirror)
    assert x * x + y * y == at[0] ** 2 + at[1] ** 2


def test_drawing_faults_around_a_pin_are_reported(tmp_path: Path) -> None:
    circuit = circuit_of(
        tmp_path,
        part("TPA", "TP", (10, 0)),
        wire((0, 0), (20, 0)),
        part("TPB", "TP", (50, 0)),
        wire((50.05, 0), (60, 0)),
        part("TPC", "TP", (80, 0)),
        wire((80.2, 0), (90, 0)),
        part("TPD", "TP", (99, 0)),
        wire((99.05, 0), (105, 0)),
        no_connect((99, 0)),
        label("FREE", (5, 5)),
        label("ON", (15, 0)),
    )
    assert findings(circuit) == [
        ("label-loose", "label 'FREE' touches neither a wire nor a pin"),
        ("pin-beside-wire", "TPA.1 lies on a wire without a junction: not connected"),
        ("pin-beside-wire", "TPB.1 is 50 µm from a wire's end: not connected"),
    ]
    (place,) = {(each.where, each.key) for each in circuit.findings if "lies on a wire" in each.message}
    assert place == ("p.kicad_sch sheet / at (10, 0) mm", "/TPA")


ITEMS = (
    A,
    B,
    C,
    part("U1", "U", (40, 0)),
    part("U2", "U", (60, 0), turn="90"),
    wire((0, 0), (20, 0)),
    wire((20, 0), (40, 0)),
    wire((10, 0), (10, 10)),
    junction((10, 0)),
    label("X", (5, 0)),
    label("Y", (40, 5), "global_label"),
    label("D[0..1]", (70, 70)),
    wire((70, 70), (90, 70), "bus"),
    label("D0", (60, 0)),
    no_connect((60, 5)),
    '(future_thing (with parts) "and text")',
)


@settings(max_examples=60, deadline=None)
@given(st.permutations(ITEMS))
def test_order_of_items_and_unknown_items_do_not_matter(
    tmp_path_factory: pytest.TempPathFactory, items: list[str]
) -> None:
    chip = library("U", pin("1", "A"), pin("2", "B", at=(0, -5)))
    circuit = circuit_of(tmp_path_factory.mktemp("p"), *items, libs=(TP, chip))
    assert nets(circuit) == {
        "/X": {"TPA.1", "TPB.1", "TPC.1", "U1.1"},
        "Y": {"U1.2"},
        "/D0": {"U2.1"},
        "unconnected-(U2-B-Pad2)": {"U2.2"},
    }
    assert [part.ref for part in circuit.components] == ["TPA", "TPB", "TPC", "U1", "U2"]
    assert circuit.complete


@settings(max_examples=150, deadline=None)
@given(st.sets(st.integers(0, 10_000), min_size=1, max_size=4))
def test_unknown_entries_inside_items_do_not_matter(tmp_path_factory: pytest.TempPathFactory, places: set[int]) -> None:
    chip = library("U", pin("1", "A"), pin("2", "B", at=(0, -5)), units=None)
    known = schematic(
        *ITEMS,
        '(bus_alias "M" (members "A0" "CK"))',
        wire((0, 90), (9, 90), "bus"),
        label("{M}", (0, 90)),
        libs=(TP, chip),
    )
    closing = [match.start() for match in re.finditer(r"\)", known)]
    text = known
    for at in sorted({closing[place % len(closing)] for place in places}, reverse=True):
        text = f'{text[:at]} (future "thing" (of 2031)) {text[at:]}'
    folder = tmp_path_factory.mktemp("p")
    before, after = read(save(folder, "p", known)), read(save(folder, "p", text))
    assert after.nets == before.nets
    assert after.components == before.components
    assert after.findings == before.findings
