"""Suggestions from the notes that designers wrote on the shared boards, with rails as `truth.toml` gives them."""

from __future__ import annotations

import tomllib

import pytest
from draws_kit import loads, rails, wire

from analyzer.reading import read

pytestmark = pytest.mark.boards


@pytest.fixture(scope="module")
def found(shared):
    def of(board: str, volts: dict[str, float]):
        truth = tomllib.loads((shared / "boards" / board / "truth.toml").read_text("utf-8"))
        circuit = read(shared / "boards" / board / truth["board"]["local_root"])
        wirings = [
            wire(
                circuit.by_ref[row["ref"]][0],
                row["vin_net"] if row["vin_net"] in volts else None,
                row["vout_net"] if row["vout_net"] in volts else None,
            )
            for row in truth.get("regulator", ())
        ]
        return loads(circuit, rails(volts, wirings))

    return of


def quoted(found, ref, rail):
    """The quoted texts of a gap's suggestions."""
    (gap,) = (gap for gap in found.gaps if (gap.ref, gap.rail) == (ref, rail))
    return [suggestion.split('"')[1] for suggestion in gap.suggestions]


def test_castor_pollux(found):
    result = found("castor-pollux", {"+12V": 12.0, "-12V": -12.0, "+3.3V": 3.3})
    budget = "Power consumption: 65-100mA, 0.7-1.2W / Power dissipated: 0.8W"
    # 63 mm from the regulator, on its sheet: for everything on its output
    assert quoted(result, "U3", "+3.3V") == [budget]
    # beside an op-amp on a sheet that is used twice
    assert quoted(result, "U9", "+3.3V") == ["Power consumption: 1mA (estimated)", budget]
    assert quoted(result, "U7", "+12V") == []
    assert result.by_rail["+3.3V"].total is None
    assert all(draw.kind in ("computed", "regulator") for load in result.by_rail.values() for draw in load.draws)


def test_glasgow(found):
    result = found("glasgow-revc", {"+5V": 5.0, "+3V3": 3.3, "+1V2": 1.2})
    assert quoted(result, "U3", "+3V3")[0] == "Imax @ 3V3 = 3 mA"
    assert quoted(result, "U2", "+3V3")[0] == "Imax @ 3V3 = 5 mA"
    assert quoted(result, "U13", "+3V3")[0] == "Imax @ 3V3 = 0.16 mA"
    assert quoted(result, "U30", "+1V2") == ["300 mA @ 1V2"]
    # the regulator's note goes to the whole rail, a part's note to that part alone
    assert "500 mA @ 3V3" in quoted(result, "U5", "+3V3")
    assert "Imax @ 3V3 = 5 mA" not in quoted(result, "U5", "+3V3")


def test_buspirate(found):
    result = found("buspirate5-rev10a", {"+3V3": 3.3, "+VUSB": 5.0})
    both = "Worst case power budget is 220mA during full buffer short. / Sized for 145mA max, 100mA typical."
    assert any(both in suggestion for gap in result.by_rail["+3V3"].gaps for suggestion in gap.suggestions)


@pytest.mark.parametrize(
    ("board", "volts"),
    [("kria-k26-devboard", {"VCC_5V0": 5.0, "VCC_3V3": 3.3}), ("helium", {"+12V": 12.0}), ("latentred-lcbringup", {})],
)
def test_boards_without_such_notes_suggest_nothing(found, board, volts):
    assert [gap.suggestions for gap in found(board, volts).gaps if gap.suggestions] == []
