"""How much more a part can carry, worked by hand."""

from __future__ import annotations

import pytest
from heat_kit import Bench, number

from analyzer.ledger import Headroom
from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.rail import Outside
from analyzer.rule import Curve, Topology

EXACT = Span.exact


def room(bench: Bench) -> Headroom:
    found = bench.entry().headroom
    assert found is not None
    return found


def test_a_linear_part_ends_where_its_junction_meets_tight_and_limit() -> None:
    # 1.7 V · I · 50 K/W = 60 K to 100 °C and 75 K to 115 °C; 0.1 A is used already
    entry = Bench().entry()
    assert entry.greatest_load == pytest.approx(75 / 85)
    found = room(Bench())
    assert (found.tight, found.over) == pytest.approx((60 / 85 - 0.1, 75 / 85 - 0.1))
    assert found.bounded_by == "junction"


@pytest.mark.parametrize(
    ("figures", "tight", "over", "bound"),
    [
        # the house policy takes nine tenths of a rated current
        ({"output_current_max": 0.5}, 0.45, 0.5, "rated current"),
        ({"output_current_max": 0.75}, 0.675, 0.75, "rated current"),
        ({"output_current_max": 5.0}, 60 / 85, 75 / 85, "junction"),
        ({"output_current_max": 0.5, "current_limit": Span(0.4, 0.6, 0.8)}, 0.4, 0.4, "rated current"),
    ],
)
def test_ratings_end_it_before(figures: dict[str, float | Span], tight: float, over: float, bound: str) -> None:
    found = room(Bench().with_figures(**figures))
    assert (found.tight + 0.1, found.over + 0.1) == pytest.approx((tight, over))
    assert found.bounded_by == bound


@pytest.mark.parametrize(("vin", "over"), [(4.11, 0.559), (3.59, 0.0), (4.7, 1.0)])
def test_a_dropout_over_load_ends_it(vin: float, over: float) -> None:
    # 0.3 V at 0.1 A rises to 1.3 V at 1 A: 0.81 V at 0.559 A; less than 0.3 V left carries nothing; 1.4 V more than
    # the table has
    table = Curve(((0.1, EXACT(0.3)), (1.0, EXACT(1.3))), "load", number(Span(0.3, 0.5, 1.3), "V"))
    found = room(Bench(vin=EXACT(vin), curves={"dropout": table}, draws=((EXACT(0.0), None),), theta=1.0))
    assert found.over == pytest.approx(over)


def test_a_part_that_is_too_hot_without_load_carries_none() -> None:
    # 5 V · 0.5 A of its own · 50 K/W = 125 K
    found = room(Bench(figures={"quiescent": 0.5, "junction_max": 125.0}))
    assert (found.tight, found.over) == (0.0, 0.0)


def test_parts_that_set_their_load_or_get_cooler_with_it_have_no_headroom() -> None:
    charger = Bench(
        topology=Topology.CHARGER,
        vout=EXACT(4.2),
        figures={"charge_current": 0.1, "battery_low": 3.0, "junction_max": 125.0},
    )
    assert charger.entry().headroom is None
    shunt = Bench(
        topology=Topology.SHUNT,
        vin=EXACT(24.0),
        vout=EXACT(12.0),
        draws=((EXACT(0.01), None),),
        figures={"junction_max": 150.0},
        outside=(Outside("R1", "resistor", number(1000.0, "Ω")),),
    )
    assert shunt.entry().headroom is None
    assert Bench(theta=None, package=None).entry().headroom is None


def test_the_room_beside_a_pulse_is_counted_from_its_peak() -> None:
    found = room(Bench(draws=((EXACT(0.05), Pulse(EXACT(0.5), 1.0, 10.0)),)))
    assert found.over == pytest.approx(75 / 85 - 0.5)
