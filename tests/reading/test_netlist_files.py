"""Netlists in the writings of KiCad 5 to 10, XML and `.net`, and what is done with damaged or hostile ones."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from sketch import part, save, schematic

from analyzer import limits
from analyzer.circuit import Circuit
from analyzer.errors import InputError
from analyzer.reading import read, variants
from analyzer.settings import Settings

# as KiCad 5.1 writes it: bare words, version D, no pin functions on nodes, unconnected pins left out
OLD = """(export (version D)
  (design (source /home/x/board.sch) (date "Mon 1 Jan 2020") (tool "Eeschema 5.1.9")
    (sheet (number 1) (name /) (tstamps /)))
  (components
    (comp (ref R1) (value 3.30) (footprint Resistor_SMD:R_0603)
      (fields (field (name MPN) 007) (field (name Note) "two words"))
      (libsource (lib Device) (part R) (description "Resistor"))
      (sheetpath (names /) (tstamps /)) (tstamp 5E000001))
    (comp (ref U1) (value AB^2/R)
      (datasheet "")
      (libsource (lib Reg) (part LDO) (description ""))
      (sheetpath (names /psu/) (tstamps /5F00/)) (tstamp 5E000002)))
  (libparts
    (libpart (lib Device) (part R) (pins (pin (num 1) (name ~) (type passive)) (pin (num 2) (name ~) (type passive))))
    (libpart (lib Reg) (part LDO)
      (pins (pin (num 1) (name VIN) (type power_in)) (pin (num 2) (name GND) (type power_in))
        (pin (num 3) (name NC) (type NotConnected)))))
  (nets
    (net (code 1) (name +5V) (node (ref R1) (pin 1)) (node (ref U1) (pin 1)))
    (net (code 2) (name "Net-(R1-Pad2)") (node (ref R1) (pin 2)) (node (ref U1) (pin 2)))))
"""

# as KiCad 10 writes it: pin functions end in the pad, variants, marks as properties
NEW = """(export (version "E")
  (design (source "/x/board.kicad_sch") (tool "Eeschema 10.0.7")
    (sheet (number "1") (name "/") (tstamps "/")) (sheet (number "2") (name "/DC{slash}DC/") (tstamps "/s/")))
  (components
    (comp (ref "R2") (value "1k") (footprint "R_0603") (datasheet "d.pdf")
      (fields (field (name "MPN") "R-1") (field (name "Footprint") "R_0603") (field (name "Datasheet") "d.pdf")
        (field (name "Description")))
      (libsource (lib "Device") (part "R") (description "Resistor"))
      (property (name "MPN") (value "R-1")) (property (name "dnp")) (property (name "exclude_from_bom"))
      (property (name "Sheetfile") (value "psu.kicad_sch")) (property (name "ki_keywords") (value "res"))
      (sheetpath (names "/DC{slash}DC/") (tstamps "/s/")) (tstamps "uuid-r2")
      (variants (variant (name "LOW") (property (name "dnp") (value "0")) (fields (field (name "Value") "2k")))))
    (comp (ref "U10") (value "LDO_33")
      (libsource (lib "Reg") (part "LDO") (description ""))
      (sheetpath (names "/") (tstamps "/")) (tstamps "uuid-a" "uuid-b")))
  (variants (variant (name "LOW") (description "")))
  (libparts (libpart (lib "Reg") (part "LDO") (pins (pin (num "1") (name "VO_1") (type "power_out")))))
  (nets
    (net (code "1") (name "/DC{slash}DC/A{slash}B") (class "Default")
      (node (ref "R2") (pin "1") (pintype "passive"))
      (node (ref "U10") (pin "1") (pinfunction "VO_1_1") (pintype "power_out")))
    (net (code "2") (name "unconnected-(U10-N{slash}C-Pad4)") (class "Default")
      (node (ref "U10") (pin "4") (pinfunction "N/C_4") (pintype "passive+no_connect")))))
"""

XML = """<?xml version="1.0" encoding="utf-8"?>
<export version="E"><design><source>/x/board.kicad_sch</source><tool>Eeschema 9.0.2</tool>
<sheet number="1" name="/" tstamps="/"/><sheet number="2" name="/DC/DC/" tstamps="/s/"/></design>
<components><comp ref="R2"><value>1k</value><footprint>R_0603</footprint>
<fields><field name="MPN">R-1</field><field name="Empty"/></fields>
<libsource lib="Device" part="R" description="Resistor"/><property name="dnp"/>
<property name="Sheetfile" value="psu.kicad_sch"/>
<sheetpath names="/DC/DC/" tstamps="/s/"/><tstamps>uuid-r2</tstamps></comp></components>
<nets><net code="1" name="/DC/DC/A/B" class="Default"><node ref="R2" pin="1" pintype="passive"/></net>
<net code="2" name="Net-(R2-N/C)" class="Default"><node ref="R2" pin="2" pinfunction="X_2" pintype="passive"/></net>
</nets>
</export>
"""


def circuit_of(folder: Path, name: str, text: str) -> Circuit:
    (folder / name).write_text(text, encoding="utf-8")
    return read(folder / name)


def fault_of(path: Path) -> str:
    with pytest.raises(InputError) as caught:
        read(path)
    return str(caught.value)


def test_net_of_kicad_5(tmp_path: Path) -> None:
    circuit = circuit_of(tmp_path, "b.net", OLD)
    resistor, regulator = circuit.components
    # unquoted words stay as written: no 3.3, no 7, no lost circumflex
    assert (resistor.value, regulator.value) == ("3.30", "AB^2/R")
    assert dict(resistor.fields) == {"MPN": "007", "Note": "two words"}
    assert (resistor.key, regulator.key) == ("/5E000001", "/5F00/5E000002")
    assert (resistor.lib_id, resistor.footprint, resistor.description) == (
        "Device:R",
        "Resistor_SMD:R_0603",
        "Resistor",
    )
    assert regulator.place.sheet == "/psu/"
    assert [(pin.number, pin.name, pin.kind, pin.net) for pin in regulator.pins] == [
        ("1", "VIN", "power_in", "+5V"),
        ("2", "GND", "power_in", "Net-(R1-Pad2)"),
        ("3", "NC", "NotConnected", "unconnected-(U1-Pad3)"),
    ]
    assert {net.name: net.is_named for net in circuit.nets} == {
        "+5V": True,
        "Net-(R1-Pad2)": False,
        "unconnected-(U1-Pad3)": False,
    }
    assert circuit.board == "board"
    assert "marks of parts as not fitted or excluded" in circuit.cannot_contain
    assert circuit.complete


def test_net_of_kicad_10(tmp_path: Path) -> None:
    circuit = circuit_of(tmp_path, "b.net", NEW)
    resistor, regulator = circuit.components
    assert (resistor.fitted, resistor.in_bom, resistor.on_board) == (False, False, True)
    assert dict(resistor.fields) == {"MPN": "R-1", "Datasheet": "d.pdf", "Description": ""}
    assert (resistor.key, resistor.keywords, resistor.description) == ("/s/uuid-r2", "res", "Resistor")
    assert (resistor.place.file, resistor.place.sheet) == ("psu.kicad_sch", "/DC{slash}DC/")
    assert regulator.key == "/uuid-a"
    assert [(pin.number, pin.name, pin.kind) for pin in regulator.pins] == [
        ("1", "VO_1", "power_out"),
        ("4", "N/C", "passive"),
    ]
    assert [net.name for net in circuit.nets] == ["/DC{slash}DC/A{slash}B", "unconnected-(U10-N{slash}C-Pad4)"]
    assert "parts excluded from the board" in circuit.cannot_contain


def test_xml_tells_slashes_in_names_from_those_between_sheets(tmp_path: Path) -> None:
    circuit = circuit_of(tmp_path, "b.xml", XML)
    (resistor,) = circuit.components
    assert [net.name for net in circuit.nets] == ["/DC{slash}DC/A{slash}B", "Net-(R2-N{slash}C)"]
    assert resistor.place.sheet == "/DC{slash}DC/"
    assert dict(resistor.fields) == {"MPN": "R-1", "Empty": ""}
    # before KiCad 10 a pin's function is its name, whatever it ends in
    assert [(pin.number, pin.name) for pin in resistor.pins] == [("1", ""), ("2", "X_2")]
    assert resistor.fitted is False
    assert "parts and sheets excluded from the bill of materials, if written for a BOM script" in circuit.cannot_contain


def test_xml_that_lists_parts_excluded_from_the_bom_is_complete_in_that(tmp_path: Path) -> None:
    text = XML.replace('<property name="dnp"/>', '<property name="exclude_from_bom"/>')
    circuit = circuit_of(tmp_path, "b.xml", text)
    assert circuit.cannot_contain == ("free texts of the sheets", "positions of parts")
    assert circuit.components[0].in_bom is False


def test_netlist_says_what_it_cannot_contain(tmp_path: Path) -> None:
    (finding,) = circuit_of(tmp_path, "b.net", NEW).findings
    assert finding.name == "netlist-only"
    assert "parts excluded from the board" in finding.message


def test_schematic_beside_a_netlist_is_read_instead(tmp_path: Path) -> None:
    save(tmp_path, "b", schematic(part("TP1", "TP", (0, 0))))
    circuit = circuit_of(tmp_path, "b.net", NEW)
    assert [each.ref for each in circuit.components] == ["TP1"]
    assert [(each.name, each.weight) for each in circuit.findings] == [("schematic-preferred", "note")]
    assert "b.kicad_sch lies beside b.net and was read instead" in circuit.findings[0].message


def test_variant_of_a_netlist(tmp_path: Path) -> None:
    path = tmp_path / "b.net"
    path.write_text(NEW, encoding="utf-8")
    assert variants(path) == ("LOW",)
    changed = read(path, variant="LOW").components[0]
    assert (changed.value, changed.fitted) == ("2k", True)
    with pytest.raises(InputError, match="there is no design variant 'HIGH'"):
        read(path, variant="HIGH")


def test_own_conventions_hold_in_netlists_too(tmp_path: Path) -> None:
    path = tmp_path / "b.net"
    path.write_text(OLD, encoding="utf-8")
    circuit = read(path, settings=Settings(unfitted_fields={"MPN": ("007",)}))
    assert [each.fitted for each in circuit.components] == [False, True]


def test_part_listed_twice_and_part_only_on_nets_are_reported(tmp_path: Path) -> None:
    text = NEW.replace('(ref "U10") (value', '(ref "R2") (value')
    circuit = circuit_of(tmp_path, "b.net", text)
    assert not circuit.complete
    assert {(each.name, each.subject) for each in circuit.findings} >= {
        ("reference-twice", "R2"),
        ("item-unreadable", "U10"),
    }


def test_pad_on_two_nets_of_a_netlist(tmp_path: Path) -> None:
    text = NEW.replace('(node (ref "U10") (pin "4")', '(node (ref "R2") (pin "1")')
    circuit = circuit_of(tmp_path, "b.net", text)
    (pin,) = circuit.components[0].pins
    assert (pin.net, pin.more_nets) == ("/DC{slash}DC/A{slash}B", ("unconnected-(U10-N{slash}C-Pad4)",))
    assert "pad-on-two-nets" in [each.name for each in circuit.findings]


@pytest.mark.parametrize(
    ("name", "text", "message"),
    [
        ("b.xml", "<!DOCTYPE x [<!ENTITY a 'aaaa'>]><export/>", "the XML declares a document type, which is not read"),
        ("b.xml", "<export><nets>", "the XML is damaged: no element found"),
        ("b.xml", "<html/>", "this is XML of kind 'html', not a netlist"),
        ("b.xml", "<export version='E'/>", "the netlist has no list of parts or nets"),
        ("b.xml", "", "the file is empty"),
        ("b.net", "(kicad_sch (version 1))", "this is a schematic (.kicad_sch), not a netlist (.net)"),
        ("b.net", '(export (version "E")', "the file ends inside (export"),
        ("b.net", OLD.replace('"two words"', '"two words'), "line 7: a blank is missing after a string"),
        ("b.xml", "<export>" + "<a>" * 5000 + "</a>" * 5000 + "</export>", "nested deeper than 64 levels"),
    ],
)
def test_damaged_netlist(tmp_path: Path, name: str, text: str, message: str) -> None:
    (tmp_path / name).write_text(text, encoding="utf-8")
    assert message in fault_of(tmp_path / name)


def test_entities_are_never_expanded(tmp_path: Path) -> None:
    bomb = '<?xml version="1.0"?><!DOCTYPE b [<!ENTITY a "xxxxxxxxxx">' + "".join(
        f'<!ENTITY {chr(98 + n)} "{f"&{chr(97 + n)};" * 10}">' for n in range(20)
    )
    (tmp_path / "b.xml").write_text(bomb + "]><export>&u;</export>", encoding="utf-8")
    assert "document type" in fault_of(tmp_path / "b.xml")


def test_missing_netlist(tmp_path: Path) -> None:
    assert fault_of(tmp_path / "b.net") == "b.net: no such file. Check the path."


@pytest.mark.parametrize(
    ("limit", "most", "message"),
    [
        ("NETLIST_PARTS", 1, "more than 1 parts"),
        ("NETLIST_NODES", 2, "more than 2 pins on nets"),
        ("NETLIST_BYTES", 1024, "larger than"),
    ],
)
def test_limits_of_netlists(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, limit: str, most: int, message: str
) -> None:
    monkeypatch.setattr(limits, limit, most)
    (tmp_path / "b.net").write_text(NEW, encoding="utf-8")
    assert message in fault_of(tmp_path / "b.net")


@pytest.mark.boards
def test_copper_layers_come_with_a_netlist_too(tmp_path: Path, shared: Path) -> None:
    shutil.copy(shared / "boards" / "helium" / "kicad10.net", tmp_path / "board.net")
    (tmp_path / "board.kicad_pcb").write_text(
        '(kicad_pcb (layers (0 "F.Cu" signal) (2 "B.Cu" signal)))', encoding="utf-8"
    )
    layers = read(tmp_path / "board.net").copper_layers
    assert layers is not None
    assert layers.span.nominal == 2
