"""Findings as SARIF 2.1.0 (OASIS): "open" findings have kind "open", waived ones are suppressed with their reason."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable
from pathlib import Path
from typing import Any

from analyzer.findings.base import Finding, Weight
from analyzer.findings.catalogue import every_kind
from analyzer.gate import Gate
from analyzer.ledger import Ledger
from analyzer.output.atomic import write_text
from analyzer.settings import Waiver

SCHEMA = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"

# kind and level belong together: a level other than "none" is allowed only for kind "fail" (SARIF 2.1.0, 3.27.10)
_WEIGHTS = {
    Weight.OVER: ("fail", "error"),
    Weight.TIGHT: ("fail", "warning"),
    Weight.OPEN: ("open", "none"),
    Weight.NOTE: ("informational", "none"),
}


def write_sarif(file: Path, ledger: Ledger, gate: Gate) -> None:
    """Write the findings."""
    write_text(file, json.dumps(as_sarif(ledger, gate), ensure_ascii=False, indent=1) + "\n")


def as_sarif(ledger: Ledger, gate: Gate) -> dict[str, Any]:
    """The findings as a SARIF log with one run."""
    from analyzer import __version__

    sheet_of = {entry.key: (entry.sheet, entry.ref) for entry in ledger.entries}
    results = [_result(finding, ledger, sheet_of, ()) for finding in gate.standing]
    results += [_result(finding, ledger, sheet_of, (waiver,)) for finding, waiver in gate.waived]
    used = {result["ruleId"] for result in results}
    rules = [
        {
            "id": kind.name,
            "shortDescription": {"text": kind.name.replace("-", " ")},
            "fullDescription": {"text": kind.meaning},
            "help": {"text": kind.remedy},
        }
        for kind in every_kind()
        if kind.name in used
    ]
    driver = {"name": "heatledger", "version": __version__, "rules": rules}
    run: dict[str, Any] = {
        "tool": {"driver": driver},
        "artifacts": [
            {"location": {"uri": _uri(file.path)}, "hashes": {"sha-256": file.sha256}} for file in ledger.inputs
        ],
        "columnKind": "unicodeCodePoints",
        "results": results,
        "invocations": [{"executionSuccessful": ledger.complete}],
    }
    return {"$schema": SCHEMA, "version": "2.1.0", "runs": [run]}


def _result(
    finding: Finding, ledger: Ledger, sheet_of: dict[str, tuple[str, str]], waivers: Iterable[Waiver]
) -> dict[str, Any]:
    kind, level = _WEIGHTS[finding.weight]
    sheet, name = sheet_of.get(finding.key, ("", finding.subject))
    text = f"{finding.subject}: {finding.message}. {finding.remedy}"
    identity = f"{ledger.board}\0{finding.name}\0{finding.key or finding.subject}"
    result: dict[str, Any] = {
        "ruleId": finding.name,
        "kind": kind,
        "level": level,
        "message": {"text": text},
        "locations": [
            {"logicalLocations": [{"name": name, "fullyQualifiedName": f"{sheet}{name}", "kind": "element"}]}
        ],
        "partialFingerprints": {"heatledger/1": hashlib.sha256(identity.encode()).hexdigest()},
    }
    suppressions = [{"kind": "external", "justification": waiver.reason} for waiver in waivers]
    if suppressions:
        result["suppressions"] = suppressions
    return result


def _uri(path: str) -> str:
    from urllib.parse import quote

    return quote(path.replace("\\", "/"))
