"""Design variants and a house's own marks for parts that are not fitted, from the command line to the ledger."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from conftest import ROOT

U2 = '(reference "U2") (unit 1))'
BARE = '(variant (name "BARE") (dnp yes))'
SLOW = '(variant (name "SLOW") (field (name "I_load") (value "12 mA")))'


def heatledger(*arguments: str, cwd: Path) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, "NO_COLOR": "1", "COLUMNS": "120", "PYTHONPATH": str(ROOT)}
    command = [sys.executable, "-m", "analyzer.cli", *arguments]
    return subprocess.run(command, cwd=cwd, env=environment, capture_output=True, encoding="utf-8", check=False)


def verdict(file: Path, ref: str = "U1") -> tuple[str, float | None]:
    """Verdict and the load's upper end [mA] of a part in a JSON ledger."""
    ledger = json.loads(file.read_text(encoding="utf-8"))
    (entry,) = (entry for entry in ledger["entries"] if entry["ref"] == ref)
    load = entry["outputs"][0]["load_amps"]
    return entry["verdict"], load and round(load[2] * 1e3, 6)


def missing(file: Path) -> list[tuple[str, str]]:
    """Part and rail of every missing current in a JSON ledger that follows from no other."""
    gaps = json.loads(file.read_text(encoding="utf-8"))["gaps"]
    return [(gap["ref"], gap["rail"]) for gap in gaps if not gap["follows"]]


@pytest.fixture
def lamp(tmp_path: Path) -> Path:
    """lane_lamp, whose U2 nobody stated, with two variants: U2 not fitted, and U2 stated as 12 mA."""
    board = Path(shutil.copytree(ROOT / "fixture_boards" / "lane_lamp", tmp_path / "lamp"))
    sheet, project = board / "lane_lamp.kicad_sch", board / "lane_lamp.kicad_pro"
    text = sheet.read_text(encoding="utf-8")
    assert text.count(U2) == 1
    sheet.write_text(text.replace(U2, U2[:-1] + f" {BARE} {SLOW})"), encoding="utf-8")
    settings = json.loads(project.read_text(encoding="utf-8"))
    settings["schematic"]["variants"] = [{"name": "BARE", "description": "no control"}, {"name": "SLOW"}]
    project.write_text(json.dumps(settings), encoding="utf-8")
    return board


def test_all_variants_give_one_ledger_each_compared_with_the_base(lamp: Path) -> None:
    (lamp / "out").mkdir()
    done = heatledger("audit", ".", "--variant", "all", "--json", "out/lamp.json", cwd=lamp)
    assert (done.returncode, done.stderr) == (0, "")
    heads = [line for line in done.stdout.splitlines() if line.startswith(("variant:", "against", "written"))]
    assert [line for line in heads if not line.startswith("against")] == [
        "variant: base design",
        "written: out/lamp.json",
        "variant: BARE",
        "written: out/lamp.BARE.json",
        "variant: SLOW",
        "written: out/lamp.SLOW.json",
    ]
    compared = [line.partition(", ")[2].split(" (")[0] for line in heads if line.startswith("against")]
    assert compared == ["better: U1 /: open"]
    assert verdict(lamp / "out" / "lamp.json") == ("open", None)
    assert missing(lamp / "out" / "lamp.json") == [("U2", "+3V3")]
    # without U2 nothing is known of the rail: the question becomes that of its source
    assert verdict(lamp / "out" / "lamp.BARE.json") == ("open", None)
    assert missing(lamp / "out" / "lamp.BARE.json") == [("U1", "+3V3")]
    assert missing(lamp / "out" / "lamp.SLOW.json") == []
    # (15.8 − 3.2505) V · 12 mA + 1.5 mW = 152.1 mW, so 60 + 130 · 0.1521 = 79.8 °C
    assert verdict(lamp / "out" / "lamp.SLOW.json") == ("clear", 12.0)


def test_one_variant_by_name(lamp: Path) -> None:
    done = heatledger("audit", "lane_lamp.kicad_pro", "--variant", "SLOW", "--json", "slow.json", cwd=lamp)
    assert done.returncode == 0
    assert verdict(lamp / "slow.json") == ("clear", 12.0)


def test_all_variants_of_a_project_without_any_is_an_error_that_says_what_to_do(tmp_path: Path) -> None:
    board = Path(shutil.copytree(ROOT / "fixture_boards" / "lane_lamp", tmp_path / "lamp"))
    done = heatledger("audit", ".", "--variant", "all", cwd=board)
    assert (done.returncode, done.stdout) == (3, "")
    assert done.stderr == "heatledger: .: the project has no design variants. Leave out --variant.\n"


@pytest.mark.parametrize(
    ("field", "settings"),
    [
        (("CONFIG", "-LAMP"), 'unfitted = { CONFIG = "-LAMP" }'),
        (("Assembly", "no"), 'unfitted = { Assembly = ["no", "later"] }'),
        (("Value", "NA"), 'unfitted_values = ["NA"]'),
    ],
)
def test_a_houses_own_mark_takes_the_part_out(tmp_path: Path, field: tuple[str, str], settings: str) -> None:
    board = Path(shutil.copytree(ROOT / "fixture_boards" / "lane_lamp", tmp_path / "lamp"))
    sheet, house = board / "lane_lamp.kicad_sch", board / "heatledger.toml"
    before = '(property "Value" "LAMP-CTL" '
    name, value = field
    marked = f'(property "{name}" "{value}" '
    text = sheet.read_text(encoding="utf-8")
    assert text.count(before) == 1
    if name != "Value":
        marked = f"{marked}(at 0 0 0) (effects (font (size 1 1)) hide)) {before}"
    sheet.write_text(text.replace(before, marked), encoding="utf-8")
    heatledger("audit", ".", "--json", "without.json", cwd=board)
    assert missing(board / "without.json") == [("U2", "+3V3")]
    house.write_text(house.read_text(encoding="utf-8") + f"\n[fields]\n{settings}\n", encoding="utf-8")
    done = heatledger("audit", ".", "--json", "with.json", cwd=board)
    assert done.returncode == 0, done.stderr
    assert missing(board / "with.json") == [("U1", "+3V3")]
