"""Currents of resistors and LEDs, worked by hand."""

from __future__ import annotations

import pytest
from draws_kit import chip, circuit, loads, one_regulator, part, rails, vreg, wire

from analyzer.quantity import Span


class TestComputed:
    def current(self, *components, ref="R1", volts=3.3, rail="+3V3", settings=None):
        board, known = one_regulator(chip("U2", "+3V3", fields={"I_load": "0 mA"}), *components, volts=volts)
        draws = loads(board, known, settings).by_rail[rail].draws
        return {draw.ref: draw.amps.span for draw in draws}.get(ref)

    def test_resistor_to_ground_with_corners(self):
        span = self.current(part("R1", ["+3V3", "GND"], "33R/5%/R0805"), volts=Span(3.2, 3.3, 3.4))
        assert span.corners == pytest.approx((3.2 / 34.65, 0.1, 3.4 / 31.35))

    def test_default_tolerance_is_an_assumption_on_record(self):
        board, known = one_regulator(part("R1", ["+3V3", "GND"], "33"))
        (draw,) = loads(board, known).by_rail["+3V3"].draws
        assert draw.amps.span.high == pytest.approx(3.3 / (33 * 0.99))
        assert draw.amps.weakest == "presumed"

    def test_divider_with_parallel_and_unfitted_resistors(self):
        span = self.current(
            part("R1", ["+3V3", "FB"], "20k/0.1%"),
            part("R2", ["+3V3", "FB"], "20k/0.1%", fitted=False),
            part("R3", ["FB", "Net-(R3-Pad2)"], "10k/0.1%"),
            part("R4", ["Net-(R3-Pad2)", "GND"], "10k/0.1%"),
            part("R5", ["Net-(R3-Pad2)", "GND"], "10k/0.1%"),
            part("C1", ["+3V3", "FB"], "22p"),
        )
        assert span.nominal == pytest.approx(3.3 / 35e3)

    def test_tap_of_a_divider_at_an_input_carries_nothing(self):
        u3 = part("U3", [("1", "IN", "input", "TAP"), ("2", "GND", "power_in", "GND")])
        span = self.current(part("R1", ["+3V3", "TAP"], "10k"), part("R2", ["TAP", "GND"], "10k"), u3)
        assert span.nominal == pytest.approx(3.3 / 20e3)

    def test_pull_up_from_rest_to_its_worst_state(self):
        u3 = part("U3", [("1", "SDA", "bidirectional", "SDA"), ("2", "GND", "power_in", "GND")])
        span = self.current(part("R1", ["+3V3", "SDA"], "2k2/1%"), u3)
        assert span.corners == pytest.approx((0.0, 0.0, 3.3 / 2178))

    def test_pull_up_at_a_negative_rail_s_chip(self):
        u3 = part(
            "U3", [("1", "OUT", "output", "SIG"), ("2", "V-", "power_in", "-5V"), ("3", "V+", "power_in", "+3V3")]
        )
        u1 = vreg("U1", "+5V", "+3V3")
        board = circuit(u1, u3, part("R1", ["+3V3", "SIG"], "1k/1%"))
        known = rails({"+5V": 5, "+3V3": 3.3, "-5V": -5}, [wire(u1, "+5V", "+3V3")])
        span = {draw.ref: draw.amps.span for draw in loads(board, known).by_rail["+3V3"].draws}["R1"]
        assert span.high == pytest.approx(8.3 / 990)

    def test_between_rails_loads_one_and_never_relieves_the_other_in_the_worst_case(self):
        up = self.current(part("R1", ["+5V", "+3V3"], "100/1%"), rail="+5V")
        assert up.corners == pytest.approx((1.7 / 101, 0.017, 1.7 / 99))
        down = self.current(part("R1", ["+5V", "+3V3"], "100/1%"))
        assert down.nominal == pytest.approx(-0.017)
        assert down.high == 0

    def test_on_a_negative_rail_the_current_counts_positive(self):
        board = circuit(chip("U2", "-12V", fields={"I_load": "5 mA"}), part("R1", ["-12V", "GND"], "1k2/1%"))
        found = loads(board, rails({"-12V": -12}))
        assert found.by_rail["-12V"].total.nominal == pytest.approx(0.015)

    def test_supply_through_a_small_resistor_to_a_connector_is_a_gap_not_a_short(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}),
            part("R1", ["+3V3", "OUT"], "10"),
            part("J1", ["OUT", "GND"], lib="Connector:Conn_01x02"),
        )
        found = loads(board, known)
        assert [(gap.ref, gap.why) for gap in found.by_rail["+3V3"].gaps] == [
            ("R1", "current behind this resistor not stated")
        ]

    def test_heater_switched_by_a_transistor(self):
        span = self.current(part("R1", ["+3V3", "HEAT"], "10/1%"), part("Q1", ["GATE", "GND", "HEAT"]))
        assert span.high == pytest.approx(3.3 / 9.9)

    def test_a_stated_current_replaces_the_computed_one(self):
        board, known = one_regulator(part("R1", ["+3V3", "GND"], "33", fields={"I_load": "90 mA"}))
        assert loads(board, known).by_rail["+3V3"].total == Span.exact(0.09)


class TestLeds:
    def current(self, *components, volts=5.0, ref="D1"):
        u1 = vreg("U1", "VIN", "+5V")
        known = rails({"VIN": 12, "+5V": volts, "+3V3": 3.3}, [wire(u1, "VIN", "+5V")])
        board = circuit(u1, chip("U2", "+5V", fields={"I_load": "0 mA"}), *components)
        found = loads(board, known)
        return {draw.ref: draw for draw in found.by_rail["+5V"].draws}.get(ref), found

    @staticmethod
    def led(ref, cathode, anode, value="RED"):
        return part(ref, [("1", "K", "passive", cathode), ("2", "A", "passive", anode)], value, "Device:LED")

    def test_string_to_ground(self):
        draw, found = self.current(part("R1", ["+5V", "X"], "300/1%"), self.led("D1", "GND", "X"))
        # red: 1.7 to 2.5 V, 2.0 V nominal
        assert draw.amps.span.corners == pytest.approx((2.5 / 303, 3.0 / 300, 3.3 / 297))
        assert draw.amps.weakest == "presumed"
        assert [d.ref for d in found.by_rail["+5V"].draws] == ["D1", "U2"]  # the resistor does not count again

    def test_resistor_below_the_led_and_two_in_series(self):
        draw, _ = self.current(self.led("D1", "A", "+5V"), self.led("D2", "B", "A"), part("R1", ["B", "GND"], "100/1%"))
        assert draw.amps.span.nominal == pytest.approx(1.0 / 100)

    def test_switched_by_a_chip(self):
        u3 = part("U3", [("1", "P0", "output", "DRV"), ("2", "GND", "power_in", "GND")])
        draw, _ = self.current(self.led("D1", "X", "+5V", "green"), part("R1", ["X", "DRV"], "1k/1%"), u3)
        assert draw.amps.span.low == 0
        assert draw.amps.span.nominal == pytest.approx((5 - 2.6) / 1000)

    def test_fed_by_a_chip_is_the_chip_s_current(self):
        u3 = part("U3", [("1", "P0", "output", "DRV"), ("2", "GND", "power_in", "GND")])
        draw, found = self.current(part("R1", ["DRV", "X"], "1k"), self.led("D1", "GND", "X"), u3)
        assert draw is None
        assert found.by_rail["+5V"].total == Span.exact(0.0)

    def test_without_a_resistor_the_current_is_unknown(self):
        u3 = part("U3", [("1", "LED0", "output", "DRV"), ("2", "GND", "power_in", "GND")])
        draw, found = self.current(self.led("D1", "DRV", "+5V"), u3)
        assert draw is None
        assert [(g.ref, g.why) for g in found.by_rail["+5V"].gaps] == [
            ("D1", "LED current set by its driver, not stated")
        ]

    def test_three_colours_behind_three_resistors(self):
        rgb = part(
            "D1",
            [
                ("1", "RK", "passive", "R"),
                ("2", "A", "passive", "+5V"),
                ("3", "GK", "passive", "G"),
                ("4", "BK", "passive", "B"),
            ],
            "RGB",
            "Device:LED_RGB",
        )
        resistors = [part(f"R{n}", [net, "GND"], "1k/1%") for n, net in enumerate("RGB", 1)]
        _, found = self.current(rgb, *resistors)
        assert found.by_rail["+5V"].total.nominal == pytest.approx((3.0 + 2.4 + 1.9) / 1000)

    def test_rail_too_low_for_the_led(self):
        draw, _ = self.current(part("R1", ["+5V", "X"], "300"), self.led("D1", "GND", "X", "blue"), volts=2.0)
        assert draw is None


class TestArraysAndThermistors:
    def test_resistor_whose_value_says_not_fitted(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}),
            part("R1", ["+3V3", "GND"], "DNP"),
            part("R2", ["+3V3", "GND"], "NA(1k)"),
        )
        assert loads(board, known).by_rail["+3V3"].total == Span.exact(0.001)

    def test_resistor_array_pairs(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}),
            part(
                "RN1",
                [
                    (str(n), name, "passive", net)
                    for n, (name, net) in enumerate(
                        [("R1.1", "+3V3"), ("R2.1", "+3V3"), ("R2.2", "GND"), ("R1.2", "GND")], 1
                    )
                ],
                "1k 5%",
                "Device:R_Pack02",
            ),
        )
        refs = [draw.ref for draw in loads(board, known).by_rail["+3V3"].draws]
        assert refs == ["RN1", "RN1", "U2"]
        assert loads(board, known).by_rail["+3V3"].total.nominal == pytest.approx(0.001 + 2 * 0.0033)

    def test_thermistor_counts_hot(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "0 mA"}),
            part("TH1", ["+3V3", "GND"], "10k", "Device:Thermistor_NTC"),
        )
        total = loads(board, known).by_rail["+3V3"].total
        assert total.nominal == pytest.approx(3.3 / 10e3)
        assert total.high == pytest.approx(3.3 / 10e3 * 30)

    def test_potentiometer_across_a_rail(self):
        u3 = part("U3", [("1", "IN", "input", "WIPER"), ("2", "GND", "power_in", "GND")])
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "0 mA"}),
            part("RV1", ["+3V3", "WIPER", "GND"], "10k", "Device:R_Potentiometer"),
            u3,
        )
        total = loads(board, known).by_rail["+3V3"].total
        assert total.corners == pytest.approx((3.3 / 12e3, 3.3 / 10e3, 3.3 / 8e3))

    def test_array_whose_pins_do_not_pair_is_a_gap(self):
        board, known = one_regulator(
            chip("U2", "+3V3", fields={"I_load": "1 mA"}), part("RN1", ["+3V3", "A", "B"], "10k", "Device:R_Network")
        )
        assert [gap.ref for gap in loads(board, known).by_rail["+3V3"].gaps] == ["RN1"]
