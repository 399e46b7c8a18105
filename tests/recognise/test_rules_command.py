"""`heatledger rules`: what try, check, draft and schema print."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from recognise_kit import QX1200, component, recognised, rules

from analyzer.circuit import Circuit
from analyzer.cli import main
from analyzer.recognise import load_rulebook
from analyzer.recognise.draft import ASKED, draft
from analyzer.rule import FIGURES, Topology


def test_try_shows_match_code_gate_and_thermal_data(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = rules(tmp_path, QX1200)
    assert main(["rules", "try", "QX1200-3.3", "--footprint", "SOT-223", "--rules", str(file)]) == 0
    text = capsys.readouterr().out
    assert "QX1200-3.3: own.toml [QX1200] by pattern {maker}1200-{code}*" in text
    assert "code '3.3' read as decimal: 3.30 V" in text
    assert "gate: reference letter U, IC" in text
    assert "pins found for input and (output or switch)" in text
    assert "SOT-223: θJA 91.0 K/W on board 1s (QX1200 data sheet)" in text


def test_try_says_why_near_rules_do_not_match(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = rules(tmp_path, QX1200.replace('kind = "linear"', 'kind = "linear"\nmakers = ["QX"]'))
    main(["rules", "try", "QY1200-3.3", "--rules", str(file)])
    assert "not own.toml [QX1200]: the rule is for QX only" in capsys.readouterr().out
    main(["rules", "try", "QX1200-33", "--rules", str(file)])
    assert "has 1200-, but the whole does not read as {maker}1200-{code}* with a code in decimal" in (
        capsys.readouterr().out
    )
    main(["rules", "try", "L7842"])
    assert "code '42' is not among 05, 06, 07, 08, 09, 10, 12, 15, 18, 20, 24 (volts)" in capsys.readouterr().out


def test_shipped_rules_do_not_hide_each_other(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["rules", "check"]) == 0
    assert capsys.readouterr().out.endswith(": valid; 0 hidden by others\n")


def test_check_finds_hidden_entries(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    hidden = QX1200.replace('"QX1200"', '"hidden"')
    file = rules(tmp_path, QX1200 + hidden)
    assert main(["rules", "check", str(file)]) == 5
    out = capsys.readouterr().out
    assert out.startswith("own.toml [hidden]: never decides;")
    assert "goes to own.toml [QX1200]" in out
    assert out.endswith("1 files, 2 rules: valid; 1 hidden by others\n")


def test_check_lists_faults_and_ends_with_3(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = rules(tmp_path, QX1200.replace("dropout", "dropuot"))
    assert main(["rules", "check", str(file)]) == 3
    assert "did you mean 'dropout'?" in capsys.readouterr().err


@pytest.mark.boards
def test_check_names_entries_that_match_nothing(
    shared: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    board = shared / "boards" / "esp-rust-board" / "project"
    assert main(["rules", "check", str(rules(tmp_path, QX1200)), "--board", str(board)]) == 0
    assert "own.toml [QX1200]: matches no part of these boards" in capsys.readouterr().out


def test_draft_is_a_valid_rule_file_that_then_matches(tmp_path: Path) -> None:
    pins = ("1 VIN power_in", "2 GND power_in", "3 EN input", "4 VOUT power_out")
    unknown = component('ZZ8512 "x"', pins=pins, footprint="own:WEIRD")
    known = component("QX1200-3.3", ref="U2", footprint="SOT-89")
    book = load_rulebook([rules(tmp_path, QX1200)])
    parts, findings = recognised(unknown, known, rulebook=book)
    text = draft(Circuit("b", (unknown, known), ()), parts, findings)
    assert "input = 1:VIN" in text
    assert '# dropout = ""  # input-output difference at which regulation is lost; may be a table over load' in text
    assert "footprint 'own:WEIRD' not understood" in text
    drafted = load_rulebook([rules(tmp_path, text, "draft.toml")])
    again, _ = recognised(unknown, known, rulebook=drafted)
    assert [part.rule.where for part in again if part.rule] == ["draft.toml [ZZ8512]", "draft.toml [QX1200-3.3]"]
    # what the known rule said is carried over without loss
    assert parts[1].channels[0].volts is not None
    assert again[1].channels[0].volts is not None
    assert again[1].channels[0].volts.span == parts[1].channels[0].volts.span
    assert again[1].channels[0].figures["dropout"].span.corners == (1.1, 1.1, 1.3)


def test_draft_never_replaces_a_file(tmp_path: Path, capsys: pytest.CaptureFixture[str], shared: Path) -> None:
    target = rules(tmp_path, "typed = 1")
    board = shared / "boards" / "helium" / "project"
    assert main(["rules", "draft", str(board), "--output", str(target)]) == 4
    assert target.read_text(encoding="utf-8") == "typed = 1"
    assert "never replaces" in capsys.readouterr().err


def test_draft_asks_for_figures_of_the_catalogue_in_every_topology() -> None:
    assert set(ASKED) == set(Topology)
    assert {key for keys in ASKED.values() for key in keys} <= set(FIGURES)


def test_schema_is_json(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["rules", "schema"]) == 0
    assert json.loads(capsys.readouterr().out)["title"] == "heatledger rule file"
