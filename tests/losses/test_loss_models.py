"""Every topology: corners that are worst, energy that balances, loads that heat, figures that are missing."""

from __future__ import annotations

import random
from collections.abc import Iterator
from dataclasses import replace

import pytest
from losses_kit import curve, efficiency_map, evidence, model, wiring

from analyzer.evidence import Grade
from analyzer.heat.case import Case, ChannelCase, worst
from analyzer.heat.path.base import all_air
from analyzer.losses.base import End, Loss, LossModel, Point
from analyzer.losses.dispatch import MODELS, input_current, model_of
from analyzer.quantity import Span
from analyzer.rail import Outside
from analyzer.rule import PASSAGES, SWITCHERS, Topology

ENTRIES = 2000
"""Random entries a topology."""

Pick = random.Random
Figures = dict[str, Span | float]


def span(pick: Pick, low: float, high: float) -> Span:
    """A random span inside two limits."""
    ends = sorted(pick.uniform(low, high) for _ in range(3))
    return Span(*ends)


def terms(pick: Pick) -> Figures:
    return {
        "high_side_resistance": span(pick, 0.02, 0.3),
        "low_side_resistance": span(pick, 0.01, 0.2),
        "switching_frequency": span(pick, 1e5, 2e6),
        "rise_time": span(pick, 1e-9, 3e-8),
        "fall_time": span(pick, 1e-9, 3e-8),
        "quiescent": span(pick, 1e-5, 5e-3),
    }


def figures_of(topology: Topology, pick: Pick) -> Figures:
    """Random figures with which a channel of this topology can be worked out."""
    match topology:
        case Topology.LINEAR:
            jump: Figures = {"ground_current_dropout": span(pick, 5e-3, 0.2)} if pick.random() < 0.5 else {}
            return {"ground_current": span(pick, 1e-5, 5e-3), "dropout": span(pick, 0.05, 1.5), **jump}
        case Topology.LINEAR_FLOATING:
            return {"dropout": span(pick, 0.5, 2.0), "feedback_current": span(pick, 1e-5, 1e-4)}
        case Topology.LINEAR_TWO_SUPPLY:
            return {"control_ratio": span(pick, 30, 100), "dropout": span(pick, 0.05, 0.4)}
        case Topology.BUCK | Topology.BOOST:
            return terms(pick) if pick.random() < 0.6 else {"efficiency": span(pick, 0.6, 0.97)}
        case Topology.CHARGE_PUMP:
            return {"gain": 1.0, "quiescent": span(pick, 1e-4, 3e-3), "output_resistance": span(pick, 5, 60)}
        case Topology.CONTROLLER:
            return {
                "efficiency": span(pick, 0.7, 0.95),
                "quiescent": span(pick, 1e-3, 5e-3),
                "gate_charge": span(pick, 1e-8, 1e-7),
                "switching_frequency": span(pick, 1e5, 1e6),
            }
        case Topology.SHUNT:
            return {"minimum_cathode_current": span(pick, 1e-4, 1e-3)}
        case Topology.CHARGER:
            return {"charge_current": span(pick, 0.05, 1.0), "battery_low": span(pick, 2.5, 3.2)}
        case Topology.SERIES_DIODE:
            return {"forward_drop": span(pick, 0.2, 1.0)}
        case Topology.BUCK_BOOST | Topology.INVERTING | Topology.MODULE:
            own: Figures = {"quiescent": span(pick, 1e-5, 5e-3)} if pick.random() < 0.5 else {}
            return {"efficiency": span(pick, 0.6, 0.97), **own}
    return {"on_resistance": span(pick, 0.005, 0.3), "quiescent": span(pick, 1e-6, 1e-3)}


def made(topology: Topology, pick: Pick, *, tables: bool) -> LossModel:
    outside: tuple[Outside, ...] = ()
    if topology is Topology.SHUNT:
        outside = (Outside("R1", "resistor", evidence(span(pick, 100, 5000), "Ω")),)
    if topology in SWITCHERS and pick.random() < 0.5:
        coil = Outside("L1", "inductor", evidence(span(pick, 0.005, 0.1), "Ω"))
        outside = (coil, Outside("D1", "diode", drop=evidence(span(pick, 0.2, 0.6), "V")))
    figures = figures_of(topology, pick)
    curves = {}
    if "efficiency" in figures and topology is not Topology.CONTROLLER:
        if pick.random() < 0.5:
            # what the data sheet's own inductor and rectifier lost where the efficiency was measured
            figures |= {"inductor_resistance": span(pick, 0.005, 0.05), "diode_drop": span(pick, 0.1, 0.4)}
        if tables and pick.random() < 0.4:
            figures.pop("efficiency")
            etas = (pick.uniform(0.3, 0.7), pick.uniform(0.6, 0.9), pick.uniform(0.7, 0.95))
            curves["efficiency"] = curve(*zip((0.02, 0.2, 1.0), etas, strict=True))
    return model(topology, figures, curves=curves, vcontrol=span(pick, 10.5, 13.0), outside=outside)


def volts(topology: Topology, pick: Pick) -> tuple[Span, Span]:
    """Random input and output voltages that suit the topology."""
    match topology:
        case Topology.BOOST:
            return span(pick, 2.5, 5.0), span(pick, 6.0, 15.0)
        case Topology.CHARGER:
            return span(pick, 4.4, 6.0), span(pick, 3.0, 4.2)
        case Topology.CHARGE_PUMP:
            return span(pick, 3.0, 5.5), span(pick, 1.0, 5.0)
        case Topology.SHUNT:
            return span(pick, 6.0, 14.0), span(pick, 1.0, 5.5)
        case Topology.LINEAR:
            # down to where some of them lose regulation
            return span(pick, 5.0, 10.0), span(pick, 1.0, 5.0)
    if topology in PASSAGES:
        vin = span(pick, 3.0, 24.0)
        return vin, vin
    return span(pick, 6.0, 10.0), span(pick, 1.0, 5.5)


def entries(topology: Topology, *, tables: bool = False) -> Iterator[tuple[Pick, LossModel, Span, Span, Span]]:
    pick = Pick(f"{topology} entries")
    for _ in range(ENTRIES):
        found = made(topology, pick, tables=tables)
        assert found.missing == ()
        vin, vout = volts(topology, pick)
        most = {Topology.SHUNT: 0.02, Topology.BOOST: 0.25}.get(topology, 1.0)
        load = found.own_load.span if found.own_load else span(pick, 0.0, most)
        yield pick, found, vin, vout, load


def case_of(topology: Topology, found: LossModel, vin: Span, vout: Span, load: Span) -> Case:
    channel = ChannelCase(wiring(topology, {}), found, vin, vout, load)
    return Case((channel,), all_air(evidence(50.0, "K/W")), Span.exact(40.0), (1.0, 1.0))


def hottest(topology: Topology, found: LossModel, vin: Span, vout: Span, load: Span) -> float:
    return worst(case_of(topology, found, vin, vout, load)).watts


def inside(pick: Pick, s: Span) -> float:
    return pick.uniform(s.low, s.high)


MOST_REFUSED = {
    # a boost by terms that cannot carry its load at the lowest input; an efficiency that its rectifier alone exceeds
    Topology.BOOST: 0.25,
    Topology.BUCK: 0.06,
    Topology.BUCK_BOOST: 0.12,
    Topology.INVERTING: 0.12,
}
"""Share of the random entries that may be outside what their figures cover; all others none."""


@pytest.mark.parametrize("topology", list(MODELS))
def test_no_sampled_point_is_hotter_than_the_worst_corner(topology: Topology) -> None:
    refused = 0
    for pick, found, vin, vout, load in entries(topology, tables=True):
        try:
            limit = hottest(topology, found, vin, vout, load)
        except ValueError:
            refused += 1
            continue
        for _ in range(3):
            point = Point(inside(pick, vin), inside(pick, vout), inside(pick, load), 40.0)
            # where the corners can be worked out, so can every point between them
            watts = max(found.at(point, end).watts for end in End)
            assert watts <= limit * (1 + 1e-4) + 1e-9, (vin, vout, load, point)
    assert refused <= MOST_REFUSED.get(topology, 0.0) * ENTRIES


GETS_COOLER = {Topology.SHUNT, Topology.CHARGER}


@pytest.mark.parametrize("topology", [one for one in MODELS if one not in GETS_COOLER])
def test_more_load_never_makes_less_heat(topology: Topology) -> None:
    for pick, found, vin, vout, _ in entries(topology):
        light, heavy = sorted((pick.uniform(0, 1), pick.uniform(0, 1)))
        try:
            less, more = (found.at(Point(vin.high, vout.low, amps), End.SEVERE).watts for amps in (light, heavy))
        except ValueError:
            continue
        assert more >= less - 1e-12


@pytest.mark.parametrize("topology", list(MODELS))
def test_a_wider_span_never_makes_a_cooler_worst_case(topology: Topology) -> None:
    pick = Pick(f"{topology} wider")
    for _ in range(ENTRIES // 4):
        found = made(topology, pick, tables=True)
        vin, vout = volts(topology, pick)
        load = found.own_load.span if found.own_load else span(pick, 0.0, 1.0)
        narrow = Span(load.low, load.nominal, load.nominal)
        try:
            # a peak between two points of a table is searched for to 1e-7 of the heat
            assert hottest(topology, found, vin, vout, load) >= hottest(topology, found, vin, vout, narrow) * (1 - 1e-7)
            middle = Span.exact(vin.nominal)
            wide, point = hottest(topology, found, vin, vout, load), hottest(topology, found, middle, vout, load)
        except ValueError:
            continue
        assert wide >= point * (1 - 2e-3) - 1e-12


def handed_on(topology: Topology, point: Point, loss: Loss) -> float:
    """Power [W] that a channel hands on, worked out from the circuit and not from its losses."""
    parts = dict(loss.terms)
    match topology:
        case Topology.CHARGE_PUMP:
            # what the transfer leaves of n · Vin, here n = 1
            return point.vin * point.iout - parts["transfer"]
        case Topology.CHARGER:
            return point.vin * point.iout - parts["charging"]
    if topology in PASSAGES:
        return point.vin * point.iout - sum(watts for name, watts in parts.items() if name != "quiescent")
    return point.vout * point.iout


@pytest.mark.parametrize("topology", [one for one in MODELS if one is not Topology.LINEAR_TWO_SUPPLY])
def test_what_goes_in_comes_out_or_turns_to_heat(topology: Topology) -> None:
    tried = 0
    for _, found, vin, vout, load in entries(topology):
        for end in End:
            point = Point(vin.high, vout.low, load.high)
            try:
                loss = found.at(point, end)
            except ValueError:
                continue
            if not loss.regulating:
                continue
            tried += 1
            out = handed_on(topology, point, loss)
            given = point.vin * loss.iin
            assert given == pytest.approx(out + loss.watts + sum(watts for _, watts in loss.elsewhere), rel=1e-9)
    assert tried > (100 if topology is Topology.SHUNT else ENTRIES)


def test_both_supplies_of_a_two_supply_part_feed_its_output() -> None:
    # 1.8 V and 3.3 V into 1.2 V, 1 A and 20 mA: the control current goes to the output as well
    part = model(Topology.LINEAR_TWO_SUPPLY, {"control_ratio": 50.0}, vcontrol=3.3)
    found = part.at(Point(1.8, 1.2, 1.0), End.SEVERE)
    assert found.watts + 1.2 * (1.0 + 0.02) == pytest.approx(1.8 * found.iin + 3.3 * 0.02)


@pytest.mark.parametrize("topology", list(MODELS))
def test_without_figures_a_model_says_what_it_lacks_and_gives_no_number(topology: Topology) -> None:
    found = model(topology, {})
    if topology is Topology.LINEAR_FLOATING:
        # its bias flows to the load: a floating part needs no figure of its own
        assert found.missing == ()
        return
    assert found.missing != ()
    with pytest.raises(ValueError, match="missing"):
        found.at(Point(5.0, 3.3, 0.1), End.SEVERE)
    assert input_current(wiring(topology, {}), Span.exact(0.1)) is None


@pytest.mark.parametrize("topology", list(MODELS))
def test_each_figure_left_out_is_missed(topology: Topology) -> None:
    pick = Pick("left out")
    needed = {
        Topology.LINEAR: {"ground_current"},
        Topology.LINEAR_TWO_SUPPLY: {"control_ratio"},
        Topology.CHARGE_PUMP: {"gain", "quiescent", "output_resistance"},
        Topology.CONTROLLER: {"efficiency", "quiescent", "gate_charge", "switching_frequency"},
        Topology.CHARGER: {"charge_current", "battery_low"},
        Topology.SERIES_DIODE: {"forward_drop"},
    }
    figures = terms(pick) if topology in (Topology.BUCK, Topology.BOOST) else figures_of(topology, pick)
    for key in needed.get(topology, set(figures) if topology in (Topology.BUCK, Topology.BOOST) else set()):
        if key == "low_side_resistance":
            continue
        rest = {name: value for name, value in figures.items() if name != key}
        assert model(topology, rest, vcontrol=12.0).missing != (), key


def test_every_topology_has_a_model() -> None:
    assert set(MODELS) == set(Topology)


def test_a_part_without_rule_or_figures_is_asked_for_both() -> None:
    from dataclasses import replace

    bare = wiring(Topology.LINEAR, {})
    unruled = replace(bare, part=replace(bare.part, rule=None))
    assert model_of(unruled).missing == ("a rule for this part, or its figures in the settings",)


def test_an_efficiency_map_is_read_inside_its_grid_only() -> None:
    grid = efficiency_map((0.1, 5.0, 0.80), (0.1, 12.0, 0.70), (1.0, 5.0, 0.90), (1.0, 12.0, 0.84))
    buck = model(Topology.BUCK, {}, mapped=grid)
    # a quarter of the way in load and half in voltage: 0.75 of 0.75 and 0.25 of 0.87
    eta = 0.75 * 0.75 + 0.25 * 0.87
    power = 3.3 * 0.325
    assert buck.at(Point(8.5, 3.3, 0.325), End.NOMINAL).watts == pytest.approx(power * (1 / eta - 1))
    assert buck.at(Point(5.0, 3.3, 0.01), End.NOMINAL).watts == pytest.approx(0.033 * (1 / 0.80 - 1))
    for vin, load in ((4.9, 0.5), (12.1, 0.5), (8.0, 1.01)):
        with pytest.raises(ValueError, match="does not cover"):
            buck.at(Point(vin, 3.3, load), End.NOMINAL)


def test_an_inverting_buck_takes_its_current_at_the_board_s_input() -> None:
    # 12 V to -5 V: the part sees 17 V; 80 % efficient; 0.2 A out: 1 W, 0.25 W of loss, 1.25 W / 12 V in
    inverter = model(Topology.BUCK, {"efficiency": 0.8}, inverts=True)
    found = inverter.at(Point(17.0, 5.0, 0.2), End.NOMINAL)
    assert found.watts == pytest.approx(0.25)
    assert found.iin == pytest.approx(1.25 / 12.0)
    assert found.regulating


COIL = Outside("L1", "inductor", evidence(Span(0.04, 0.05, 0.06), "Ω"))
DIODE = Outside("D1", "diode", drop=evidence(Span(0.3, 0.4, 0.5), "V"))


def test_what_a_stated_efficiency_has_in_it_is_taken_out_at_its_least() -> None:
    buck = wiring(Topology.BUCK, {"efficiency": 0.8}, outside=(COIL, DIODE))
    here = replace(buck.channel.figures["efficiency"], grade=Grade.STATED)
    stated = replace(buck, channel=replace(buck.channel, figures={**buck.channel.figures, "efficiency": here}))
    found = model_of(stated).at(Point(10.0, 5.0, 1.0), End.SEVERE)
    # total 5 · (1/0.8 − 1) = 1.25 W; L1 at least 1² · 0.04 W; the input's 0.625 A are the coil's 1 A for at most 0.625
    # of the time, so D1 has 0.3 V · 1 A for 0.375 of it at least; at most they lose 0.06 W and 0.5 · 0.375 W
    assert found.watts == pytest.approx(1.25 - 0.04 - 0.1125)
    assert dict(found.elsewhere) == pytest.approx({"L1": 0.06, "D1": 0.1875})


def test_a_worse_inductor_on_the_board_does_not_cool_the_part() -> None:
    # a rule's efficiency was measured with another inductor: without its resistance nothing is taken out, with it that
    alone = model(Topology.BUCK, {"efficiency": 0.8}, outside=(COIL,))
    found = alone.at(Point(10.0, 5.0, 1.0), End.SEVERE)
    assert found.watts == pytest.approx(1.25)
    assert found.iin == pytest.approx((5.0 + 1.25 + 0.06) / 10.0)
    assert alone.notes == ("loss of the inductor (L1 here) left in the part: the efficiency names none",)
    ruled = model(Topology.BUCK, {"efficiency": 0.8, "inductor_resistance": Span(0.01, 0.012, 0.015)}, outside=(COIL,))
    found = ruled.at(Point(10.0, 5.0, 1.0), End.SEVERE)
    assert found.watts == pytest.approx(1.25 - 0.01)
    assert dict(found.elsewhere) == pytest.approx({"L1": 0.06})
    assert found.iin == pytest.approx((5.0 + 1.24 + 0.06) / 10.0)
    # two coils of the measured kind side by side carry half the current each
    twins = model(
        Topology.BUCK, {"efficiency": 0.8, "inductor_resistance": 0.02}, outside=(COIL, Outside("L2", "inductor"))
    )
    assert twins.at(Point(10.0, 5.0, 1.0), End.SEVERE).watts == pytest.approx(1.25 - 0.01)


def test_light_load_losses_are_bounded_by_the_chord() -> None:
    # a + b·I + c·I² = 0.3 + 0.2·I + 0.1·I² W at 12 V out: η(1 A) = 12/12.6; idle 0.3 W = 24 V · 12.5 mA
    number = model(Topology.BUCK, {"efficiency": 12 / 12.6, "quiescent": 0.0125})
    half = number.at(Point(24.0, 12.0, 0.5), End.SEVERE)
    assert half.watts == pytest.approx(0.3 + 6.0 * 0.05)  # true: 0.425 W
    tabled = model(
        Topology.BUCK, {"quiescent": 0.0125}, curves={"efficiency": curve((1.0, 12 / 12.6), (2.0, 24 / 25.1))}
    )
    assert tabled.at(Point(24.0, 12.0, 0.5), End.SEVERE).watts == pytest.approx((0.3 + 0.6) / 2)
    unknown = model(Topology.BUCK, {}, curves={"efficiency": curve((1.0, 12 / 12.6), (2.0, 24 / 25.1))})
    assert unknown.at(Point(24.0, 12.0, 0.001), End.SEVERE).watts == pytest.approx(0.6)


def test_a_rule_s_efficiency_alone_says_nothing_of_light_loads() -> None:
    found = wiring(Topology.BUCK, {"efficiency": 0.9})
    figures = {key: value for key, value in found.channel.figures.items() if key != "quiescent"}
    bare = model_of(replace(found, channel=replace(found.channel, figures=figures)))
    assert bare.missing == ("quiescent current (what the converter loses without a load)",)


def test_an_efficiency_of_25_degrees_is_lowered_by_two_points_on_a_hot_board() -> None:
    # TI SNVA951 section 9: 87 % counted as 85 %: 3.3 V · 3 A · (1/0.85 − 1) = 1.747 W
    found = wiring(Topology.BUCK, {"efficiency": 0.87})
    figures = {key: value for key, value in found.channel.figures.items() if key != "efficiency_temperature"}
    cold = model_of(replace(found, channel=replace(found.channel, figures=figures)))
    assert cold.at(Point(24.0, 3.3, 3.0), End.SEVERE).watts == pytest.approx(1.747, abs=0.0005)
    assert cold.at(Point(24.0, 3.3, 3.0), End.NOMINAL).watts == pytest.approx(1.479, abs=0.0005)
    assert [one.grade for one in cold.used if "hot board" in one.quantity] == [Grade.PRESUMED]


def test_a_resistance_without_a_tempco_is_presumed_to_rise() -> None:
    # 35 mΩ at 4.4 A: 0.6776 W cold; at 125 °C 1.8 times that at most
    found = wiring(Topology.LOAD_SWITCH, {"on_resistance": 0.035, "quiescent": 0.0})
    figures = {key: value for key, value in found.channel.figures.items() if key != "resistance_tempco"}
    bare = model_of(replace(found, channel=replace(found.channel, figures=figures)))
    assert bare.at(Point(5.0, 5.0, 4.4, 125.0), End.SEVERE).watts == pytest.approx(0.6776 * 1.8)
    assert bare.heats
    assert [one.grade for one in bare.used if one.quantity == "resistance tempco"] == [Grade.PRESUMED]


def test_a_pass_transistor_whose_input_falls_to_its_output_still_takes_the_difference() -> None:
    # (16 − 4.9) V · 1 A, though 5 V in would leave it nothing to take
    def series(vin: Span, vout: Span):
        found = wiring(Topology.SERIES_TRANSISTOR, {"on_resistance": 0.02, "quiescent": 0.0})
        return model_of(replace(found, vin=evidence(vin, "V"), vout=evidence(vout, "V")))

    passing = series(Span(5.0, 12.0, 16.0), Span(4.9, 5.0, 5.1))
    assert passing.at(Point(16.0, 4.9, 1.0), End.SEVERE).watts == pytest.approx(11.1)
    switch = series(Span(4.75, 5.0, 5.25), Span(4.75, 5.0, 5.25))
    assert switch.at(Point(5.25, 4.75, 1.0), End.SEVERE).watts == pytest.approx(0.02)


def test_a_diode_that_warms_is_not_credited_for_it() -> None:
    diode = model(Topology.SERIES_DIODE, {"forward_drop": 0.5, "forward_drop_tempco": -0.002})
    assert diode.at(Point(5.0, 4.5, 1.0, 125.0), End.NOMINAL).watts == pytest.approx(0.5)


def test_a_table_over_the_load_is_held_level_below_its_first_point() -> None:
    found = model(Topology.LINEAR, {}, curves={"ground_current": curve((0.01, 0.001), (0.1, 0.003))})
    assert found.at(Point(5.0, 3.0, 0.0), End.NOMINAL).watts == pytest.approx(0.005)
    assert found.loads == (0.01, 0.1)


def test_the_heat_of_a_buck_peaks_where_its_duty_reaches_one() -> None:
    # 3 to 15 V in, 3.3 V, 2 A, 0.4 Ω, 2 MHz, 40 ns, external diode: D = 1 up to 3.3 + 2 · 0.4 = 4.1 V, and there
    # 2² · 0.4 + 0.5 · 4.1 · 2 · 2 MHz · 40 ns + 4.1 · 1 mA = 1.6 + 0.328 + 0.0041 W
    figures = {
        "high_side_resistance": 0.4,
        "switching_frequency": 2e6,
        "rise_time": 2e-8,
        "fall_time": 2e-8,
        "quiescent": 0.001,
        "diode_drop": 0.5,
    }
    found = wiring(Topology.BUCK, figures)
    one = ChannelCase(found, model_of(found), Span(3.0, 9.0, 15.0), Span.exact(3.3), Span.exact(2.0))
    hottest = worst(Case((one,), None, Span.exact(40.0), (1.0, 1.0)))
    assert hottest.watts == pytest.approx(1.9321, abs=1e-4)
    assert hottest.chosen[0].point.vin == pytest.approx(4.1)


def test_a_buck_wired_as_inverter_that_cannot_make_its_voltage_has_no_loss_to_tell() -> None:
    figures = {
        "high_side_resistance": 0.2,
        "switching_frequency": 5e5,
        "rise_time": 1e-8,
        "fall_time": 1e-8,
        "quiescent": 0.001,
        "diode_drop": 0.5,
    }
    inverter = model(Topology.BUCK, figures, inverts=True)
    # D = (12 + 0.5)/(17 + 0.5 − 0.2 · Icoil) ≥ 1 once the coil carries 25 A
    with pytest.raises(ValueError, match=r"no duty cycle makes 12\.0 V from 5\.00 V in"):
        inverter.at(Point(17.0, 12.0, 7.36), End.SEVERE)


def test_a_table_is_itself_at_its_knots() -> None:
    # 0.1 + (1 − 0.1)/(1 − 0.1) · (0.45 − 0.1) is not 0.45 in binary
    table = curve((0.1, Span(0.05, 0.05, 0.1)), (1.0, 0.45))
    assert table.at(1.0) == Span.exact(0.45)
    assert table.at(0.1) == Span(0.05, 0.05, 0.1)


def test_an_efficiency_of_a_higher_output_leaves_its_loss_at_a_lower_one() -> None:
    # 150 and 50 mΩ, 12 → 5 V, 3 A: 1.017 W, 93.65 %; at 1.2 V the loss terms still make 0.732 W, the efficiency 0.244 W
    figures = {"efficiency": 0.9365, "efficiency_output": 5.0}
    buck = model(Topology.BUCK, figures)
    assert buck.at(Point(12.0, 1.2, 3.0), End.SEVERE).watts == pytest.approx(15.0 * (1 / 0.9365 - 1))
    found = wiring(Topology.BUCK, figures)
    bare = {key: value for key, value in found.channel.figures.items() if key != "efficiency_output"}
    assert model_of(replace(found, channel=replace(found.channel, figures=bare))).missing == (
        "output voltage at which the efficiency was measured (efficiency_output)",
    )
    fixed = replace(found.channel, figures=bare, volts=evidence(1.2, "V"))
    assert model_of(replace(found, channel=fixed)).missing == ()


def test_a_drop_that_falls_with_the_load_heats_most_between_two_points() -> None:
    # 1 V at 0 A falls to 0.2 V at 1 A: I · (1 − 0.8 · I) is greatest at 0.625 A: 0.3125 W
    found = model(Topology.SERIES_DIODE, {}, curves={"forward_drop": curve((0.0, 1.0), (1.0, 0.2))})
    assert found.loads == pytest.approx((0.0, 0.625, 1.0))
    assert found.at(Point(5.0, 4.0, 0.625), End.SEVERE).watts == pytest.approx(0.3125)
