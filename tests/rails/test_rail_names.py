"""Voltage by net name: the forms and traps counted on real boards (reference/boards.md section 2)."""

from __future__ import annotations

import pytest

from analyzer.rails.names import base_name, named_volts

FORMS = {
    # prefix then voltage
    "PWR3V3": 3.3,
    "PS_1V8": 1.8,
    "VCC_1.8V": 1.8,
    "VDD1V8": 1.8,
    "VCC5V0_INT": 5.0,
    "P_1V2_A": 1.2,
    "USB_5V": 5.0,
    "VIN_24V": 24.0,
    "VDDA_3V3": 3.3,
    "VPP_2V5": 2.5,
    "VCC_3_3V": 3.3,
    "B-3V3": 3.3,
    "APP_+1.2_PLL": 1.2,
    "P_1.35_DRAM": 1.35,
    "SYS_RTC_1P8V": 1.8,
    # sign, with or without suffix
    "+3V3": 3.3,
    "+5V": 5.0,
    "+12V": 12.0,
    "-12V": -12.0,
    "+15V": 15.0,
    "-6V": -6.0,
    "+3.3V": 3.3,
    "+1,8V": 1.8,
    "+3.3VA": 3.3,
    "+5VP": 5.0,
    "+5V/4": 5.0,
    "+5V{slash}4": 5.0,
    "+3V3_STDBY": 3.3,
    "+0V9": 0.9,
    "+12": 12.0,
    "-5": -5.0,
    "VREF-10": -10.0,
    "NEG5V": -5.0,
    "5VN": -5.0,
    "VEE-5V": -5.0,
    # no sign
    "3V3": 3.3,
    "12V0": 12.0,
    "0V6_REG": 0.6,
    "3V3_SYS": 3.3,
    "3.3V-U": 3.3,
    "5V-R": 5.0,
    "1v8A": 1.8,
    "2V5OUT": 2.5,
    "2.8V": 2.8,
    "48V": 48.0,
    "12V_IN": 12.0,
    "3V3_SW": 3.3,
    "VREG5V{slash}1": 5.0,
    # sheet paths, also with slashes in sheet names
    "/psu/PS_1V8_OUT": 1.8,
    "/Power Supply/DC{slash}DC conventers/PS_1V8_OUT": 1.8,
    "/a/+5V/4": 5.0,
    "V_{3V3}": 3.3,
}

NONE = [
    "PWR1V1EN",
    "AMUX_S0_3V3",
    "BTN-3",
    "V_bit1",
    "BU3V3IN",
    "VBUS",
    "VCC",
    "VDDA",
    "VCORE",
    "3V3_EN",
    "EN_3V3",
    "1V8_PG",
    "SOM_5V_FB",
    "SW_PS_1V8",
    "SW_3V3",
    "CCI0_I2C_SCL_3V3",
    "UART_TX_1V8",
    "3V3_1V8_SEL",
    "5V_USB_EN",
    "SPI2VCC",
    "USB1VBUS",
    "+/-15V",
    "24VAC",
    "Net-(U5-3V3)",
    "unconnected-(U1-5V-Pad3)",
    "GND",
    "",
    "VCCOEN_PS_M2C",
    "INT_3V3",
]


@pytest.mark.parametrize(("name", "volts"), FORMS.items())
def test_forms(name: str, volts: float) -> None:
    found = named_volts(name)
    assert found is not None
    assert found.volts == pytest.approx(volts, abs=1e-12)


@pytest.mark.parametrize("name", NONE)
def test_traps(name: str) -> None:
    assert named_volts(name) is None


def test_two_different_voltages_are_none_and_equal_ones_are_one() -> None:
    assert named_volts("5V_TO_3V3") is None
    found = named_volts("5V_5V0")
    assert found is not None
    assert found.volts == 5.0


def test_base_name_keeps_slashes_of_global_names() -> None:
    assert base_name("+5V/4") == "+5V/4"
    assert base_name("/psu/+5V{slash}4") == "+5V/4"
    assert base_name("/psu/VDD") == "VDD"


@pytest.mark.parametrize(
    ("name", "volts"),
    [("+5V_LED", 5.0), ("LED_12V", 12.0), ("3V3_ADC", 3.3), ("VDD_1V8_CLK", 1.8), ("P12V", 12.0), ("N12V", -12.0)],
)
def test_words_of_what_a_rail_supplies(name: str, volts: float) -> None:
    found = named_volts(name)
    assert found is not None
    assert found.volts == volts


@pytest.mark.parametrize("name", ["24V_RTN", "M12V", "ADC_3V3", "3V3_OK", "5V_FAULT", "12V_SENSE"])
def test_more_traps(name: str) -> None:
    assert named_volts(name) is None
