"""The BOM script, started as KiCad starts it: by path, from another folder, with its placeholders filled in."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import openpyxl
import pytest
from conftest import ROOT

import analyzer.kicad_plugin as plugin

SCRIPT = Path(plugin.__file__)

STUB = """#!{python}
import json, os, sys
record = dict(argv=sys.argv[1:], home=os.environ.get("PYTHONHOME"), path=os.environ.get("PYTHONPATH"))
open({record!r}, "w", encoding="utf-8").write(json.dumps(record))
print("1 regulator: 1 clear")
sys.exit({status})
"""


def start(
    folder: Path, *arguments: str, status: int = 0, tool: bool = True
) -> tuple[subprocess.CompletedProcess[str], Path]:
    """Start the script with a stand-in for the installed tool; gives the outcome and where the stand-in wrote."""
    record, stub = folder / "record.json", folder / "bin" / "heatledger"
    stub.parent.mkdir(exist_ok=True)
    stub.write_text(STUB.format(python=sys.executable, record=str(record), status=status), encoding="utf-8")
    stub.chmod(0o755)
    elsewhere = folder / "elsewhere"
    elsewhere.mkdir(exist_ok=True)
    environment = {
        "HEATLEDGER": str(stub if tool else folder / "absent"),
        "PATH": os.defpath,
        "HOME": str(folder),
        "PYTHONPATH": "/host/python",
    }
    # -I and -S: the host's Python sees neither this project nor any installed package
    command = [sys.executable, "-I", "-S", str(SCRIPT), *arguments]
    done = subprocess.run(command, cwd=elsewhere, env=environment, capture_output=True, text=True, check=False)
    return done, record


def test_the_tool_gets_the_schematic_beside_the_netlist(tmp_path: Path) -> None:
    project = tmp_path / "Über Wärme (v2)"
    project.mkdir()
    schematic = project / "Gerät.kicad_sch"
    schematic.write_text("(kicad_sch)", encoding="utf-8")
    done, record = start(tmp_path, str(project / "Gerät.xml"), str(project / "Gerät") + ".xlsx")
    assert (done.returncode, done.stdout, done.stderr) == (0, "1 regulator: 1 clear\n", "")
    told = json.loads(record.read_text(encoding="utf-8"))
    assert told["argv"] == ["audit", str(schematic), "--workbook", str(project / "Gerät.xlsx"), "--brief"]
    assert told["path"] is None


def test_without_a_schematic_the_netlist_itself_is_used(tmp_path: Path) -> None:
    _, record = start(tmp_path, str(tmp_path / "a.xml"), str(tmp_path / "a.xlsx"))
    assert json.loads(record.read_text(encoding="utf-8"))["argv"][1] == str(tmp_path / "a.xml")


@pytest.mark.parametrize(("tools", "hosts"), [(0, 0), (5, 0), (3, 3), (4, 4)])
def test_findings_are_no_failed_run_but_errors_are(tmp_path: Path, tools: int, hosts: int) -> None:
    done, _ = start(tmp_path, "a.xml", "a.xlsx", status=tools)
    assert done.returncode == hosts


def test_a_missing_tool_is_one_line_that_says_how_to_install_it(tmp_path: Path) -> None:
    done, _ = start(tmp_path, "a.xml", "a.xlsx", tool=False)
    assert done.returncode == 1
    assert done.stderr == plugin.NOT_FOUND + "\n"
    assert "pipx install heatledger" in done.stderr


def test_wrong_arguments_give_the_usage(tmp_path: Path) -> None:
    done, record = start(tmp_path, "a.xml")
    assert (done.returncode, done.stderr) == (1, plugin.USAGE + "\n")
    assert not record.exists()


def test_started_as_kicad_starts_it_the_real_tool_writes_the_workbook(tmp_path: Path) -> None:
    tool = Path(sys.executable).parent / "heatledger"
    assert tool.is_file(), "the project must be installed beside the Python that runs the tests"
    project = tmp_path / "Wärme & Licht (v2)"
    shutil.copytree(ROOT / "fixture_boards" / "lane_lamp", project)
    # %I is what the host has just exported, %O the same without its ending
    netlist, out = project / "lane_lamp.xml", str(project / "lane_lamp")
    netlist.write_text("<export/>", encoding="utf-8")
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    environment = {"PATH": f"{tool.parent}{os.pathsep}{os.defpath}", "HOME": str(tmp_path), "PYTHONHOME": ""}
    done = subprocess.run(
        [sys.executable, "-I", "-S", str(SCRIPT), str(netlist), out + ".xlsx"],
        cwd=elsewhere,
        env=environment,
        capture_output=True,
        encoding="utf-8",
        check=False,
    )
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    # short output for the message pane: three parts, the caution and the summary
    assert len(lines) <= 16
    assert lines[-1] == f"written: {out}.xlsx"
    assert max(map(len, lines[:-1])) <= 80
    assert [line.split()[:2] for line in lines if line.startswith(("open ", "tight "))] == [
        ["open", "U1"],
        ["tight", "U101"],
        ["tight", "U201"],
    ]
    book = openpyxl.load_workbook(out + ".xlsx", read_only=True)
    assert {"Summary", "Regulators", "Currents"} <= set(book.sheetnames)
    book.close()
    assert list(elsewhere.iterdir()) == []
