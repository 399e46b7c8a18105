"""The machine-readable ledger, contract "heatledger/ledger-1": additive changes only, see `schema/ledger-1.json`."""

from __future__ import annotations

import json
import sys
from collections.abc import Iterable
from pathlib import Path
from typing import Any

from analyzer import __version__
from analyzer.evidence import Evidence
from analyzer.findings.base import Finding, Verdict
from analyzer.ledger import Corner, Entry, Headroom, Ledger, Remedy
from analyzer.load import Draw, Gap
from analyzer.quantity import Span
from analyzer.rail import Rail

SCHEMA = "heatledger/ledger-1"


def as_document(ledger: Ledger) -> dict[str, Any]:
    """The ledger as plain values, in a fixed order."""
    return {
        "schema": SCHEMA,
        "version": __version__,
        "board": ledger.board,
        "complete": ledger.complete,
        "inputs": [{"path": file.path, "sha256": file.sha256} for file in ledger.inputs],
        "settings": {one.quantity: _evidence(one) for one in ledger.settings},
        "entries": [_entry(entry) for entry in ledger.entries],
        "rails": [_rail(rail, ledger) for rail in ledger.rails],
        "gaps": [_gap(gap) for gap in ledger.gaps],
        "findings": [_finding(finding) for finding in ledger.findings],
        "not_understood": list(ledger.not_understood),
        "summary": summary(ledger),
    }


def as_text(ledger: Ledger) -> str:
    """The ledger as JSON text, ending in a line break."""
    return json.dumps(as_document(ledger), ensure_ascii=False, indent=1, allow_nan=False) + "\n"


def write_json(file: Path, ledger: Ledger) -> None:
    """Write the ledger to a file, or print it for "-"."""
    if str(file) == "-":
        sys.stdout.write(as_text(ledger))
        return
    from analyzer.output.atomic import write_text

    write_text(file, as_text(ledger))


def summary(ledger: Ledger) -> dict[str, Any]:
    """Counts and the worst part."""
    known = [entry for entry in ledger.entries if entry.fitted and entry.margin is not None]
    worst = min(known, key=lambda entry: entry.margin or 0.0, default=None)
    return {
        **{verdict.value: ledger.count(verdict) for verdict in Verdict},
        "not_fitted": sum(1 for entry in ledger.entries if not entry.fitted),
        "gaps": sum(1 for gap in ledger.gaps if not gap.follows),
        "findings": len(ledger.findings),
        "worst_part": worst.ref if worst else None,
        "worst_margin_kelvin": worst.margin if worst else None,
        "worst_is_bound": worst is not None and worst.is_bound,
    }


def _entry(entry: Entry) -> dict[str, Any]:
    return {
        "ref": entry.ref,
        "key": entry.key,
        "sheet": entry.sheet,
        "part": entry.part,
        "value": entry.value,
        "kind": entry.kind,
        "fitted": entry.fitted,
        "rule": entry.rule,
        "package": entry.package,
        "input": None
        if entry.input is None
        else {"net": entry.input.net, "rail": entry.input.rail, "volts": _span(entry.input.volts)},
        "outputs": [
            {
                "channel": output.channel,
                "net": output.net,
                "rail": output.rail,
                "volts": _span(output.volts),
                "load_amps": _span(output.load),
            }
            for output in entry.outputs
        ],
        "dissipation_watts": _pair(entry, "watts"),
        "theta_k_per_w": entry.worst.theta if entry.worst else None,
        "ambient_celsius": entry.worst.ambient if entry.worst else None,
        "junction_celsius": _pair(entry, "junction"),
        "limit_celsius": entry.limit,
        "data_sheet_limit_celsius": entry.data_sheet_limit,
        "policy_limit_celsius": entry.policy_limit,
        "margin_kelvin": entry.margin,
        "headroom_amps": _headroom(entry.headroom),
        "greatest_load_amps": entry.greatest_load,
        "rated_load_amps": entry.rated_load,
        "verdict": entry.verdict.value,
        "grade": entry.grade.value,
        "missing": list(entry.missing),
        "findings": list(dict.fromkeys(finding.name for finding in entry.findings)),
        "worst_corner": entry.worst.name if entry.worst else None,
        "corners": [_corner(corner) for corner in (entry.nominal, entry.worst) if corner is not None],
        "remedies": [_remedy(remedy) for remedy in entry.remedies],
        "sensitivity": [{"input": name, "kelvin": kelvin} for name, kelvin in entry.sensitivity],
        "chance": None
        if entry.chance is None
        else {
            "over_limit": entry.chance[0],
            "junction_celsius_5_percent": entry.chance[1],
            "junction_celsius_95_percent": entry.chance[2],
        },
        "evidence": [_evidence(one) for one in entry.evidence],
    }


def _pair(entry: Entry, field: str) -> list[float] | None:
    if entry.nominal is None or entry.worst is None:
        return None
    pair = [getattr(entry.nominal, field), getattr(entry.worst, field)]
    return None if None in pair else pair


def _corner(corner: Corner) -> dict[str, Any]:
    return {
        "name": corner.name,
        "watts": corner.watts,
        "ambient_celsius": corner.ambient,
        "theta_k_per_w": corner.theta,
        "junction_celsius": corner.junction,
        "channels": [
            {
                "channel": point.channel,
                "input_volts": point.vin,
                "output_volts": point.vout,
                "load_amps": point.iout,
                "input_amps": point.iin,
                "watts": point.watts,
                "elsewhere": [{"where": who, "watts": watts} for who, watts in point.elsewhere],
                "formula": point.formula,
            }
            for point in corner.channels
        ],
    }


def _remedy(remedy: Remedy) -> dict[str, Any]:
    return {"kind": remedy.kind, "text": remedy.text, "numbers": dict(remedy.numbers)}


def _headroom(room: Headroom | None) -> dict[str, Any] | None:
    return None if room is None else {"tight": room.tight, "over": room.over, "bounded_by": room.bounded_by}


def _evidence(one: Evidence) -> dict[str, Any]:
    return {
        "quantity": one.quantity,
        "value": list(one.span.corners),
        "unit": one.unit,
        "source": one.source,
        "grade": one.grade.value,
        "formula": one.formula,
        "note": one.note,
    }


def _rail(rail: Rail, ledger: Ledger) -> dict[str, Any]:
    load = ledger.loads.get(rail.name)
    return {
        "name": rail.name,
        "nets": list(rail.nets),
        "volts": _span(rail.volts.span if rail.volts else None),
        "why_open": rail.why_open,
        "feeds": _unique(feed.ref or feed.kind for feed in rail.feeds),
        "draws": [_draw(draw) for draw in load.draws] if load else [],
        "known_amps": _span(load.known if load else None),
        "complete": load.is_complete if load else True,
    }


def _draw(draw: Draw) -> dict[str, Any]:
    return {"ref": draw.ref, "amps": _span(draw.amps.span), "source": draw.amps.source, "kind": draw.kind}


def _gap(gap: Gap) -> dict[str, Any]:
    return {
        "ref": gap.ref,
        "rail": gap.rail,
        "value": gap.value,
        "sheet": gap.sheet,
        "why": gap.why,
        "suggestions": list(gap.suggestions),
        "follows": gap.follows,
    }


def _finding(finding: Finding) -> dict[str, Any]:
    return {
        "name": finding.name,
        "verdict": finding.weight.value,
        "subject": finding.subject,
        "message": finding.message,
        "remedy": finding.remedy,
        "where": finding.where,
    }


def _span(span: Span | None) -> list[float] | None:
    return None if span is None else list(span.corners)


def _unique(items: Iterable[str]) -> list[str]:
    return list(dict.fromkeys(items))
