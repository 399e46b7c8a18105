"""The command line as people use it: help, wrong words, narrow and old terminals, bad input, exit statuses."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from collections.abc import Mapping
from pathlib import Path

import openpyxl
import pytest
from conftest import ROOT

BOARDS = ROOT / "fixture_boards"
COMMANDS = ("audit", "trail", "rails", "gaps", "nets", "rules", "adopt")


def heatledger(
    *arguments: str, cwd: Path = ROOT, variables: Mapping[str, str] | None = None
) -> subprocess.CompletedProcess[str]:
    ours = {"PYTHONIOENCODING": "utf-8", "COLUMNS": "80", "PYTHONPATH": str(ROOT)}
    environment = {**os.environ, **ours, **(variables or {})}
    environment.pop("HEATLEDGER_TRACE", None)
    command = [sys.executable, "-m", "analyzer.cli", *arguments]
    return subprocess.run(command, cwd=cwd, env=environment, capture_output=True, encoding="utf-8", check=False)


@pytest.fixture
def board(tmp_path: Path) -> Path:
    return Path(shutil.copytree(BOARDS / "seedling_bench", tmp_path / "seedling_bench"))


@pytest.mark.parametrize("command", COMMANDS)
def test_help_is_short_and_begins_with_two_real_examples(command: str) -> None:
    done = heatledger(command, "--help")
    lines = done.stdout.splitlines()
    assert (done.returncode, done.stderr) == (0, "")
    assert len(lines) <= 60
    examples = [n for n, line in enumerate(lines) if line.startswith(f"  heatledger {command} ")]
    first_option = next(n for n, line in enumerate(lines) if line.startswith(("options:", "positional arguments:")))
    assert len(examples) >= 2
    assert max(examples) < first_option


def test_the_top_help_lists_every_command_and_the_exit_statuses() -> None:
    text = heatledger("--help").stdout
    assert [line.split()[0] for line in text.splitlines() if re.match(r"    \w+ +\w", line)] == list(COMMANDS)
    assert "5  findings at or above the chosen level" in text
    assert len(text.splitlines()) <= 60


def test_start_up_imports_nothing_heavy() -> None:
    code = (
        "import sys, contextlib, io\n"
        "from analyzer.cli import main\n"
        "with contextlib.redirect_stdout(io.StringIO()), contextlib.suppress(SystemExit):\n"
        "    main(['audit', '--help'])\n"
        "heavy = {'rich', 'openpyxl', 'xlsxwriter', 'pint', 'kiutils', 'tomllib', 'numpy', 'distributed'}\n"
        "print(sorted(heavy & set(sys.modules)))\n"
    )
    # measuring coverage imports modules of its own
    variables = {name: value for name, value in os.environ.items() if not name.startswith("COVERAGE_")}
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=ROOT, capture_output=True, encoding="utf-8", check=True, env=variables
    )
    assert done.stdout == "[]\n"


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (["adit", "x"], "heatledger: there is no command 'adit'. Did you mean 'audit'?"),
        (["audit", "x", "--workbok", "y"], "heatledger: there is no option '--workbok'. Did you mean '--workbook'?"),
        (["audit"], "heatledger: the following arguments are required: PATH. 'heatledger audit --help' lists"),
        (["audit", "x", "--fail-on", "all"], "heatledger: argument --fail-on: invalid choice: 'all'"),
    ],
)
def test_wrong_words_end_in_status_1_with_one_line(arguments: list[str], message: str) -> None:
    done = heatledger(*arguments)
    assert (done.returncode, done.stdout) == (1, "")
    assert done.stderr.startswith(message)
    assert len(done.stderr.splitlines()) == 1


def test_no_command_prints_the_help() -> None:
    done = heatledger()
    assert done.returncode == 1
    assert done.stdout.startswith("usage: heatledger")


def test_the_version_is_printed() -> None:
    assert re.fullmatch(r"heatledger \d+\.\d+\.\d+\n", heatledger("--version").stdout)


@pytest.mark.parametrize("encoding", ["ascii", "cp1252", "utf-8"])
def test_a_terminal_that_cannot_show_theta_gets_an_escape_and_no_fault(encoding: str) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "analyzer.cli", "trail", "U2", "fixture_boards/seedling_bench"],
        cwd=ROOT,
        env={**os.environ, "PYTHONIOENCODING": encoding, "COLUMNS": "100"},
        capture_output=True,
        check=False,
    )
    assert done.returncode == 0
    assert ("θJA" if encoding == "utf-8" else "\\u03b8JA") in done.stdout.decode(encoding)
    assert done.stderr == b""


@pytest.mark.parametrize("columns", ["40", "80", "120"])
def test_reports_keep_to_the_width(columns: str) -> None:
    done = heatledger("audit", "fixture_boards/lane_lamp", variables={"COLUMNS": columns})
    assert max(len(line) for line in done.stdout.splitlines()) <= int(columns)


def test_a_closed_pipe_is_no_fault() -> None:
    command = f"'{sys.executable}' -m analyzer.cli audit fixture_boards/lane_lamp | head -n 1"
    done = subprocess.run(["bash", "-c", command], cwd=ROOT, capture_output=True, encoding="utf-8", check=False)
    assert done.stdout.startswith("open  U1")
    assert done.stderr == ""


@pytest.mark.parametrize(("level", "status"), [("over", 5), ("tight", 5), ("open", 5), ("never", 0)])
def test_the_level_decides_the_status(level: str, status: int) -> None:
    assert heatledger("audit", "fixture_boards/seedling_bench", "--fail-on", level).returncode == status


def test_a_board_that_is_only_open_passes_the_default_gate_and_fails_the_strict_one() -> None:
    assert heatledger("audit", "fixture_boards/tide_logger").returncode == 0
    assert heatledger("audit", "fixture_boards/tide_logger", "--fail-on", "open").returncode == 5


def test_waivers_in_the_settings_accept_with_a_reason_and_tell_when_stale(board: Path) -> None:
    settings = board / "heatledger.toml"
    text = settings.read_text(encoding="utf-8")
    waiver = "\n[[waiver]]\nfinding = 'junction-over-rating'\nsubject = 'U5'\nreason = 'measured, report 3'\n"
    settings.write_text(text + waiver, encoding="utf-8")
    done = heatledger("audit", str(board))
    assert done.returncode == 0
    assert done.stdout.endswith("1 findings waived\n")
    settings.write_text(text + waiver.replace("U5", "U55"), encoding="utf-8")
    stale = heatledger("audit", str(board))
    assert stale.returncode == 5
    assert "the waiver of junction-over-rating on U55 matches no finding" in " ".join(stale.stdout.split())
    settings.write_text(text + waiver.replace("reason = 'measured, report 3'\n", ""), encoding="utf-8")
    bare = heatledger("audit", str(board))
    assert (bare.returncode, bare.stdout) == (3, "")
    assert "[[waiver]] number 1 reason: is missing" in bare.stderr
    settings.write_text(text + waiver + "expires = '2020-01-01'\n", encoding="utf-8")
    assert heatledger("audit", str(board)).returncode == 5


BAD = {
    "not-there": (lambda b: b.parent / "nothing.kicad_pro", 3, "no such file"),
    "two projects": (lambda b: _second_project(b), 3, "several projects are in this folder"),
    "truncated": (lambda b: _cut(b), 3, "file ends inside"),
    "not utf-8": (lambda b: _rewrite(b, b"\xff\xfe\x00"), 3, "UTF-16"),
    "a board": (lambda b: _rewrite(b, b"(kicad_pcb (version 1))"), 3, "kicad_pcb"),
    "legacy": (lambda b: _rewrite(b, b"EESchema Schematic File Version 4\n"), 3, "KiCad 5"),
    "empty": (lambda b: _rewrite(b, b""), 3, "empty"),
}


def _sheet(board: Path) -> Path:
    return board / "seedling_bench.kicad_sch"


def _rewrite(board: Path, data: bytes) -> Path:
    _sheet(board).write_bytes(data)
    return board


def _cut(board: Path) -> Path:
    return _rewrite(board, _sheet(board).read_bytes()[:5000])


def _second_project(board: Path) -> Path:
    (board / "other.kicad_pro").write_text("{}", encoding="utf-8")
    (board / "other.kicad_sch").write_text("", encoding="utf-8")
    return board


@pytest.mark.parametrize("what", BAD)
def test_bad_input_is_one_clear_line_and_writes_nothing(board: Path, what: str) -> None:
    spoil, status, words = BAD[what]
    path = spoil(board)
    out = board.parent / "out.xlsx"
    done = heatledger("audit", str(path), "--workbook", str(out))
    assert (done.returncode, done.stdout) == (status, "")
    assert words.casefold() in done.stderr.casefold()
    assert len(done.stderr.splitlines()) == 1
    assert "Traceback" not in done.stderr
    assert not out.exists()


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("[draws]\n'U3' = '120 ma'\n", "[draws] U3: '120 ma': 'ma' is not a unit; capitals matter: mA"),
        ("[draws]\n'U3' = '1,500 mA'\n", "[draws] U3: '1,500 mA': a comma may be a decimal sign"),
        ("[site]\nambient = '62'\n", "[site] ambient: '62': no unit"),
        ("[sight]\nambient = '40 °C'\n", "[sight]: unknown table; did you mean 'site'?"),
        ("[site]\nambeint = '40 °C'\n", "[site] ambeint: unknown key; did you mean 'ambient'?"),
        ("[site\n", "is not valid TOML"),
    ],
)
def test_bad_settings_are_named_with_table_and_key(board: Path, text: str, words: str) -> None:
    (board / "heatledger.toml").write_text(text, encoding="utf-8")
    done = heatledger("audit", str(board))
    assert (done.returncode, done.stdout) == (3, "")
    assert words in done.stderr
    assert "heatledger.toml" in done.stderr


def test_all_faults_of_a_rule_file_are_told_at_once(board: Path) -> None:
    rules = "[[rule]]\nname = 'a'\nkind = 'linar'\nmatch = [{ pattern = 'A*' }]\ndropuot = '1 V'\nquiescent = '5 ma'\n"
    (board / "rules.toml").write_text(rules, encoding="utf-8")
    done = heatledger("audit", str(board))
    assert done.returncode == 3
    text = done.stderr
    assert "kind: 'linar' is not known; did you mean 'linear'?" in text
    assert "dropuot: unknown key; did you mean 'dropout'?" in text
    assert "quiescent: '5 ma': 'ma' is not a unit" in text


def test_a_current_for_a_part_that_is_not_there_is_a_finding(board: Path) -> None:
    settings = board / "heatledger.toml"
    settings.write_text(settings.read_text(encoding="utf-8") + "\n[draws]\n'U77' = '10 mA'\n", encoding="utf-8")
    assert "U77" in heatledger("audit", str(board)).stdout


def test_a_rule_without_thermal_data_leaves_the_budget_open_or_generic(board: Path) -> None:
    text = (board / "rules.toml").read_text(encoding="utf-8")
    bare = re.sub(r"\[\[rule\.thermal\]\]\n(?:[^\[\n].*\n)+", "", text)
    (board / "rules.toml").write_text(bare, encoding="utf-8")
    out = heatledger("audit", str(board)).stdout
    assert "is the generic figure of SOT-223 on 1s, ±40 %" in " ".join(out.split())


def test_a_doubled_reference_is_a_finding_and_never_clear(board: Path) -> None:
    sheet = _sheet(board)
    text = sheet.read_text(encoding="utf-8")
    sheet.write_text(text.replace('(reference "U4")', '(reference "U2")'), encoding="utf-8")
    out = heatledger("audit", str(board)).stdout
    assert "U2" in out
    assert "clear U2" not in out


def test_an_output_over_an_input_is_refused_with_status_4(board: Path) -> None:
    before = _sheet(board).read_bytes()
    done = heatledger("audit", str(board), "--json", str(_sheet(board)))
    assert done.returncode == 4
    assert "is an input of this run" in done.stderr
    assert _sheet(board).read_bytes() == before


def test_trail_of_an_unknown_part_suggests_the_near_one() -> None:
    done = heatledger("trail", "U22", "fixture_boards/seedling_bench")
    assert done.returncode == 3
    assert "there is no budget for U22. Did you mean U2?" in done.stderr


def test_no_home_and_no_terminal_are_no_matter(board: Path) -> None:
    environment = {"PATH": os.environ["PATH"], "PYTHONPATH": str(ROOT)}
    command = [sys.executable, "-m", "analyzer.cli", "audit", str(board), "--brief"]
    done = subprocess.run(command, cwd="/", env=environment, stdin=subprocess.DEVNULL, capture_output=True, check=False)
    assert (done.returncode, done.stderr) == (5, b"")


def test_json_to_standard_output_is_json_and_nothing_else(board: Path) -> None:
    import json

    done = heatledger("audit", str(board), "--json", "-")
    assert json.loads(done.stdout)["schema"] == "heatledger/ledger-1"


@pytest.mark.parametrize("name", ["board.xls", "board"])
def test_a_workbook_of_another_ending_is_refused_before_any_work(board: Path, name: str) -> None:
    done = heatledger("audit", ".", "--workbook", name, cwd=board)
    remedy = "Spreadsheet programs go by the ending: name it board.xlsx."
    assert (done.returncode, done.stdout) == (1, "")
    assert done.stderr == f"heatledger: {name}: --workbook writes .xlsx files only. {remedy}\n"
    assert not (board / name).exists()


def test_the_ledger_is_the_same_wherever_the_tool_was_started(board: Path) -> None:
    inside = heatledger("audit", ".", "--json", "-", cwd=board).stdout
    assert heatledger("audit", "seedling_bench", "--json", "-", cwd=board.parent).stdout == inside
    assert heatledger("audit", str(board / "seedling_bench.kicad_pro"), "--json", "-", cwd=ROOT).stdout == inside
    assert '"path": "rules.toml"' in inside


def test_currents_typed_into_the_workbook_are_adopted_and_close_the_budgets(tmp_path: Path) -> None:
    board = Path(shutil.copytree(BOARDS / "tide_logger", tmp_path / "tide_logger"))
    heatledger("audit", ".", "--workbook", "tide.xlsx", cwd=board)
    file, settings = board / "tide.xlsx", board / "heatledger.toml"
    book = openpyxl.load_workbook(file)
    sheet = book["Currents"]
    heads = {str(cell.value): cell.column - 1 for cell in sheet[4]}
    typed = {("U4", "+5V"): "2.5 mA", ("U4", "-5V"): 0.002, ("U5", "+5V"): "1/4/30 mA"}
    for row in sheet.iter_rows(min_row=5):
        key = (str(row[heads["Part"]].value), str(row[heads["Rail"]].value))
        if key in typed:
            row[heads["Type nominal [A]"]].value = typed.pop(key)
    assert typed == {}
    book.save(file)
    before = settings.read_text(encoding="utf-8")
    added = '\n[draws]\n"U4@+5V" = "2.5 mA"\n"U5@+5V" = "1/4/30 mA"\n"U4@-5V" = "0.002 A"\n'
    shown = heatledger("adopt", "tide.xlsx", ".", "--dry-run", cwd=board)
    assert shown.returncode == 0
    assert sorted(shown.stdout.splitlines()) == sorted((before + added).splitlines())
    assert settings.read_text(encoding="utf-8") == before
    done = heatledger("adopt", "tide.xlsx", "tide_logger.kicad_pro", cwd=board)
    assert (done.returncode, done.stderr) == (0, "")
    assert settings.read_text(encoding="utf-8") == shown.stdout
    assert heatledger("gaps", ".", cwd=board).stdout == "no current is missing\n"
    # a second time changes nothing
    heatledger("adopt", "tide.xlsx", ".", cwd=board)
    assert settings.read_text(encoding="utf-8") == shown.stdout


def test_a_parts_table_of_ones_own_is_annotated_beside_it(board: Path) -> None:
    (board / "parts.csv").write_text("Ref;Price\nU5;0,40\n", encoding="utf-8")
    done = heatledger("audit", ".", "--annotate", "parts.csv", cwd=board)
    assert done.returncode == 5
    assert "written: parts.heat.csv" in done.stdout
    assert (board / "parts.csv").read_text(encoding="utf-8") == "Ref;Price\nU5;0,40\n"
    head, row = (board / "parts.heat.csv").read_text(encoding="utf-8").splitlines()
    assert head == "Ref;Price;Dissipation [W];Junction [°C];Margin [K];Verdict;Missing current"
    # by hand in EXPECTED.md: 1.371413 W, 209.626 °C, margin −94.626 K; with the table's own decimal sign
    assert row == "U5;0,40;1,371;209,6;-94,63;over;"
