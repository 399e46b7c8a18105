"""Words of descriptions: what they say a part is, and what it is not."""

from __future__ import annotations

import re

from analyzer.rule import Topology

NOT_A_REGULATOR = re.compile(
    r"\b(led driver|leds?|motor|supervis\w*|reset|voltage reference|shunt regulator|protection|isolator|transceiver|"
    r"(micro)?controller unit|mcu|microcontroller|driver|sensor|amplifier|opamp|op-amp|oscillator|relay|"
    r"battery monitor|fuel gauge|gate|memory|virtual ground|current source|dac|adc|prescaler|rtc|rfid|real time clock|"
    r"real-time clock|comparator|level shifter|translator|synthesizer|filter|mixer|attenuator)\b",
    re.IGNORECASE,
)
"""A description with one of these is not taken for a regulator on pin names alone."""

SIGNAL_PART = re.compile(
    r"\b(dac|adc|opto[- ]?\w*|analog[- ]to[- ]digital|digital[- ]to[- ]analog|line (receiver|driver)s?)\b",
    re.IGNORECASE,
)
"""A description with one of these overrules even a matching number: AD78.. and DS78.. are no 78.. regulators."""

PASSAGES: tuple[tuple[re.Pattern[str], Topology], ...] = (
    (re.compile(r"ideal[- ]diode|or-?ing controller", re.I), Topology.IDEAL_DIODE),
    (re.compile(r"e-?fuse|hot[- ]?swap", re.I), Topology.EFUSE),
    (re.compile(r"power (multiplexer|mux)|source selector|power selector", re.I), Topology.POWER_MUX),
    (
        re.compile(
            r"(load|power|high[- ]?side|usb|distribution) ?switch|power[- ]distribution|current[- ]limited", re.I
        ),
        Topology.LOAD_SWITCH,
    ),
)
CHARGER = re.compile(r"(?<!dis)charg(er|ing|e[- ]management)\b|li-?(ion|po)\w* charge", re.IGNORECASE)
SHUNT = re.compile(r"shunt|voltage reference.*(2|two)[- ]?(pin|terminal)", re.IGNORECASE)

KINDS: tuple[tuple[re.Pattern[str], Topology], ...] = (
    (re.compile(r"buck[-/ ]?boost|step[- ]?up[-/ ]?down", re.I), Topology.BUCK_BOOST),
    (re.compile(r"charge pump|switched[- ]capacitor|voltage doubler", re.I), Topology.CHARGE_PUMP),
    (re.compile(r"(switching|buck|boost|pwm|dc[-/]dc|step-down) controller", re.I), Topology.CONTROLLER),
    (re.compile(r"isolated|dc[-/ ]dc (converter )?module|converter module|power module", re.I), Topology.MODULE),
    (re.compile(r"\bboost\b|step[- ]?up", re.I), Topology.BOOST),
    (re.compile(r"inverting|inverter", re.I), Topology.INVERTING),
    (re.compile(r"\bbuck\b|step[- ]?down|switching regulator", re.I), Topology.BUCK),
    (re.compile(r"\bldo\b|low[- ]?drop|linear|regulator", re.I), Topology.LINEAR),
)
NEGATIVE = re.compile(r"\bnegative\b|(?<![\d.])-\d+(\.\d+)?V", re.IGNORECASE)
SOUNDS_LIKE = re.compile(
    r"\b(regulator|ldo|low[- ]?drop\w*|step[- ]?(up|down)|buck|boost|dc[-/ ]dc|charge pump)\b", re.IGNORECASE
)
"""A description with one of these, on a part whose pins were not understood, deserves a note."""


def passage_of(text: str) -> Topology | None:
    """What kind of passage a description speaks of."""
    return next((topology for pattern, topology in PASSAGES if pattern.search(text)), None)


def kind_of(text: str) -> Topology | None:
    """What kind of regulator a description speaks of."""
    return next((topology for pattern, topology in KINDS if pattern.search(text)), None)
