"""Parts by rule and by pins: identity, gate, conflicts, statements, order of rules."""

from __future__ import annotations

import random
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from recognise_kit import LINEAR_PINS, QX1200, component, recognised, rules

from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.recognise import load_rulebook
from analyzer.rule import Role, Topology
from analyzer.settings import PartStatement, Settings

SHIPPED = load_rulebook()


def volts(value: str = "", pins: tuple[str, ...] = LINEAR_PINS, **more: str) -> tuple[float, float, float] | None:
    parts, _ = recognised(component(value, pins=pins, **more), rulebook=SHIPPED)
    assert len(parts) == 1
    found = parts[0].channels[0].volts
    return found.span.corners if found else None


# what the numbers mean is trade knowledge: seven-eight-oh-five is 5 V, seven-nine-one-two is -12 V, 1117-33 is 3.3 V
@pytest.mark.parametrize(
    ("value", "nominal"),
    [
        ("L7805", 5),
        ("MC7812CT", 12),
        ("MC78M05CDT", 5),
        ("UA78L05", 5),
        ("L7912CV", -12),
        ("LM1117-3.3", 3.3),
        ("LM1117DT-1.8", 1.8),
        ("LD1117S33TR", 3.3),
        ("MCP1700-3302E", 3.3),
        ("HT7533-1", 3.3),
        ("AP1231-3.3V(SOT23-5)", 3.3),
        ("TLV70018", 1.8),
        ("LP5907MFX-1.2", 1.2),
        ("7805", 5),
        ("7912", -12),
        ("78L05", 5),
        ("XC6206P332MR", 3.3),
        ("LP2985-33DBVR", 3.3),
        ("TLV1117LV33DCYR", 3.3),
        ("RT9013-18GB", 1.8),
    ],
)
def test_voltage_codes(value: str, nominal: float) -> None:
    found = volts(value)
    assert found is not None
    assert found[1] == pytest.approx(nominal)
    assert found[0] < found[1] < found[2]


def test_twelve_behind_1117_reads_by_maker() -> None:
    # one maker means 12 V, the others 1.2 V
    assert volts("NCP1117-12")[1] == 12  # type: ignore[index]
    assert volts("NCP1117ST12T3G")[1] == 12  # type: ignore[index]
    assert volts("LD1117S12TR")[1] == 1.2  # type: ignore[index]


@pytest.mark.parametrize(
    "value", ["BC337", "BC338", "SMAJ350A", "MOC3042M", "CA3080", "DMN3042L", "B350", "20V", "7805"]
)
def test_look_alikes_are_no_regulators(value: str) -> None:
    transistor = component(value, ref="Q1", pins=("1 B input", "2 C passive", "3 E passive"))
    coupler = component(
        value, ref="U2", description="Opto-Triac", pins=("1 A passive", "2 K passive", "4 T1 passive", "6 T2 passive")
    )
    diode = component(value, ref="D1", pins=("1 K passive", "2 A passive"))
    assert recognised(transistor, coupler, diode, rulebook=SHIPPED) == ((), ())


def test_a_regulators_number_without_its_pins_is_reported() -> None:
    parts, findings = recognised(component("LM1117-3.3", pins=("1 1 passive", "2 2 passive", "3 3 passive")))
    assert parts == ()
    assert [(finding.name, finding.weight.value) for finding in findings] == [("rule-pins-missing", "open")]


@pytest.mark.parametrize("description", ["Dual line receiver", "12-bit DAC, voltage output"])
def test_signal_parts_with_a_regulators_number_are_none(description: str) -> None:
    pins = ("1 INPUT input", "3 OUTPUT output", "7 GND power_in", "14 VCC power_in")
    assert recognised(component("AB7812", pins=pins, description=description), rulebook=SHIPPED) == ((), ())


def test_a_receiver_with_a_regulators_number_is_none() -> None:
    pins = ("1 -IN input", "2 +IN input", "3 OUT output", "7 GND power_in", "14 VCC power_in")
    assert recognised(component("DS7820", pins=pins), rulebook=SHIPPED)[0] == ()


@pytest.mark.parametrize(
    "field",
    ["MPN", "mpn", "Part Number", "PARTNO", "Mfr. No.", "Manufacturer_Part_Number", "manf#", "PN", "DPN", "Key"],
)
def test_part_number_fields_beat_the_value(field: str) -> None:
    parts, _ = recognised(component("regulator", **{field: "LM1117-3.3\u200e "}), rulebook=SHIPPED)
    assert parts[0].identity_field == field
    assert parts[0].identity == "LM1117-3.3"


def test_two_part_numbers_in_one_field() -> None:
    assert volts("x", MPN="QQ99999, LM1117-1.8") == pytest.approx((1.8 * 0.98, 1.8, 1.8 * 1.02), rel=0.02)


def test_part_number_against_value_is_a_conflict() -> None:
    parts, findings = recognised(component("AP2112K-3.3", MPN="AP2112K-1.2"), rulebook=SHIPPED)
    assert parts[0].channels[0].volts is not None
    assert parts[0].channels[0].volts.span.nominal == pytest.approx(1.2)
    assert [finding.name for finding in findings] == ["identity-conflict"]
    assert "AP2112K-3.3" in findings[0].message


def test_a_copied_symbol_lends_no_figures() -> None:
    parts, findings = recognised(component("ZZ8512A50", lib_id="Regulator_Linear:LM1117-3.3"), rulebook=SHIPPED)
    assert parts[0].rule is None
    assert parts[0].channels[0].volts is None
    assert {finding.name for finding in findings} == {"identity-conflict", "no-rule"}


def test_own_rules_come_first(tmp_path: Path) -> None:
    own = QX1200.replace("1200-{code}*", "1117-{code}*").replace("QX1200", "our 1117")
    book = load_rulebook([rules(tmp_path, own)])
    parts, findings = recognised(component("LM1117-3.3"), rulebook=book)
    assert parts[0].rule is not None
    assert parts[0].rule.name == "our 1117"
    assert findings == ()


def test_equal_rank_is_a_finding(tmp_path: Path) -> None:
    twin = QX1200.replace('name = "QX1200"', 'name = "twin"')
    book = load_rulebook([rules(tmp_path, QX1200 + twin)])
    _, findings = recognised(component("QX1200-3.3"), rulebook=book)
    assert [finding.name for finding in findings] == ["rules-tie"]


def test_fixed_voltage_has_the_rules_tolerance_and_thermal_data_of_its_package(tmp_path: Path) -> None:
    book = load_rulebook([rules(tmp_path, QX1200)])
    (part,), findings = recognised(
        component("QX1200-3.3", footprint="Package_TO_SOT_SMD:SOT-223-3_TabPin2"), rulebook=book
    )
    assert part.channels[0].volts is not None
    assert part.channels[0].volts.span.corners == pytest.approx((3.267, 3.3, 3.333))
    assert [figure.theta_ja.span.nominal for figure in part.thermal if figure.theta_ja] == [91]
    assert part.package.tab_pin == "2"
    assert findings == ()


@given(st.integers(0, 10_000))
def test_order_of_rules_is_irrelevant(seed: int) -> None:
    shuffled = list(SHIPPED.rules)
    random.Random(seed).shuffle(shuffled)
    book = replace(SHIPPED, rules=tuple(shuffled))
    names = ("L7805", "LD1117S33TR", "LM2596S-5", "TPS73101DBVR", "MCP1700-3302E", "AP2112K-3.3", "TLV75533PDRVR")
    pins = (*LINEAR_PINS, "4 FB input")
    parts = [component(name, ref=f"U{number}", pins=pins) for number, name in enumerate(names)]
    assert recognised(*parts, rulebook=book) == recognised(*parts, rulebook=SHIPPED)


def test_statements_beat_everything() -> None:
    stated = Evidence("output voltage", Span.exact(2.5), "V", "heatledger.toml", Grade.STATED)
    one, two, three = (component("L7805", ref=f"U{number}") for number in (1, 2, 3))
    settings = Settings(
        parts={
            "U1": PartStatement(is_regulator=False),
            "U2": PartStatement(vout=stated, package="TO-92"),
            "U3": PartStatement(identity="LM1117-3.3"),
        }
    )
    parts, _ = recognised(one, two, three, rulebook=SHIPPED, settings=settings)
    assert [part.ref for part in parts] == ["U2", "U3"]
    assert parts[0].channels[0].volts == stated
    assert (parts[0].package.family, parts[0].package.source) == ("TO-92", "stated")
    assert parts[1].rule is not None
    assert parts[1].rule.name == "1117"
    assert parts[1].how == "stated"


def test_a_stated_rule_that_does_not_exist_is_a_finding() -> None:
    settings = Settings(parts={"U1": PartStatement(rule="nonsense")})
    _, findings = recognised(component("L7805"), rulebook=SHIPPED, settings=settings)
    assert "stated-rule-unknown" in {finding.name for finding in findings}


def topology(pins: tuple[str, ...], description: str = "", keywords: str = "") -> Topology | None:
    parts, _ = recognised(component("ZZ8512", pins=pins, description=description, keywords=keywords), rulebook=SHIPPED)
    return parts[0].topology if parts else None


FOUR = ("1 VIN power_in", "2 GND power_in", "3 EN input", "4 VOUT power_out")


@pytest.mark.parametrize(
    ("pins", "description", "expected"),
    [
        (FOUR, "", Topology.LINEAR),
        (FOUR, "300mA LDO", Topology.LINEAR),
        (FOUR, "2A load switch with slew rate control", Topology.LOAD_SWITCH),
        (FOUR, "eFuse, 5A", Topology.EFUSE),
        (FOUR, "Ideal diode", Topology.IDEAL_DIODE),
        (FOUR, "Crystal oscillator", None),
        (FOUR, "16-bit DAC", None),
        (("1 VIN power_in", "2 GND power_in", "3 SW output", "4 FB input"), "step-down", Topology.BUCK),
        (("1 VIN power_in", "2 GND power_in", "3 SW output", "4 FB input"), "step-up converter", Topology.BOOST),
        (("1 VIN power_in", "3 VOUT power_out", "4 ADJ input"), "", Topology.LINEAR_FLOATING),
        (("1 K passive", "2 A passive", "3 REF passive"), "Shunt regulator", Topology.SHUNT),
        (("1 VIN power_in", "2 VBAT power_out", "3 GND power_in"), "Li-Ion charger", Topology.CHARGER),
        (("1 VCCA power_in", "2 VCCB power_in", "3 A1 bidirectional", "4 GND power_in"), "", None),
    ],
)
def test_generic_layer(pins: tuple[str, ...], description: str, expected: Topology | None) -> None:
    assert topology(pins, description) is expected


def test_generic_layer_says_there_is_no_rule_and_reads_only_safe_voltages() -> None:
    (safe, unsafe), findings = recognised(
        component("ZZ8512-3.3", ref="U1", pins=FOUR), component("ZZ8512-33", ref="U2", pins=FOUR), rulebook=SHIPPED
    )
    assert safe.how == "pins"
    assert safe.channels[0].volts is not None
    assert safe.channels[0].volts.grade is Grade.PRESUMED
    assert safe.channels[0].volts.span.nominal == 3.3
    assert unsafe.channels[0].volts is None
    assert [finding.name for finding in findings] == ["no-rule", "no-rule"]


def test_channels_are_told_apart_by_the_number_of_their_pins() -> None:
    pins = ("1 VIN power_in", "2 SW1 output", "3 FB1 input", "4 SW2 output", "5 FB2 input", "6 GND power_in")
    (part,), _ = recognised(component("ZZ8512", pins=pins, description="Dual step-down"), rulebook=SHIPPED)
    assert [channel.name for channel in part.channels] == ["1", "2"]
    assert [channel.nets(Role.FEEDBACK) for channel in part.channels] == [("N3",), ("N5",)]
    assert [channel.nets(Role.INPUT) for channel in part.channels] == [("N1",), ("N1",)]


def test_pins_not_understood_leave_a_note() -> None:
    parts, findings = recognised(
        component("ZZ8512", pins=("1 X1 passive", "2 X2 passive"), description="Low dropout regulator"),
        rulebook=SHIPPED,
    )
    assert parts == ()
    assert [finding.name for finding in findings] == ["sounds-like-regulator"]
