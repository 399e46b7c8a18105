"""What changed since an earlier run."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from analyzer.archive.since import Standing, changes, read_standings
from analyzer.errors import InputError


def test_each_way_of_changing_has_its_word_and_rounding_has_none() -> None:
    before = {
        ("a", "U1 /"): Standing("clear", 30.0),
        ("a", "U2 /"): Standing("over", -3.0),
        ("a", "U3 /"): Standing("clear", 20.0),
        ("a", "U4 /"): Standing("clear", 20.0),
        ("a", "U5 /"): Standing("open", None),
    }
    after = {
        ("a", "U1 /"): Standing("tight", 4.0),
        ("a", "U2 /"): Standing("clear", 16.0),
        ("a", "U3 /"): Standing("clear", 20.2),
        ("a", "U4 /"): Standing("clear", 19.0),
        ("a", "U6 /"): Standing("clear", 1.0),
    }
    assert [str(change) for change in changes(before, after)] == [
        "worse: a U1 /: clear (+30.0 K) → tight (+4.0 K)",
        "better: a U2 /: over (-3.0 K) → clear (+16.0 K)",
        "worse: a U4 /: clear (+20.0 K) → clear (+19.0 K)",
        "went: a U5 /: open → absent",
        "appeared: a U6 /: absent → clear (+1.0 K)",
    ]


def test_an_open_budget_is_worse_than_a_tight_one() -> None:
    (change,) = changes({("a", "U1 /"): Standing("tight", 3.0)}, {("a", "U1 /"): Standing("open", None)})
    assert change.how == "worse"


def test_one_boards_own_result_can_be_compared(tmp_path: Path) -> None:
    file = tmp_path / "old.json"
    entry = {"ref": "U1", "sheet": "/", "fitted": True, "verdict": "clear", "margin_kelvin": 12.5}
    unfitted = {**entry, "ref": "U2", "fitted": False}
    document = {"schema": "heatledger/ledger-1", "board": "b", "entries": [entry, unfitted]}
    file.write_text(json.dumps(document), encoding="utf-8")
    assert read_standings(file) == {("b", "U1 /"): Standing("clear", 12.5)}


@pytest.mark.parametrize("text", ["", "[]", "{}", '{"schema": 3}', "\x00"])
def test_anything_else_is_refused_with_the_file_named(tmp_path: Path, text: str) -> None:
    file = tmp_path / "old.json"
    file.write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match=r"old\.json: is no earlier result"):
        read_standings(file)
