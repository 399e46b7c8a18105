"""Recognition measured on every symbol of Debian's KiCad libraries against the hand-checked table (pytest -s prints).

Symbols of regulator libraries that the table does not list are not judged.
"""

from __future__ import annotations

import csv
from collections import Counter
from pathlib import Path

import pytest
from conftest import need
from kicad_symbols import components

from analyzer.circuit import Circuit
from analyzer.part import Part
from analyzer.recognise import load_rulebook, recognise
from analyzer.rule import Topology
from analyzer.settings import Settings

pytestmark = [pytest.mark.outside, pytest.mark.boards]

LINEAR = ("linear", "ldo", "linear_neg")
SWITCHING = ("buck", "boost")
NO_REGULATORS = ("reference", "charger", "load_switch", "protection", "current_source", "led_driver", "not_regulator")
HELD_WRONG: dict[str, str] = {}
"""Rows of the table held to be wrong, with the reason: none."""


@pytest.fixture(scope="module")
def found() -> dict[str, Part]:
    folder = need(Path("/usr/share/kicad/symbols"))
    parts, _ = recognise(
        Circuit("symbols", tuple(part for _, _, part in components(folder)), ()), load_rulebook(), Settings()
    )
    return {part.key: part for part in parts}


@pytest.fixture(scope="module")
def truth(shared: Path) -> dict[str, dict[str, str]]:
    with (shared / "reference" / "regulators_v6.csv").open(encoding="utf-8", newline="") as file:
        return {f"/{row['lib']}/{row['symbol']}": row for row in csv.DictReader(file)}


def share(found: dict[str, Part], truth: dict[str, dict[str, str]], kinds: tuple[str, ...]) -> float:
    wanted = [key for key, row in truth.items() if row["kind"] in kinds and row["sure"] == "1"]
    hits = [key for key in wanted if key in found]
    print(f"{'/'.join(kinds)}: {len(hits)} of {len(wanted)} = {len(hits) / len(wanted):.2%}")
    print("  missed:", *sorted(set(wanted) - set(hits)))
    return len(hits) / len(wanted)


def test_linear_parts_are_recognised(found: dict[str, Part], truth: dict[str, dict[str, str]]) -> None:
    assert share(found, truth, LINEAR) >= 0.98


def test_switching_parts_are_recognised(found: dict[str, Part], truth: dict[str, dict[str, str]]) -> None:
    assert share(found, truth, SWITCHING) >= 0.88


def test_few_false_alarms(found: dict[str, Part], truth: dict[str, dict[str, str]]) -> None:
    alarms = []
    for key, part in found.items():
        row = truth.get(key)
        if row is None and not key.startswith("/Regulator_"):
            alarms.append(key)
        elif row is not None and row["kind"] in NO_REGULATORS and part.topology.regulates:
            if row["kind"] == "charger" and part.topology is Topology.CHARGER:
                continue
            alarms.append(key)
    print(f"false alarms: {len(alarms)}", *alarms)
    assert len(alarms) <= 25


def test_every_voltage_is_right_or_declared_unknown(found: dict[str, Part], truth: dict[str, dict[str, str]]) -> None:
    wrong, counts = [], Counter[str]()
    for key, row in truth.items():
        if row["sure"] != "1" or row["kind"] not in (*LINEAR, *SWITCHING) or key not in found or key in HELD_WRONG:
            continue
        for channel in found[key].channels:
            fixed = [float(text) for text in row["fixed_vout"].split(";") if text]
            if channel.volts is None:
                counts["unknown" if fixed else "adjustable, unknown"] += 1
            elif any(abs(channel.volts.span.nominal - volts) <= 0.006 * abs(volts) for volts in fixed):
                counts["right"] += 1
            else:
                wrong.append((key, channel.volts.span.nominal, row["vout_mode"], row["fixed_vout"]))
    print(f"voltages: {dict(counts)}, wrong {len(wrong)}", *wrong, sep="\n  ")
    assert not wrong
    assert counts["right"] > 900
