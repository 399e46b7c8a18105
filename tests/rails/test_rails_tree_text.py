"""The tree as text: order, indentation, width, what is said twice and what is not known."""

from __future__ import annotations

import pytest
from rails_bench import circuit, part, recognised, rulebook

from analyzer.evidence import Evidence, Grade
from analyzer.load import Draw, Gap, Loads, RailLoad
from analyzer.quantity import ZERO, Span
from analyzer.rail import Rails
from analyzer.rails import find_rails
from analyzer.rails.tree import tree_text
from analyzer.rule import Topology
from analyzer.settings import Settings


def board() -> Rails:
    buck = part(
        "U1", "XB", {"1 VIN power_in": "VSYS", "2 GND power_in": "GND", "3 SW output": "SW", "4 EN input": "VSYS"}
    )
    ldo = part("U2", "XL", {"1 VIN power_in": "+3V3", "2 GND power_in": "GND", "3 VOUT power_out": "+1V8"})
    made = circuit(
        buck,
        ldo,
        part("J1", "USB", {"1 VBUS": "VBUS", "2 GND": "GND"}),
        part("J2", "DC", {"1 +": "+9V", "2 -": "GND"}),
        part("D1", "SS14", {"1 K": "VSYS", "2 A": "VBUS"}),
        part("D2", "SS14", {"1 K": "VSYS", "2 A": "+9V"}),
        part("L1", "10u", "SW VO"),
        part("R1", "0R", "VO +3V3"),
        part("C1", "1u", "VO GND"),
        part("C2", "1u", "+1V8 GND"),
        part("U9", "MCU", {"1 VDD power_in": "+3V3", "2 VSS power_in": "GND"}),
    )
    parts = (recognised(buck, Topology.BUCK, volts=3.3), recognised(ldo, Topology.LINEAR, volts=1.8))
    return find_rails(made, parts, rulebook(), Settings())


EXPECTED = """\
+9V  8.55 V..9.45 V, nominal 9.00 V presumed  [from connector J2]
  D2 → VSYS  4.25 V..9.25 V, nominal 4.65 V presumed
    U1 buck via L1, R1 → +3V3  3.30 V ruled
      U2 linear → +1V8  1.80 V ruled
VBUS  4.75 V..5.25 V, nominal 5.00 V presumed  [from connector J1]
  D1 → VSYS  4.25 V..9.25 V, nominal 4.65 V presumed  (what it feeds is shown
      above)
ground: GND
"""


def test_whole_text() -> None:
    assert tree_text(board()) == EXPECTED


def test_no_line_is_wider_than_asked() -> None:
    for width in (40, 60, 80):
        assert max(len(line) for line in tree_text(board(), width=width).splitlines()) <= width


def test_loads_and_gaps() -> None:
    amps = Evidence("current", Span(0.08, 0.1, 0.15), "A", "stated", Grade.STATED)
    draw = Draw("U9", "/U9", "+3V3", amps, "stated")
    gap = Gap("U9", "/U9", "+1V8", "MCU", "/")
    loads = Loads(
        {
            "+3V3": RailLoad("+3V3", (draw,), (), amps.span),
            "+1V8": RailLoad("+1V8", (), (gap,), ZERO),
        }
    )
    text = tree_text(board(), loads)
    assert "+3V3 3.30 V ruled, load 80.0 mA..150 mA, nominal 100 mA" in " ".join(text.split())
    assert "load not known, 1 part without a current" in " ".join(text.split())


def test_circle_of_feeds_is_written_once_and_ends() -> None:
    chips = [
        part(ref, "XL", {"1 VIN power_in": source, "2 GND power_in": "GND", "3 VOUT power_out": sink})
        for ref, source, sink in (("U1", "A", "B"), ("U2", "B", "A"))
    ]
    made = circuit(*chips, part("C1", "1u", "A GND"), part("C2", "1u", "B GND"))
    rails = find_rails(
        made, tuple(recognised(chip, Topology.LINEAR, volts=3.3) for chip in chips), rulebook(), Settings()
    )
    lines = tree_text(rails).splitlines()
    assert lines[:3] == [
        "A  3.30 V ruled  [in a circle of feeds]",
        "  U1 linear → B  3.30 V ruled",
        "    U2 linear → A  3.30 V ruled  (what it feeds is shown above)",
    ]


def test_unknown_is_listed_with_its_reason() -> None:
    chip = part("U1", "XL", {"1 VIN power_in": "DC_IN", "2 GND power_in": "GND", "3 VOUT power_out": "OUT"})
    made = circuit(chip, part("J1", "Jack", {"1 P": "DC_IN", "2 N": "GND"}), part("C1", "1u", "OUT GND"))
    text = tree_text(find_rails(made, (recognised(chip, Topology.LINEAR, volts=5.0),), rulebook(), Settings()))
    tail = " ".join(text.partition("not known:\n")[2].split())
    assert tail == "DC_IN comes from J1 and nothing states its voltage U1: input voltage not known"


@pytest.mark.boards
def test_command_on_a_real_board(shared, capsys) -> None:  # type: ignore[no-untyped-def]
    from analyzer.cli import main

    assert main(["rails", str(shared / "boards" / "esp-rust-board" / "project")]) == 0
    out = capsys.readouterr().out
    assert "U5 buck via L1 → +3V3" in out
    assert "Q1 → +5V" in out
    assert max(len(line) for line in out.splitlines()) <= 80
