"""Junctions that feed their own heat: where they come to rest, and where there is no rest at all."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from heat_kit import Bench, names, number

from analyzer.circuit import Circuit
from analyzer.findings.base import Verdict
from analyzer.heat import close_entries
from analyzer.ledger import Entry
from analyzer.load import Loads, Pulse
from analyzer.quantity import Span
from analyzer.rail import Feed, Rail, Rails
from analyzer.rule import BoardClass, Rulebook, ThermalFigure, Topology

EXACT = Span.exact


def blocking(leakage: float, *, other_feed: bool = True, load: float = 0.0) -> Entry:
    """A diode on a 12 V rail in 40 °C and 60 K/W that may have to block the rail's own voltage."""
    bench = Bench(
        topology=Topology.SERIES_DIODE,
        vin=EXACT(12.0),
        vout=EXACT(12.0),
        draws=((EXACT(load), None),),
        figures={"forward_drop": 0.4, "reverse_leakage": leakage, "junction_max": 125.0},
        theta=60.0,
    )
    part, wiring, rail_load = bench.parts()
    assert rail_load is not None
    wiring = replace(wiring, has_other_feed=other_feed)
    rails = Rails((Rail(rail_load.rail, (), feeds=(Feed(part.ref, "passage"),)),), (wiring,))
    settings = replace(bench.settings, site=bench.site, board=bench.board)
    book, loads = Rulebook((), (), (), ()), Loads({rail_load.rail: rail_load})
    (entry,) = close_entries(Circuit("test", (), ()), (part,), rails, loads, book, settings)
    return entry


def lower_rest(scale: float) -> float:
    """Cooler solution [K] of x = scale · 2^((15 + x)/10), by bisection below the tangent at 10/ln 2."""
    low, high = 0.0, 10.0 / math.log(2.0)
    for _ in range(100):
        middle = (low + high) / 2
        low, high = (middle, high) if scale * 2.0 ** ((15.0 + middle) / 10.0) > middle else (low, middle)
    return low


# 60 K/W · 12 V · I, doubling every 10 K from 25 °C (common practice, from memory): a rest exists while the curve still
# touches the straight line, where x = 10/ln 2 = 14.427 K; that is up to 14.427/(60 · 12 · 2^2.9427) = 2.606 mA
@pytest.mark.parametrize(("leakage", "celsius"), [(1e-3, 42.40606), (2e-3, 46.30556), (2.5e-3, 50.65608)])
def test_leakage_comes_to_rest_below_the_tangent(leakage: float, celsius: float) -> None:
    entry = blocking(leakage)
    assert entry.worst is not None
    assert celsius == pytest.approx(40.0 + lower_rest(60.0 * 12.0 * leakage), abs=1e-5)
    assert entry.worst.junction == pytest.approx(celsius, abs=1e-4)
    assert entry.verdict is Verdict.CLEAR


@pytest.mark.parametrize("leakage", [2.7e-3, 5e-3, 0.1])
def test_leakage_runs_away_above_it(leakage: float) -> None:
    entry = blocking(leakage)
    assert entry.verdict is Verdict.OVER
    assert "thermal-runaway" in names(entry)
    assert entry.worst is not None
    assert entry.worst.junction is not None
    assert entry.worst.junction > 125.0


def test_leakage_is_no_matter_where_nothing_else_feeds_the_rail() -> None:
    entry = blocking(5e-3, other_feed=False)
    assert entry.worst is not None
    assert entry.worst.watts == 0.0


def test_forward_heat_counts_where_it_is_the_greater() -> None:
    # 0.4 V · 1 A against 12 V · 1 mA · 2^((64 - 25)/10) = 0.179 W
    entry = blocking(1e-3, load=1.0)
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(0.4)
    assert entry.worst.junction == pytest.approx(64.0)


def test_a_hot_efficiency_comes_to_rest() -> None:
    # TI SNVA951 section 9 lowers 87 % by 2 % in 60 K; T = 60 + 25 · 9.9 · (1/(0.87 - (T - 25) · 0.02/60) - 1)
    bench = Bench(
        topology=Topology.BUCK,
        vin=EXACT(24.0),
        vout=EXACT(3.3),
        draws=((EXACT(3.0), None),),
        figures={"efficiency": 0.87, "efficiency_hot_loss": 0.02 / 60.0, "junction_max": 150.0},
        theta=25.0,
    ).in_air(60.0)
    entry = bench.entry()
    assert entry.worst is not None
    hot = entry.worst.junction
    assert hot is not None
    assert hot == pytest.approx(106.10669, abs=1e-4)
    assert hot == pytest.approx(60.0 + 25.0 * 9.9 * (1.0 / (0.87 - (hot - 25.0) * 0.02 / 60.0) - 1.0))


def test_a_pass_transistor_is_hottest_at_its_highest_input_and_lowest_output() -> None:
    bench = Bench(
        topology=Topology.SERIES_TRANSISTOR,
        vin=Span(11.5, 12.0, 12.5),
        vout=Span(4.9, 5.0, 5.1),
        draws=((Span(0.1, 0.5, 1.0), None),),
        figures={"on_resistance": 0.02, "junction_max": 150.0},
        theta=5.0,
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.name == "input high, output low, load high"
    assert entry.worst.watts == pytest.approx((12.5 - 4.9) * 1.0)
    assert entry.worst.junction == pytest.approx(78.0)
    assert entry.verdict is Verdict.CLEAR


def test_the_dip_of_an_efficiency_map_inside_the_input_span_is_the_worst_corner() -> None:
    from analyzer.rule import EfficiencyMap

    # 80 % at 12 V between 90 % at 9 V and 88 % at 16 V: 5 V · 1 A · (1/0.8 - 1) = 1.25 W at 12 V
    points = tuple(
        (load, vin, EXACT(eta)) for load in (0.1, 1.0) for vin, eta in ((9.0, 0.9), (12.0, 0.8), (16.0, 0.88))
    )
    bench = Bench(
        topology=Topology.BUCK,
        vin=Span(9.0, 10.0, 16.0),
        vout=EXACT(5.0),
        draws=((EXACT(1.0), None),),
        figures={"junction_max": 125.0},
        efficiency_map=EfficiencyMap(points, number(Span(0.8, 0.88, 0.9), "1")),
        theta=20.0,
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.name == "input inside"
    assert entry.worst.channels[0].vin == 12.0
    assert entry.worst.watts == pytest.approx(1.25)


FOOTPRINT = tuple((r, r * c) for r, c in ((0.8, 6e-5), (1.6, 5e-4), (4.5, 0.03), (24, 0.16), (0.1, 1000), (100, 0.5)))


def test_a_pulse_rides_on_the_steady_rest_and_the_network_is_stretched_to_a_larger_theta() -> None:
    # 1 V · (0.1 A steady, 0.4 A more for 0.1 s every second); θ 150 K/W stands above the network's 131
    figure = ThermalFigure("SOT-223", "test", theta_ja=number(150.0, "K/W"), board=BoardClass.HIGH, foster=FOOTPRINT)
    pulse = Pulse(EXACT(0.4), 0.1, 1.0)
    bench = Bench(vin=EXACT(6.0), vout=EXACT(5.0), draws=((EXACT(0.1), None), (EXACT(0.04), pulse)), thermal=(figure,))
    # ST Doc 7381, Table 6: 2 W in this rhythm make 35.09 K, so 0.4 W make 7.018 K
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.junction == pytest.approx(40.0 + 0.1 * 150.0 + 7.018 * 150.0 / 131.0, abs=0.01)
