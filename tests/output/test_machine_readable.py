"""JSON, SARIF and Markdown: the contracts, held against their schemas."""

from __future__ import annotations

import json
import subprocess
import sys
from datetime import date
from pathlib import Path

import jsonschema
import pytest
from conftest import ROOT
from schema_store import published

from analyzer.audit import Audit, audit
from analyzer.gate import judge
from analyzer.output.ledger_json import as_document, as_text
from analyzer.output.page import page
from analyzer.output.sarif import as_sarif
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
