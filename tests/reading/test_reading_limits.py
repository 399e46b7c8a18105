"""Every limit of the schematic reader trips with a message, in bounded time."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from sketch import TP, library, part, pin, save, schematic, sheet

from analyzer import limits
from analyzer.circuit import Circuit
from analyzer.errors import InputError
from analyzer.reading import read


def messages(circuit: Circuit) -> list[str]:
    return [finding.message for finding in circuit.findings if finding.name == "limit-reached"]


def test_size_of_a_sheet(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = save(tmp_path, "p", "")
    with path.open("wb") as stream:
        stream.truncate(limits.SHEET_BYTES + 1)
    start = time.perf_counter()
    with pytest.raises(InputError, match=r"p\.kicad_sch: larger than 64 MiB"):
        read(path)
    assert time.perf_counter() - start < 5


def test_size_of_a_project_file(tmp_path: Path) -> None:
    path = save(tmp_path, "p", schematic(part("TP1", "TP", (0, 0))))
    with path.with_suffix(".kicad_pro").open("wb") as stream:
        stream.truncate(limits.PROJECT_FILE_BYTES + 1)
    circuit = read(path)
    assert [finding.message for finding in circuit.findings] == ["p.kicad_pro could not be used: larger than 16 MiB"]
    assert len(circuit.components) == 1


def test_size_of_a_project(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    child = schematic(part("TP9", "TP", (0, 0)), uuid="c")
    root = schematic(sheet("s", "c.kicad_sch"))
    monkeypatch.setattr(limits, "PROJECT_BYTES", len(root) + len(child))
    save(tmp_path, "c", child, None)
    circuit = read(save(tmp_path, "p", root))
    assert not circuit.complete
    assert "the project's files together exceed 0 MiB" in circuit.findings[0].message


def test_number_of_symbols(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, "SYMBOL_INSTANCES", 3)
    circuit = read(save(tmp_path, "p", schematic(*(part(f"TP{n}", "TP", (n, 0)) for n in range(10)))))
    assert messages(circuit) == ["more than 3 placed symbols or 2000000 pins"]
    assert not circuit.complete


def test_number_of_pins(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(limits, "PINS", 5)
    chip = library("C", *(pin(str(n), "A", at=(n, 0)) for n in range(4)))
    circuit = read(save(tmp_path, "p", schematic(part("U1", "C", (0, 0)), part("U2", "C", (0, 9)), libs=(TP, chip))))
    assert messages(circuit) == ["more than 200000 placed symbols or 5 pins"]


def test_a_busy_sheet_costs_in_proportion_to_its_size(tmp_path: Path) -> None:
    def seconds(count: int) -> float:
        items = [part(f"TP{n}", "TP", (n, 0)) for n in range(count)]
        items += [f"(wire (pts (xy {n} 0) (xy {n} 10)))" for n in range(count)]
        items += [f'(label "N{n}" (at {n} 5 0))' for n in range(count)]
        path = save(tmp_path, "p", schematic(*items))
        start = time.perf_counter()
        assert len(read(path).nets) == count
        return time.perf_counter() - start

    seconds(50)
    small, large = min(seconds(300) for _ in range(3)), min(seconds(2400) for _ in range(3))
    assert large < small * 8 * 2.5
