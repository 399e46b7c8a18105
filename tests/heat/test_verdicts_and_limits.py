"""Verdicts, the two limits, ratings, policies, and what an entry says beside its verdict."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from heat_kit import Bench, close, names, number

from analyzer.audit import audit
from analyzer.evidence import Grade
from analyzer.findings.base import Verdict
from analyzer.heat.ratings import site_findings
from analyzer.heat.uncertainty import chance
from analyzer.load import Pulse
from analyzer.quantity import Span
from analyzer.rule import BoardClass, PackageRule, Topology
from analyzer.settings import Board, Coupling, PartStatement, Policy, Settings
from analyzer.settings_policy import read_policy
from analyzer.toml_table import Table, read_toml

EXACT = Span.exact
ROOT = Path(__file__).resolve().parents[2]


def at_junction(celsius: float, **changes: object) -> Bench:
    """A part of 1 V and 50 K/W whose load brings it just there from 40 °C."""
    amps = (celsius - 40.0) / 50.0
    return Bench(vin=EXACT(6.0), vout=EXACT(5.0), draws=((EXACT(amps), None),)).but(**changes)


@pytest.mark.parametrize(
    ("celsius", "verdict", "finding"),
    [
        (99.9, Verdict.CLEAR, None),
        (100.1, Verdict.TIGHT, "junction-tight"),
        (114.9, Verdict.TIGHT, "junction-tight"),
        (115.1, Verdict.OVER, "junction-over-policy"),
        (124.9, Verdict.OVER, "junction-over-policy"),
        (125.1, Verdict.OVER, "junction-over-rating"),
    ],
)
def test_house_policy_on_a_part_rated_125(celsius: float, verdict: Verdict, finding: str | None) -> None:
    entry = at_junction(celsius).entry()
    assert entry.verdict is verdict
    assert (entry.limit, entry.data_sheet_limit, entry.policy_limit, entry.tight_above) == (115.0, 125.0, 115.0, 100.0)
    assert entry.margin == pytest.approx(115.0 - celsius)
    junctions = {name for name in names(entry) if name.startswith("junction")}
    assert junctions == ({finding} if finding else set())


def test_only_an_absolute_maximum_is_used_and_said() -> None:
    entry = at_junction(99.0, figures={"quiescent": 0.0, "junction_absolute_max": 150.0}).entry()
    # common practice: 25 K between the absolute maximum and operation
    assert entry.data_sheet_limit == 125.0
    assert "absolute-limit-used" in names(entry)


def test_a_stated_limit_wins() -> None:
    entry = at_junction(99.0, statement=PartStatement(junction_max=number(105.0, "°C"))).entry()
    assert entry.data_sheet_limit == 105.0
    assert entry.verdict is Verdict.OVER


@pytest.mark.parametrize(
    ("factor", "cap", "limit"), [(0.75, None, 93.75), (None, 85.0, 85.0), (0.75, 110.0, 93.75), (0.9, 110.0, 110.0)]
)
def test_factor_and_cap_of_a_policy(factor: float | None, cap: float | None, limit: float) -> None:
    policy = Policy("test", junction_factor=factor, junction_cap=cap)
    entry = at_junction(60.0, settings=Settings(policy=policy)).entry()
    assert entry.policy_limit == pytest.approx(min(limit, 115.0))
    assert entry.tight_above is not None
    assert entry.limit is not None
    assert entry.tight_above <= entry.limit


@pytest.mark.parametrize(
    ("figures", "finding", "verdict"),
    [
        ({"input_max": 5.9}, "input-over-rating", Verdict.OVER),
        ({"input_max": 6.0}, None, Verdict.CLEAR),
        ({"input_absolute_max": 6.5}, "input-over-policy", Verdict.TIGHT),
        ({"input_absolute_max": 6.7}, None, Verdict.CLEAR),
        ({"output_current_max": 0.39}, "current-over-rating", Verdict.OVER),
        ({"output_current_max": 0.42}, "current-over-policy", Verdict.TIGHT),
        ({"output_current_max": 0.45}, None, Verdict.CLEAR),
        ({"differential_max": 0.9}, "input-over-rating", Verdict.OVER),
        ({"power_max": 0.39}, "power-over-rating", Verdict.OVER),
        ({"dropout": 1.1}, "dropout-lost", Verdict.OVER),
        ({"dropout": 0.9}, None, Verdict.CLEAR),
        ({"current_limit": 2.0}, "short-circuit-heat", Verdict.CLEAR),
    ],
)
def test_ratings(figures: dict[str, float | Span], finding: str | None, verdict: Verdict) -> None:
    entry = at_junction(60.0).with_figures(**figures).entry()  # 6 to 5 V at 0.4 A
    assert entry.verdict is verdict
    if finding:
        assert finding in names(entry)


@pytest.mark.parametrize(
    ("nominal", "rated", "grade", "verdict"),
    [
        (6.0, 6.2, Grade.STATED, Verdict.OVER),
        (6.0, 6.2, Grade.PRESUMED, Verdict.TIGHT),
        (6.0, 5.9, Grade.PRESUMED, Verdict.OVER),
        (6.0, 6.3, Grade.PRESUMED, Verdict.CLEAR),
    ],
)
def test_a_presumed_tolerance_alone_makes_no_fault(
    nominal: float, rated: float, grade: Grade, verdict: Verdict
) -> None:
    bench = at_junction(60.0, vin=Span.around(nominal, 0.05), vin_grade=grade).with_figures(input_max=rated)
    assert bench.entry().verdict is verdict


def test_an_unfitted_part_has_no_verdict_of_its_own() -> None:
    entry = at_junction(200.0, fitted=False).entry()
    assert not entry.fitted
    assert entry.verdict is Verdict.OPEN
    assert entry.missing == ("not fitted",)


def test_runaway_is_over() -> None:
    # I²R of 1 W cold and 1 %/K: with 120 K/W the rise feeds itself faster than it is carried away
    bench = Bench(
        topology=Topology.LOAD_SWITCH,
        vout=EXACT(5.0),
        draws=((EXACT(10.0), None),),
        figures={"on_resistance": 0.01, "resistance_tempco": 0.01, "junction_max": 150.0},
        theta=120.0,
    )
    entry = bench.entry()
    assert entry.verdict is Verdict.OVER
    assert "thermal-runaway" in names(entry)
    # with 40 K/W there is a rest: Tj = 40 + 40 (1 + 0.01 (Tj - 25)), that is 116.67 °C
    rest = bench.but(theta=40.0).entry()
    assert rest.worst is not None
    assert rest.worst.junction == pytest.approx((40 + 40 * 0.75) / 0.6, abs=1e-5)


def test_a_generic_package_figure_is_graded_and_flagged() -> None:
    rule = PackageRule("SOT-223", (), {BoardClass.LOW: number(165.0, "K/W"), BoardClass.HIGH: number(100.0, "K/W")})
    bench = at_junction(60.0, theta=None, packages=(rule,), board=Board())
    entry = bench.entry()  # nothing known of the board: the poorest class
    assert entry.worst is not None
    assert entry.worst.junction == pytest.approx(40.0 + 0.4 * 165.0)
    assert entry.grade is Grade.PRESUMED
    assert "theta-generic" in names(entry)
    assert bench.but(package="TO-999").entry().verdict is Verdict.OPEN


def test_both_neighbours_are_warmed_by_one_pair() -> None:
    pair = Coupling("U1", "U2", number(10.0, "K/W"))
    benches = (at_junction(60.0), at_junction(90.0, ref="U2"))
    first, second = close(benches, Settings(board=benches[0].board, coupling=(pair,)))
    assert first.worst is not None
    assert second.worst is not None
    assert first.worst.junction == pytest.approx(60.0 + 10.0 * 1.0)
    assert second.worst.junction == pytest.approx(90.0 + 10.0 * 0.4)


def test_numbers_for_the_workbook_give_the_same_junction() -> None:
    bench = Bench(
        vin=Span(10.8, 12.0, 13.2),
        vout=Span(4.9, 5.0, 5.1),
        draws=((Span(0.05, 0.1, 0.2), None),),
        figures={"quiescent": Span(0.001, 0.002, 0.005), "junction_max": 125.0},
    ).in_air(Span(0.0, 25.0, 50.0), 2000.0, 5.0)
    entry = bench.entry()
    live, worst = entry.live, entry.worst
    assert worst is not None
    assert live["closed_form"] == 1.0
    watts = live["k0"] + live["k1"] * live["load"] + live["k2"] * live["load"] ** 2
    assert watts == pytest.approx((13.2 - 4.9) * 0.2 + 13.2 * 0.005)
    thin = (1 - 2.25577e-5 * 2000.0) ** (-5.25588 * 0.7)
    junction = 55.0 + watts * (live["theta_solid"] + live["theta_air"] * thin) + live["rise_extra"]
    assert worst.junction == pytest.approx(junction)


def test_no_formula_is_handed_out_where_the_worst_corner_moves_with_the_load() -> None:
    # a buck is worst at its highest input when idle and at its lowest when loaded
    figures: dict[str, float | Span] = {
        "high_side_resistance": 0.15,
        "low_side_resistance": 0.02,
        "switching_frequency": 500e3,
        "rise_time": 1e-8,
        "fall_time": 1e-8,
        "quiescent": 0.001,
        "junction_max": 125.0,
    }
    bench = Bench(Topology.BUCK, Span(5.5, 12.0, 28.0), EXACT(5.0), draws=((EXACT(2.0), None),), figures=figures)
    assert bench.entry().live["closed_form"] == 0.0


def test_no_formula_for_pulses() -> None:
    pulse = Pulse(EXACT(0.5), 0.001, 0.1)
    assert at_junction(60.0, draws=((EXACT(0.005), pulse),)).entry().live["closed_form"] == 0.0


def test_the_monte_carlo_run_is_reproducible_and_inside_the_corners() -> None:
    bench = at_junction(60.0, theta=Span(40.0, 50.0, 60.0), seed=7).in_air(Span(20.0, 40.0, 60.0))
    entry = bench.entry()
    assert entry.chance == bench.entry().chance != bench.but(seed=8).entry().chance
    assert entry.chance is not None
    assert entry.worst is not None
    over, low, high = entry.chance
    # 20 + 16 at the coolest, 60 + 24 at the hottest: the limit of 115 is out of reach
    assert over == 0.0
    assert 36.0 < low < 60.0 < high < 84.0
    assert at_junction(60.0).entry().chance is None


def test_the_trail_goes_from_readings_to_the_junction_with_sources() -> None:
    steps = at_junction(60.0).entry().steps
    order = [step.what for step in steps]
    assert order[0] == "part"
    wanted = ["input voltage", "θJA", "heat", "air around the part", "θ", "junction", "data sheet limit"]
    places = [order.index(what) for what in wanted]
    assert places == sorted(places)
    junction = [step for step in steps if step.what == "junction"][-1]
    assert junction.formula == "40.0 °C + 50.0 K/W · 400 mW"
    assert junction.value == "60.0 °C"
    assert all(step.source for step in steps if step.what != "missing")


def test_remedies_carry_their_numbers() -> None:
    bench = Bench(
        vin=EXACT(12.0), vout=EXACT(3.3), draws=((EXACT(0.2), None),), figures={"quiescent": 0.0, "junction_max": 125.0}
    ).with_figures(dropout=0.5)
    entry = bench.entry()  # 8.7 V · 0.2 A · 50 K/W = 87 K
    found = {one.kind: one.numbers for one in entry.remedies}
    assert entry.verdict is Verdict.OVER
    assert found["θ needed"]["k_per_w"] == pytest.approx(75.0 / 1.74)
    assert found["greatest load"]["amps"] == pytest.approx(75.0 / 50.0 / 8.7)
    assert found["greatest ambient"]["celsius"] == pytest.approx(28.0)
    assert found["greatest input"]["volts"] == pytest.approx(3.3 + 75.0 / 50.0 / 0.2)
    # (12 - 3.3 - 0.5)/0.2 = 41 Ω, E24: 39 Ω, 1.56 W; what is left is 0.9 V · 0.2 A · 50 K/W
    resistor = found["series resistor"]
    assert resistor["ohms"] == pytest.approx(39.0)
    assert resistor["watts"] == pytest.approx(1.56)
    assert resistor["celsius"] == pytest.approx(49.0)
    split = found["intermediate rail"]
    assert split["volts"] == pytest.approx(7.65)
    assert split["celsius_first"] == split["celsius_second"] == pytest.approx(40.0 + 43.5)


def test_an_efficiency_that_would_pass() -> None:
    bench = Bench(Topology.BUCK, EXACT(12.0), EXACT(5.0), draws=((EXACT(2.0), None),))
    entry = bench.but(figures={"efficiency": 0.8, "junction_max": 125.0}).entry()  # 2.5 W · 50 K/W = 125 K
    least = next(one.numbers["efficiency"] for one in entry.remedies if one.kind == "least efficiency")
    assert least == pytest.approx(10.0 / 11.5)
    passes = bench.but(figures={"efficiency": least + 1e-6, "junction_max": 125.0}).entry()
    assert passes.verdict is not Verdict.OVER


def test_sensitivity_is_largest_first_and_in_kelvin() -> None:
    bench = at_junction(60.0, theta=Span(40.0, 50.0, 60.0)).in_air(Span(20.0, 30.0, 50.0))
    # worst 50 + 24; ambient at 30 saves 20 K, θ at 50 saves 4 K
    assert [(name, round(kelvin, 6)) for name, kelvin in bench.entry().sensitivity] == [("ambient", 20.0), ("θ", 4.0)]


@pytest.mark.parametrize("file", sorted((ROOT / "rules" / "policies").glob("*.toml")), ids=lambda file: file.stem)
def test_shipped_policies_read_and_only_ours_is_verified(file: Path) -> None:
    faults: list[object] = []
    policy = read_policy(Table(file, "", read_toml(file), faults))  # type: ignore[arg-type]
    assert faults == []
    assert policy.name == file.stem
    assert policy.verified == (policy.name == "house")
    assert policy.junction_tight >= policy.junction_over
    found = {finding.name for finding in site_findings(Settings(policy=policy))}
    assert ("policy-unverified" in found) == (policy.name != "house")
    if policy.name == "house":
        assert policy == Policy()


def test_altitude_above_five_kilometres_is_flagged() -> None:
    site = Bench().in_air(altitude=5001.0).site
    assert "altitude-unchecked" in {finding.name for finding in site_findings(Settings(site=site))}


def test_air_that_moves_takes_the_forced_exponent() -> None:
    still = at_junction(60.0).in_air(altitude=3000.0)
    moving = still.but(site=replace(still.site, air_speed=number(1.0, "m/s")))
    ratio = (1 - 2.25577e-5 * 3000.0) ** 5.25588
    for bench, exponent in ((still, 0.7), (moving, 0.8)):
        worst = bench.entry().worst
        assert worst is not None
        assert worst.theta == pytest.approx(50.0 * ratio**-exponent)


def test_a_case_without_a_path_has_no_chance() -> None:
    from analyzer.heat.case import Case

    assert chance(Case((), None, EXACT(40.0), (1.0, 1.0)), 1) is None


def test_how_far_a_part_may_go_ends_at_its_ratings_too() -> None:
    entries = {one.ref: one for one in audit(ROOT / "fixture_boards" / "tide_logger").ledger.entries}
    said = {(ref, remedy.kind): remedy for ref, one in entries.items() for remedy in one.remedies}
    # by the junction alone hundreds of volts: recommended up to 20 V, absolute maximum 24 V less a tenth by policy
    far = said["U2", "greatest input"]
    assert far.numbers == {"volts": 20.0}
    ends = "where the input rating under the policy ends before the junction does"
    assert far.text == f"up to 20.0 V, {ends} (with the known currents alone)"
    # 60 mA rated, nine tenths of it by policy
    assert said["U3", "greatest load"].numbers == {"amps": pytest.approx(0.054)}
