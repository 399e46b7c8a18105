"""JSON, SARIF and Markdown: the contracts, held against their schemas."""

from __future__ import annotations

import json
import subprocess
import sys
from dataclasses import replace
from datetime import date
from pathlib import Path

import jsonschema
import pytest
from conftest import ROOT
from schema_store import published

from analyzer.audit import Audit, audit
from analyzer.gate import judge
from analyzer.output.ledger_json import as_document, as_text
from analyzer.output.page import page, write_page
from analyzer.output.sarif import as_sarif, write_sarif
from analyzer.settings import Waiver

BOARDS = ("seedling_bench", "lane_lamp", "tide_logger")
SCHEMAS = ROOT / "analyzer" / "output" / "schema"
TODAY = date(2026, 12, 1)


@pytest.fixture(scope="module", params=BOARDS)
def result(request: pytest.FixtureRequest) -> Audit:
    return audit(ROOT / "fixture_boards" / str(request.param))


def test_the_ledger_fits_its_published_schema(result: Audit) -> None:
    schema = json.loads((SCHEMAS / "ledger-1.json").read_text(encoding="utf-8"))
    jsonschema.Draft7Validator.check_schema(schema)
    document = json.loads(as_text(result.ledger))
    jsonschema.Draft7Validator(schema).validate(document)
    assert document == as_document(result.ledger)


@pytest.mark.parametrize("board", BOARDS)
def test_the_netlist_fits_its_published_schema(board: str) -> None:
    command = [sys.executable, "-m", "analyzer.cli", "nets", str(ROOT / "fixture_boards" / board), "--json", "-"]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, encoding="utf-8", check=True)
    schema = json.loads((SCHEMAS / "nets-1.json").read_text(encoding="utf-8"))
    jsonschema.Draft7Validator(schema).validate(json.loads(done.stdout))


def test_every_number_has_its_trail(result: Audit) -> None:
    for entry in as_document(result.ledger)["entries"]:
        quantities = {evidence["quantity"] for evidence in entry["evidence"]}
        assert {"ambient", "enclosure rise", "altitude"} <= quantities
        assert all(evidence["source"] for evidence in entry["evidence"])


def test_sarif_keeps_to_the_standard(result: Audit) -> None:
    log = as_sarif(result.ledger, judge(result.ledger, (), "over", TODAY))
    schema = published("Static Analysis Results Format (SARIF) Version 2.1.0 JSON Schema")
    assert schema["$id"].startswith("https://raw.githubusercontent.com/oasis-tcs/sarif-spec/")
    jsonschema.validators.validator_for(schema)(schema).validate(log)
    used = {found["ruleId"] for found in log["runs"][0]["results"]}
    assert used == {rule["id"] for rule in log["runs"][0]["tool"]["driver"]["rules"]}


def test_open_findings_are_open_and_waived_ones_suppressed_with_their_reason() -> None:
    ledger = audit(ROOT / "fixture_boards" / "lane_lamp").ledger
    gate = judge(ledger, [Waiver("junction-tight", "U101", "measured, report 7")], "tight", TODAY)
    results = as_sarif(ledger, gate)["runs"][0]["results"]
    kinds = {(found["ruleId"], found["kind"], found["level"]) for found in results}
    assert ("budget-open", "open", "none") in kinds
    assert ("junction-tight", "fail", "warning") in kinds
    (waived,) = [found for found in results if "suppressions" in found]
    assert waived["suppressions"] == [{"kind": "external", "justification": "measured, report 7"}]
    assert waived["locations"][0]["logicalLocations"][0]["fullyQualifiedName"] == "/Left/U101"
    prints = [found["partialFingerprints"]["heatledger/1"] for found in results]
    assert len(set(prints)) == len(prints)


def test_the_page_tells_the_worst_first_and_escapes_markup() -> None:
    ledger = audit(ROOT / "fixture_boards" / "seedling_bench").ledger
    lines = list(page(ledger, judge(ledger, (), "over", TODAY)))
    table = [line for line in lines if line.startswith(("| over", "| clear"))]
    assert table[0] == ("| over | U5 QXA40 | +12V | 1.37 W | 210 °C | 115 °C | -94.6 K | derived |")
    assert lines[-1].startswith("*An estimate, not a measurement")
    assert lines[0] == "## Thermal budgets: seedling\\_bench"


def test_the_archive_schema_is_a_schema() -> None:
    schema = json.loads(Path(SCHEMAS / "archive-1.json").read_text(encoding="utf-8"))
    jsonschema.Draft7Validator.check_schema(schema)
    empty = {"schema": "heatledger/archive-1", "boards": [], "standings": [], "changes": []}
    jsonschema.Draft7Validator(schema).validate(empty)


def test_a_long_page_is_cut_and_an_incomplete_drawing_said_so(tmp_path: Path) -> None:
    ledger = audit(ROOT / "fixture_boards" / "lane_lamp").ledger
    gate = judge(ledger, (), "over", TODAY)
    many = replace(ledger, complete=False, entries=ledger.entries * 15)
    write_page(tmp_path / "page.md", many, gate)
    lines = (tmp_path / "page.md").read_text(encoding="utf-8").splitlines()
    assert lines[4] == "**Incomplete:** part of the drawing could not be read; no part can be clear."
    # the head, forty of the forty-five parts, and three findings
    assert [sum(line.startswith(word) for line in lines) for word in ("| verdict", "| open | U1 ", "| tight | U")] == [
        1,
        14 + 1,
        26 + 2,
    ]
    assert "… and 5 more." in lines
    # what is missing makes heat and junction a lower bound, and the margin an upper one
    assert lines[8] == "| open | U1 QXL2133-3.3 | +3V3 | ≥ 1.50 mW | ≥ 60.2 °C | 115 °C | ≤ +54.8 K | presumed |"
    what = "junction 101 °C at the worst corner, less than the required margin below 125 °C"
    assert lines[-3].startswith(f"| tight | U201 | {what} | ")
    crowded = list(page(replace(ledger, findings=()), replace(gate, standing=gate.standing * 14)))
    assert crowded[-3] == "… and 2 more findings."
    nothing = replace(ledger, findings=())
    assert not any("what to do" in line for line in page(nothing, judge(nothing, (), "over", TODAY)))


def test_sarif_is_written_whole(tmp_path: Path) -> None:
    ledger = audit(ROOT / "fixture_boards" / "lane_lamp").ledger
    gate = judge(ledger, (), "over", TODAY)
    write_sarif(tmp_path / "found.sarif", ledger, gate)
    assert json.loads((tmp_path / "found.sarif").read_text(encoding="utf-8")) == as_sarif(ledger, gate)


def test_a_chance_has_its_place_in_the_ledger() -> None:
    ledger = audit(ROOT / "fixture_boards" / "lane_lamp").ledger
    one = replace(ledger.entries[0], chance=(0.25, 61.0, 99.5))
    assert as_document(replace(ledger, entries=(one,)))["entries"][0]["chance"] == {
        "over_limit": 0.25,
        "junction_celsius_5_percent": 61.0,
        "junction_celsius_95_percent": 99.5,
    }
