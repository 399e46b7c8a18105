"""Writes a circuit of resistors and five-pin chips as a KiCad 8 schematic, every pin on a label of its net."""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from pathlib import Path

SPACE = uuid.UUID("5f0c2c1e-8a50-4a3e-9a54-3d3a3c1d5a10")
ROOT = uuid.uuid5(SPACE, "root")

CHIP_PINS = {
    "VIN": ("power_in", -7.62, 2.54, 0),
    "GND": ("power_in", 0.0, -7.62, 90),
    "VOUT": ("power_out", 7.62, 2.54, 180),
    "FB": ("input", 7.62, 0.0, 180),
    "EN": ("input", -7.62, 0.0, 0),
}
TWO_PINS = {"1": ("passive", 0.0, 3.81, 270), "2": ("passive", 0.0, -3.81, 90)}


@dataclass(frozen=True)
class Placed:
    """A symbol: library name, reference, value, nets by pin, fitted."""

    symbol: str
    ref: str
    value: str
    nets: dict[str, str]
    fitted: bool = True


def _library_symbol(name: str, letters: str, pins: dict[str, tuple[str, float, float, int]], named: bool) -> str:
    rows = [
        f"(pin {kind} line (at {x} {y} {angle}) (length 2.54)"
        f' (name "{pin if named else "~"}" (effects (font (size 1.27 1.27))))'
        f' (number "{number if named else pin}" (effects (font (size 1.27 1.27)))))'
        for number, (pin, (kind, x, y, angle)) in enumerate(pins.items(), start=1)
    ]
    return (
        f'(symbol "Own:{name}" (in_bom yes) (on_board yes)'
        f' (property "Reference" "{letters}" (at 0 0 0)) (property "Value" "{name}" (at 0 0 0))'
        f' (symbol "{name}_1_1" {" ".join(rows)}))'
    )


def write_sheet(path: Path, parts: list[Placed]) -> None:
    """Write the schematic; parts stand on a grid, 25.4 mm apart."""
    body = []
    for index, one in enumerate(parts):
        x, y = 50.8 + 25.4 * (index % 20), 50.8 + 25.4 * (index // 20)
        pins = CHIP_PINS if one.symbol == "XREG" else TWO_PINS
        body.append(
            f'(symbol (lib_id "Own:{one.symbol}") (at {x} {y} 0) (unit 1) (in_bom yes) (on_board yes)'
            f' (dnp {"no" if one.fitted else "yes"}) (uuid "{uuid.uuid5(SPACE, one.ref)}")'
            f' (property "Reference" "{one.ref}" (at {x} {y} 0)) (property "Value" "{one.value}" (at {x} {y} 0))'
            f' (property "Footprint" "" (at {x} {y} 0))'
            f' (instances (project "tree" (path "/{ROOT}" (reference "{one.ref}") (unit 1)))))'
        )
        for pin, (_, px, py, _) in pins.items():
            net = one.nets[pin]
            body.append(
                f'(global_label "{net}" (shape input) (at {x + px:.2f} {y - py:.2f} 0)'
                f' (uuid "{uuid.uuid5(SPACE, one.ref + pin)}"))'
            )
    library = " ".join(
        (
            _library_symbol("XREG", "U", CHIP_PINS, True),
            *(
                _library_symbol(name, letters, TWO_PINS, False)
                for name, letters in (("R", "R"), ("FB", "FB"), ("C", "C"))
            ),
        )
    )
    path.write_text(
        f'(kicad_sch (version 20231120) (generator "eeschema") (uuid "{ROOT}") (paper "A0")'
        f' (lib_symbols {library}) {" ".join(body)} (sheet_instances (path "/" (page "1"))))',
        encoding="utf-8",
    )
