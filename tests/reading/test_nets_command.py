"""`heatledger nets`: the JSON contract, the text, and the exit status."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from sketch import TP, label, library, part, pin, save, schematic, sheet, wire

from analyzer.cli import main

BOARD = schematic(
    part("TP2", "TP", (0, 0), value="x", fields={"MPN": "A-1"}, more="(dnp yes)"),
    part("TP10", "TP", (10, 0)),
    wire((0, 0), (10, 0)),
    label("+3V3", (0, 0), "global_label"),
)


def test_json_contract(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = save(tmp_path, "p", BOARD)
    assert main(["nets", str(path), "--json", "-"]) == 0
    assert json.loads(capsys.readouterr().out) == {
        "schema": "heatledger/nets-1",
        "board": "p",
        "complete": True,
        "nets": [{"name": "+3V3", "pins": [["TP2", "1"], ["TP10", "1"]]}],
        "parts": [
            {
                "ref": "TP2",
                "value": "x",
                "lib_id": "t:TP",
                "footprint": "",
                "fitted": False,
                "in_bom": True,
                "on_board": True,
                "sheet": "/",
                "fields": {"MPN": "A-1"},
            },
            {
                "ref": "TP10",
                "value": "TP",
                "lib_id": "t:TP",
                "footprint": "",
                "fitted": True,
                "in_bom": True,
                "on_board": True,
                "sheet": "/",
                "fields": {},
            },
        ],
        "notices": [],
    }


def test_text(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["nets", str(save(tmp_path, "p", BOARD))]) == 0
    assert capsys.readouterr().out == "+3V3: TP2.1 TP10.1\np: 1 nets, 2 parts (1 not fitted)\n"


def test_incomplete_board_says_so_and_ends_with_3(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = save(tmp_path, "p", schematic(sheet("psu", "psu.kicad_sch"), part("TP1", "TP", (0, 0))))
    assert main(["nets", str(path)]) == 3
    lines = capsys.readouterr().out.splitlines()
    assert lines[-1] == "p: 1 nets, 1 parts (0 not fitted); INCOMPLETE: parts of the drawing could not be read"
    assert lines[-2].startswith(
        "sheet-missing: sheet file 'psu.kicad_sch' does not exist (tried psu.kicad_sch) [p.kicad_sch"
    )
    assert main(["nets", str(path), "--json", "-"]) == 3
    document = json.loads(capsys.readouterr().out)
    assert document["complete"] is False
    assert [notice["name"] for notice in document["notices"]] == ["sheet-missing"]


def test_unreadable_board_ends_with_3(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = save(tmp_path, "p", "(kicad_sch (version 20250114)\n(symbol")
    assert main(["nets", str(path)]) == 3
    assert capsys.readouterr().err.startswith(
        "heatledger: p.kicad_sch: the file ends inside (symbol ... opened at line 2."
    )


def test_control_characters_in_names_do_not_reach_the_terminal(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = save(tmp_path, "p", schematic(part("TP1", "TP", (0, 0)), label("A\x1b[31mB\x07", (0, 0))))
    assert main(["nets", str(path)]) == 0
    assert capsys.readouterr().out.splitlines()[0] == "/A\\x1b[31mB\\x07: TP1.1"


def test_same_bytes_whatever_the_hash_seed(tmp_path: Path) -> None:
    import os
    import subprocess
    import sys

    chip = library("C", *(pin(str(n), f"N{n}", at=(5 * n, 0)) for n in range(1, 9)))
    taps = [part(f"TP{n}", "TP", (5 * n, 0)) for n in range(1, 9)]
    path = save(tmp_path, "p", schematic(part("U1", "C", (0, 0)), *taps, libs=(TP, chip)))
    outputs = {
        subprocess.run(
            [sys.executable, "-m", "analyzer.cli", "nets", str(path), "--json", "-"],
            env={**os.environ, "PYTHONHASHSEED": seed, "LC_ALL": "C"},
            capture_output=True,
            check=True,
        ).stdout
        for seed in ("0", "1", "12345")
    }
    assert len(outputs) == 1
