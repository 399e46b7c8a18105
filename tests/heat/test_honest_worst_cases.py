"""Cases in which a first thought finds too little heat, or overlooks that the output is lost: none may be clear."""

from __future__ import annotations

from dataclasses import replace

import pytest
from heat_kit import Bench, close, names, number

from analyzer.circuit import Circuit
from analyzer.findings.base import Verdict
from analyzer.heat import close_entries
from analyzer.heat.case import Case, ChannelCase
from analyzer.heat.limits import Limits, limits_of
from analyzer.heat.pulses import swing_of
from analyzer.ledger import Entry
from analyzer.load import Draw, Loads, Pulse, RailLoad
from analyzer.losses import model_of
from analyzer.quantity import Span
from analyzer.rail import Feed, Outside, Rail, Rails
from analyzer.rule import BoardClass, Curve, Rulebook, ThermalFigure, Topology
from analyzer.settings import Board, Coupling, PartStatement, Policy, Settings

EXACT = Span.exact
PULSES = Pulse(EXACT(0.11), 1.0, 100.0)


def resistor(ohms: float) -> Outside:
    return Outside("R1", "resistor", number(ohms, "Ω"))


def test_a_shunt_is_hottest_while_nothing_pulses() -> None:
    # 12 V · (24 − 12) V / 100 Ω = 1.44 W at rest, 40 + 60 · 1.44 = 126.4 °C; in the pulse 12 · (0.12 − 0.11) = 0.12 W
    bench = Bench(
        topology=Topology.SHUNT,
        vin=EXACT(24.0),
        vout=EXACT(12.0),
        draws=((EXACT(0.0011), PULSES),),
        figures={"minimum_cathode_current": 0.001, "junction_max": 150.0},
        outside=(resistor(100.0),),
        theta=60.0,
    )
    for pulse in (PULSES, replace(PULSES, on_seconds=0.001, period_seconds=None)):
        entry = bench.but(draws=((EXACT(0.0011), pulse),)).entry()
        assert entry.worst is not None
        assert entry.worst.junction == pytest.approx(126.4)


def test_pulses_that_do_not_meet_may_heat_a_converter_more_than_all_together() -> None:
    # η 0.5 at 0.1 A and 0.95 at 1 A: at 0.5 A it is 0.7 and the loss 3.3 · 0.5 · (1/0.7 − 1) = 0.7071 W
    table = Curve(((0.1, EXACT(0.5)), (1.0, EXACT(0.95))), "load", number(Span(0.5, 0.7, 0.95), "1"))
    pulse = Pulse(EXACT(0.5), 1.0, 100.0)
    bench = Bench(
        topology=Topology.BUCK,
        vin=EXACT(12.0),
        draws=((EXACT(0.005), pulse), (EXACT(0.005), pulse)),
        figures={"junction_max": 125.0},
        curves={"efficiency": table},
        theta=120.0,
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.watts >= 0.7071
    assert entry.verdict is Verdict.OVER


@pytest.mark.parametrize("spot", ["case_measured", "board_measured"])
def test_a_measured_temperature_that_no_psi_can_use_leaves_the_budget_open(spot: str) -> None:
    entry = Bench(statement=PartStatement(**{spot: number(130.0, "°C")})).entry()
    assert entry.verdict is Verdict.OPEN
    assert entry.missing[0] == f"{'ψJT' if spot == 'case_measured' else 'ψJB'} for the measured temperature"


def test_short_pulses_count_in_full_above_a_heat_sink() -> None:
    # 3.12 + 0.5 K/W and a sink of 1.5: 7 V · 8 A = 56 W for 10 ms; most of θJC is reached in that time
    sink = (number(3.12, "K/W"), number(0.5, "K/W"), number(1.5, "K/W"))
    bench = Bench(
        vin=EXACT(12.0),
        vout=EXACT(5.0),
        draws=((EXACT(0.8), Pulse(EXACT(8.0), 0.010, 0.100)),),
        statement=PartStatement(heat_sink=sink),
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(56.0)
    assert entry.verdict is Verdict.OVER


@pytest.mark.parametrize(("vin", "lack"), [(5.2, "1.90 V"), (3.4, "100 mV")])
def test_little_room_and_no_dropout_known_stays_open(vin: float, lack: str) -> None:
    entry = Bench(vin=EXACT(vin), dropout_unknown=True).entry()
    assert entry.verdict is Verdict.OPEN
    assert entry.missing == (f"dropout (only {lack} left between lowest input and highest output)",)
    assert Bench(vin=EXACT(5.31), dropout_unknown=True).entry().verdict is Verdict.CLEAR


def test_a_linear_part_between_rails_of_opposite_sign_stays_open() -> None:
    entry = Bench(vin=EXACT(12.0), vout=EXACT(-5.0)).entry()
    assert entry.verdict is Verdict.OPEN
    assert entry.missing == (
        "input and output of opposite signs (12.0 V and -5.00 V), which a linear part does not make",
    )


def test_a_boost_with_more_input_than_output_is_over() -> None:
    bench = Bench(
        topology=Topology.BOOST, vin=EXACT(12.0), vout=EXACT(5.0), figures={"efficiency": 0.9, "junction_max": 125.0}
    )
    entry = bench.entry()
    assert entry.verdict is Verdict.OVER
    assert "input-above-output" in names(entry)
    (found,) = [one for one in entry.findings if one.name == "input-above-output"]
    assert found.message == "input up to 12.0 V is above the output 5.00 V"
    assert bench.but(vin=EXACT(4.9)).entry().verdict is Verdict.CLEAR


@pytest.mark.parametrize(("vin", "is_lost"), [(5.0, True), (5.009, True), (5.5, False)])
def test_a_buck_needs_what_its_switch_takes(vin: float, is_lost: bool) -> None:
    # 0.1 A · 0.1 Ω = 10 mV
    terms = {
        "high_side_resistance": 0.1,
        "low_side_resistance": 0.05,
        "switching_frequency": 500e3,
        "rise_time": 1e-8,
        "fall_time": 1e-8,
        "quiescent": 0.001,
        "junction_max": 125.0,
    }
    entry = Bench(topology=Topology.BUCK, vin=EXACT(vin), vout=EXACT(5.0), figures=terms).entry()
    assert ("dropout-lost" in names(entry)) is is_lost
    assert entry.verdict is (Verdict.OVER if is_lost else Verdict.CLEAR)


def test_a_starved_shunt_is_over() -> None:
    # (12.5 − 12) V / 100 Ω = 5 mA at the lowest input, the load takes 100 mA
    bench = Bench(
        topology=Topology.SHUNT,
        vin=Span(12.5, 18.0, 24.0),
        vout=EXACT(12.0),
        figures={"junction_max": 150.0},
        outside=(resistor(100.0),),
    )
    entry = bench.entry()
    assert entry.verdict is Verdict.OVER
    assert "dropout-lost" in names(entry)


def test_a_limit_stated_above_the_data_sheet_s_is_never_clear() -> None:
    entry = Bench(statement=PartStatement(junction_max=number(175.0, "°C"))).entry()
    assert entry.verdict is Verdict.TIGHT
    assert "limit-raised" in names(entry)
    assert Bench(statement=PartStatement(junction_max=number(110.0, "°C"))).entry().verdict is Verdict.CLEAR


def test_the_heat_of_a_neighbour_in_doubt_is_not_known() -> None:
    warm = Bench(ref="U9", why_open=("two outputs are joined",))
    pair = Settings(coupling=(Coupling("U1", "U9", number(5.0, "K/W")),))
    cool, _ = close([Bench(), warm], pair)
    assert cool.verdict is Verdict.OPEN
    assert cool.missing == ("heat of its neighbour U9",)


def test_a_neighbour_whose_heat_rises_with_a_junction_that_is_not_known() -> None:
    switch = Bench(
        ref="U9",
        topology=Topology.LOAD_SWITCH,
        vout=EXACT(5.0),
        figures={"on_resistance": 0.1, "resistance_tempco": 0.005, "junction_max": 125.0},
        theta=None,
        package=None,
    )
    pair = Settings(coupling=(Coupling("U1", "U9", number(5.0, "K/W")),))
    cool, _ = close([Bench(), switch], pair)
    assert cool.missing == ("heat of its neighbour U9",)


def test_a_package_whose_first_channel_is_a_mere_passage_has_an_entry() -> None:
    # (12 − 5) V · 1 A · 50 K/W = 350 K above 40 °C
    part, wiring, load = Bench(vin=EXACT(12.0), vout=EXACT(5.0), draws=((EXACT(1.0), None),)).parts()
    switch = replace(part.channels[0], name="S", topology=Topology.LOAD_SWITCH, figures={})
    both = replace(part, channels=(switch, part.channels[0]))
    assert load is not None
    rails = Rails((Rail("OUT_U1", (), feeds=(Feed("U1", "regulator"),)),), (replace(wiring, part=both),))
    settings = Settings(board=Board(board_class=BoardClass.HIGH))
    limit = {"U1": PartStatement(junction_max=number(125.0, "°C"))}
    (entry,) = close_entries(
        Circuit("test", (), ()),
        (both,),
        rails,
        Loads({"OUT_U1": load}),
        Rulebook((), (), (), ()),
        replace(settings, parts=limit),
    )
    assert entry.verdict is Verdict.OVER
    assert entry.worst is not None
    assert entry.worst.junction == pytest.approx(390.0)


def test_the_lowest_limit_of_all_channels_holds() -> None:
    part = Bench().parts()[0]
    other = replace(part.channels[0], name="B", figures={"junction_max": number(85.0, "°C")})
    limits = limits_of(replace(part, channels=(part.channels[0], other)), PartStatement(), Policy())
    assert isinstance(limits, Limits)
    assert (limits.data_sheet, limits.policy) == (85.0, 75.0)


def test_the_rating_of_a_shunt_is_about_what_flows_through_it() -> None:
    # (24 − 12) V / 47 Ω = 0.2553 A without load
    bench = Bench(
        topology=Topology.SHUNT,
        vin=EXACT(24.0),
        vout=EXACT(12.0),
        draws=((EXACT(0.0), None),),
        figures={"output_current_max": 0.1, "junction_max": 150.0},
        outside=(resistor(47.0),),
        theta=10.0,
    )
    (found,) = [one for one in bench.entry().findings if one.name == "current-over-rating"]
    assert found.message == "current of the element up to 255 mA, rated 100 mA"


def test_a_load_that_the_current_limit_may_stop_is_over() -> None:
    bench = Bench(draws=((EXACT(0.5), None),)).with_figures(current_limit=Span(0.30, 0.35, 0.40))
    entry = bench.entry()
    assert entry.verdict is Verdict.OVER
    (found,) = [one for one in entry.findings if one.name == "current-over-rating"]
    assert found.message == "load up to 500 mA, its current limit may hold at 300 mA"


def test_ratings_that_no_rule_gives_are_told() -> None:
    def told(**figures: float) -> list[str]:
        found = Bench().with_figures(**figures).entry().findings
        return [one.message for one in found if one.name == "rating-not-checked"]

    assert told() == ["rated input voltage and output current not known"]
    assert told(input_max=6.0) == ["rated output current not known"]
    assert told(input_max=6.0, output_current_max=1.0) == []


def test_a_figure_without_theta_does_not_hide_one_with_it() -> None:
    # a copper table without any copper stated says nothing: 150 K/W of 2s2p on a 1s board is 150 · 1.56 for SOIC-8
    table = Curve(((1e-4, EXACT(90.0)), (6e-4, EXACT(60.0))), "copper", number(Span(60.0, 75.0, 90.0), "K/W"))
    figures = (
        ThermalFigure("SOIC-8", "test", theta_ja=number(150.0, "K/W"), board=BoardClass.HIGH),
        ThermalFigure("SOIC-8", "test", copper=table, board=BoardClass.LOW),
    )
    entry = Bench(package="SOIC-8", thermal=figures, board=Board(board_class=BoardClass.LOW, source="test")).entry()
    assert entry.worst is not None
    assert entry.worst.theta == pytest.approx(150.0 * 1.56)


def test_the_greatest_ambient_is_looked_for_where_the_figures_hold() -> None:
    # 30 % falling by 0.3 points a kelvin is none at 125 °C: the search must not fall over that
    figures = {"efficiency": 0.3, "efficiency_hot_loss": 0.003, "junction_max": 150.0}
    bench = Bench(topology=Topology.BUCK, vin=EXACT(12.0), figures=figures, draws=((EXACT(0.0), None),))
    (found,) = [one for one in bench.entry().remedies if one.kind == "greatest ambient"]
    assert found.numbers["celsius"] == pytest.approx(125.0, abs=0.1)


def wired(bench: Bench, feeds: tuple[Feed, ...] = (Feed("U1", "regulator"),), **changes: object) -> Entry:
    """The entry of a bench whose wiring or feeds are changed."""
    part, wiring, load = bench.parts()
    assert load is not None
    rails = Rails((Rail("OUT_U1", (), feeds=feeds),), (replace(wiring, **changes),))  # type: ignore[arg-type]
    settings = Settings(board=bench.board)
    (entry,) = close_entries(
        Circuit("test", (), ()), (part,), rails, Loads({"OUT_U1": load}), Rulebook((), (), (), ()), settings
    )
    return entry


def test_an_input_that_may_change_its_sign_may_be_nothing() -> None:
    entry = Bench(vin=Span(-2.0, 3.0, 5.0), vout=EXACT(1.5)).entry()
    assert "dropout-lost" in names(entry)
    assert entry.verdict is Verdict.OVER


def test_a_dropout_that_is_tabled_counts_at_the_greatest_load() -> None:
    # 0.3 V at 0.1 A rises to 1.3 V at 1 A: 0.8 V at 0.55 A
    table = Curve(((0.1, EXACT(0.3)), (1.0, EXACT(1.3))), "load", number(Span(0.3, 0.5, 1.3), "V"))
    bench = Bench(vin=EXACT(4.11), draws=((EXACT(0.55), None),), curves={"dropout": table}, theta=1.0)
    assert bench.entry().verdict is Verdict.CLEAR
    lost = bench.but(vin=EXACT(4.09)).entry()
    (found,) = [one for one in lost.findings if one.name == "dropout-lost"]
    assert found.message == "input 4.09 V less output 3.30 V leaves 790 mV, the part needs 800 mV"


def test_a_control_supply_below_the_output_is_over() -> None:
    bench = Bench(
        topology=Topology.LINEAR_TWO_SUPPLY, vout=EXACT(1.2), figures={"control_ratio": 60.0, "junction_max": 125.0}
    )
    entry = wired(bench, vcontrol=number(Span(1.0, 5.0, 5.2), "V"))
    (found,) = [one for one in entry.findings if one.name == "dropout-lost"]
    assert found.message == "control supply 1.00 V is below the output 1.20 V"
    assert entry.verdict is Verdict.OVER
    assert wired(bench, vcontrol=number(Span(1.3, 5.0, 5.2), "V")).verdict is Verdict.CLEAR
    # a bias pin of another kind of part is no control supply
    assert wired(Bench(), vcontrol=number(1.0, "V")).verdict is Verdict.CLEAR


def test_a_part_carries_its_own_share_and_no_other_s() -> None:
    feeds = (
        Feed("U2", "regulator", share=0.25),
        Feed("U1", "regulator", "B", share=0.125),
        Feed("U1", "regulator", share=0.75),
    )
    entry = wired(Bench(), feeds)
    assert entry.worst is not None
    assert entry.worst.channels[0].iout == pytest.approx(0.075)


def test_a_neighbour_s_pulses_warm_with_their_peak() -> None:
    # U9: 1.7 V · 1 A while it pulses, 5 K/W from it to U1: 8.5 K more around it
    warm = Bench(ref="U9", draws=((EXACT(0.1), Pulse(EXACT(1.0), 1.0, 10.0)),), theta=1.0)
    pair = Settings(coupling=(Coupling("U1", "U9", number(5.0, "K/W")),))
    cool, _ = close([Bench(), warm], pair)
    assert cool.worst is not None
    assert cool.worst.ambient == pytest.approx(48.5)


def test_power_and_difference_may_reach_their_ratings_but_not_exceed_them() -> None:
    bench = Bench(vin=EXACT(5.0), vout=EXACT(3.0), draws=((EXACT(0.5), None),))  # 1 W exactly
    assert "power-over-rating" not in names(bench.with_figures(power_max=1.0).entry())
    assert "power-over-rating" in names(bench.with_figures(power_max=0.999).entry())
    assert "input-over-rating" not in names(bench.with_figures(differential_max=2.0).entry())
    (found,) = [
        one for one in bench.with_figures(differential_max=1.9).entry().findings if one.name == "input-over-rating"
    ]
    assert found.message == "input-output difference up to 2.00 V, rated 1.90 V"


def test_an_open_budget_has_no_chance_of_exceeding_anything() -> None:
    assert Bench(seed=1).entry().chance is not None
    assert Bench(seed=1, gaps=1).entry().chance is None


def test_the_input_is_told_by_net_and_rail() -> None:
    entry = wired(Bench(), input_net="IN_A", input_rail="+5V")
    assert entry.input is not None
    assert (entry.input.net, entry.input.rail) == ("IN_A", "+5V")
    bare = wired(Bench(), input_net="IN_A", input_rail=None)
    assert bare.input is not None
    assert bare.input.rail == "IN_A"


def test_a_buck_with_a_dropout_of_its_own_needs_that() -> None:
    figures = {"efficiency": 0.9, "dropout": 0.5, "junction_max": 125.0}
    bench = Bench(topology=Topology.BUCK, vin=EXACT(5.4), vout=EXACT(5.0), figures=figures)
    (found,) = [one for one in bench.entry().findings if one.name == "dropout-lost"]
    assert found.message == "input 5.40 V less output 5.00 V leaves 400 mV, the part needs 500 mV"
    assert "dropout-lost" not in names(bench.but(vin=EXACT(5.6)).entry())


def greatest_input(**figures: float) -> float:
    found = Bench(theta=10.0).with_figures(**figures).entry().remedies
    return next(one.numbers["volts"] for one in found if one.kind == "greatest input")


def test_the_greatest_input_ends_at_each_rating() -> None:
    assert greatest_input(input_max=6.0) == pytest.approx(6.0)
    # the house policy takes nine tenths of an absolute maximum; a difference counts from the lowest output
    assert greatest_input(input_absolute_max=10.0) == pytest.approx(9.0)
    assert greatest_input(differential_max=4.0) == pytest.approx(7.3)
    assert greatest_input(input_max=8.0, input_absolute_max=8.5) == pytest.approx(7.65)


def test_an_output_s_load_is_told_where_it_is_known_and_on() -> None:
    assert Bench().entry().outputs[0].load == EXACT(0.1)
    assert Bench(gaps=1).entry().outputs[0].load is None
    assert Bench(has_load=False).entry().outputs[0].load is None
    assert Bench(is_off=True).entry().outputs[0].load is None


def test_a_shunt_whose_load_is_not_known_is_open_for_more_load_cools_it() -> None:
    bench = Bench(
        topology=Topology.SHUNT,
        vin=EXACT(24.0),
        vout=EXACT(12.0),
        draws=((EXACT(0.0), None),),
        figures={"junction_max": 125.0},
        outside=(resistor(100.0),),
        theta=60.0,
    )
    assert bench.entry().verdict is Verdict.OVER  # 126.4 °C
    unknown = bench.but(gaps=1).entry()
    assert unknown.verdict is Verdict.OPEN
    assert not any(one.weight == "over" for one in unknown.findings)
    assert "rating-not-checked" in names(unknown)


def test_pulses_of_several_channels_take_the_longest_pulse_and_the_shortest_period() -> None:
    _, wiring, _ = Bench().parts()

    def channel(pulse: Pulse) -> ChannelCase:
        draw = Draw("D1", "/D1", "OUT", number(0.1, "A"), "stated", pulse)
        load = RailLoad("OUT", (draw,), (), EXACT(0.1))
        return ChannelCase(wiring, model_of(wiring), EXACT(5.0), EXACT(3.3), EXACT(0.1), load)

    slow, fast = Pulse(EXACT(1.0), 0.010, 1.0), Pulse(EXACT(1.0), 0.002, 0.1)
    swing = swing_of(Case((channel(slow), channel(fast)), None, EXACT(40.0), (1.0, 1.0)))
    assert swing is not None
    assert (swing.on, swing.period) == (0.010, 0.1)
    single = swing_of(Case((channel(replace(slow, period_seconds=None)),), None, EXACT(40.0), (1.0, 1.0)))
    assert single is not None
    assert (single.on, single.period) == (0.010, None)


def test_short_pulses_of_little_heat_count_a_tenth_of_their_step() -> None:
    # 1.7 V · 0.5 A = 0.85 W for a tenth of the time: 0.085 W and a tenth of the other 0.765 W
    entry = Bench(draws=((EXACT(0.05), Pulse(EXACT(0.5), 0.001, 0.010)),)).entry()
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(0.1615)
    assert entry.worst.junction == pytest.approx(40.0 + 50.0 * 0.1615)


def test_pulses_without_a_thermal_path_leave_the_budget_open() -> None:
    entry = Bench(theta=None, package=None, draws=((EXACT(0.05), Pulse(EXACT(0.5), 0.001, 0.010)),)).entry()
    assert entry.verdict is Verdict.OPEN
    assert entry.worst is not None
    assert entry.worst.watts == pytest.approx(0.85)


def test_a_single_pulse_through_a_network_adds_to_its_rest() -> None:
    # Σ R = 50 K/W = θ; 0.85 W for 10 ms: 10 · (1 − e^(−0.01/0.01)) + 40 · (1 − e^(−0.01/100)) = 6.3252 K/W
    network = ((10.0, 0.01), (40.0, 100.0))
    figure = ThermalFigure("SOT-223", "test", theta_ja=number(50.0, "K/W"), board=BoardClass.HIGH, foster=network)
    pulse = Pulse(EXACT(0.5), 0.010, None, EXACT(0.1))
    entry = Bench(thermal=(figure,), draws=((EXACT(0.1), pulse),)).entry()
    assert entry.worst is not None
    # 0.17 W at rest, 0.68 W more in the pulse
    assert entry.worst.junction == pytest.approx(40.0 + 50.0 * 0.17 + 0.68 * 6.3252, abs=1e-3)


def test_short_pulses_count_in_full_above_a_measured_case() -> None:
    # ψJT 20 K/W above 85 °C; 7 V · 0.4 A = 2.8 W for 9 ms every 90 ms
    figure = ThermalFigure("SOT-223", "test", psi_jt=number(20.0, "K/W"), board=BoardClass.HIGH)
    bench = Bench(
        vin=EXACT(12.0),
        vout=EXACT(5.0),
        thermal=(figure,),
        draws=((EXACT(0.04), Pulse(EXACT(0.4), 0.009, 0.090)),),
        statement=PartStatement(case_measured=number(85.0, "°C")),
    )
    entry = bench.entry()
    assert entry.worst is not None
    assert entry.worst.junction == pytest.approx(85.0 + 20.0 * 2.8)


def test_a_copper_table_without_a_class_is_taken_as_measured_over_planes() -> None:
    table = Curve(((3e-4, EXACT(60.0)), (1e-3, EXACT(40.0))), "copper", number(Span(40.0, 50.0, 60.0), "K/W"))
    copper = PartStatement(pour=number(5e-4, "m²"), board_class=BoardClass.LOW)
    unknown = (ThermalFigure("SOT-223", "test", copper=table),)
    assert Bench(thermal=unknown, statement=copper).entry().missing == ("θJA: none known for package SOT-223",)
    low = (ThermalFigure("SOT-223", "test", copper=table, board=BoardClass.LOW),)
    worst = Bench(thermal=low, statement=copper).entry().worst
    assert worst is not None
    assert worst.theta == pytest.approx(60.0 - 20.0 * 2 / 7)


def test_a_part_that_runs_away_is_told_with_numbers_that_end() -> None:
    figures = {"on_resistance": 0.5, "resistance_tempco": 0.02, "junction_max": 150.0}
    bench = Bench(topology=Topology.LOAD_SWITCH, vout=EXACT(5.0), figures=figures, draws=((EXACT(2.0), None),))
    entry = bench.entry()
    assert "thermal-runaway" in names(entry)
    assert entry.worst is not None
    assert entry.worst.junction == 1000.0
