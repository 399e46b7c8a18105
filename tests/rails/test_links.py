"""Links: what joins nets and what must not."""

from __future__ import annotations

import pytest
from rails_bench import circuit, part, recognised, rulebook

from analyzer.rail import Rails
from analyzer.rails import find_rails
from analyzer.rule import Topology
from analyzer.settings import Settings


def joined(*extra: object, settings: Settings | None = None) -> Rails:
    """An LDO from +5V to "OUT", a chip on "LOAD", and whatever lies between."""
    chip = part("U1", "XL330", {"1 VIN power_in": "+5V", "2 GND power_in": "GND", "3 VOUT power_out": "OUT"})
    board = circuit(
        chip,
        part("J1", "Conn", {"1 Pin_1": "+5V", "2 Pin_2": "GND"}),
        part("U2", "MCU", {"1 VDD power_in": "LOAD", "2 VSS power_in": "GND", "3 IO1 bidirectional": "IO1"}),
        part("C1", "1u", "OUT GND"),
        part("C2", "1u", "LOAD GND"),
        *extra,  # type: ignore[arg-type]
    )
    parts = (recognised(chip, Topology.LINEAR, volts=3.3),)
    return find_rails(board, parts, rulebook(), settings or Settings())


LINKS = {
    "0R": part("R1", "0R 1%", "OUT LOAD"),
    "0R with package": part("R1", "R_0R_0402", "OUT LOAD"),
    "0": part("R1", "0", "OUT LOAD"),
    "bead": part("FB1", "600R@100MHz", "OUT LOAD"),
    "bead with reference L and a current as value": part("L1", "1.5A", "OUT LOAD", lib_id="Own:FERRITE"),
    "bead valued FILTER": part("L1", "FILTER", "OUT LOAD"),
    "inductor": part("L1", "2,2uH", "OUT LOAD"),
    "fuse": part("F1", "350mA", "OUT LOAD"),
    "polyfuse": part("F1", "0.5A", "OUT LOAD", lib_id="Device:Polyfuse"),
    "net tie": part("NT1", "VCC", "OUT LOAD"),
    "net tie marked unfitted": part("NT1", "0", "OUT LOAD", fitted=False),
    "bridged jumper": part("JP1", "Jumper", "OUT LOAD", lib_id="Jumper:SolderJumper_2_Bridged"),
    "bridged solder jumper marked unfitted": part(
        "JP1", "Jumper", "OUT LOAD", lib_id="Jumper:SolderJumper_2_Bridged", fitted=False
    ),
    "closed jumper": part("JP1", "Jumper", "OUT LOAD", lib_id="Jumper:Jumper_2_Bridged"),
    "SHORT jumper whose part number says DNP": part(
        "JP1", "SHORT", "OUT LOAD", lib_id="Own:JUMPER", fields={"MPN": "DNP"}
    ),
    "three-way jumper bridged 1-2": part("JP1", "Jumper", "OUT LOAD SPARE", lib_id="Jumper:SolderJumper_3_Bridged12"),
    "shunt": part("R1", "0.1", "OUT LOAD"),
    "shunt of 330 mΩ": part("R1", "0R33", "OUT LOAD"),
    "four-terminal shunt": part("R1", "0R01", "OUT OUT LOAD LOAD"),
    "feed-through filter": part("FL1", "NFM", "OUT GND LOAD", lib_id="Own:EMI"),
    "choke, pairs by the symbol's name": part(
        "L1", "CMC", {"1": "OUT", "2": "GND", "3": "PGND", "4": "LOAD"}, lib_id="Device:L_Coupled_1423"
    ),
    "resistor array of 0 Ω": part(
        "RN1", "0R", {"1 R1.1": "OUT", "2 R2.1": "A", "3 R2.2": "B", "4 R1.2": "LOAD"}, lib_id="Device:R_Pack02_Split"
    ),
}


@pytest.mark.parametrize("name", LINKS)
def test_joins(name: str) -> None:
    rails = joined(LINKS[name])
    assert rails.of_net["OUT"] == rails.of_net["LOAD"] == "LOAD"  # the name its consumer knows it by
    (wiring,) = rails.wirings
    assert wiring.output_net == "OUT"
    assert wiring.through == (LINKS[name].ref,)


BARRIERS = {
    "unfitted 0R": part("R1", "0R", "OUT LOAD", fitted=False),
    "0R whose value says unfitted": part("R1", "NA(0R/R0603)", "OUT LOAD"),
    "resistor": part("R1", "10k", "OUT LOAD"),
    "open jumper": part("JP1", "Jumper", "OUT LOAD", lib_id="Jumper:SolderJumper_2_Open"),
    "capacitor": part("C9", "10u", "OUT LOAD"),
    "unfitted bead": part("FB1", "600R", "OUT LOAD", fitted=False),
    "light-emitting diode": part("D1", "GREEN", {"1 K": "LOAD", "2 A": "OUT"}),
    "Zener": part("D1", "3V3", {"1 K": "OUT", "2 A": "LOAD"}, lib_id="Device:D_Zener"),
    "three-way jumper bridged 2-3": part("JP1", "Jumper", "OUT LOAD SPARE", lib_id="Jumper:SolderJumper_3_Bridged23"),
    "shunt between a transistor and ground is no link": part("R1", "0.1", "SRC GND"),
}


@pytest.mark.parametrize("name", BARRIERS)
def test_does_not_join(name: str) -> None:
    rails = joined(BARRIERS[name])
    assert rails.of_net["OUT"] != rails.of_net["LOAD"]
    assert rails.wirings[0].output_rail == "OUT"
    assert rails.of_net["OUT"] != rails.of_net["GND"]


def test_settings_override_both_ways() -> None:
    rails = joined(part("R1", "4R7", "OUT LOAD"), settings=Settings(links={"R1": True}))
    assert rails.of_net["OUT"] == rails.of_net["LOAD"]
    rails = joined(part("R1", "0R", "OUT LOAD"), settings=Settings(links={"R1": False}))
    assert rails.of_net["OUT"] != rails.of_net["LOAD"]


def test_greatest_shunt_is_a_setting() -> None:
    shunt = part("R1", "0R33", "OUT LOAD")
    assert joined(shunt, settings=Settings(shunt_max=0.2)).of_net["LOAD"] == "LOAD"
    assert joined(shunt, settings=Settings(shunt_max=0.2)).of_net["OUT"] == "OUT"


def test_shunt_at_a_transistor_source_does_not_make_its_net_ground() -> None:
    low_side = part("Q1", "NMOS", {"1 G": "DRV", "2 S": "SRC", "3 D": "COIL"}, lib_id="Device:Q_NMOS_GSD")
    rails = joined(part("R1", "0.1", "SRC GND"), low_side)
    assert rails.of_net.get("SRC") != "GND"


def test_choke_without_named_windings_is_reported() -> None:
    choke = part("L1", "CMC", {"1": "OUT", "2": "LOAD", "3": "X1", "4": "X2"}, lib_id="Own:CHOKE4")
    rails = joined(choke)
    assert rails.of_net["OUT"] != rails.of_net["LOAD"]
    assert [finding.subject for finding in rails.findings if finding.name == "choke-unpaired"] == ["L1"]


def test_inductor_at_a_chips_own_switch_pin_is_no_link() -> None:
    # a microcontroller with a converter of its own: the inductor is that converter's, not a filter
    chip = part(
        "U3", "MCU2", {"1 VLXSMPS power_out": "VLX", "2 VDD power_in": "LOAD", "3 VSS power_in": "GND", "4 A": "N4"}
    )
    rails = joined(chip, part("L1", "2.2uH", "VLX LOAD"))
    assert rails.of_net["LOAD"] != rails.of_net.get("VLX")


def test_inductor_at_a_drain_without_capacitor_is_no_link() -> None:
    switch = part("Q1", "NMOS", {"1 G": "DRV", "2 S": "GND", "3 D": "DRAIN"}, lib_id="Device:Q_NMOS_GSD")
    rails = joined(switch, part("L1", "10uH", "OUT DRAIN"), part("D1", "SS14", {"1 K": "HV", "2 A": "DRAIN"}))
    assert "DRAIN" not in rails.of_net or rails.of_net["DRAIN"] != rails.of_net["OUT"]
