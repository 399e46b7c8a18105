"""Nodal analysis: Kirchhoff's current law at every free node, and what has no path to a source."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analyzer.draws.network import Branch, current, solve

nodes = st.sampled_from([f"n{i}" for i in range(8)])
branches = st.lists(
    st.tuples(nodes, nodes, st.floats(min_value=1.0, max_value=1e6)).filter(lambda b: b[0] != b[1]), max_size=20
).map(lambda rows: [Branch(f"r{n}", *row) for n, row in enumerate(rows)])


@given(branches, st.dictionaries(st.sampled_from(["n0", "n1", "n2"]), st.floats(-48, 48), min_size=1))
def test_currents_at_free_nodes_cancel(listed, fixed):
    volts = solve(listed, fixed)
    for node in volts.keys() - fixed.keys():
        out = [current(b, volts) * (1 if b.a == node else -1) for b in listed if node in (b.a, b.b)]
        assert sum(out) == pytest.approx(0, abs=1e-9 + 1e-9 * max(map(abs, out)))


@given(branches, st.dictionaries(st.sampled_from(["n0", "n1", "n2"]), st.floats(-48, 48), min_size=1))
def test_no_node_lies_outside_the_sources(listed, fixed):
    volts = solve(listed, fixed)
    assert all(min(fixed.values()) - 1e-12 <= v <= max(fixed.values()) + 1e-12 for v in volts.values())


@given(branches, st.dictionaries(st.sampled_from(["n0", "n1", "n2"]), st.floats(-48, 48), min_size=1), st.randoms())
def test_order_of_branches_does_not_matter(listed, fixed, shuffle):
    turned = listed.copy()
    shuffle.shuffle(turned)
    first, second = solve(listed, fixed), solve(turned, fixed)
    assert first.keys() == second.keys()
    assert all(second[node] == pytest.approx(volts, abs=1e-9) for node, volts in first.items())


def test_six_decades_of_resistance_cost_no_digit():
    # four nodes on one source: all at its voltage, whatever the order
    rows = [("n0", "n1", 747483.0), ("n0", "n2", 1.0), ("n0", "n2", 397856.0), ("n0", "n3", 1.0)]
    volts = solve([Branch(f"r{n}", *row) for n, row in enumerate(rows)], {"n1": 4.0})
    assert volts == pytest.approx(dict.fromkeys(("n0", "n1", "n2", "n3"), 4.0), rel=1e-15)


def test_bridge_by_hand():
    """Wheatstone bridge 10 V, 1k/2k and 2k/4k: balanced, no current in the bridge resistor."""
    rows = [("in", "x", 1e3), ("x", "0", 2e3), ("in", "y", 2e3), ("y", "0", 4e3), ("x", "y", 5e3)]
    listed = [Branch(f"r{n}", *row) for n, row in enumerate(rows)]
    volts = solve(listed, {"in": 10.0, "0": 0.0})
    assert volts["x"] == pytest.approx(20 / 3)
    assert current(listed[4], volts) == pytest.approx(0, abs=1e-15)


def test_what_floats_is_left_out():
    volts = solve([Branch("r1", "a", "b", 10.0), Branch("r2", "c", "0", 10.0)], {"0": 0.0})
    assert volts == {"0": 0.0, "c": 0.0}
    assert current(Branch("r1", "a", "b", 10.0), volts) == 0.0
