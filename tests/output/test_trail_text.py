"""The trail of a part: every figure in it worked out again here, from what the fixture boards state and nothing else.

Figures, tolerances and wiring are those of `fixture_boards/*/EXPECTED.md` and `rules.toml`; the formulas are the ones
written there. Whole trails and gap lists of all three boards stand in `tests/golden`.
"""

from __future__ import annotations

from dataclasses import replace
from functools import cache

from conftest import ROOT

from analyzer.audit import audit
from analyzer.ledger import Entry, Ledger
from analyzer.output.console import gap_lines
from analyzer.output.trail_text import trail_lines

THIN_AIR = (1 - 2.25577e-5 * 450) ** 5.25588
"""Pressure ratio of the US Standard Atmosphere 1976 at seedling_bench's 450 m."""

MULTIPLIER = THIN_AIR**-0.7


@cache
def ledger(board: str) -> Ledger:
    return audit(ROOT / "fixture_boards" / board).ledger


def entry(board: str, ref: str) -> Entry:
    (found,) = [one for one in ledger(board).entries if one.ref == ref]
    return found


def lines(board: str, ref: str) -> list[str]:
    return trail_lines(entry(board, ref), 1000)


def three(value: float) -> str:
    """Three significant digits."""
    return f"{value:#.3g}".rstrip(".")


def milli(value: float) -> str:
    return three(1000 * value)


def after(trail: list[str], head: str) -> list[str]:
    """The lines from this one on, the caution left out."""
    return trail[trail.index(head) : -2]


def nominal_and_worst(trail: list[str], quantity: str) -> list[str]:
    return [line.split(" [")[0].strip() for line in trail if line.startswith(f"  {quantity}: ")]


def test_a_floating_regulator_over_its_limit_with_every_remedy() -> None:
    trail = lines("seedling_bench", "U5")
    reference, upper, lower, adjust = 1.25, 240.0, 2050.0, 50e-6
    out = reference * (1 + lower / upper) + adjust * lower
    least = reference * 0.98 * (1 + lower * 0.99 / (upper * 1.01)) + 50e-6 * lower * 0.99
    most = reference * 1.02 * (1 + lower * 1.01 / (upper * 0.99)) + 90e-6 * lower * 1.01
    assert f"= {three(least)} V..{three(most)} V, nominal {three(out)} V [derived]" in trail[5]
    load = 0.080 + out / (upper + lower)
    load_most = 0.095 + most / ((upper + lower) * 0.99)
    load_least = 0.080 + least / ((upper + lower) * 1.01)
    total = f"load of +12V: {milli(load_least)} mA..{milli(load_most)} mA, nominal {milli(load)} mA"
    assert f"  {total} [derived] sum over R4, U6" in trail
    heat = (24 - out) * load + 24 * 50e-6
    hot = (25.2 - least) * load_most + 25.2 * 90e-6
    assert nominal_and_worst(trail, "heat") == [
        f"heat: (24.0 V − {three(out)} V) · {milli(load)} mA + 24.0 V · 50.0 µA = {three(heat)} W",
        f"heat: (25.2 V − {three(least)} V) · {milli(load_most)} mA + 25.2 V · 90.0 µA = {three(hot)} W",
    ]
    theta = 110 * MULTIPLIER
    junctions = (48 + theta * heat, 53 + theta * hot)
    assert nominal_and_worst(trail, "junction") == [
        f"junction: 48.0 °C + {three(theta)} K/W · {three(heat)} W = {three(junctions[0])} °C",
        f"junction: 53.0 °C + {three(theta)} K/W · {three(hot)} W = {three(junctions[1])} °C",
    ]
    assert f"  θ: {three(theta)} K/W [derived] θJA (1s, design 1s), air side × {MULTIPLIER:.3f} for altitude" in trail
    allowed, other = (115 - 53) / theta, 53 + 100 * MULTIPLIER * hot
    most_load = (allowed - 25.2 * 90e-6) / (25.2 - least)
    most_input = (allowed + least * load_most) / (load_most + 90e-6)
    # 75 Ω is the greatest of the E24 series that leaves the dropout of 2.2 V at the lowest input
    room = (22.8 - most - 2.2) / load_most
    assert 75 < room < 82
    behind = (25.2 - 75 * load_most - least) * load_most + 25.2 * 90e-6
    middle = (25.2 + least) / 2
    stages = ((25.2 - middle) * load_most + 25.2 * 90e-6, (middle - least) * load_most + middle * 90e-6)
    assert after(trail, f"margin: 115.0 °C − {junctions[1]:.1f} °C = {115 - junctions[1]:+.1f} K") == [
        "margin: 115.0 °C − 209.6 °C = -94.6 K",
        f"greatest load: up to {milli(most_load)} mA, where the junction meets its limit",
        f"greatest ambient: the junction meets its limit at {115 - theta * hot:.1f} °C around the part",
        f"θ needed: {three((115 - 53) / hot)} K/W from junction to air or less keep the junction inside its limit",
        f"greatest input: up to {three(most_input)} V, where the junction meets its limit",
        f"series resistor: 75.0 Ω before the input takes {milli(75 * load_most**2)} mW at {milli(load_most)} mA, keeps "
        f"{three(22.8 - 75 * load_most - most)} V at the lowest input and brings the junction to "
        f"{three(53 + theta * behind)} °C",
        f"intermediate rail: an intermediate rail of {three(middle)} V between two such stages brings their junctions "
        f"to {three(53 + theta * stages[0])} °C and {three(53 + theta * stages[1])} °C",
        # generic, from packages.toml, and it has its share of the thin air too
        f"next package: package QFN (generic 100 K/W) would bring the junction to {three(other)} °C",
        *(
            f"sensitivity: {name} at its nominal instead of its worst lowers the junction by {kelvin:.1f} K"
            for name, kelvin in (
                ("load", theta * (25.2 - least) * (load_most - load)),
                ("input voltage", theta * (1.2 * load_most + 1.2 * 90e-6)),
                ("output voltage", theta * (out - least) * load_most),
                ("ambient", 5.0),
            )
        ),
    ]


def test_a_buck_whose_inductor_takes_its_share() -> None:
    trail = lines("seedling_bench", "U1")
    out, most, least = 5.0, 0.808 * (1 + 106.05 / 19.8), 0.792 * (1 + 103.95 / 20.2)
    lamp = ((least - 3.5) / 1010, (out - 2.6) / 1000, (most - 1.9) / 990)
    divider = (least / 126.25e3, out / 125e3, most / 123.75e3)
    below = (0.05106, 0.05106, 0.079095)
    load = [sum(three_of) for three_of in zip(lamp, divider, below, strict=True)]
    total = f"load of +5V: {milli(load[0])} mA..{milli(load[2])} mA, nominal {milli(load[1])} mA"
    assert f"  {total} [derived] sum over D1, R1, U2" in trail
    # two points less when hot; 25 mΩ where it was measured, 40 mΩ here; 2 mA without load at 25.2 V
    ohms = [(out * load[1], 0.86, load[1]), (most * load[2], 0.80, load[2])]
    lost, idle = [0.025 * amps**2 for _, _, amps in ohms], (0.0, 25.2 * 0.002)
    heat = [watts * (1 / share - 1) - coil + own for (watts, share, _), coil, own in zip(ohms, lost, idle, strict=True)]
    light = ("", f" + {milli(idle[1])} mW at light load")
    assert nominal_and_worst(trail, "heat") == [
        f"heat: {milli(watts)} mW · (1/{share:.3f} − 1) − {milli(1000 * coil)} µW in the inductor measured with"
        f"{more} = {milli(kept)} mW"
        for (watts, share, _), coil, more, kept in zip(ohms, lost, light, heat, strict=True)
    ]
    theta = 95 * MULTIPLIER
    assert nominal_and_worst(trail, "junction") == [
        f"junction: {air:.1f} °C + {three(theta)} K/W · {milli(kept)} mW = {three(air + theta * kept)} °C"
        for air, kept in zip((48, 53), heat, strict=True)
    ]
    assert nominal_and_worst(trail, "input current") == [
        "input current: 51.1 mA..79.1 mA",
        *(
            f"input current: {milli((watts + kept + 0.04 * amps**2) / vin)} mA"
            for (watts, _, amps), kept, vin in zip(ohms, heat, (24, 25.2), strict=True)
        ),
    ]
    # most · (1/0.80 − 1) · I − 0.025 · I² + idle = 62 K / θ, the smaller root
    k1 = most * (1 / 0.80 - 1)
    greatest = (k1 - (k1**2 - 4 * 0.025 * (62 / theta - idle[1])) ** 0.5) / 0.05
    nominal_load = most * load[1] * (1 / 0.80 - 1) - 0.025 * load[1] ** 2 + idle[1]
    nominal_out = out * load[2] * (1 / 0.80 - 1) - 0.025 * load[2] ** 2 + idle[1]
    assert trail[-10:-2] == [
        f"margin: 115.0 °C − {53 + theta * heat[1]:.1f} °C = {62 - theta * heat[1]:+.1f} K",
        f"greatest load: up to {milli(greatest)} mA, where the junction meets its limit",
        f"greatest ambient: the junction meets its limit at {three(115 - theta * heat[1])} °C around the part",
        f"θ needed: {three(62 / heat[1])} K/W from junction to air or less keep the junction inside its limit",
        "sensitivity: ambient at its nominal instead of its worst lowers the junction by 5.0 K",
        f"sensitivity: load at its nominal instead of its worst lowers the junction by "
        f"{theta * (heat[1] - nominal_load):.1f} K",
        f"sensitivity: output voltage at its nominal instead of its worst lowers the junction by "
        f"{theta * (heat[1] - nominal_out):.1f} K",
        f"sensitivity: input voltage at its nominal instead of its worst lowers the junction by {theta * 0.0024:.1f} K",
    ]


def test_a_budget_without_its_load_is_told_as_a_bound() -> None:
    trail = lines("lane_lamp", "U1")
    assert trail[0] == "U1 QXL2133-3.3 (linear, sheet /): open [presumed]"
    bias = 15.8 * 95e-6
    alone = " (with the known currents alone)"
    bound = "  load of +3V3: 0 A (a lower bound: some parts' currents are missing) [derived] sum over nothing"
    assert bound in trail
    assert "  missing: load of +3V3: no current known for U2 [presumed]" in trail
    assert trail[-9:-2] == [
        f"margin: at most 115.0 °C − {60 + 130 * bias:.1f} °C = {55 - 130 * bias:+.1f} K",
        f"greatest load: up to {milli((55 / 130 - bias) / (15.8 - 3.2505))} mA, where the junction meets its limit",
        f"greatest ambient: the junction meets its limit at {three(115 - 130 * bias)} °C around the part{alone}",
        f"θ needed: {55 / bias:.0f} K/W from junction to air or less keep the junction inside its limit{alone}",
        # its rules file gives 20 V, and nine tenths of the absolute 24 V are more
        f"greatest input: up to 20.0 V, where the input rating under the policy ends before the junction does{alone}",
        "sensitivity: ambient at its nominal instead of its worst lowers the junction by 40.0 K",
        f"sensitivity: input voltage at its nominal instead of its worst lowers the junction by "
        f"{130 * (15.8 - 11.65) * 95e-6:.1f} K",
    ]


def test_a_charge_pump_without_its_load() -> None:
    trail = lines("tide_logger", "U3")
    quiet = 5.075 * 1.2e-3
    alone = " (with the known currents alone)"
    assert nominal_and_worst(trail, "heat") == [
        "heat: (1 · 5.00 V − 5.00 V) · 0 A + 5.00 V · 500 µA = 2.50 mW",
        f"heat: (1 · 5.08 V − 5.08 V) · 0 A + 5.08 V · 1.20 mA = {milli(quiet)} mW",
    ]
    assert trail[-9:-2] == [
        "  missing: load of -5V: no current known for U4 [presumed]",
        "",
        f"margin: at most 115.0 °C − {40 + 220 * quiet:.1f} °C = {75 - 220 * quiet:+.1f} K",
        # nine tenths of the rated 60 mA
        "greatest load: up to 54.0 mA, where the rated current under the policy ends before the junction does",
        f"greatest ambient: the junction meets its limit at {three(115 - 220 * quiet)} °C around the part{alone}",
        f"θ needed: {75 / quiet:.0f} K/W from junction to air or less keep the junction inside its limit{alone}",
        # its input voltage moves the junction by 220 K/W · 0.075 V · 1.2 mA = 0.02 K, which is not worth a line
        "sensitivity: ambient at its nominal instead of its worst lowers the junction by 25.0 K",
    ]


def test_an_estimate_of_chance_has_its_line() -> None:
    one = replace(entry("lane_lamp", "U101"), chance=(0.0123, 61.04, 99.96), remedies=(), sensitivity=(), steps=())
    assert trail_lines(one, 200) == [
        "U101 QXL2150-5.0 (linear, sheet /Left/): tight [presumed]",
        "",
        "margin: 115.0 °C − 100.8 °C = +14.2 K",
        "chance of exceeding the limit: 1.2%; junction 61.0 to 100.0 °C (5 to 95 %), triangular over each span, inputs "
        "independent",
        "",
        "An estimate, not a measurement: verify on hardware; data sheet, local codes and qualified engineers decide.",
    ]


def test_without_a_limit_there_is_no_margin() -> None:
    one = replace(entry("lane_lamp", "U101"), limit=None)
    assert not any(line.startswith("margin") for line in trail_lines(one, 200))


def test_gaps_are_told_by_rail_with_the_room_that_is_left() -> None:
    theta, bias, lift = 130.0, 15.8 * 95e-6, 15.8 - 3.2505
    tight, over = (((end - 60) / theta - bias) / lift for end in (100, 115))
    assert list(gap_lines(ledger("lane_lamp"), 200)) == [
        "",
        "missing currents, by rail",
        f"  +3V3, U1 has room for {milli(tight)} mA (over at {milli(over)} mA, junction)",
        "    U2 LAMP-CTL",
        '    note for U2: "U2: up to 30 mA with both lamps fading" (lane_lamp.kicad_sch sheet / at (172.72, 76.2) mm)',
    ]
    most = 0.609 * (1 + 141.4 / 9.9)
    bias, lift, known = most * 95e-6, most - 4.925, 0.0012
    tight, over = (((end - 40) / theta - bias) / lift - known for end in (100, 115))
    assert list(gap_lines(ledger("tide_logger"), 200)) == [
        "",
        "missing currents, by rail",
        f"  +5V, known 500 µA..1.20 mA, U2 has room for {milli(tight)} mA (over at {milli(over)} mA, junction)",
        "    U4 GAUGE-AMP, U5 LOG-3",
        # nine tenths of the rated current, and all of it, both less than the junction allows
        "  -5V, U3 has room for 54.0 mA (over at 60.0 mA, rated current)",
        "    U4 GAUGE-AMP",
    ]
    assert list(gap_lines(ledger("seedling_bench"), 200)) == []
