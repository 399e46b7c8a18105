"""Any circuit, however senseless, is answered: no exception, no endless loop, every rail consistent."""

from __future__ import annotations

import random
import time

from hypothesis import given, settings
from hypothesis import strategies as st
from rails_bench import LIBS, circuit, figure, part, recognised, rulebook

from analyzer.rail import Rails
from analyzer.rails import find_rails
from analyzer.rails.tree import tree_text
from analyzer.rule import Topology
from analyzer.settings import Settings

NETS = ("GND", "+5V", "+3V3", "-12V", "VBUS", "A", "B", "C", "D", "Net-(X1-1)", "SW", "FB", "/psu/VOUT", "VREF-10")
TWO_PIN = ("R", "C", "L", "FB", "D", "F", "NT", "JP", "BT")
VALUES = ("0R", "10k", "0.1", "1uF", "3V3", "DNP", "", "600R@100MHz", "SS14", "?!", "1e9")
PIN_NAMES = ("VIN", "GND", "VOUT", "SW", "FB", "EN", "BOOT", "A", "K", "SET", "1")
KINDS = ("power_in", "power_out", "input", "output", "passive", "bidirectional", "unspecified", "no_connect")


def senseless(seed: int) -> tuple[Rails, float]:
    pick = random.Random(seed)
    components, parts = [], []
    for number in range(pick.randint(1, 30)):
        letters = pick.choice(TWO_PIN)
        nets = f"{pick.choice(NETS)} {pick.choice(NETS)}"
        fitted = pick.random() < 0.9
        lib_id = pick.choice((LIBS[letters], "Jumper:SolderJumper_2_Bridged", "Own:X"))
        components.append(part(f"{letters}{number}", pick.choice(VALUES), nets, fitted=fitted, lib_id=lib_id))
    for number in range(pick.randint(0, 4)):
        pins = {f"{name} {name} passive": pick.choice(NETS) for name in pick.choice((("G", "S", "D"), ("B", "C", "E")))}
        components.append(part(f"Q{number}", "Q", pins))
        trimmer = {str(pin): pick.choice(NETS) for pin in (1, 2, 3)}
        components.append(part(f"RV{number}", pick.choice(("10k", "x")), trimmer))
    for number in range(pick.randint(0, 6)):
        names = pick.sample(PIN_NAMES, pick.randint(2, 7))
        pins = {f"{pin} {name} {pick.choice(KINDS)}": pick.choice(NETS) for pin, name in enumerate(names, start=1)}
        chip = part(f"U{number}", "X", pins, fitted=pick.random() < 0.9)
        components.append(chip)
        if pick.random() < 0.8:
            parts.append(
                recognised(
                    chip,
                    pick.choice(list(Topology)),
                    volts=pick.choice((None, 3.3, -5.0)),
                    reference=pick.choice((None, 0.8, -1.2)),
                    across=pick.choice(("lower", "upper")),
                    sign=pick.choice((1, -1)),
                    figures={"gain": figure(-1.0, "1"), "set_current": figure(1e-5, "A")}
                    if pick.random() < 0.3
                    else {},
                )
            )
    start = time.perf_counter()
    rails = find_rails(circuit(*components), tuple(parts), rulebook(), Settings())
    text = tree_text(rails)
    assert all(len(line) <= 80 or " " not in line.strip() for line in text.splitlines())
    return rails, time.perf_counter() - start


@given(st.integers(0, 1_000_000))
@settings(max_examples=150, deadline=None)
def test_senseless_circuits(seed: int) -> None:
    rails, seconds = senseless(seed)
    assert seconds < 5.0
    names = [rail.name for rail in rails.rails]
    assert len(set(names)) == len(names)
    for rail in rails.rails:
        assert rail.name in rail.nets
        assert all(rails.of_net[net] == rail.name for net in rail.nets)
        assert rail.is_ground or (rail.volts is None) == bool(rail.why_open)
        for feed in rail.feeds:
            assert feed.from_rail is None or feed.from_rail in names
            assert feed.from_rail != rail.name
    for wiring in rails.wirings:
        # nothing unknown without a reason
        if wiring.vout is None and not wiring.is_off:
            assert wiring.why_open
        if wiring.vin is None and not wiring.is_off:
            assert wiring.why_open
