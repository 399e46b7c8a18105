"""Every limit of `analyzer.limits` trips with its message, and stands in the README with its figure.

Sizes and depths are tried at their true figures, with holes in files for bytes; counts that would take long to build
are lowered first.
"""

from __future__ import annotations

import re
import sys
import zipfile
from collections.abc import Callable
from pathlib import Path

import pytest

from analyzer import limits
from analyzer.component_value import component_value
from analyzer.errors import HeatledgerError
from analyzer.grammar import parse
from analyzer.output.workbook.archive_check import check_archive
from analyzer.quantity import Dimension
from analyzer.reading import read
from analyzer.reading.buses import BusError, read_bus
from analyzer.reading.library import pads_of
from analyzer.reading.parts_table import read_table
from analyzer.reading.variables import VariableCycleError, put_in
from analyzer.recognise import load_rulebook
from analyzer.recognise.pattern import match
from analyzer.rule import Pattern
from analyzer.settings_file import load_settings

sys.path.insert(0, str(Path(__file__).parent / "reading"))
from sketch import TP, library, part, pin, save, schematic, sheet

ROOT = Path(__file__).resolve().parent.parent
FIGURES = {name: value for name, value in vars(limits).items() if name.isupper()}
Lower = Callable[[str, int], None]


def hole(path: Path, size: int, start: bytes = b"") -> Path:
    """A file of this size that takes no room."""
    with path.open("wb") as stream:
        stream.write(start)
        stream.truncate(size)
    return path


def refused(call: Callable[[], object]) -> str:
    with pytest.raises((HeatledgerError, ValueError, BusError)) as caught:
        call()
    return str(caught.value)


def found(path: Path, name: str = "limit-reached") -> str:
    circuit = read(path)
    assert not circuit.complete
    return " ".join(one.message for one in circuit.findings if one.name == name)


def sheet_bytes(folder: Path, _: Lower) -> str:
    return refused(lambda: read(hole(folder / "p.kicad_sch", limits.SHEET_BYTES + 1)))


def project_bytes(folder: Path, lower: Lower) -> str:
    root, child = schematic(sheet("s", "c.kicad_sch")), schematic(uuid="c")
    lower("PROJECT_BYTES", len(root) + len(child))
    save(folder, "c", child, None)
    return found(save(folder, "p", root), "sheet-unreadable")


def project_file_bytes(folder: Path, _: Lower) -> str:
    path = save(folder, "p", schematic())
    hole(path.with_suffix(".kicad_pro"), limits.PROJECT_FILE_BYTES + 1)
    return read(path).findings[0].message


def netlist_bytes(folder: Path, _: Lower) -> str:
    return refused(lambda: read(hole(folder / "b.net", limits.NETLIST_BYTES + 1)))


def board_head(folder: Path, _: Lower) -> str:
    path = save(folder, "p", schematic(part("TP1", "TP", (0, 0))))
    late = b"(kicad_pcb" + b" " * limits.BOARD_HEAD_BYTES + b'(layers (0 "F.Cu" signal) (2 "B.Cu" signal)))'
    path.with_suffix(".kicad_pcb").write_bytes(late)
    return str(read(path).copper_layers)


def nesting(folder: Path, _: Lower) -> str:
    deep = "(" + "a (" * limits.NESTING + "b" + ")" * (limits.NESTING + 1)
    return refused(lambda: read(save(folder, "p", f"(kicad_sch (version 20250114) {deep})")))


def sheet_instances(folder: Path, _: Lower) -> str:
    # each level uses the next twice: 2^30 instances
    for level in range(30):
        below = f"l{level + 1}.kicad_sch"
        save(folder, f"l{level}", schematic(sheet("x", below), sheet("y", below), uuid=f"u{level}"), None)
    save(folder, "l30", schematic(uuid="u30"), None)
    return found(folder / "l0.kicad_sch")


def sheet_depth(folder: Path, _: Lower) -> str:
    for level in range(limits.SHEET_DEPTH + 2):
        save(folder, f"l{level}", schematic(sheet("x", f"l{level + 1}.kicad_sch"), uuid=f"u{level}"), None)
    return found(folder / "l0.kicad_sch")


def symbols(folder: Path, lower: Lower) -> str:
    lower("SYMBOL_INSTANCES", 3)
    return found(save(folder, "p", schematic(*(part(f"TP{n}", "TP", (n, 0)) for n in range(9)))))


def pins(folder: Path, lower: Lower) -> str:
    lower("PINS", 5)
    chip = library("C", *(pin(str(n), "A", at=(n, 0)) for n in range(4)))
    return found(save(folder, "p", schematic(part("U1", "C", (0, 0)), part("U2", "C", (0, 9)), libs=(TP, chip))))


def bus_members(_folder: Path, _: Lower) -> str:
    return refused(lambda: read_bus(f"D[0..{limits.BUS_MEMBERS}]", {}))


def stacked_pads(_folder: Path, _: Lower) -> str:
    assert len(pads_of(f"[1-{limits.STACKED_PADS}]")) == limits.STACKED_PADS
    return str(pads_of(f"[1-{limits.STACKED_PADS + 1}]"))


def variable_depth(_folder: Path, _: Lower) -> str:
    chain = {f"V{n}": f"${{V{n + 1}}}" for n in range(limits.VARIABLE_DEPTH + 1)}
    with pytest.raises(VariableCycleError) as caught:
        put_in("${V0}", chain.get)
    return str(caught.value)


def text_length(_folder: Path, _: Lower) -> str:
    long = "x" * (limits.TEXT_LENGTH // 4)
    with pytest.raises(VariableCycleError) as caught:
        put_in("${V}" * 5, {"V": long}.get)
    return str(caught.value)


NET = (
    '(export (version "E") (components (comp (ref "R1") (value "1")) (comp (ref "R2") (value "1")))'
    '(nets (net (code "1") (name "A") (node (ref "R1") (pin "1")) (node (ref "R2") (pin "1"))'
    '(node (ref "R2") (pin "2")))))'
)


def netlist(folder: Path) -> str:
    (folder / "b.net").write_text(NET, encoding="utf-8")
    return refused(lambda: read(folder / "b.net"))


def netlist_parts(folder: Path, lower: Lower) -> str:
    lower("NETLIST_PARTS", 1)
    return netlist(folder)


def netlist_nodes(folder: Path, lower: Lower) -> str:
    lower("NETLIST_NODES", 2)
    return netlist(folder)


def table_bytes(folder: Path, _: Lower) -> str:
    return refused(lambda: read_table(hole(folder / "t.csv", limits.TABLE_BYTES + 1)))


def table_rows(folder: Path, _: Lower) -> str:
    (folder / "t.csv").write_text("Reference,Vin\n" + "U1,5 V\n" * limits.TABLE_ROWS, encoding="utf-8")
    return refused(lambda: read_table(folder / "t.csv"))


def rule_files(folder: Path, _: Lower) -> str:
    return refused(lambda: load_rulebook([folder / "r.toml"] * (limits.RULE_FILES + 1), beside=folder))


def rules(folder: Path, lower: Lower) -> str:
    lower("RULES", 3)
    return refused(lambda: load_rulebook([], beside=folder))


def archive(folder: Path, names: int, size: int, method: int = zipfile.ZIP_DEFLATED) -> str:
    path = folder / "w.xlsx"
    with zipfile.ZipFile(path, "w", method) as made:
        for number in range(names):
            with made.open(f"{number}.xml", "w") as stream:
                for _ in range(size // 2**20 or 1):
                    stream.write(b"\0" * min(size, 2**20))
    return refused(lambda: check_archive(path))


def workbook_entries(folder: Path, _: Lower) -> str:
    return archive(folder, limits.WORKBOOK_ENTRIES + 1, 1)


def workbook_unpacked(folder: Path, _: Lower) -> str:
    return archive(folder, 5, limits.WORKBOOK_UNPACKED // 4)


def workbook_ratio(folder: Path, _: Lower) -> str:
    return archive(folder, 1, 4 * 2**20)


def settings_bytes(folder: Path, _: Lower) -> str:
    return refused(lambda: load_settings(hole(folder / "heatledger.toml", limits.SETTINGS_BYTES + 1)))


def quantity_length(_folder: Path, _: Lower) -> str:
    return refused(lambda: parse("1" * (limits.QUANTITY_LENGTH - 1) + " A", Dimension.CURRENT))


def value_length(_folder: Path, _: Lower) -> str:
    text = "10k" + " x" * 98  # 199 characters
    early, late = component_value(text[:-4] + " 5%"), component_value(text + " 5%")
    assert early is not None
    assert early.tolerance == 0.05
    assert late is not None
    return str(late.tolerance)


def pattern_length(folder: Path, _: Lower) -> str:
    pattern = "Q" * (limits.PATTERN_LENGTH + 1)
    text = f'[[rule]]\nname = "Q"\nkind = "linear"\nmatch = [{{ pattern = "{pattern}" }}]\nsource = "invented"\n'
    (folder / "r.toml").write_text(text, encoding="utf-8")
    return refused(lambda: load_rulebook([folder / "r.toml"], beside=folder))


def name_length(_folder: Path, _: Lower) -> str:
    anything = Pattern("Q*")
    assert match(anything, "Q" * limits.NAME_LENGTH) is not None
    return str(match(anything, "Q" * (limits.NAME_LENGTH + 1)))


TRIPS: dict[str, tuple[Callable[[Path, Lower], str], str]] = {
    "SHEET_BYTES": (sheet_bytes, "p.kicad_sch: larger than 64 MiB"),
    "PROJECT_BYTES": (project_bytes, "the project's files together exceed 0 MiB"),
    "PROJECT_FILE_BYTES": (project_file_bytes, "p.kicad_pro could not be used: larger than 16 MiB"),
    "NETLIST_BYTES": (netlist_bytes, "b.net: larger than 64 MiB"),
    "BOARD_HEAD_BYTES": (board_head, "None"),
    "NESTING": (nesting, "nested deeper than 64 levels"),
    "SHEET_INSTANCES": (sheet_instances, "more than 2000 sheet instances or 64 levels of sheets"),
    "SHEET_DEPTH": (sheet_depth, "more than 2000 sheet instances or 64 levels of sheets"),
    "SYMBOL_INSTANCES": (symbols, "more than 3 placed symbols or 2000000 pins"),
    "PINS": (pins, "more than 200000 placed symbols or 5 pins"),
    "BUS_MEMBERS": (bus_members, "bus 'D[0..4096]' has 4097 members; at most 4096 are read"),
    "STACKED_PADS": (stacked_pads, "('[1-4097]',)"),
    "VARIABLE_DEPTH": (variable_depth, "V16"),
    "TEXT_LENGTH": (text_length, "V"),
    "NETLIST_PARTS": (netlist_parts, "b.net: more than 1 parts"),
    "NETLIST_NODES": (netlist_nodes, "b.net: more than 2 pins on nets"),
    "TABLE_BYTES": (table_bytes, "is larger than 16 MB"),
    "TABLE_ROWS": (table_rows, "more than 50000 rows"),
    "RULE_FILES": (rule_files, "more than 100 rule files"),
    "RULES": (rules, "more than 3 rules"),
    "WORKBOOK_ENTRIES": (workbook_entries, "holds 1001 parts, more than 1000"),
    "WORKBOOK_UNPACKED": (workbook_unpacked, "would unpack to 80 MB"),
    "WORKBOOK_RATIO": (workbook_ratio, "to 1, as only bombs are"),
    "SETTINGS_BYTES": (settings_bytes, "larger than 1048576 bytes. This cannot be a settings file."),
    "QUANTITY_LENGTH": (quantity_length, "'111111111111111111111111111111…': too long for a quantity"),
    "VALUE_LENGTH": (value_length, "None"),
    "PATTERN_LENGTH": (pattern_length, "is longer than 80 characters"),
    "NAME_LENGTH": (name_length, "None"),
}


def test_every_limit_is_tried() -> None:
    assert set(TRIPS) == set(FIGURES)


@pytest.mark.parametrize("name", TRIPS)
def test_a_limit_trips_with_its_message(name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    trip, message = TRIPS[name]
    assert message in trip(tmp_path, lambda limit, figure: monkeypatch.setattr(limits, limit, figure))


def test_the_readme_lists_every_limit_with_its_figure() -> None:
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    table = text.split("## Limits", 1)[1].split("\n## ", 1)[0]
    listed = {key: figure for figure, key in re.findall(r"\| ([\d ]+(?:MiB|KiB)?) +\| `(\w+)` \|", table)}

    def shown(name: str, value: int) -> str:
        if name.endswith("BYTES") or name == "WORKBOOK_UNPACKED":
            return f"{value // 2**20} MiB" if value >= 2**20 else f"{value // 2**10} KiB"
        return f"{value:,}".replace(",", " ")

    assert {key: figure.strip() for key, figure in listed.items()} == {
        name: shown(name, value) for name, value in FIGURES.items()
    }
