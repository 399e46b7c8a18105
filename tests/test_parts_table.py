"""Parts tables: columns by name, decimal commas, encodings, grouped references, a budget for each row."""

from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest

from analyzer.audit import audit
from analyzer.errors import InputError
from analyzer.findings.base import Verdict
from analyzer.reading.parts_table import read_table, spread_refs

RULES = """
[[rule]]
name = "QXL9"
kind = "linear"
match = [{ pattern = "QXL9-{code}", decode = "decimal" }]
output_tolerance = "±0 %"
dropout = "0.3 V"
quiescent = "5 mA"
output_current_max = "1 A"
junction_max = "125 °C"
source = "invented"

[[rule.thermal]]
package = "SOT-223"
theta_ja = "100 K/W"
board = "1s"
source = "invented"
"""


@pytest.mark.parametrize(
    ("text", "refs"),
    [
        ("U1", ("U1",)),
        ("U1, U3-U5 U7", ("U1", "U3", "U4", "U5", "U7")),
        ("U2 - U4", ("U2", "U3", "U4")),
        ("R1..3;C1", ("R1", "R2", "R3", "C1")),
        ("U5-U3", ("U5-U3",)),
        ("U1,U1", ("U1",)),
        ("", ()),
    ],
)
def test_grouped_references_are_spread(text: str, refs: tuple[str, ...]) -> None:
    assert spread_refs(text) == refs


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
@pytest.mark.parametrize("separator", [";", "\t"])
def test_decimal_commas_and_units_in_heads_in_every_encoding(tmp_path: Path, encoding: str, separator: str) -> None:
    file = tmp_path / "parts.csv"
    lines = [
        ["Überschrift"],
        ["Designator", "Vin [V]", "Load (mA)", "Output voltage"],
        ["U1", "12,5", "80..150", "3,3 V"],
    ]
    file.write_bytes("\r\n".join(separator.join(line) for line in lines).encode(encoding))
    (row,) = read_table(file).rows
    assert row.refs == ("U1",)
    assert row.faults == ()
    assert {name: span.corners for name, span in row.quantities.items()} == {
        "vin": (12.5, 12.5, 12.5),
        "vout": (3.3, 3.3, 3.3),
        "current": pytest.approx((0.08, 0.115, 0.15)),
    }


def test_where_commas_separate_they_are_no_decimal_signs(tmp_path: Path) -> None:
    file = tmp_path / "parts.csv"
    file.write_text('Ref,Vin\nU1,"12,5 V"\n', encoding="utf-8")
    (row,) = read_table(file).rows
    assert row.quantities == {}
    assert "a comma may be a decimal sign" in row.faults[0]


def test_a_budget_for_each_row_and_open_where_a_column_lacks(tmp_path: Path) -> None:
    (tmp_path / "rules.toml").write_text(RULES, encoding="utf-8")
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for line in (
        ["Reference", "Part number", "Footprint", "Vin", "Current"],
        ["U1", "QXL9-5.0", "SOT-223", "9 V", "100 mA"],
        ["U2", "QXL9-5.0", "SOT-223", "9 V", None],
        ["U3", "QXL9-5.0", "SOT-223", None, "100 mA"],
        ["U4", "QXL9-5.0", "box", "9 V", "100 mA"],
        ["U5", "NOBODY-1", "SOT-223", "9 V", "100 mA"],
    ):
        sheet.append(line)
    book.save(tmp_path / "parts.xlsx")
    ledger = audit(tmp_path / "parts.xlsx", rule_files=[tmp_path / "rules.toml"]).ledger
    entries = {entry.ref: entry for entry in ledger.entries}
    first = entries["U1"]
    assert first.worst is not None
    # (9 − 5) V · 0.1 A + 9 V · 5 mA = 0.445 W; 40 °C + 100 K/W · 0.445 W = 84.5 °C; limit 125 − 10 °C
    assert first.worst.watts == pytest.approx(0.445)
    assert first.worst.junction == pytest.approx(84.5)
    assert first.margin == pytest.approx(30.5)
    assert first.verdict is Verdict.CLEAR
    assert {ref: entries[ref].verdict for ref in ("U2", "U3", "U4")} == dict.fromkeys(("U2", "U3", "U4"), Verdict.OPEN)
    assert any("input voltage" in missing for missing in entries["U3"].missing)
    assert any("package not understood" in missing for missing in entries["U4"].missing)
    assert ledger.not_understood == ("U5 NOBODY-1: no rule knows it (parts.xlsx row 6)",)
    assert [(f.name, f.subject) for f in ledger.findings if f.name == "no-rule"] == [("no-rule", "U5")]


def test_a_row_that_contradicts_its_part_number_stays_open(tmp_path: Path) -> None:
    (tmp_path / "rules.toml").write_text(RULES, encoding="utf-8")
    table = "Reference,Part number,Footprint,Vin,Vout,Current\nU1,QXL9-3.3,SOT-223,6 V,5 V,0.4 A\n"
    (tmp_path / "parts.csv").write_text(table, encoding="utf-8")
    (entry,) = audit(tmp_path / "parts.csv", rule_files=[tmp_path / "rules.toml"]).ledger.entries
    assert entry.verdict is not Verdict.CLEAR
    assert "its output voltage: the row says 5.00 V, the part number 3.30 V" in entry.missing


def test_a_part_with_more_outputs_than_a_row_can_hold_stays_open(tmp_path: Path) -> None:
    dual = RULES.replace("QXL9", "QXD2").replace(
        '{ pattern = "QXD2-{code}", decode = "decimal" }', '{ pattern = "QXD2" }'
    )
    channels = '\n[[rule.channel]]\nname = "A"\nvolts = "5 V"\n\n[[rule.channel]]\nname = "B"\nvolts = "3.3 V"\n'
    (tmp_path / "rules.toml").write_text(dual + channels, encoding="utf-8")
    table = "Reference,Part number,Footprint,Vin,Vout,Current\nU1,QXD2,SOT-223,6 V,5 V,0.1 A\n"
    (tmp_path / "parts.csv").write_text(table, encoding="utf-8")
    (entry,) = audit(tmp_path / "parts.csv", rule_files=[tmp_path / "rules.toml"]).ledger.entries
    assert entry.verdict is Verdict.OPEN
    assert entry.missing == ("channel A: a table's row holds one output, the part has more: B",)


@pytest.mark.parametrize(
    ("name", "data", "what"),
    [
        ("a.csv", b"no,heads\n1,2\n", "no head row with a reference column"),
        ("a.csv", b"\x00\x01\x02", "is no text file"),
        ("a.xlsx", b"PK\x03\x04 broken", "is no .xlsx workbook"),
        ("a.xlsx", b"Ref,Vin\n", "is no .xlsx workbook"),
    ],
)
def test_what_is_no_table_is_refused_in_one_line(tmp_path: Path, name: str, data: bytes, what: str) -> None:
    file = tmp_path / name
    file.write_bytes(data)
    with pytest.raises(InputError, match=what) as refused:
        read_table(file)
    assert len(str(refused.value).splitlines()) == 1
