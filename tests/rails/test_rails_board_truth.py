"""Seven real boards against hand-made truth: inputs, outputs, rails, voltages, traps. Prints the table (pytest -s)."""

from __future__ import annotations

import tomllib
from functools import lru_cache
from pathlib import Path
from typing import Any

import pytest
from rails_bench import recognised, rulebook

from analyzer.circuit import Circuit
from analyzer.part import Part
from analyzer.rail import Rails, Wiring
from analyzer.rails import find_rails
from analyzer.reading import read
from analyzer.rule import Topology
from analyzer.settings import Settings

pytestmark = pytest.mark.boards

BOARDS = (
    "buspirate5-rev10a",
    "castor-pollux",
    "esp-rust-board",
    "glasgow-revc",
    "helium",
    "kria-k26-devboard",
    "latentred-lcbringup",
)
KINDS = {
    "ldo": Topology.LINEAR,
    "ldo-adj": Topology.LINEAR,
    "ldo DNP": Topology.LINEAR,
    "buck": Topology.BUCK,
    "buck module (integrated inductor)": Topology.BUCK,
    "isolated dc-dc module": Topology.MODULE,
    "charger-linear": Topology.CHARGER,
    "shunt reference": Topology.SHUNT,
}
IDEAL_DIODES = {"kria-k26-devboard": ("U56", "U57", "U58")}
LOAD_SWITCHES = {"glasgow-revc": ("U15",)}


def truth_of(shared: Path, board: str) -> dict[str, Any]:
    return tomllib.loads((shared / "boards" / board / "truth.toml").read_text(encoding="utf-8"))


@lru_cache(maxsize=8)
def board(shared: Path, name: str) -> tuple[Circuit, tuple[Part, ...], Rails]:
    """The board with parts recognised from the truth file, so that this stage is judged alone."""
    circuit = read(shared / "boards" / name / "project", settings=Settings())
    parts = []
    for row in truth_of(shared, name).get("regulator", ()):
        reference = row.get("divider", {}).get("vref")
        by_name = row["kind"] not in ("buck", "buck module (integrated inductor)", "ldo-adj")
        parts.append(
            recognised(
                circuit.by_ref[row["ref"]][0],
                KINDS[row["kind"]],
                volts=row["vout_v"] if by_name else None,
                reference=None if by_name else reference,
                sign=-1 if row["vout_v"] < 0 else 1,
            )
        )
    for refs, topology in (
        (IDEAL_DIODES.get(name, ()), Topology.IDEAL_DIODE),
        (LOAD_SWITCHES.get(name, ()), Topology.LOAD_SWITCH),
    ):
        parts += [recognised(circuit.by_ref[ref][0], topology) for ref in refs]
    return circuit, tuple(parts), find_rails(circuit, tuple(parts), rulebook(), Settings())


def net_at(circuit: Circuit, anchor: str) -> str:
    ref, _, number = anchor.partition(".")
    (component,) = circuit.by_ref[ref]
    return next(pin.net for pin in component.pins if pin.number == number)


def wiring_of(rails: Rails, ref: str) -> Wiring:
    (wiring,) = [wiring for wiring in rails.wirings if wiring.part.ref == ref]
    return wiring


def shown(wiring: Wiring) -> str:
    if wiring.vout is None:
        return f"open: {'; '.join(wiring.why_open)}"
    low, nominal, high = wiring.vout.span.corners
    return f"{nominal:.4g} ({low:.4g} to {high:.4g})"


def wrong_rows(shared: Path, name: str, circuit: Circuit, rails: Rails) -> list[str]:
    """What differs from the truth: inputs, outputs, rails, voltages."""
    wrong: list[str] = []
    for row in truth_of(shared, name).get("regulator", ()):
        wiring = wiring_of(rails, row["ref"])
        print(
            f"{name:20} {row['ref']:5} {wiring.input_rail or '-':45} {wiring.output_rail or '-':28} "
            f"truth {row['vout_v']:<7} {shown(wiring)}"
        )
        if wiring.input_rail != rails.of_net[net_at(circuit, row["vin_anchor"])]:
            wrong.append(f"{row['ref']}: input rail {wiring.input_rail}")
        if rails.of_net.get(wiring.output_net or "") != rails.of_net[net_at(circuit, row["vout_anchor"])]:
            wrong.append(f"{row['ref']}: output net {wiring.output_net}")
        if "rail_anchor" in row and wiring.output_rail != net_at(circuit, row["rail_anchor"]):
            wrong.append(f"{row['ref']}: rail {wiring.output_rail}, not {row['rail']}")
        if wiring.vout is None:
            if not wiring.why_open:
                wrong.append(f"{row['ref']}: open without a reason")
        elif "vout_range" in row:
            # programmable: the span must hold the truth's range, and say why it is one
            low, high = row["vout_range"]
            span = wiring.vout.span
            if not (span.low <= low + 0.1 and high - 0.1 <= span.high and wiring.vout.note):
                wrong.append(f"{row['ref']}: {span} for a range {low} to {high}")
        elif abs(wiring.vout.span.nominal - row["vout_v"]) > 0.01 * abs(row["vout_v"]):
            wrong.append(f"{row['ref']}: {wiring.vout.span.nominal} V, not {row['vout_v']} V")
    return wrong


@pytest.mark.parametrize("name", BOARDS)
def test_every_row(shared: Path, name: str) -> None:
    circuit, _, rails = board(shared, name)
    assert not wrong_rows(shared, name, circuit, rails)


@pytest.mark.parametrize("name", BOARDS)
def test_every_row_with_the_shipped_rules(shared: Path, name: str) -> None:
    from analyzer.recognise import load_rulebook, recognise

    circuit, _, _ = board(shared, name)
    rules = load_rulebook([])
    parts, _ = recognise(circuit, rules, Settings())
    assert not wrong_rows(shared, name, circuit, find_rails(circuit, parts, rules, Settings()))


@pytest.mark.parametrize("name", BOARDS)
def test_rows_with_a_divider_are_solved_not_read_from_the_name(shared: Path, name: str) -> None:
    _, _, rails = board(shared, name)
    for row in truth_of(shared, name).get("regulator", ()):
        if "divider" in row:
            volts = wiring_of(rails, row["ref"]).vout
            assert volts is not None, row["ref"]
            assert volts.grade.value == "derived", row["ref"]
            assert "network solved" in volts.formula


@pytest.mark.parametrize("name", BOARDS)
def test_renamed_rails(shared: Path, name: str) -> None:
    circuit, _, rails = board(shared, name)
    for row in truth_of(shared, name).get("rail", ()):
        net = row["net"]
        if net not in circuit.net_by_name and name == "buspirate5-rev10a":
            net = "+3V3"  # the truth's alias: one net under KiCad's own name
        rail = rails.by_name[rails.of_net[net]]
        assert rail.volts is not None, net
        assert rail.volts.span.nominal == pytest.approx(row["v"], rel=0.01), net


@pytest.mark.parametrize("name", BOARDS)
def test_traps_feed_nothing(shared: Path, name: str) -> None:
    """No look-alike becomes a regulator feed; those that do pass current do so as passages."""
    truth = truth_of(shared, name)
    _, parts, rails = board(shared, name)
    real = {part.ref for part in parts} | {row["ref"] for row in truth.get("dissipator", ())}
    passing = {"D6"} if name == "esp-rust-board" else set()  # in the truth's own words it passes VBUS on
    for row in truth.get("trap", ()):
        for rail in rails.rails:
            for feed in rail.feeds:
                if feed.ref == row["ref"] and feed.kind in ("regulator", "passage"):
                    assert row["ref"] in real | passing, row["ref"]


def test_series_parts_between_output_and_rail(shared: Path) -> None:
    circuit, _, rails = board(shared, "kria-k26-devboard")
    for ref, via in (("U47", "R160"), ("U48", "R161"), ("U49", "R162"), ("U51", "R164"), ("U61", "FB3")):
        assert wiring_of(rails, ref).through == (via,)
    _, _, glasgow = board(shared, "glasgow-revc")
    assert wiring_of(glasgow, "U31").through == ("R56", "R49")
    assert wiring_of(glasgow, "U14").through == ("R7", "R48")
    assert circuit.complete


def test_bus_of_three_sources_is_fed_by_all_of_them(shared: Path) -> None:
    circuit, _, rails = board(shared, "kria-k26-devboard")
    bus = rails.by_name[rails.of_net[net_at(circuit, "U47.10")]]
    assert [feed.ref for feed in bus.feeds] == ["U56", "U57", "U58"]
    # one source can negotiate its voltage, one is a jack: nothing on the drawing says how high they go
    assert bus.volts is None
    assert "J11" in bus.why_open


def test_control_board_without_regulators(shared: Path) -> None:
    _, parts, rails = board(shared, "helium")
    assert parts == ()
    assert rails.wirings == ()
    plus = rails.by_name["+12V"]
    assert [(feed.ref, feed.kind) for feed in plus.feeds] == [("D2", "passage")]
