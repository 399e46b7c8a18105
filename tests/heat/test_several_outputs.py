"""Parts with several outputs: one entry, the heat summed over the package."""

from __future__ import annotations

from dataclasses import replace

import pytest
from heat_kit import Bench

from analyzer.circuit import Circuit
from analyzer.findings.base import Verdict
from analyzer.heat import close_entries
from analyzer.ledger import Entry
from analyzer.load import Loads, Pulse
from analyzer.quantity import Span
from analyzer.rail import Rails
from analyzer.rule import Rulebook
from analyzer.settings import Settings

EXACT = Span.exact


def double(first: Bench, second: Bench, *, lost: bool = False) -> Entry:
    """The two benches' channels as one part, in the first one's package."""
    part, one, load_one = first.parts()
    _, two, load_two = second.parts()
    channels = (replace(one.channel, name="A"), replace(two.channel, name="B"))
    part = replace(part, channels=channels)
    one = replace(one, part=part, channel=channels[0])
    two = replace(two, part=part, channel=channels[1], output_rail="OUT_B", is_off=second.is_off)
    assert load_one is not None
    assert load_two is not None
    loads = {load_one.rail: load_one, "OUT_B": replace(load_two, rail="OUT_B")}
    if lost:
        del loads["OUT_B"]
    settings = Settings(site=first.site, board=first.board)
    circuit = Circuit("test", (), ())
    (entry,) = close_entries(circuit, (part,), Rails((), (one, two)), Loads(loads), Rulebook((), (), (), ()), settings)
    return entry


A = Bench(vin=EXACT(6.0), vout=EXACT(5.0), draws=((EXACT(0.3), None),))
B = Bench(vin=EXACT(6.0), vout=EXACT(3.0), draws=((EXACT(0.1), None),))


def test_heat_is_summed() -> None:
    entry = double(A, B)
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(0.3 + 0.3)
    assert entry.worst.junction == pytest.approx(40.0 + 30.0)
    assert [output.channel for output in entry.outputs] == ["A", "B"]
    assert entry.verdict is Verdict.CLEAR


@pytest.mark.parametrize("change", [{"vin": None}, {"vout": None}, {"gaps": 1}, {"why_open": ("doubt",)}])
def test_one_unknown_output_keeps_the_whole_part_open(change: dict[str, object]) -> None:
    assert double(A, B.but(**change)).verdict is Verdict.OPEN
    assert double(A.but(**change), B).verdict is Verdict.OPEN


def test_an_output_without_a_load_entry_keeps_it_open() -> None:
    assert double(A, B, lost=True).verdict is Verdict.OPEN


def test_a_known_output_already_over_is_over() -> None:
    assert double(A.but(draws=((EXACT(3.0), None),)), B.but(vin=None)).verdict is Verdict.OVER


def test_pulses_on_the_second_output_count() -> None:
    # 1 A for 0.5 s every 100 s: no transient impedance known, so 3 W as if it never ended
    pulsed = B.but(draws=((EXACT(0.005), Pulse(EXACT(1.0), 0.5, 100.0)),))
    entry = double(A, pulsed)
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(0.3 + 3.0)
    assert entry.verdict is Verdict.OVER


def test_pulses_count_where_the_first_output_is_off() -> None:
    pulsed = B.but(draws=((EXACT(0.005), Pulse(EXACT(1.0), 0.5, 100.0)),))
    part_off = A.but(is_off=True)
    entry = double(part_off, pulsed)
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(3.0)


def test_a_single_pulse_beside_repeating_ones_does_not_hide_them() -> None:
    # steady heat of a train at half duty must not vanish because another draw pulses once
    train, once = Pulse(EXACT(0.4), 0.005, 0.010), Pulse(EXACT(0.1), 0.001)
    bench = A.but(draws=((EXACT(0.2), train), (EXACT(0.0), once)))
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.watts >= 0.5 * 0.5
