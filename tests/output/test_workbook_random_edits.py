"""Random edits of every cell that a person may type into: a re-run has all of it, and a second re-run is the same."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import pytest
from cells import Place, Sheets, taken_apart
from conftest import ROOT
from hypothesis import HealthCheck, event, given, settings
from hypothesis import strategies as st

from analyzer.audit import Audit, audit, close
from analyzer.output.workbook import write_workbook
from analyzer.output.workbook.build import build
from analyzer.output.workbook.typed import Typed
from analyzer.output.workbook.typed_reading import read_typed
from analyzer.rule import BoardClass

BOARD = ROOT / "fixture_boards" / "tide_logger"
ENDS = ("Type low [A]", "Type nominal [A]", "Type high [A]")


@dataclass(frozen=True, repr=False)
class Bench:
    """One audit and its workbook, taken apart once; every example types into it anew."""

    result: Audit
    sheets: Sheets
    file: Path


@pytest.fixture(scope="module")
def bench(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    file = tmp_path_factory.mktemp("random") / "board.xlsx"
    result = audit(BOARD)
    write_workbook(file, result.ledger, result.settings)
    return Bench(result, taken_apart(file), file)


# what spreadsheets let people type: anything but control characters; line breaks with Alt and Enter
TEXT = st.text(
    st.one_of(
        st.sampled_from("=+-@'\"&<>|%;,.\n äΩ°µ™🌡"),
        st.characters(codec="utf-8", categories=("L", "M", "N", "P", "S", "Zs")),
    ),
    min_size=1,
    max_size=40,
).filter(str.strip)
# spreadsheets keep fifteen digits of what is typed
AMPS = st.floats(0, 3).map(lambda amps: round(amps, 12))
MILLIAMPS = st.integers(0, 900)


def _pulse(peak: int, on: int, pause: int, rest: int | None) -> str:
    text = f"{peak} mA for {on} ms every {on + pause} ms"
    return text if rest is None else f"{text}, else {rest} mA"


ALONE = st.one_of(
    AMPS,
    MILLIAMPS.map(lambda amps: f"{amps} mA"),
    st.tuples(MILLIAMPS, MILLIAMPS).map(lambda pair: f"{min(pair)}..{max(pair)} mA"),
    st.tuples(MILLIAMPS, MILLIAMPS).map(lambda pair: f" {min(pair)}/{max(pair)} mA "),
    st.integers(0, 40).map(lambda tenths: f"{tenths / 10} W"),
    st.builds(_pulse, MILLIAMPS, st.integers(1, 50), st.integers(0, 500), st.none() | MILLIAMPS),
    st.just("2 A for 5 ms"),
)
ONE_CELL = st.tuples(st.integers(0, 2), ALONE).map(lambda one: tuple(one[1] if n == one[0] else None for n in range(3)))
RISING = st.tuples(st.lists(MILLIAMPS, min_size=3, max_size=3).map(sorted), st.lists(st.booleans(), min_size=3)).map(
    lambda two: tuple(f"{amps} mA" if text else amps / 1000 for amps, text in zip(*two, strict=False))
)
TWO_CELLS = st.tuples(RISING, st.integers(0, 2)).map(
    lambda two: tuple(None if n == two[1] else cell for n, cell in enumerate(two[0]))
)
CURRENTS = st.one_of(ONE_CELL, RISING, TWO_CELLS)

RATIO = st.floats(0.1, 1.0).map(lambda ratio: round(ratio, 12))
KELVIN = st.integers(0, 40).map(float)
SETTINGS = {
    "Altitude_high": st.integers(0, 5000).map(float),
    "Altitude_exponent": RATIO,
    "Margin_over": KELVIN,
    "Margin_tight": KELVIN,
    "Policy_factor": RATIO,
    "Policy_current": RATIO,
    "Policy_cap": st.integers(90, 200).map(float),
}
PAIRS = (("Ambient_nominal", "Ambient_high"), ("Rise_nominal", "Rise_high"))


@dataclass(frozen=True)
class Meant:
    """What was typed, as it must come back: texts without the blanks around them."""

    edits: dict[Place, object]
    typed: Typed


def plainly(value: object) -> object:
    return value.strip() if isinstance(value, str) else value


@st.composite
def edited(draw: st.DrawFn, sheets: Sheets) -> Meant:
    """Some of the cells, each with something that fits it."""
    edits: dict[Place, object] = {}
    typed = Typed()
    cells, notes, answers, sign_off, numbers, thetas = {}, {}, {}, {}, {}, {}
    chosen = draw(st.sets(st.sampled_from(sheets.inputs), max_size=len(sheets.inputs)))
    for place in sorted(chosen, key=sheets.inputs.index):
        sheet, head, row = place[0], sheets.head(place), sheets.row(place)
        if sheet == "Summary":
            edits[place] = text = draw(TEXT)
            sign_off[str(row[next(iter(row))])] = text.strip()
        elif sheet == "Findings":
            edits[place] = text = draw(TEXT)
            answers[row["Finding"], row["About"]] = text.strip()
        elif head == "Your note":
            edits[place] = text = draw(TEXT)
            where = (row["Identity"], row["Rail"])
            # a part with two rows on one rail keeps the notes of both
            earlier = notes.get(where)
            notes[where] = f"{earlier}; {text.strip()}" if earlier not in (None, text.strip()) else text.strip()
        elif sheet == "Regulators":
            edits[place] = theta = draw(st.floats(1, 300).map(lambda kelvin: round(kelvin, 9)))
            if theta != row[head]:
                thetas[row["Part"]] = theta
        elif sheet == "Settings":
            name, value = str(row["Name in formulas"]), None
            if name == "Board_class":
                value = draw(st.sampled_from([one.value for one in BoardClass]))
                typed = Typed(board_class=BoardClass(value) if value != row["As audited"] else None)
            elif name in SETTINGS:
                value = draw(SETTINGS[name])
            if value is not None:
                edits[place] = value
                if name in SETTINGS and value != row["As audited"]:
                    numbers[name] = value
        elif (row["Identity"], row["Rail"]) not in cells:
            three = draw(CURRENTS)
            line = place[1].lstrip("ABCDEFGHIJKLMNOPQRSTUVWXYZ")
            edits |= {("Currents", f"{letter}{line}"): cell for letter, cell in zip("HIJ", three, strict=True)}
            cells[row["Identity"], row["Rail"]] = tuple(plainly(cell) for cell in three)
    _surroundings(draw, sheets, edits, numbers)
    event(f"{len(edits) // 15 * 15} cells and more")
    texts = {"notes": notes, "answers": answers, "sign_off": sign_off}
    return Meant(edits, Typed("", cells, settings=numbers, thetas=thetas, board_class=typed.board_class, **texts))


def _surroundings(draw: st.DrawFn, sheets: Sheets, edits: dict[Place, object], numbers: dict[str, float]) -> None:
    """Ambient and enclosure rise: the highest of each not below the nominal one."""
    places = {str(sheets.row(place)["Name in formulas"]): place for place in sheets.inputs if place[0] == "Settings"}
    for names in PAIRS:
        if draw(st.booleans()):
            values = sorted(draw(st.tuples(*[st.integers(0, 85).map(float)] * 2)))
            for name, value in zip(names, values, strict=True):
                edits[places[name]] = value
                if value != sheets.row(places[name])["As audited"]:
                    numbers[name] = value


def same_as_meant(found: Typed, meant: Typed) -> None:
    assert found.cells == meant.cells
    assert found.notes == meant.notes
    # the wording of a finding may change with the figures in it
    assert {one[:2]: text for one, text in found.answers.items()} == meant.answers
    assert len(found.answers) == len(meant.answers)
    assert found.sign_off == meant.sign_off
    assert found.settings == meant.settings
    assert found.thetas == meant.thetas
    assert found.board_class == meant.board_class


def test_every_cell_to_type_into_is_among_them(bench: Bench) -> None:
    """By hand: what people type is on five sheets, and no cell of a regulator's own current is among it."""
    found = {}
    for place in bench.sheets.inputs:
        found.setdefault((place[0], bench.sheets.head(place)), []).append(bench.sheets.row(place))
    assert {key: len(rows) for key, rows in found.items()} == {
        ("Summary", "B"): 4,
        ("Settings", "Value"): 12,
        ("Regulators", "θ at sea level [K/W]"): 3,
        # U4 on +5V and on -5V, U5, and the two feedback resistors' ladder R1; the lines of U1, U2, U3 follow
        **{("Currents", head): 4 for head in ENDS},
        ("Currents", "Your note"): 10,
        ("Findings", "Your answer"): 3,
    }
    kinds = {row["Kind"] for row in found["Currents", ENDS[0]]}
    assert kinds == {"gap", "computed"}


@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large])
@given(data=st.data())
def test_random_edits_lose_nothing(bench: Bench, data: st.DataObject) -> None:
    """Two hundred workbooks with up to all of their cells typed into."""
    meant = data.draw(edited(bench.sheets))
    bench.file.write_bytes(bench.sheets.typed(meant.edits))
    once = read_typed(bench.file)
    same_as_meant(once, meant.typed)
    result = bench.result
    run = close(result.circuit, result.rulebook, once.applied_to(result.settings))
    written = build(run.ledger, run.settings, once, bench.file.name)
    bench.file.write_bytes(written)
    twice = read_typed(bench.file)
    same_as_meant(twice, meant.typed)
    # the second re-run starts from the same values, so the same ledger and the same file come of it
    assert twice.applied_to(result.settings) == once.applied_to(result.settings)
    assert twice == once or build(run.ledger, run.settings, twice, bench.file.name) == written
