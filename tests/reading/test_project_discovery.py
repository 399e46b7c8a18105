"""Which project a path means, and what a project file may hold wrongly without harm."""

from __future__ import annotations

from hashlib import sha256
from pathlib import Path

import pytest
from sketch import label, part, save, schematic

from analyzer.errors import InputError
from analyzer.reading import read

ONE = schematic(part("TP1", "TP", (0, 0)), label("${RAIL}", (0, 0)))


def fault_of(path: Path) -> str:
    with pytest.raises(InputError) as caught:
        read(path)
    return str(caught.value)


@pytest.mark.parametrize("named", ["p.kicad_sch", "p.kicad_pro", "."])
def test_sheet_project_file_and_folder_mean_the_same(tmp_path: Path, named: str) -> None:
    save(tmp_path, "p", ONE, '{"text_variables": {"RAIL": "VDD"}}')
    circuit = read(tmp_path / named)
    assert circuit.board == "p"
    assert [net.name for net in circuit.nets] == ["/VDD"]
    hashes = {file.path: file.sha256 for file in circuit.inputs}
    assert hashes["p.kicad_sch"] == sha256(ONE.encode()).hexdigest()
    assert set(hashes) == {"p.kicad_sch", "p.kicad_pro"}


def test_folder_with_several_projects_names_them(tmp_path: Path) -> None:
    save(tmp_path, "a", ONE)
    save(tmp_path, "b", ONE)
    assert "several projects are in this folder: a.kicad_pro, b.kicad_pro. Name one of them." in fault_of(tmp_path)


def test_folder_with_one_sheet_and_no_project_file(tmp_path: Path) -> None:
    save(tmp_path, "p", ONE, None)
    save(tmp_path, "_autosave-p", ONE, None)
    assert read(tmp_path).board == "p"


def test_folder_with_several_sheets_and_no_project_file(tmp_path: Path) -> None:
    save(tmp_path, "a", ONE, None)
    save(tmp_path, "b", ONE, None)
    assert "several projects are in this folder: a.kicad_sch, b.kicad_sch" in fault_of(tmp_path)


def test_folder_without_a_project(tmp_path: Path) -> None:
    assert "no KiCad project is in this folder. Give a .kicad_pro or .kicad_sch." in fault_of(tmp_path)


def test_folder_with_a_project_of_kicad_5(tmp_path: Path) -> None:
    (tmp_path / "old.sch").write_text("EESchema", encoding="utf-8")
    assert "only a project of KiCad 5 or older is in this folder" in fault_of(tmp_path)


def test_project_file_without_its_root_sheet(tmp_path: Path) -> None:
    (tmp_path / "p.kicad_pro").write_text("{}", encoding="utf-8")
    assert fault_of(tmp_path / "p.kicad_pro") == "p.kicad_sch: no such file. Check the path."


def test_missing_project_file_is_a_note(tmp_path: Path) -> None:
    circuit = read(save(tmp_path, "p", ONE, None))
    assert [finding.name for finding in circuit.findings] == ["project-missing"]
    assert circuit.findings[0].weight == "note"
    assert circuit.complete
    assert [net.name for net in circuit.nets] == ["/${RAIL}"]


def test_sheet_read_without_the_project_it_belongs_to_is_pointed_out(tmp_path: Path) -> None:
    save(tmp_path, "board", ONE)
    circuit = read(save(tmp_path, "psu", ONE, None))
    assert "board.kicad_pro is another project, perhaps the one this sheet belongs to" in circuit.findings[0].message


@pytest.mark.parametrize(
    ("content", "why"),
    [
        ("{not json", "it is no JSON"),
        ("[]", "it holds no JSON object"),
        ("", "it is no JSON"),
        ('{"text_variables": [1]}', "'text_variables' is no object"),
        ('{"schematic": "x"}', "'schematic' is no object"),
        ('{"schematic": {"bus_aliases": 3}}', "'bus_aliases' is no object"),
        ('{"schematic": {"variants": {}}}', "'variants' is no list"),
        ('{"schematic": {"top_level_sheets": ["x"]}}', "an entry of 'top_level_sheets' has no file name"),
        ('{"schematic": {"subpart_first_id": "A"}}', "'subpart_first_id' is no number"),
        ("[" * 100_000, "it is no JSON"),
    ],
)
def test_unusable_project_file_is_a_finding_and_the_sheets_are_read(tmp_path: Path, content: str, why: str) -> None:
    circuit = read(save(tmp_path, "p", ONE, content))
    (finding,) = circuit.findings
    assert finding.name == "project-unreadable"
    assert finding.message.startswith(f"p.kicad_pro could not be used: {why}")
    assert len(circuit.components) == 1


@pytest.mark.parametrize(
    "content",
    [
        '{"text_variables": null, "schematic": null}',
        '{"schematic": {"bus_aliases": null, "variants": null, "top_level_sheets": null, "subpart_first_id": null}}',
        '{"text_variables": {"RAIL": 5}}',
        '\ufeff{"meta": {"filename": "p.kicad_pro"}}',
    ],
)
def test_nulls_and_foreign_entries_of_a_project_file_are_absent_entries(tmp_path: Path, content: str) -> None:
    circuit = read(save(tmp_path, "p", ONE, content))
    assert circuit.findings == ()


@pytest.mark.parametrize("name", ["~p.kicad_sch.lck", "~p.kicad_pro.lck", "_autosave-p.kicad_sch"])
def test_open_editor_is_noted(tmp_path: Path, name: str) -> None:
    path = save(tmp_path, "p", ONE)
    (tmp_path / name).write_text("", encoding="utf-8")
    assert [(finding.name, finding.message) for finding in read(path).findings] == [
        ("open-in-editor", f"{name} exists: the saved state was read")
    ]


@pytest.mark.parametrize(
    ("board", "layers"),
    [
        ('(kicad_pcb (version 20240108) (layers (0 "F.Cu" signal) (31 "B.Cu" signal) (36 "B.SilkS" user)))', 2),
        (
            '(kicad_pcb (version 20241229) (generator "pcbnew")\n\t(general (thickness 1.6))\n\t(layers'
            '\n\t\t(0 "F.Cu" signal)\n\t\t(4 "In1.Cu" power "GND plane")\n\t\t(6 "In2.Cu" mixed)'
            '\n\t\t(2 "B.Cu" signal)\n\t\t(9 "F.Adhes" user)\n\t)\n)',
            4,
        ),
        ("(kicad_pcb (version 20171130) (layers (0 F.Cu signal) (31 B.Cu signal) (32 B.Adhes user)))", 2),
        ('(kicad_pcb (version 20240108) (layers (0 "F.Cu" signal)))', 1),
    ],
)
def test_copper_layers_come_from_the_head_of_the_board_file(tmp_path: Path, board: str, layers: int) -> None:
    path = save(tmp_path, "p", ONE)
    path.with_suffix(".kicad_pcb").write_text(board, encoding="utf-8")
    found = read(path).copper_layers
    assert found is not None
    assert found.span.corners == (layers, layers, layers)
    assert found.source == "p.kicad_pcb: list of layers"


@pytest.mark.parametrize(
    "board", ["", "(kicad_sch)", "(kicad_pcb (version 1))", '(kicad_pcb (layers (36 "B.SilkS" user)))']
)
def test_board_file_that_does_not_say_gives_no_layers(tmp_path: Path, board: str) -> None:
    path = save(tmp_path, "p", ONE)
    path.with_suffix(".kicad_pcb").write_text(board, encoding="utf-8")
    assert read(path).copper_layers is None


def test_no_board_file_gives_no_layers(tmp_path: Path) -> None:
    assert read(save(tmp_path, "p", ONE)).copper_layers is None
