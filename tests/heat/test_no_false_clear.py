"""A clear verdict must be impossible while anything that the budget needs is missing, or while anything is exceeded."""

from __future__ import annotations

import pytest
from heat_kit import Bench, close, names, number
from hypothesis import given, settings
from hypothesis import strategies as st

from analyzer.findings.base import Finding, Verdict, Weight
from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.rule import Curve, EfficiencyMap, Topology
from analyzer.settings import Coupling, Settings

GOOD = Bench()

OPEN_PART = Finding("doubt", Weight.OPEN, "U1", "something is not understood", "look", key="/U1")
OPEN_REF = Finding("doubt", Weight.OPEN, "U1", "something is not understood", "look")
OPEN_INPUT = Finding("doubt", Weight.OPEN, "IN_U1", "rail not understood", "look")
OPEN_OUTPUT = Finding("doubt", Weight.OPEN, "OUT_U1", "rail not understood", "look")

LACKS = {
    "input voltage": {"vin": None},
    "output voltage": {"vout": None},
    "a draw": {"gaps": 1},
    "many draws": {"gaps": 40, "draws": ()},
    "an output rail": {"has_load": False},
    "a current figure": {"figures": {"junction_max": 125.0}},
    "a limit": {"figures": {"quiescent": 0.0}},
    "a thermal path": {"theta": None, "package": None},
    "a path for a known package": {"theta": None, "package": "SOT-223"},
    "the rule": {"has_rule": False, "figures": {}},
    "part of the drawing": {"complete": False},
    "an explanation of its wiring": {"why_open": ("two outputs are joined",)},
    "a channel that is on": {"is_off": True},
    "fitting": {"fitted": False},
    "an answer about the part": {"known": (OPEN_PART,)},
    "an answer about its reference": {"known": (OPEN_REF,)},
    "an answer about its input": {"known": (OPEN_INPUT,)},
    "an answer about its output": {"known": (OPEN_OUTPUT,)},
    "an efficiency": {"topology": Topology.BUCK},
    "a limit of a switch": {"topology": Topology.EFUSE, "figures": {"on_resistance": 0.01}},
}


def test_the_whole_budget_is_clear() -> None:
    # 1.7 V · 0.1 A · 50 K/W = 8.5 K above 40 °C
    entry = GOOD.entry()
    assert entry.verdict is Verdict.CLEAR
    assert entry.missing == ()
    assert entry.worst is not None
    assert entry.worst.junction == pytest.approx(48.5)


@pytest.mark.parametrize("lack", list(LACKS))
def test_any_one_lack_keeps_it_open(lack: str) -> None:
    entry = GOOD.but(**LACKS[lack]).entry()
    assert entry.verdict is Verdict.OPEN
    assert entry.missing


@given(
    st.sets(st.sampled_from([lack for lack in LACKS if "switch" not in lack]), min_size=1),
    st.floats(0.0, 5.0),
    st.booleans(),
    st.floats(1.0, 300.0),
)
@settings(max_examples=400, deadline=None)
def test_random_lacks_never_give_clear_or_tight(lacks: set[str], amps: float, wide: bool, theta: float) -> None:
    bench = GOOD.but(draws=((Span(0.0, amps / 2, amps) if wide else Span.exact(amps), None),), theta=theta)
    for lack in sorted(lacks):
        changes = dict(LACKS[lack])
        if "known" in changes:
            changes["known"] = (*bench.known, *changes["known"])  # type: ignore[misc]
        bench = bench.but(**changes)
    entry = bench.entry()
    # a later lack may put back what an earlier one took (figures): only judge what is really lacking
    really = bench.theta is None or any(
        (
            bench.vin is None,
            bench.vout is None,
            bench.gaps,
            not bench.has_load,
            "junction_max" not in bench.figures,
            "quiescent" not in bench.figures,
            not bench.complete,
            bench.why_open,
            bench.is_off,
            not bench.fitted,
            bench.known,
            not bench.has_rule,
            bench.topology is Topology.BUCK,
        )
    )
    assert really
    assert entry.verdict in (Verdict.OPEN, Verdict.OVER)
    if not bench.fitted:
        assert entry.verdict is Verdict.OPEN
    assert entry.missing


def test_a_known_part_already_over_is_over_though_draws_are_missing() -> None:
    # 1.7 V · 2 A · 50 K/W = 170 K above 40 °C, and more draws to come
    entry = GOOD.but(draws=((Span.exact(2.0), None),), gaps=3).entry()
    assert entry.verdict is Verdict.OVER
    assert entry.missing


def test_a_neighbour_without_known_heat_keeps_it_open() -> None:
    pair = Coupling("U1", "U2", number(5.0, "K/W"))
    both = (GOOD, GOOD.but(ref="U2", gaps=1))
    first, _ = close(both, Settings(board=GOOD.board, coupling=(pair,)))
    assert first.verdict is Verdict.OPEN
    assert any("U2" in line for line in first.missing)


def test_a_neighbour_that_does_not_exist_keeps_it_open() -> None:
    pair = Coupling("U1", "U77", number(5.0, "K/W"))
    (entry,) = close((GOOD,), Settings(board=GOOD.board, coupling=(pair,)))
    assert entry.verdict is Verdict.OPEN


@pytest.mark.parametrize("altitude", [11_001.0, 29_000.0])
def test_an_altitude_beyond_the_formula_keeps_it_open(altitude: float) -> None:
    assert GOOD.in_air(altitude=altitude).entry().verdict is Verdict.OPEN


def test_a_load_beyond_its_table_keeps_it_open() -> None:
    table = Curve(((0.0, Span.exact(0.001)), (0.05, Span.exact(0.002))), "load", number(Span(0.001, 0.001, 0.002), "A"))
    entry = GOOD.but(figures={"junction_max": 125.0}, curves={"ground_current": table}).entry()
    assert entry.verdict is Verdict.OPEN
    assert "figure-out-of-table" in names(entry)


def test_an_input_outside_the_efficiency_map_keeps_it_open() -> None:
    points = tuple((load, vin, Span.exact(0.9)) for load in (0.1, 1.0) for vin in (6.0, 12.0))
    mapped = EfficiencyMap(points, number(0.9, "1"))
    bench = GOOD.but(topology=Topology.BUCK, vin=Span(5.5, 8.0, 10.0), efficiency_map=mapped)
    assert bench.entry().verdict is Verdict.OPEN
    assert bench.but(vin=Span(6.0, 8.0, 10.0)).entry().verdict is Verdict.CLEAR


def test_the_peak_of_a_pulse_counts_against_the_rated_current() -> None:
    pulse = Pulse(Span.exact(2.0), 0.001, 1.0)
    entry = GOOD.but(draws=((Span.exact(0.002), pulse),)).with_figures(output_current_max=1.0).entry()
    assert entry.verdict is Verdict.OVER
    assert "current-over-rating" in names(entry)


def test_the_heat_of_a_switch_follows_the_peaks_not_the_average_current() -> None:
    # 20 A for 1 ms every 10 ms through 50 mΩ: 20 W for a tenth of the time is 2 W; 2 A of average would be 0.2 W
    pulse = Pulse(Span.exact(20.0), 0.001, 0.010)
    bench = GOOD.but(
        topology=Topology.LOAD_SWITCH,
        vout=Span.exact(5.0),
        draws=((Span.exact(2.0), pulse),),
        figures={"on_resistance": 0.05, "junction_max": 125.0},
        theta=20.0,
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(2.0 + 0.1 * 18.0)
    assert entry.verdict is Verdict.OVER


def test_a_hump_of_heat_between_two_points_of_the_efficiency_table_is_found() -> None:
    # η from 0.50 at 0.1 A to 0.95 at 1 A on a straight line: 3.3 V · I · (1/η − 1) is greatest where η = √0.45
    table = Curve(((0.1, Span.exact(0.5)), (1.0, Span.exact(0.95))), "load", number(Span(0.5, 0.95, 0.95), "1"))
    bench = GOOD.but(
        topology=Topology.BUCK,
        vin=Span.exact(12.0),
        draws=((Span(0.1, 1.0, 1.0), None),),
        figures={"junction_max": 125.0},
        curves={"efficiency": table},
    )
    entry = bench.entry()
    eta = 0.45**0.5
    load = (eta - 0.45) / 0.5
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(3.3 * load * (1 / eta - 1), rel=1e-6)
    assert entry.worst.watts > 3 * 3.3 * (1 / 0.95 - 1)
