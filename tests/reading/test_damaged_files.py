"""Broken and hostile schematic files: each kind of damage has its own message with file and line."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from sketch import TP, label, library, part, pin, save, schematic, sheet, wire

from analyzer.errors import InputError
from analyzer.reading import read

GOOD = schematic(part("TP1", "TP", (0, 0)), part("TP2", "TP", (10, 0)), wire((0, 0), (10, 0)))


def fault_of(path: Path) -> str:
    with pytest.raises(InputError) as caught:
        read(path)
    assert caught.value.exit_status == 3
    return str(caught.value)


def names(path: Path, **options: bool) -> dict[str, str]:
    """Finding names with their messages."""
    return {finding.name: finding.message for finding in read(path, **options).findings}


def test_good_file_reads_without_findings(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", GOOD))
    assert circuit.findings == ()
    assert circuit.complete
    assert {net.name: [pin for _, pin in net.pins] for net in circuit.nets} == {"Net-(TP1-Pad1)": ["1", "1"]}


@pytest.mark.parametrize(
    ("damage", "message"),
    [
        (b"", "p.kicad_sch: the file is empty"),
        (b" \n", "p.kicad_sch: the file is empty"),
        (GOOD.encode("utf-16"), "p.kicad_sch: the file is UTF-16, not UTF-8"),
        (GOOD.encode().replace(b"TP2", b"T\0P2", 1), "p.kicad_sch: NUL byte at byte "),
        (b'(kicad_sch\n(version 1)\n(x "\xb5"))', "p.kicad_sch: line 3: not UTF-8 at byte 27"),
        (
            GOOD.replace("(wire", "(wire (a", 1).encode(),
            "p.kicad_sch: the file ends inside (kicad_sch ... opened at line 1",
        ),
        (GOOD.encode()[: GOOD.index("(lib_id")], "p.kicad_sch: the file ends inside (symbol ... opened at line 3"),
        (b'(kicad_sch (version 20250114)\n(uuid "ab\n', "p.kicad_sch: line 2: a string that begins here never ends"),
        (GOOD.rstrip().encode() + b"\n)", "p.kicad_sch: line 7: extra ')'"),
        (GOOD.encode() + b"(more)", "p.kicad_sch: line 7: a second expression follows the end of the data"),
        (GOOD.encode() + b'"more"', "p.kicad_sch: line 7: there is text after the end of the data"),
        (
            b"(kicad_sch (version 1)\n<<<<<<< HEAD\n(a)\n=======\n(b)\n>>>>>>> other\n)",
            "p.kicad_sch: unresolved merge conflict in lines 2-6",
        ),
        (b"(kicad_pcb (version 20240108))", "p.kicad_sch: this is a board (.kicad_pcb), not a schematic"),
        (b"(kicad_symbol_lib (version 20231120))", "p.kicad_sch: this is a symbol library"),
        (b"(fancy_thing)", "p.kicad_sch: this is a file of kind 'fancy_thing', not a schematic"),
        (b'<?xml version="1.0"?><export/>', "p.kicad_sch: this is XML, not a schematic"),
        (b'{"meta": {}}', "p.kicad_sch: this is JSON (a project file?), not a schematic"),
        (b"PK\x03\x04rest", "p.kicad_sch: this is a ZIP archive"),
        (b"hello", "p.kicad_sch: line 1: this is not a schematic"),
        (b"EESchema Schematic File Version 4\n", "p.kicad_sch: this is a schematic of KiCad 5 or older"),
        (GOOD.replace("(version 20250114)", "").encode(), "p.kicad_sch: line 1: the format version is missing"),
        (GOOD.replace("20250114", "soon").encode(), "p.kicad_sch: line 1: 'soon' is no format version"),
        (GOOD.replace("20250114", "4").encode(), "p.kicad_sch: format 4 is older than any KiCad release wrote"),
        (b"(kicad_sch (version 20250114)" + b"(a" * 70 + b")" * 71, "p.kicad_sch: nested deeper than 64 levels"),
        (GOOD.replace('"TP1"', '"TP1"(x)', 1).encode(), "p.kicad_sch: line 3: a blank is missing after a string"),
        (GOOD.replace('(uuid "', '(uuid"', 1).encode(), "p.kicad_sch: line 1: a blank is missing before a string"),
        ('(kicad_sch (version 20250114)\n(x "\ufdd0"))'.encode(), "p.kicad_sch: line 2: the noncharacter U+FDD0"),
    ],
)
def test_damaged_root_is_one_clear_error(tmp_path: Path, damage: bytes, message: str) -> None:
    path = save(tmp_path, "p", "")
    path.write_bytes(damage)
    assert message in fault_of(path)


@pytest.mark.parametrize("change", ["bom", "crlf", "cr"])
def test_harmless_encodings_are_accepted(tmp_path: Path, change: str) -> None:
    path = save(tmp_path, "p", "")
    written = {
        "bom": b"\xef\xbb\xbf" + GOOD.encode(),
        "crlf": GOOD.replace("\n", "\r\n").encode(),
        "cr": GOOD.replace("\n", "\r").encode(),
    }
    path.write_bytes(written[change])
    assert [net.name for net in read(path).nets] == ["Net-(TP1-Pad1)"]


def test_conflict_marks_inside_a_string_are_text(tmp_path: Path) -> None:
    path = save(tmp_path, "p", GOOD.replace("\n)\n", '\n(text "a <<<<<<< b" (at 0 0 0))\n)\n'))
    assert [note.text for note in read(path).notes] == ["a <<<<<<< b"]


def test_strings_ending_in_a_backslash_stay_whole(tmp_path: Path) -> None:
    # in the file: "C:\\" then " VCC"
    fields = {"Path": "C:\\\\", "Next": " VCC"}
    circuit = read(save(tmp_path, "p", schematic(part("TP1", "TP", (0, 0), fields=fields))))
    assert dict(circuit.components[0].fields) == {"Path": "C:\\", "Next": " VCC"}


def test_escapes_in_strings_are_undone(tmp_path: Path) -> None:
    fields = {"A": "one\\ntwo\\ttab", "B": 'say \\"hi\\"', "C": "back\\\\slash\\\\n"}
    circuit = read(save(tmp_path, "p", schematic(part("TP1", "TP", (0, 0), fields=fields))))
    assert dict(circuit.components[0].fields) == {"A": "one\ntwo\ttab", "B": 'say "hi"', "C": "back\\slash\\n"}


def test_deep_nesting_and_large_files_end_in_bounded_time(tmp_path: Path) -> None:
    path = save(tmp_path, "p", "")
    path.write_bytes(b"(kicad_sch (version 20250114)" + b"(a " * 100_000 + b")" * 100_001)
    assert "nested deeper than 64 levels" in fault_of(path)
    path.write_bytes(b"(kicad_sch (version 20250114)" + b'("' * 100_000)
    assert "the file ends inside" in fault_of(path) or "blank is missing" in fault_of(path)


@pytest.mark.parametrize("exact", [".kicad_sch", ".kicad_pro"])
def test_missing_file_is_named(tmp_path: Path, exact: str) -> None:
    assert fault_of(tmp_path / f"nothing{exact}") == "nothing.kicad_sch: no such file. Check the path."


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="the platform has no FIFOs")
def test_fifo_is_not_opened_for_ever(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "p.kicad_sch")
    assert fault_of(tmp_path / "p.kicad_sch") == "p.kicad_sch: not a regular file. Give a file, not a folder or device."


def test_other_kinds_of_file_are_named(tmp_path: Path) -> None:
    board = tmp_path / "p.kicad_pcb"
    board.write_text("(kicad_pcb (version 20240108))", encoding="utf-8")
    assert fault_of(board).startswith("p.kicad_pcb: this is a board (.kicad_pcb), not a schematic (.kicad_sch). Give a")
    renamed = tmp_path / "p.txt"
    renamed.write_text(GOOD, encoding="utf-8")
    assert "its name does not end in .kicad_sch" in fault_of(renamed)
    legacy = tmp_path / "old.sch"
    legacy.write_text("EESchema Schematic File Version 4", encoding="utf-8")
    assert "KiCad 5 or older" in fault_of(legacy)


def test_newer_format_warns_and_goes_on(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", GOOD.replace("20250114", "20991231")))
    assert [finding.name for finding in circuit.findings] == ["format-newer"]
    assert "format 20991231" in circuit.findings[0].message
    assert len(circuit.nets) == 1
    assert circuit.complete


@pytest.mark.parametrize(
    ("item", "message"),
    [
        (part("R1", "R", (0, 0)).replace("(at 0 0 0) (unit", "(at nan 0 0) (unit"), "symbol R1: bad position"),
        (part("R1", "R", (0, 0)).replace("(at 0 0 0) (unit", "(at 1e300 0 0) (unit"), "symbol R1: bad position"),
        (part("R1", "R", (0, 0)).replace("(at 0 0 0) (unit", "(unit"), "symbol R1: bad position"),
        (part("R1", "R", (0, 0), turn="45"), "symbol R1: bad position"),
        (part("R1", "R", (0, 0), unit="x"), "symbol R1: bad position or missing entry"),
        (part("R1", "R", (0, 0)).replace("(unit 1) )", "(unit x) )"), "R1: library symbol 't:R' has no unit -1"),
        ("(wire (pts (xy 0 0)))", "wire"),
        ("(junction (at inf 0))", "junction"),
        ("(label)", "label"),
        ("(no_connect)", "no connect"),
        ("(bus_entry (at 0 0))", "bus entry"),
        ("(bus (pts))", "bus"),
        ('(sheet (at 0 0) (size 1 1) (property "Sheetname" "s" (at 0 0 0)))', "sheet s"),
    ],
)
def test_unreadable_item_is_left_out_and_the_circuit_incomplete(tmp_path: Path, item: str, message: str) -> None:
    circuit = read(save(tmp_path, "p", schematic(part("TP1", "TP", (50, 50)), item)))
    assert not circuit.complete
    assert any(message in finding.message for finding in circuit.findings)
    assert "TP1" in circuit.by_ref


@pytest.mark.parametrize("gone", ["number", "name", "at"])
def test_library_pin_without_what_it_needs_makes_the_circuit_incomplete(tmp_path: Path, gone: str) -> None:
    broken = pin("2", "B").replace(f"({gone} ", "(nothing ", 1)
    circuit = read(save(tmp_path, "p", schematic(part("U1", "X", (0, 0)), libs=(library("X", pin("1", "A"), broken),))))
    assert not circuit.complete
    assert [finding.message for finding in circuit.findings if finding.name == "item-unreadable"] == [
        "U1: 1 pin(s) of library symbol 't:X' are unreadable"
    ]


def test_missing_library_symbol_is_an_error_of_the_part(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", schematic(part("U1", "X", (0, 0)), part("TP1", "TP", (50, 0)))))
    assert not circuit.complete
    assert (
        names(tmp_path / "p.kicad_sch")["symbol-missing"] == "U1: the file holds no library symbol 't:X'; no pins known"
    )
    assert circuit.by_ref["U1"][0].pins == ()


def test_two_library_symbols_of_one_name_are_reported(tmp_path: Path) -> None:
    other = library("TP", pin("1", "1"), pin("2", "2", at=(0, 5)))
    circuit = read(save(tmp_path, "p", schematic(part("TP1", "TP", (0, 0)), libs=(TP, other))))
    assert not circuit.complete
    assert "two different library symbols named 't:TP'" in names(tmp_path / "p.kicad_sch")["library-symbol-twice"]


def test_every_line_of_a_file_cut_anywhere_is_an_error_or_a_circuit(tmp_path: Path) -> None:
    path = save(tmp_path, "p", "")
    whole = schematic(part("TP1", "TP", (0, 0)), label("N", (0, 0)), sheet("s", "p2.kicad_sch")).encode()
    for end in range(0, len(whole.rstrip()), 7):
        path.write_bytes(whole[:end])
        with pytest.raises(InputError):
            read(path)


@pytest.mark.parametrize("name", ["x" * 300 + ".kicad_sch", "x" * 300 + ".net", "x" * 300])
def test_name_that_is_too_long_is_one_clear_error(tmp_path: Path, name: str) -> None:
    assert "cannot be opened: File name too long" in fault_of(tmp_path / name)


@pytest.mark.parametrize(
    ("good", "bad"),
    [
        ("(unit 1)", "((unit) 1)"),
        ('(uuid "TP1")', "((x) (y))"),
        ("(in_bom yes)", "(in_bom (yes))"),
        ("(size 20 200)", "(dnp (yes))"),
        ('(property "Value"', "(property (x)"),
        ("(lib_symbols", "(lib_symbols (symbol) (symbol (x)) ()"),
        ('(project "p"', '(project ("p")'),
    ],
)
def test_lists_where_words_belong_do_no_harm(tmp_path: Path, good: str, bad: str) -> None:
    text = schematic(part("TP1", "TP", (0, 0), more="(in_bom yes)"), sheet("s", "c.kicad_sch"))
    assert good in text
    assert read(save(tmp_path, "p", text.replace(good, bad))).findings
