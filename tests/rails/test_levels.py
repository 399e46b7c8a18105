"""Precedence of evidence, standard supplies, reference voltages from text, and every finding of the stage."""

from __future__ import annotations

import tomllib

import pytest
from rails_bench import ROOT, circuit, figure, part, recognised, rulebook

from analyzer.circuit import Component, Note, Place
from analyzer.evidence import Evidence, Grade
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.rail import Rails
from analyzer.rails import find_rails
from analyzer.rule import Topology
from analyzer.settings import PartStatement, Settings

IN5 = part("J1", "DC", {"1 +": "+5V", "2 -": "GND"})
NAMES = {kind: kind for kind in ("name-disagrees", "divider-against-name", "same-divider", "unusual-resistance")}


def ldo(ref: str, source: str, out: str, *more: str) -> Component:
    pins = {"1 VIN power_in": source, "2 GND power_in": "GND", "3 VOUT power_out": out}
    if more:
        pins["4 FB input"] = more[0]
    return part(ref, "XL", pins)


def load(net: str, ref: str = "U9") -> tuple[Component, Component]:
    return (
        part(ref, "MCU", {"1 VDD power_in": net, "2 VSS power_in": "GND"}),
        part(f"C{ref[1:]}", "100n", f"{net} GND"),
    )


def find(
    *components: Component, parts: tuple[Part, ...] = (), settings: Settings | None = None, notes: tuple[Note, ...] = ()
) -> Rails:
    return find_rails(circuit(*components, notes=notes), parts, rulebook(), settings or Settings())


def volts(rails: Rails, name: str) -> Evidence:
    found = rails.by_name[name].volts
    assert found is not None
    return found


def named(rails: Rails, kind: str) -> list[str]:
    return [finding.subject for finding in rails.findings if finding.name == kind]


def stated(value: float) -> Evidence:
    return Evidence("supply voltage", Span.exact(value), "V", "heatledger.toml [supplies]", Grade.STATED)


def test_name_alone_is_presumed_within_5_percent() -> None:
    rails = find(IN5, *load("+5V"))
    assert volts(rails, "+5V").span.corners == pytest.approx((4.75, 5.0, 5.25))
    assert volts(rails, "+5V").grade is Grade.PRESUMED


def test_ruled_beats_name_and_the_disagreement_is_a_finding() -> None:
    chip = ldo("U1", "+5V", "VPP_2V5")
    rails = find(chip, IN5, *load("VPP_2V5"), parts=(recognised(chip, Topology.LINEAR, volts=3.3),))
    assert volts(rails, "VPP_2V5").span.nominal == 3.3
    assert volts(rails, "VPP_2V5").grade is Grade.RULED
    (finding,) = [finding for finding in rails.findings if finding.name == "name-disagrees"]
    assert "2.5 V" in finding.message
    assert "3.3 V" in finding.message


def test_stated_beats_everything() -> None:
    chip = ldo("U1", "+5V", "+3V3")
    parts = (recognised(chip, Topology.LINEAR, volts=3.3),)
    rails = find(chip, IN5, *load("+3V3"), parts=parts, settings=Settings(supplies={"+3V3": stated(3.0)}))
    assert volts(rails, "+3V3").span.nominal == 3.0
    rails = find(
        chip, IN5, *load("+3V3"), parts=parts, settings=Settings(parts={"U1": PartStatement(vout=stated(3.1))})
    )
    assert volts(rails, "+3V3").span.nominal == 3.1
    assert rails.wirings[0].vout == stated(3.1)
    rails = find(chip, IN5, *load("+3V3"), parts=parts, settings=Settings(parts={"U1": PartStatement(vin=stated(4.4))}))
    assert rails.wirings[0].vin == stated(4.4)


def test_fixed_output_takes_the_tolerance_of_its_rule() -> None:
    chip = ldo("U1", "+5V", "OUT")
    made = recognised(chip, Topology.LINEAR, volts=3.3, figures={"output_tolerance": figure(0.02, "1")})
    rails = find(chip, IN5, *load("OUT"), parts=(made,))
    assert volts(rails, "OUT").span.corners == pytest.approx((3.234, 3.3, 3.366))


def test_standard_supply_by_setting_and_by_name() -> None:
    rails = find(part("J1", "DC", {"1 +": "VMAIN", "2 -": "GND"}), *load("VMAIN"))
    assert rails.by_name["VMAIN"].volts is None
    settings = Settings(supply_names={"VMAIN": "industrial-24v"})
    rails = find(part("J1", "DC", {"1 +": "VMAIN", "2 -": "GND"}), *load("VMAIN"), settings=settings)
    assert volts(rails, "VMAIN").span.corners == pytest.approx((20.4, 24.0, 28.8))
    assert volts(rails, "VMAIN").grade is Grade.RULED
    assert "61131-2" in volts(rails, "VMAIN").source
    rails = find(part("J1", "USB", {"1 D+": "VBUS", "2 -": "GND"}), *load("VBUS"))
    assert volts(rails, "VBUS").span.corners == (4.75, 5.0, 5.25)
    assert volts(rails, "VBUS").grade is Grade.PRESUMED


def test_a_voltage_in_the_name_beats_a_standard_in_the_name() -> None:
    rails = find(part("J1", "X", {"1 A": "POE_VDD_12V", "2 -": "GND"}), *load("POE_VDD_12V"))
    assert volts(rails, "POE_VDD_12V").span.nominal == 12.0


def test_every_standard_supply_has_a_source_and_an_ordered_span() -> None:
    data = tomllib.loads((ROOT / "rules" / "supplies.toml").read_text(encoding="utf-8"))
    names = [entry["name"] for entry in data["supply"]]
    assert len(set(names)) == len(names)
    assert all(entry["source"].strip() for entry in data["supply"])
    rules = {rule.name: rule.volts for rule in rulebook().supplies}
    # figures of reference/physics.md section 8, by hand
    assert rules["usb-vbus"].span.corners == (4.75, 5.0, 5.25)
    assert (rules["poe-af"].span.low, rules["poe-af"].span.high) == (37.0, 57.0)
    assert (rules["automotive-12v-d"].span.low, rules["automotive-12v-d"].span.high) == (10.5, 16.0)
    assert (rules["automotive-24v-h"].span.low, rules["automotive-24v-h"].span.high) == (18.0, 32.0)
    assert (rules["pc-3v3"].span.low, rules["pc-3v3"].span.high) == (3.14, 3.47)
    assert rules["aircraft-28v"].grade is Grade.PRESUMED
    assert rules["telecom-48v"].span.nominal < 0


def test_name_that_a_regulator_makes_impossible_is_not_trusted() -> None:
    # a 3.3 V linear part cannot run from a rail that says 2.5 V
    chip = ldo("U1", "X_2V5", "OUT")
    rails = find(
        chip,
        part("J1", "DC", {"1 P": "X_2V5", "2 -": "GND"}),
        part("C1", "1u", "X_2V5 GND"),
        parts=(recognised(chip, Topology.LINEAR, volts=3.3),),
    )
    assert rails.by_name["X_2V5"].volts is None
    assert named(rails, "name-not-trusted") == ["X_2V5"]
    assert rails.wirings[0].vin is None


def test_joined_nets_with_different_voltages_in_their_names() -> None:
    rails = find(IN5, part("R1", "0R", "+5V +3V3"), *load("+3V3"))
    assert named(rails, "names-conflict") == ["+3V3"]
    assert rails.by_name["+3V3"].volts is None


def text(words: str, x: float = 10.0) -> Note:
    return Note(words, Place("board.kicad_sch", "/", x, 0.0))


@pytest.mark.parametrize(
    ("words", "reference"),
    [
        ("Vfb = 0.6V", 0.6),
        ("V_{FB}=500mV", 0.5),
        ("Vout=0.8*(1+Ra/Rb)", 0.8),
        ("VOUT = 0.765 V x (1 + R1/R2)", 0.765),
        ("Vref = 1.0V", 1.0),
        ("Buck\nVREF=1,25 V", 1.25),
    ],
)
def test_reference_from_a_note(words: str, reference: float) -> None:
    chip = ldo("U1", "+12V", "OUT", "FB")
    rails = find(
        chip,
        part("R1", "10k 1%", "OUT FB"),
        part("R2", "10k 1%", "FB GND"),
        part("C1", "1u", "OUT GND"),
        parts=(recognised(chip, Topology.LINEAR),),
        notes=(text(words), text("Vfb = 2.2V", x=60.0)),
    )
    found = volts(rails, "OUT")
    assert found.span.nominal == pytest.approx(2 * reference)
    assert found.weakest is Grade.PRESUMED


@pytest.mark.parametrize(
    ("description", "reference"),
    [
        ("2A buck, Adjustable Output 0.6V-5.5V, SOT-23-6", 0.6),
        ("DC-DC Converter, Adjustable, 4.2V-18Vin, 0.8V-7V/3A out", 0.8),
        ("Adjustable LDO, input 2.5V to 16V, output 1.25V to 15V", 1.25),
    ],
)
def test_reference_from_the_description(description: str, reference: float) -> None:
    chip = part(
        "U1",
        "XL",
        {"1 VIN power_in": "+12V", "2 GND power_in": "GND", "3 VOUT power_out": "OUT", "4 FB input": "FB"},
        description=description,
    )
    rails = find(
        chip,
        part("R1", "10k 1%", "OUT FB"),
        part("R2", "10k 1%", "FB GND"),
        part("C1", "1u", "OUT GND"),
        parts=(recognised(chip, Topology.LINEAR),),
    )
    assert volts(rails, "OUT").span.nominal == pytest.approx(2 * reference)


def test_presumed_reference_against_the_rails_name_gives_way_to_the_name() -> None:
    chip = ldo("U1", "+12V", "+3V3", "FB")
    rails = find(
        chip,
        part("R1", "10k 1%", "+3V3 FB"),
        part("R2", "10k 1%", "FB GND"),
        *load("+3V3"),
        parts=(recognised(chip, Topology.LINEAR),),
        notes=(text("Vref = 4.0V"),),
    )
    assert volts(rails, "+3V3").span.corners == pytest.approx((3.135, 3.3, 3.465))


def test_without_any_reference_the_name_is_used_and_without_a_name_it_is_open() -> None:
    chip = ldo("U1", "+12V", "OUT", "FB")
    resistors = (part("R1", "10k 1%", "OUT FB"), part("R2", "10k 1%", "FB GND"), part("C1", "1u", "OUT GND"))
    rails = find(chip, *resistors, parts=(recognised(chip, Topology.LINEAR),))
    assert rails.by_name["OUT"].volts is None
    assert any("reference" in why for why in rails.wirings[0].why_open)


def test_divider_findings() -> None:
    one, two = ldo("U1", "+12V", "+3V3", "FB1"), ldo("U2", "+12V", "+1V8", "FB2")
    rails = find(
        one,
        two,
        part("R1", "31k6 1%", "+3V3 FB1"),
        part("R2", "10k 1%", "FB1 GND"),
        part("R3", "31k6 1%", "+1V8 FB2"),
        part("R4", "10k 1%", "FB2 GND"),
        *load("+3V3"),
        *load("+1V8", "U8"),
        parts=(recognised(one, Topology.LINEAR, reference=0.8), recognised(two, Topology.LINEAR, reference=0.8)),
    )
    assert named(rails, "divider-against-name") == ["U2"]
    assert named(rails, "name-disagrees") == ["+1V8"]
    assert named(rails, "same-divider") == ["U1"]
    assert named(rails, "unusual-resistance") == []


def test_resistor_value_in_no_series() -> None:
    chip = ldo("U1", "+12V", "OUT", "FB")
    rails = find(
        chip,
        part("R1", "31k7 1%", "OUT FB"),
        part("R2", "10k 1%", "FB GND"),
        part("C1", "1u", "OUT GND"),
        parts=(recognised(chip, Topology.LINEAR, reference=0.8),),
    )
    assert named(rails, "unusual-resistance") == ["R1"]


def test_parallel_regulators_and_opposite_signs() -> None:
    one, two = ldo("U1", "+5V", "OUT"), ldo("U2", "+5V", "OUT")
    rails = find(
        one,
        two,
        IN5,
        *load("OUT"),
        parts=(recognised(one, Topology.LINEAR, volts=3.3), recognised(two, Topology.LINEAR, volts=3.0)),
    )
    assert named(rails, "parallel-regulators") == ["OUT"]
    assert volts(rails, "OUT").span.corners == (3.0, 3.3, 3.3)
    rails = find(
        one,
        two,
        IN5,
        *load("OUT"),
        parts=(recognised(one, Topology.LINEAR, volts=3.3), recognised(two, Topology.LINEAR, volts=-3.0, sign=-1)),
    )
    assert named(rails, "opposite-feeds") == ["OUT"]


def test_circle_of_feeds_is_named_with_its_path_and_ends() -> None:
    chips = (ldo("U1", "A", "B"), ldo("U2", "B", "C"), ldo("U3", "C", "A"))
    rails = find(
        *chips,
        *load("A", "U7"),
        *load("B", "U8"),
        *load("C", "U9"),
        parts=tuple(recognised(chip, Topology.LINEAR, volts=3.3) for chip in chips),
    )
    (finding,) = [finding for finding in rails.findings if finding.name == "circular-feed"]
    assert finding.weight.value == "open"
    assert "A → U1 → B → U2 → C → U3 → A" in finding.message


def test_circle_of_diodes_has_no_silent_voltage() -> None:
    rails = find(
        part("J1", "X", {"1 Pin_1": "A", "2 Pin_2": "GND"}),
        part("D1", "SS14", {"1 K": "B", "2 A": "A"}),
        part("D2", "SS14", {"1 K": "A", "2 A": "B"}),
        *load("A", "U7"),
        *load("B", "U8"),
    )
    assert named(rails, "circular-feed") == ["A"]
    assert rails.by_name["A"].volts is None
    assert rails.by_name["B"].volts is None


def test_regulator_from_a_rail_that_nothing_feeds() -> None:
    chip = ldo("U1", "VX_5V", "OUT")
    rails = find(
        chip, part("C1", "1u", "VX_5V GND"), *load("OUT"), parts=(recognised(chip, Topology.LINEAR, volts=3.3),)
    )
    assert named(rails, "rail-without-feed") == ["VX_5V"]


def test_supply_for_a_net_that_does_not_exist() -> None:
    settings = Settings(supplies={"+5VV": stated(5.0)}, supply_names={"+5V": "no-such"})
    rails = find(IN5, *load("+5V"), settings=settings)
    found = {finding.subject: finding.message for finding in rails.findings if finding.name == "supply-without-net"}
    assert set(found) == {"+5VV", "+5V"}


def test_part_bridged_by_a_link() -> None:
    chip = ldo("U1", "+5V", "OUT")
    rails = find(
        chip, IN5, part("R1", "0R", "+5V OUT"), *load("OUT"), parts=(recognised(chip, Topology.LINEAR, volts=3.3),)
    )
    assert named(rails, "bypassed") == ["U1"]


def test_one_unknown_feed_among_several_is_reported() -> None:
    rails = find(
        part("J1", "X", {"1 Pin_1": "A", "2 Pin_2": "GND"}),
        part("J2", "X", {"1 +": "+5V", "2 -": "GND"}),
        part("D1", "SS14", {"1 K": "VM", "2 A": "A"}),
        part("D2", "SS14", {"1 K": "VM", "2 A": "+5V"}),
        *load("VM"),
    )
    assert named(rails, "feed-voltage-unknown") == ["VM"]
    assert rails.by_name["VM"].volts is None


def test_board_without_any_ground_name_takes_the_net_with_most_ground_pins() -> None:
    chip = part("U1", "XL", {"1 VIN power_in": "+5V", "2 GND power_in": "RET", "3 VOUT power_out": "OUT"})
    other = part("U2", "MCU", {"1 VDD power_in": "OUT", "2 VSS power_in": "RET"})
    minus = part("U3", "AMP", {"1 V+ power_in": "+5V", "2 VSS power_in": "-9V"})
    rails = find(chip, other, minus, part("C1", "1u", "OUT RET"), parts=(recognised(chip, Topology.LINEAR, volts=3.3),))
    assert [rail.name for rail in rails.rails if rail.is_ground] == ["RET"]


@pytest.mark.parametrize(
    "name", ["GND", "/GND", "GNDA", "GNDD", "AGND", "DGND", "PGND", "GND1", "VSS", "0V", "GNDPWR", "GND_ISO"]
)
def test_ground_names(name: str) -> None:
    from analyzer.rails.ground import is_ground_name

    assert is_ground_name(name)


@pytest.mark.parametrize(
    "name", ["-9V", "VEE", "+5V", "GND_DET", "VSYS", "/psu/VN", "FGND_SENSE", "PGOOD", "0V9", "0V85", "0V6_REG", "COM"]
)
def test_names_that_are_not_ground(name: str) -> None:
    from analyzer.rails.ground import is_ground_name

    assert not is_ground_name(name)


def test_vbus_on_a_board_without_usb_is_not_5_v() -> None:
    # motor drives call their bus VBUS; nothing here speaks of USB
    rails = find(part("J1", "Terminal", {"1 P": "VBUS", "2 N": "GND"}), *load("VBUS"))
    assert rails.by_name["VBUS"].volts is None


def test_signals_of_a_supply_are_no_supply() -> None:
    rails = find(
        part("J1", "USB", {"1 VBUS": "VBUS", "2 N": "GND"}),
        *load("VBUS"),
        part("R1", "100k", "VBUS VBUS_DET"),
        part("C9", "1n", "VBUS_DET GND"),
    )
    assert "VBUS_DET" not in rails.of_net


def test_vbus_on_a_terminal_beside_a_usb_port_is_not_5_v() -> None:
    port = part("J2", "USB_B", {"1 D+": "DP", "2 GND": "GND"})
    terminal = part("J1", "Terminal", {"1 P": "VBUS", "2 N": "GND"})
    assert find(port, terminal, *load("VBUS")).by_name["VBUS"].volts is None
    # behind an unknown switch, on no connector of its own, the port's name is believed
    assert volts(find(port, *load("VBUS")), "VBUS").span.nominal == 5.0


def test_link_for_a_part_that_does_not_exist() -> None:
    rails = find(IN5, *load("+5V"), settings=Settings(links={"R77": True}))
    assert named(rails, "link-without-part") == ["R77"]


def test_vss_is_ground_only_where_nothing_is_called_ground() -> None:
    amplifier = part("U3", "AMP", {"1 VDD power_in": "+5V", "2 VSS power_in": "VSS"})
    alone = find(amplifier, part("J1", "DC", {"1 +": "+5V", "2 -": "VSS"}), part("C1", "1u", "+5V VSS"))
    assert [rail.name for rail in alone.rails if rail.is_ground] == ["VSS"]
    beside = find(amplifier, IN5, part("C1", "1u", "+5V GND"), part("C2", "1u", "VSS GND"))
    assert [rail.name for rail in beside.rails if rail.is_ground] == ["GND"]
    assert beside.of_net.get("VSS") != "GND"
