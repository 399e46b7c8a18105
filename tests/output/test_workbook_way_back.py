"""What a person typed stays in force run after run, is refused where it cannot be meant, and is never lost silently."""

from __future__ import annotations

import datetime
import json
import shutil
import zipfile
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from conftest import ROOT
from test_workbook_round_trip import fresh, rows, type_in

from analyzer.audit import Audit, audit
from analyzer.cli import main
from analyzer.errors import InputError, OutputError
from analyzer.findings.base import Finding
from analyzer.ledger import Ledger
from analyzer.output.workbook import write_workbook
from analyzer.output.workbook.typed import Answered, Typed
from analyzer.output.workbook.typed_reading import read_typed
from analyzer.rule import BoardClass

BOARDS = ROOT / "fixture_boards"


@pytest.fixture(scope="module")
def result() -> Audit:
    return audit(BOARDS / "tide_logger")


@pytest.fixture
def bench(tmp_path: Path) -> Path:
    """A copy of a board with its workbook beside it."""
    board = Path(shutil.copytree(BOARDS / "seedling_bench", tmp_path / "bench"))
    assert main(["audit", str(board), "--workbook", str(board / "bench.xlsx")]) == 5
    return board / "bench.xlsx"


def rerun(file: Path, *more: str, currents: bool = True) -> dict[str, Any]:
    """The ledger of a re-run over a workbook, which is written anew."""
    taken = ["--currents", str(file)] if currents else []
    ledger = file.with_suffix(".json")
    assert main(["audit", str(file.parent), *taken, "--workbook", str(file), "--json", str(ledger), *more]) in (0, 5)
    found: dict[str, Any] = json.loads(ledger.read_text(encoding="utf-8"))
    return found


def one_of(ledger: dict[str, Any], ref: str) -> dict[str, Any]:
    (entry,) = [entry for entry in ledger["entries"] if entry["ref"] == ref]
    return dict(entry)


def test_what_was_typed_is_in_force_in_the_second_re_run_too(bench: Path) -> None:
    """A hot site typed once must not turn cool again, and "clear", because the workbook was run twice."""
    type_in(bench, "Settings", "Value", 100, Setting="Ambient, highest")
    type_in(bench, "Settings", "Value", "2s2p", Setting="Board class")
    type_in(bench, "Settings", "Value", 30, Setting="Tight above: rating less")
    type_in(bench, "Regulators", "θ at sea level [K/W]", 77, Part="U2")
    type_in(bench, "Currents", "Type high [A]", "1.2 W", Part="U6", Rail="+12V")
    type_in(bench, "Currents", "Your note", "worst in spring", Part="U6", Rail="+12V")
    first = rerun(bench)
    once = bench.read_bytes()
    second = rerun(bench)
    assert second == first
    assert bench.read_bytes() == once
    # by hand with EXPECTED.md: 100 + 8 °C, 77 K/W and the altitude's 1.038251, 149.418 mW
    assert one_of(second, "U2")["junction_celsius"][1] == pytest.approx(108 + 77 * 1.038251 * 0.149418, abs=1e-3)
    # 1.2 W at +12V's 11.582818 V at least
    (draw,) = [draw for rail in second["rails"] for draw in rail["draws"] if draw["ref"] == "U6"]
    assert draw["amps"][2] == pytest.approx(1.2 / 11.582818, rel=1e-6)
    assert read_typed(bench).settings == {"Ambient_high": 100.0, "Margin_tight": 30.0}
    assert read_typed(bench).board_class is BoardClass.HIGH


def test_an_emptied_cell_goes_back_to_what_the_files_say(bench: Path) -> None:
    before = rerun(bench)
    type_in(bench, "Settings", "Value", 70, Setting="Ambient, highest")
    type_in(bench, "Settings", "Value", "2s2p", Setting="Board class")
    type_in(bench, "Regulators", "θ at sea level [K/W]", 77, Part="U2")
    type_in(bench, "Currents", "Type high [A]", 0.2, Part="U6", Rail="+12V")
    assert rerun(bench) != before
    for sheet, head, where in (
        ("Settings", "Value", {"Setting": "Ambient, highest"}),
        ("Settings", "Value", {"Setting": "Board class"}),
        ("Regulators", "θ at sea level [K/W]", {"Part": "U2"}),
        ("Currents", "Type high [A]", {"Part": "U6", "Rail": "+12V"}),
    ):
        type_in(bench, sheet, head, None, **where)
    assert rerun(bench) == before
    assert read_typed(bench) == Typed("bench.xlsx")


def test_a_run_that_does_not_take_it_in_carries_it_on_and_shows_no_verdict(
    bench: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    type_in(bench, "Settings", "Value", 70, Setting="Ambient, highest")
    type_in(bench, "Settings", "Value", "2s2p", Setting="Board class")
    type_in(bench, "Regulators", "θ at sea level [K/W]", 77, Part="U2")
    type_in(bench, "Currents", "Type high [A]", "200 mA", Part="U6", Rail="+12V")
    typed = read_typed(bench)
    capsys.readouterr()
    rerun(bench, currents=False)
    note = f"note: {bench} holds typed values that this run did not use; take them in with --currents {bench}\n"
    assert capsys.readouterr().err == note
    assert read_typed(bench) == typed
    # programs that show stored results must show none that the typed values may have changed
    book = openpyxl.load_workbook(bench, data_only=True)
    assert [book["Regulators"][f"T{row}"].value for row in (5, 6, 7)] == ["re-run"] * 3
    assert [[cell.value for cell in row] for row in book["Summary"]["A4:B8"]] == [
        ["over", 0],
        ["open", 0],
        ["tight", 0],
        ["clear", 0],
        ["re-run", 3],
    ]
    rerun(bench)
    assert capsys.readouterr().err == ""
    assert openpyxl.load_workbook(bench, data_only=True)["Regulators"]["T5"].value == "over"


def test_a_workbook_is_not_replaced_by_one_that_lacks_what_was_typed_into_it(result: Audit, tmp_path: Path) -> None:
    file, other = fresh(result, tmp_path), fresh(result, tmp_path, "ida.xlsx")
    sheets: tuple[tuple[str, str, object, dict[str, str], str], ...] = (
        ("Currents", "Type high [A]", 0.01, {"Part": "U5", "Rail": "+5V"}, "U5 on +5V"),
        ("Currents", "Your note", "ask Ida", {"Part": "U4", "Rail": "-5V"}, "the note to U4 on -5V"),
        ("Findings", "Your answer", "known", {"About": "U2"}, "budget-open of U2"),
        ("Settings", "Value", 50, {"Setting": "Ambient, highest"}, "Ambient_high"),
        ("Regulators", "θ at sea level [K/W]", 50, {"Part": "U2"}, "θ of U2"),
        ("Settings", "Value", "2s2p", {"Setting": "Board class"}, "the board class"),
    )
    for sheet, head, value, where, _ in sheets:
        type_in(file, sheet, head, value, **where)
    sign(file, "Decision", "build it")
    before = file.read_bytes()
    assert list(read_typed(other).lacks(read_typed(file))) == [
        *(name for *_, name in sheets[:3]),
        "Decision",
        *(name for *_, name in sheets[3:]),
    ]
    message = r"board\.xlsx: holds what was typed for U5 on \+5V and 6 more, and ida\.xlsx does not"
    with pytest.raises(OutputError, match=message) as refused:
        write_workbook(file, result.ledger, result.settings, read_typed(other))
    assert refused.value.exit_status == 4
    assert file.read_bytes() == before
    # another value for the same cell is a newer one, and the old file is kept beside it
    shutil.copy(file, other)
    type_in(other, "Currents", "Type high [A]", 0.02, Part="U5", Rail="+5V")
    write_workbook(file, result.ledger, result.settings, read_typed(other))
    assert (tmp_path / "board.previous.xlsx").read_bytes() == before


def sign(file: Path, label: str, value: object) -> None:
    book = openpyxl.load_workbook(file)
    sheet = book["Summary"]
    place = next(row[0].row for row in sheet.iter_rows() if row[0].value == label)
    sheet.cell(place, 2).value = value  # type: ignore[assignment]
    book.save(file)


def test_a_day_signed_off_on_stays_that_day(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    sign(file, "Date", datetime.datetime(2026, 9, 4))
    sign(file, "Remarks", datetime.datetime(2026, 9, 4, 13, 30))
    for _ in range(2):
        assert read_typed(file).sign_off == {"Date": "2026-09-04", "Remarks": "2026-09-04 13:30:00"}
        write_workbook(file, result.ledger, result.settings, read_typed(file))


def test_line_breaks_of_other_systems_become_ours(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    type_in(file, "Currents", "Your note", "one_x000D_\ntwo", Part="U5", Rail="+5V")
    assert list(read_typed(file).notes.values()) == ["one\ntwo"]


def test_what_a_regulator_takes_is_not_to_be_typed(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    sheet = openpyxl.load_workbook(file)["Currents"]
    shown = {row[3].value: row[8].fill.start_color.rgb == "FFFFCC99" for row in sheet.iter_rows(min_row=5)}
    assert shown == {"gap": True, "computed": True, "regulator": False, "gap below": False}
    # typed all the same, it is read, reported by the audit, and still there in the next workbook
    type_in(file, "Currents", "Type high [A]", 0.5, Part="U2", Kind="regulator")
    typed = read_typed(file)
    again = audit(BOARDS / "tide_logger", adjust=typed.applied_to).ledger
    assert [f.subject for f in again.findings if f.name == "draw-on-regulator"] == ["U2"]
    write_workbook(file, again, result.settings, typed)
    assert read_typed(file) == typed
    # two rows on one rail, each with another current: which one was meant?
    type_in(file, "Currents", "Type high [A]", 0.4, Part="U2", Kind="gap below")
    with pytest.raises(InputError, match=r"Currents!H9:J9: U2 on \+9V has other currents in another row\. Keep one\."):
        read_typed(file)
    type_in(file, "Currents", "Type high [A]", 0.5, Part="U2", Kind="gap below")
    assert read_typed(file) == typed


def test_a_head_that_is_gone_is_missed_and_not_passed_over(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    book = openpyxl.load_workbook(file)
    book["Currents"].insert_rows(1)
    book["Findings"]["G4"].value = "Answers"
    book.save(file)
    with pytest.raises(InputError) as refused:
        read_typed(file)
    assert [(fault.place, fault.what) for fault in refused.value.faults] == [
        ("Currents", "row 4 has no column 'Rail'"),
        ("Findings", "row 4 has no column 'Your answer'"),
    ]


@pytest.mark.parametrize(
    ("cells", "what"),
    [
        ((None, "-2 A for 5 ms", None), "a current that a part takes cannot be negative"),
        ((None, "-1 W", None), "a power that a part takes cannot be negative"),
        ((0.2, None, 0.1), "low, nominal and high must rise: 0.2, 0.15, 0.1 A"),
        (("1..2 A", 3, None), "'1..2 A' is a range: type it alone, or one value in each cell"),
        ((None, True, None), "'True' is no current; type amperes as a number, or text such as 120 mA"),
    ],
)
def test_currents_that_cannot_be_meant_are_refused(
    result: Audit, tmp_path: Path, cells: tuple[object, ...], what: str
) -> None:
    file = fresh(result, tmp_path)
    for head, value in zip(("Type low [A]", "Type nominal [A]", "Type high [A]"), cells, strict=True):
        type_in(file, "Currents", head, value, Part="U5", Rail="+5V")
    with pytest.raises(InputError) as refused:
        read_typed(file)
    (fault,) = refused.value.faults
    assert (fault.what, fault.place.startswith("Currents!H")) == (what, True)


def test_every_fault_of_settings_and_theta_is_told_at_once(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    type_in(file, "Settings", "Value", "60 °C", Setting="Altitude, highest")
    type_in(file, "Settings", "Value", 70, Setting="Ambient, nominal")
    type_in(file, "Settings", "Value", 60, Setting="Ambient, highest")
    type_in(file, "Regulators", "θ at sea level [K/W]", -5, Part="U2")
    with pytest.raises(InputError) as refused:
        read_typed(file)
    assert [fault.what for fault in refused.value.faults] == [
        "'60 °C' is no number for Altitude, highest",
        "Ambient_nominal 70 is above Ambient_high 60",
        "'-5' is no θ in K/W",
    ]


def test_a_theta_may_be_typed_where_none_is_known(tmp_path: Path) -> None:
    """The lamp's U1 without its package: no θ, so the budget is open; one typed into the empty cell closes that."""
    board = Path(shutil.copytree(BOARDS / "lane_lamp", tmp_path / "lamp"))
    rules = board / "rules.toml"
    text = rules.read_text(encoding="utf-8")
    rules.write_text("\n".join(line for line in text.splitlines() if "theta" not in line), encoding="utf-8")
    settings = board / "heatledger.toml"
    settings.write_text(settings.read_text(encoding="utf-8") + '[parts.U1]\npackage = "none known"\n', encoding="utf-8")
    file = board / "lamp.xlsx"
    found = one_of(rerun(file, currents=False), "U1")
    assert found["theta_k_per_w"] is None
    (row,) = [row for row in rows(file, "Regulators") if row["Part"] == "U1"]
    assert row["θ at sea level [K/W]"] is None
    type_in(file, "Regulators", "θ at sea level [K/W]", 88, Part="U1")
    for _ in range(2):
        # sea level, so the typed one is the one used
        assert one_of(rerun(file), "U1")["theta_k_per_w"] == 88


def test_a_theta_typed_for_a_part_that_is_gone_is_listed(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    type_in(file, "Regulators", "θ at sea level [K/W]", 50, Part="U2")
    typed = replace(read_typed(file), thetas={"U2": 50.0, "U77": 61.5})
    for _ in range(2):
        write_workbook(file, result.ledger, result.settings, typed)
        (gone,) = [row for row in rows(file, "Regulators") if row["Kind"] == "gone"]
        assert (gone["Part"], gone["θ at sea level [K/W]"]) == ("U77", 61.5)
        assert gone["Missing"] == "θ typed for a part that has no budget now: rename or delete it"
        assert read_typed(file) == typed


def answered(ledger: Ledger, file: Path, result: Audit, *answers: str | None) -> None:
    """The workbook of a ledger with these answers, by row."""
    write_workbook(file, ledger, result.settings)
    book = openpyxl.load_workbook(file)
    for number, answer in enumerate(answers):
        book["Findings"].cell(5 + number, 7).value = answer
    book.save(file)


def test_findings_of_one_kind_about_one_part_have_an_answer_each(result: Audit, tmp_path: Path) -> None:
    file = tmp_path / "board.xlsx"
    one = result.ledger.findings[0]
    twins = tuple(replace(one, message=f"pin {pin} of U2 is hidden") for pin in (3, 7, 9))
    ledger = replace(result.ledger, findings=twins)
    answered(ledger, file, result, "pin 3 is fine", None, "pin 9 is not")
    write_workbook(file, replace(ledger, findings=(*twins[1:], twins[0])), result.settings, read_typed(file))
    assert told(file) == [
        ("open", "pin 7 of U2 is hidden", None),
        ("open", "pin 9 of U2 is hidden", "pin 9 is not"),
        ("open", "pin 3 of U2 is hidden", "pin 3 is fine"),
    ]
    # reworded among several of its kind it is no guess which one was meant: listed
    write_workbook(file, replace(ledger, findings=(*twins[:2], one)), result.settings, read_typed(file))
    assert told(file) == [
        ("open", "pin 3 of U2 is hidden", "pin 3 is fine"),
        ("open", "pin 7 of U2 is hidden", None),
        ("open", one.message, None),
        ("gone", "pin 9 of U2 is hidden", "pin 9 is not"),
    ]


def test_an_answer_stays_with_its_finding_when_a_figure_in_it_changes(result: Audit, tmp_path: Path) -> None:
    file = tmp_path / "board.xlsx"
    one = replace(result.ledger.findings[0], message="junction 101 °C")
    answered(replace(result.ledger, findings=(one,)), file, result, "measured: 80 °C")
    hotter: Callable[[Finding], Finding] = lambda finding: replace(finding, message="junction 103 °C")  # noqa: E731
    write_workbook(file, replace(result.ledger, findings=(hotter(one),)), result.settings, read_typed(file))
    assert told(file) == [("open", "junction 103 °C", "measured: 80 °C")]
    assert list(read_typed(file).answers) == [Answered(one.name, one.subject, one.key, "junction 103 °C", one.where)]
    # mended: what was written about it stays
    write_workbook(file, replace(result.ledger, findings=()), result.settings, read_typed(file))
    assert told(file) == [("gone", "junction 103 °C", "measured: 80 °C")]
    assert [row["What to do"] for row in rows(file, "Findings")] == ["found in an earlier run, not in this one"]


def told(file: Path) -> list[tuple[str, str, str | None]]:
    return [(row["Weight"], row["What"], row["Your answer"]) for row in rows(file, "Findings")]


def test_the_longest_text_that_a_cell_holds_comes_back_whole(result: Audit, tmp_path: Path) -> None:
    file = fresh(result, tmp_path)
    # the format's limit is 32,767 UTF-16 units; a thermometer is two
    text = "a" + "🌡" * 16_383
    type_in(file, "Currents", "Your note", text, Part="U5", Rail="+5V")
    write_workbook(file, result.ledger, result.settings, read_typed(file))
    assert list(read_typed(file).notes.values()) == [text]


def test_a_damaged_workbook_and_one_of_an_earlier_version_are_read_as_they_are(result: Audit, tmp_path: Path) -> None:
    damaged = tmp_path / "damaged.xlsx"
    with zipfile.ZipFile(damaged, "w") as archive:
        archive.writestr("[Content_Types].xml", "<Types/>")
    with pytest.raises(InputError, match="is no readable workbook"):
        read_typed(damaged)
    # earlier versions had no mark for a typed θ and showed the engine's where no formula follows: nobody typed that
    file = fresh(result, tmp_path)
    book = openpyxl.load_workbook(file)
    sheet = book["Regulators"]
    heads = {str(cell.value): cell.column for cell in sheet[4]}
    sheet.cell(4, heads["θ typed"]).value = None
    book.save(file)
    type_in(file, "Regulators", "θ at sea level [K/W]", 220, Part="U3")
    assert read_typed(file).thetas == {}
