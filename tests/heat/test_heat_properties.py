"""What must hold for any regulator: more of anything that heats never cools, wider spans never help."""

from __future__ import annotations

import random

import pytest
from heat_kit import Bench
from hypothesis import given, settings
from hypothesis import strategies as st

from analyzer.findings.base import Verdict
from analyzer.ledger import Entry
from analyzer.losses import model_of
from analyzer.losses.base import End, Point
from analyzer.quantity import Span
from analyzer.rule import Topology

TERMS: dict[str, float | Span] = {
    "high_side_resistance": Span(0.05, 0.08, 0.15),
    "low_side_resistance": Span(0.02, 0.03, 0.05),
    "switching_frequency": Span(450e3, 500e3, 550e3),
    "rise_time": 10e-9,
    "fall_time": 12e-9,
    "quiescent": Span(1e-4, 2e-4, 5e-4),
    "junction_max": 125.0,
}
KINDS: dict[Topology, dict[str, float | Span]] = {
    Topology.LINEAR: {"quiescent": Span(1e-3, 2e-3, 5e-3), "junction_max": 125.0},
    Topology.LINEAR_FLOATING: {"feedback_current": Span(4e-5, 5e-5, 1e-4), "junction_max": 125.0},
    Topology.BUCK: TERMS,
    Topology.BUCK_BOOST: {"efficiency": Span(0.8, 0.87, 0.92), "junction_max": 125.0},
    Topology.LOAD_SWITCH: {"on_resistance": Span(0.02, 0.03, 0.05), "resistance_tempco": 0.004, "junction_max": 125.0},
    Topology.SERIES_DIODE: {"forward_drop": Span(0.3, 0.4, 0.5), "junction_max": 125.0},
}
NEEDS_HEADROOM = frozenset({Topology.LINEAR, Topology.LINEAR_FLOATING, Topology.BUCK})

spans = st.tuples(st.floats(0, 1), st.floats(0, 1), st.floats(0, 1)).map(sorted)
kinds = st.sampled_from(list(KINDS))


@st.composite
def benches(draw: st.DrawFn) -> Bench:
    kind = draw(kinds)
    vout = [1.0 + 4.0 * x for x in draw(spans)]
    base = vout[2] + 0.5 if kind in NEEDS_HEADROOM else 3.0
    vin = [base + 20.0 * x for x in draw(spans)]
    load = [1e-3 + 2.0 * x for x in draw(spans)]
    theta = [5.0 + 60.0 * x for x in draw(spans)]
    bench = Bench(
        topology=kind,
        vin=Span(*vin),
        vout=Span(*vout),
        draws=((Span(*load), None),),
        figures=KINDS[kind],
        theta=Span(*theta),
    )
    return bench.in_air(Span(-10.0, 25.0, draw(st.floats(25.0, 85.0))), Span(0.0, 0.0, draw(st.floats(0.0, 5000.0))))


def junction(entry: Entry) -> float:
    assert entry.worst is not None
    assert entry.worst.junction is not None
    return entry.worst.junction if "thermal-runaway" not in {f.name for f in entry.findings} else 1e9


def more(span: Span, by: float) -> Span:
    return Span(span.low + by, span.nominal + by, span.high + by)


@given(benches(), st.floats(1e-6, 1.0))
@settings(max_examples=120, deadline=None)
def test_more_load_never_cools(bench: Bench, by: float) -> None:
    heavier = bench.but(draws=((more(bench.draws[0][0], by), None),))
    assert junction(heavier.entry()) >= junction(bench.entry()) - 1e-9


@given(benches(), st.floats(1e-6, 50.0), st.sampled_from(["ambient", "theta", "altitude", "rise"]))
@settings(max_examples=120, deadline=None)
def test_worse_surroundings_never_cool(bench: Bench, by: float, what: str) -> None:
    site = bench.site
    ambient, altitude = site.ambient.span, site.altitude.span
    if what == "theta":
        assert isinstance(bench.theta, Span)
        worse = bench.but(theta=more(bench.theta, by))
    elif what == "ambient":
        worse = bench.in_air(more(ambient, by), altitude)
    elif what == "rise":
        worse = bench.in_air(ambient, altitude, by)
    else:
        worse = bench.in_air(ambient, more(altitude, 100.0 * by))
    assert junction(worse.entry()) >= junction(bench.entry()) - 1e-9


@given(benches(), st.floats(0.0, 0.4), st.sampled_from(["vin", "vout", "draws", "theta"]))
@settings(max_examples=120, deadline=None)
def test_a_wider_span_never_helps(bench: Bench, by: float, what: str) -> None:
    def wider(span: Span) -> Span:
        return Span(max(0.0, span.low - by), span.nominal, span.high + by)

    if what == "draws":
        worse = bench.but(draws=((wider(bench.draws[0][0]), None),))
    elif what == "vin":
        assert bench.vin is not None
        worse = bench.but(vin=wider(bench.vin))
    elif what == "vout":
        assert bench.vout is not None
        worse = bench.but(vout=wider(bench.vout))
    else:
        assert isinstance(bench.theta, Span)
        worse = bench.but(theta=wider(bench.theta))
    assert junction(worse.entry()) >= junction(bench.entry()) - 1e-9


@given(benches(), st.integers(0, 2**32))
@settings(max_examples=120, deadline=None)
def test_no_sampled_point_is_hotter_than_the_worst_corner(bench: Bench, seed: int) -> None:
    _, wiring, load = bench.parts()
    model = model_of(wiring)
    worst = junction(bench.entry())
    assert load is not None
    assert bench.vin is not None
    assert bench.vout is not None
    entry = bench.entry()
    assert entry.worst is not None
    rng = random.Random(seed)

    def pick(span: Span) -> float:
        return rng.uniform(span.low, span.high)

    for _ in range(20):
        point = Point(pick(bench.vin), pick(bench.vout), pick(load.known), min(worst, 900.0))
        watts = model.at(point, rng.choice(list(End))).watts
        assert watts <= entry.worst.watts * (1 + 1e-6) + 1e-9 or worst == 1e9


@given(benches())
@settings(max_examples=120, deadline=None)
def test_the_verdict_follows_the_junction(bench: Bench) -> None:
    entry = bench.entry()
    hot = junction(entry)
    # house policy: over above 125 - 10, tight above 125 - 25
    if hot > 115.0:
        assert entry.verdict is Verdict.OVER
    if entry.verdict is Verdict.CLEAR:
        assert hot <= 100.0
        assert entry.missing == ()


@given(benches())
@settings(max_examples=60, deadline=None)
def test_headroom_ends_just_where_the_verdict_turns(bench: Bench) -> None:
    entry = bench.entry()
    room = entry.headroom
    if room is None or entry.verdict in (Verdict.OVER, Verdict.TIGHT):
        return
    load = bench.draws[0][0]
    for further, bound in ((room.tight, 100.0), (room.over, 115.0)):
        if not 1e-3 < further < 100.0:
            continue
        under = bench.but(draws=((Span(load.low, load.nominal, load.high + further * 0.999), None),)).entry()
        above = bench.but(draws=((Span(load.low, load.nominal, load.high + further * 1.001 + 1e-6), None),)).entry()
        assert junction(under) <= bound + 1e-6
        assert junction(above) > bound - 1e-3


@pytest.mark.parametrize("by", [0.0, 0.05])
def test_the_closed_form_of_headroom_agrees_with_the_search(by: float) -> None:
    # (115 - 40)/50 = 1.5 W; less 12 V · 2 mA; over 12 - 3.3 V
    bench = Bench(
        vin=Span(10.0, 12.0 - by, 12.0),
        draws=((Span.exact(0.05), None),),
        figures={"quiescent": 0.002, "junction_max": 125.0},
    )
    entry = bench.entry()
    expected = (1.5 - 0.024) / 8.7
    assert entry.greatest_load == pytest.approx(expected, rel=1e-9)
    assert entry.headroom is not None
    assert entry.headroom.over == pytest.approx(expected - 0.05, rel=1e-9)
    assert entry.headroom.tight == pytest.approx((1.2 - 0.024) / 8.7 - 0.05, rel=1e-9)
