"""Feedback networks: published figures, closed forms, corners by brute force."""

from __future__ import annotations

import itertools

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from rails_bench import circuit, part, recognised, rulebook

from analyzer.quantity import Span
from analyzer.rails import find_rails
from analyzer.rails.feedback import Drive, solve_feedback
from analyzer.rails.network import End, Leg, Network, Resistance, Switch
from analyzer.rule import Topology
from analyzer.settings import Settings


def resistance(ref: str, one: str, other: str, ohms: float, tolerance: float = 0.0) -> Resistance:
    return Resistance(ref, one, other, Span.around(ohms, tolerance), True, "")


def divider(top: float, bottom: float, tolerance: float = 0.0, *more: Resistance, **legs: End) -> Network:
    ends = {"out": Leg("out", End.OUTPUT), "gnd": Leg("gnd", End.GROUND)}
    ends.update({group: Leg(group, end, "U9") for group, end in legs.items()})
    resistances = (
        resistance("R1", "tap", "out", top, tolerance),
        resistance("R2", "tap", "gnd", bottom, tolerance),
        *more,
    )
    return Network("tap", resistances, legs=ends)


def test_published_divider_of_0v8() -> None:
    # reference/physics.md 3.3: 0.8 V ±1 %, 31.6k/10k 1 %: 3.328 V, 3.245 to 3.413 V
    solved = solve_feedback(divider(31600, 10000, 0.01), Span.around(0.8, 0.01))
    assert solved.volts is not None
    assert [round(volts, 3) for volts in solved.volts.corners] == [3.245, 3.328, 3.413]


@pytest.mark.parametrize(
    ("upper", "lower", "amps", "volts"),
    [
        # reference/physics.md 3.3 and section 14 item 6
        (124.0, 374.0, 0.0, 5.0202),
        (124.0, 374.0, 50e-6, 5.0389),
        (1200.0, 3600.0, 0.0, 5.000),
        (1200.0, 3600.0, 50e-6, 5.180),
    ],
)
def test_reference_across_the_upper_resistor(upper: float, lower: float, amps: float, volts: float) -> None:
    solved = solve_feedback(divider(upper, lower), Span.exact(1.25), Span.exact(amps), across="upper")
    assert solved.volts is not None
    assert solved.volts.nominal == pytest.approx(volts, abs=5e-5)


def test_pin_current_into_the_pin_raises_the_output_by_current_times_top() -> None:
    solved = solve_feedback(divider(100e3, 22.1e3), Span.exact(0.6), Span.exact(1e-7))
    assert solved.volts is not None
    assert solved.volts.nominal == pytest.approx(0.6 * (1 + 100 / 22.1) + 1e-7 * 100e3, rel=1e-12)


def test_negative_reference_gives_negative_output() -> None:
    solved = solve_feedback(divider(68.1e3, 10e3), Span.exact(-1.22))
    assert solved.volts is not None
    assert solved.volts.nominal == pytest.approx(-1.22 * 7.81, rel=1e-12)


@given(
    top=st.floats(100, 1e6),
    bottom=st.floats(100, 1e6),
    tolerance=st.floats(0.001, 0.1),
    spread=st.floats(0.001, 0.05),
)
@settings(max_examples=60, deadline=None)
def test_corners_equal_the_closed_form(top: float, bottom: float, tolerance: float, spread: float) -> None:
    solved = solve_feedback(divider(top, bottom, tolerance), Span.around(0.8, spread))
    high = 0.8 * (1 + spread) * (1 + top * (1 + tolerance) / (bottom * (1 - tolerance)))
    low = 0.8 * (1 - spread) * (1 + top * (1 - tolerance) / (bottom * (1 + tolerance)))
    assert solved.volts is not None
    assert solved.volts.high == pytest.approx(high, rel=1e-9)
    assert solved.volts.low == pytest.approx(low, rel=1e-9)


def test_third_leg_to_a_driven_pin_spans_its_range() -> None:
    # 0.8 + 133k·(0.8/33k + (0.8 - Vd)/102k), Vd from 0 to 3.3 V (reference/boards.md: a PWM into the divider)
    network = divider(133e3, 33e3, 0.0, resistance("R3", "tap", "dac", 102e3), dac=End.DRIVEN)
    solved = solve_feedback(network, Span.exact(0.8), drives={"dac": Drive(Span(0, 1.65, 3.3), "U9 drives it")})

    def volts(drive: float) -> float:
        return 0.8 + 133 * (0.8 / 33 + (0.8 - drive) / 102)

    assert solved.volts is not None
    assert solved.volts.corners == pytest.approx((volts(3.3), volts(1.65), volts(0.0)), rel=1e-12)
    assert solved.reasons == ("U9 drives it",)


def test_driven_leg_of_unknown_voltage_leaves_the_output_unknown() -> None:
    network = divider(133e3, 33e3, 0.0, resistance("R3", "tap", "dac", 102e3), dac=End.DRIVEN)
    solved = solve_feedback(network, Span.exact(0.8))
    assert solved.volts is None
    assert "dac" in solved.trouble[0]


def test_open_jumper_to_a_second_leg_spans_both_positions() -> None:
    network = Network(
        "tap",
        (
            resistance("R1", "tap", "out", 100e3),
            resistance("R2", "tap", "gnd", 10e3),
            resistance("R3", "tap", "mid", 10e3),
        ),
        switches=(Switch("JP1", (("mid", "gnd"),)),),
        legs={"out": Leg("out", End.OUTPUT), "gnd": Leg("gnd", End.GROUND)},
    )
    solved = solve_feedback(network, Span.exact(1.0))
    assert solved.volts is not None
    assert solved.volts.corners == pytest.approx((11.0, 11.0, 21.0))
    assert solved.reasons == ("JP1 switches a leg of the divider",)


def test_trimmer_spans_its_travel() -> None:
    # tap on the wiper of a 10k trimmer between 10k above and 10k below: fractions 1/3 to 2/3
    network = Network(
        "w",
        (resistance("R1", "out", "a", 10e3), resistance("R2", "b", "gnd", 10e3)),
        trimmers=(("RV1", "a", "w", "b", Span.exact(10e3)),),
        legs={"out": Leg("out", End.OUTPUT), "gnd": Leg("gnd", End.GROUND)},
    )
    solved = solve_feedback(network, Span.exact(1.0))
    assert solved.volts is not None
    assert solved.volts.corners == pytest.approx((1.5, 2.0, 3.0), rel=1e-6)


def test_network_without_way_to_the_output_is_unknown() -> None:
    network = Network("tap", (resistance("R2", "tap", "gnd", 1e4),), legs={"gnd": Leg("gnd", End.GROUND)})
    assert solve_feedback(network, Span.exact(0.8)).volts is None


@given(st.lists(st.sampled_from([1e3, 2.2e3, 4.7e3, 1e4, 3.3e4]), min_size=4, max_size=6), st.integers(0, 5))
@settings(max_examples=40, deadline=None)
def test_bridge_corners_enclose_a_dense_grid(values: list[float], seed: int) -> None:
    # tap, a and b joined by a bridge: no closed form; the corners must enclose and touch a grid of 3 points a part
    tolerance = 0.05
    nodes = [("tap", "a"), ("a", "out"), ("tap", "b"), ("b", "gnd"), ("a", "b"), ("tap", "gnd")]
    items = [resistance(f"R{i}", *nodes[i], ohms, tolerance) for i, ohms in enumerate(values)]
    legs = {"out": Leg("out", End.OUTPUT), "gnd": Leg("gnd", End.GROUND)}
    solved = solve_feedback(Network("tap", tuple(items), legs=legs), Span.exact(0.8))
    assert solved.volts is not None
    lows, highs = [], []
    for factors in itertools.product((1 - tolerance, 1.0, 1 + tolerance), repeat=len(items)):
        exact = tuple(
            resistance(item.ref, item.one, item.other, item.span.nominal * factor)
            for item, factor in zip(items, factors, strict=True)
        )
        point = solve_feedback(Network("tap", exact, legs=legs), Span.exact(0.8)).volts
        assert point is not None
        lows.append(point.nominal)
        highs.append(point.nominal)
    assert solved.volts.low == pytest.approx(min(lows), rel=1e-9)
    assert solved.volts.high == pytest.approx(max(highs), rel=1e-9)


def buck(top: str = "R1", **more: object) -> list[object]:
    return [
        part("J1", "Conn", {"1 Pin_1": "+12V", "2 Pin_2": "GND"}),
        part(
            "U1",
            "XB100",
            {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 SW output": "SW1", "4 FB input": "FB1"},
        ),
        part("L1", "10uH", "SW1 VOUT"),
        part("C1", "22u", "VOUT GND"),
    ]


def solve(*extra: object, reference: float | Span = 0.8) -> object:
    components = [*buck(), *extra]
    board = circuit(*components)  # type: ignore[arg-type]
    chip = board.by_ref["U1"][0]
    rails = find_rails(board, (recognised(chip, Topology.BUCK, reference=reference),), rulebook(), Settings())
    return rails.wirings[0], rails


def test_series_and_parallel_with_links_and_unfitted_parts() -> None:
    # top: (20k ∥ 20k) + 0 Ω + 5k6, an unfitted 1k across it; bottom 10k: 0.8·(1 + 15.6/10) = 2.048 V
    wiring, _ = solve(
        part("R1", "20k 0.1%", "VOUT N1"),
        part("R2", "20k 0.1%", "VOUT N1"),
        part("R3", "0R", "N1 N2"),
        part("R4", "5k6 0.1%", "N2 FB1"),
        part("R5", "1k", "VOUT FB1", fitted=False),
        part("R6", "10k 0.1%", "FB1 GND"),
        part("C2", "22p", "VOUT FB1"),
    )
    assert wiring.vout is not None
    assert wiring.vout.span.nominal == pytest.approx(2.048, rel=1e-12)
    assert wiring.vout.grade.value == "derived"
    # 0.1 % is in the value texts, so no tolerance is presumed
    assert wiring.vout.note == ""
    assert wiring.vout.span.high == pytest.approx(0.8 * (1 + 15.6 * 1.001 / (10 * 0.999)), rel=1e-9)


def test_tolerance_not_stated_is_presumed_and_said() -> None:
    wiring, _ = solve(part("R1", "31k6", "VOUT FB1"), part("R2", "10k", "FB1 GND"))
    assert wiring.vout is not None
    assert "not stated" in wiring.vout.note
    assert wiring.vout.weakest.value == "presumed"
    assert wiring.vout.span.high == pytest.approx(0.8 * (1 + 31.6 * 1.01 / (10 * 0.99)), rel=1e-9)


def test_tolerance_from_a_field() -> None:
    wiring, _ = solve(
        part("R1", "31k6", "VOUT FB1", fields={"Tolerance": "0.5%"}),
        part("R2", "10k", "FB1 GND", fields={"Tol": "±0.5 %"}),
    )
    assert wiring.vout is not None
    assert wiring.vout.span.high == pytest.approx(0.8 * (1 + 31.6 * 1.005 / (10 * 0.995)), rel=1e-9)
    assert wiring.vout.note == ""


def test_unreadable_resistor_leaves_the_output_open_with_its_name() -> None:
    wiring, _ = solve(part("R1", "see note", "VOUT FB1"), part("R2", "10k", "FB1 GND"))
    assert wiring.vout is None
    assert any("R1" in reason for reason in wiring.why_open)


def test_feedback_on_the_output_is_the_reference() -> None:
    wiring, _ = solve(part("R1", "0R", "VOUT FB1"))
    assert wiring.vout is not None
    assert wiring.vout.span.nominal == pytest.approx(0.8)


def test_remote_sense_behind_a_bead_and_second_decoy_divider() -> None:
    wiring, rails = solve(
        part("FB1", "600R@100MHz", "VOUT VCORE"),
        part("R1", "10k 1%", "VCORE FB1"),
        part("R2", "10k 1%", "FB1 GND"),
        part("R7", "47k", "VOUT OVP"),
        part("R8", "10k", "OVP GND"),
    )
    assert wiring.vout is not None
    assert wiring.vout.span.nominal == pytest.approx(1.6)
    assert rails.of_net["VOUT"] == rails.of_net["VCORE"]


def test_jumper_and_transistor_switched_legs_of_a_drawn_board() -> None:
    common = (part("R1", "100k 0.0%", "VOUT FB1"), part("R2", "10k 0.0%", "FB1 GND"), part("R3", "10k 0.0%", "FB1 N1"))
    both = pytest.approx((8.8, 8.8, 16.8))  # 0.8·(1 + 100/10) and 0.8·(1 + 100/5)
    jumper = part("JP1", "Jumper", "N1 GND", lib_id="Jumper:SolderJumper_2_Open")
    wiring, rails = solve(*common, jumper)
    assert wiring.vout.span.corners == both
    assert "JP1" in wiring.vout.note
    assert [finding.name for finding in rails.findings if finding.subject == "U1"] == ["adjustable-output"]
    switch = part("Q1", "NMOS", {"1 G": "SEL", "2 S": "GND", "3 D": "N1"}, lib_id="Device:Q_NMOS_GSD")
    wiring, _ = solve(*common, switch)
    assert wiring.vout.span.corners == both
    # a jumper at the pin itself, the resistor behind it
    behind = (*common[:2], part("JP1", "J", "FB1 N1", lib_id="Jumper:Jumper_2_Open"), part("R3", "10k 0.0%", "N1 GND"))
    wiring, _ = solve(*behind)
    assert wiring.vout.span.corners == both
    # bridged, it is no choice any more
    bridged = part("JP1", "J", "N1 GND", lib_id="Jumper:SolderJumper_2_Bridged")
    wiring, _ = solve(*common, bridged)
    assert wiring.vout.span.corners == pytest.approx((16.8, 16.8, 16.8))


def test_trimmer_of_a_drawn_board() -> None:
    wiring, _ = solve(
        part("R1", "10k 0.0%", "VOUT A"),
        part("RV1", "10k", {"1": "A", "2": "FB1", "3": "B"}),
        part("R2", "10k 0.0%", "B GND"),
    )
    assert wiring.vout.span.corners == pytest.approx((1.2, 1.6, 2.4), rel=1e-6)


def test_rheostat_in_the_lower_leg() -> None:
    # wiper tied to one end: 10k plus 0 to 10k below, 10k above
    wiring, _ = solve(
        part("R1", "10k 0.0%", "VOUT FB1"),
        part("R2", "10k 0.0%", "FB1 A"),
        part("RV1", "10k", {"1": "A", "2": "GND", "3": "GND"}),
    )
    assert wiring.vout.span.corners == pytest.approx((1.2, 0.8 * (1 + 10 / 15), 1.6), rel=1e-6)


def test_pull_up_of_the_divider_to_another_rail() -> None:
    # a margining resistor to a stated 2.5 V: (V-0.8)/10k + (2.5-0.8)/20k = 0.8/10k
    board = circuit(
        *buck(),  # type: ignore[arg-type]
        part("R1", "10k 0.0%", "VOUT FB1"),
        part("R2", "10k 0.0%", "FB1 GND"),
        part("R3", "20k 0.0%", "FB1 +2V5"),
        part("U7", "MCU", {"1 VDD power_in": "+2V5", "2 VSS power_in": "GND"}),
        part("C7", "1u", "+2V5 GND"),
    )
    from rails_bench import figure

    rails = find_rails(
        board,
        (recognised(board.by_ref["U1"][0], Topology.BUCK, reference=0.8),),
        rulebook(),
        Settings(supplies={"+2V5": figure(2.5)}),
    )
    assert rails.wirings[0].vout is not None
    assert rails.wirings[0].vout.span.nominal == pytest.approx(0.8 + 10 * (0.8 / 10 - 1.7 / 20))
