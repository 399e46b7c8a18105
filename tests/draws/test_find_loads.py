"""The draws stage as a whole: what must not change its result, and circuits that cut across its rooms."""

from __future__ import annotations

import pytest
from draws_kit import chip, circuit, loads, one_regulator, part, rails, vreg, wire

from analyzer.quantity import Span
from analyzer.rail import Rail, Rails
from analyzer.rule import Topology


def test_an_unrelated_part_changes_nothing():
    board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "10 mA"}), part("R1", ["+3V3", "SIG"], "1k"))
    more = circuit(*board.components, part("R9", ["A", "B"], "1k"), part("U9", [("1", "X", "input", "A")], lib="x:y"))
    assert loads(board, known) == loads(more, known)


def test_names_of_nets_do_not_matter():
    def made(rail):
        u1 = vreg("U1", "+5V", rail)
        more = [
            chip("U2", rail, fields={"I_load": "10 mA"}),
            part("R1", [rail, "T"], "1k"),
            part("R2", ["T", "GND"], "1k"),
        ]
        found = loads(circuit(u1, *more), rails({"+5V": 5, rail: 3.3}, [wire(u1, "+5V", rail)]))
        return found.by_rail["+5V"].total, found.by_rail[rail].total

    assert made("+3V3") == made("/psu/AUX") == made("Net-(U1-VOUT)")


def test_order_of_parts_does_not_matter():
    board, known = one_regulator(
        chip("U2", "+3V3", fields={"I_load": "10 mA"}),
        chip("U10", "+3V3"),
        part("R1", ["+3V3", "GND"], "1k"),
        part("R2", ["+3V3", "SIG"], "1k"),
        part("J1", ["+3V3", "SIG", "GND"], lib="Connector:Conn_01x03"),
    )
    turned = circuit(*reversed(board.components))
    assert loads(board, known) == loads(turned, known)


def test_dropping_resistor_before_a_reference_that_no_rule_knows():
    u2 = part("U2", [("1", "K", "passive", "VREF"), ("2", "A", "passive", "GND")])
    known = rails({"+12V": 12, "VREF": 10})
    unfed = tuple(Rail("VREF", ("VREF",), r.volts) if r.name == "VREF" else r for r in known.rails)
    board = circuit(u2, part("R1", ["+12V", "VREF"], "1k/1%"), chip("U3", "VREF", fields={"I_load": "1 mA"}))
    found = loads(board, Rails(unfed, (), of_net=known.of_net))
    assert found.by_rail["+12V"].total.nominal == pytest.approx(0.002)
    assert found.by_rail["VREF"].total == Span.exact(0.001)


def test_shunt_regulator_s_resistor_is_counted_once():
    u2 = part("U2", [("1", "VOUT", "passive", "VREF"), ("2", "GND", "passive", "GND")])
    shunt = wire(u2, "+12V", "VREF", Topology.SHUNT)
    board = circuit(u2, part("R1", ["+12V", "VREF"], "1k/1%"), chip("U3", "VREF", fields={"I_load": "1 mA"}))
    found = loads(board, rails({"+12V": 12, "VREF": 10}, [shunt]))
    assert found.by_rail["+12V"].total.nominal == pytest.approx(0.002)
    assert found.by_rail["VREF"].total == Span.exact(0.001)
