"""Invented parts and rule files for tests of recognition."""

from __future__ import annotations

from pathlib import Path

from analyzer.circuit import Circuit, Component, Pin, Place
from analyzer.findings.base import Finding
from analyzer.part import Part
from analyzer.recognise import load_rulebook, recognise
from analyzer.rule import Rulebook
from analyzer.settings import Settings

LINEAR_PINS = ("1 GND power_in", "2 VO power_out", "3 VI power_in")

QX1200 = """
[[rule]]
name = "QX1200"
kind = "linear"
match = [{ pattern = "{maker}1200-{code}*", decode = "decimal" }]
output_tolerance = "±1 %"
dropout = "1.1/1.3 V"
source = "QX1200 data sheet"
[[rule.thermal]]
package = "SOT-223"
theta_ja = "91 K/W"
board = "1s"
"""


def component(
    value: str = "",
    ref: str = "U1",
    pins: tuple[str, ...] = LINEAR_PINS,
    lib_id: str = "Own:Chip",
    footprint: str = "",
    description: str = "",
    keywords: str = "",
    **fields: str,
) -> Component:
    """A part; `pins` are "number name kind"."""
    made = tuple(Pin(number, name, kind, f"N{number}") for number, name, kind in (pin.split() for pin in pins))
    return Component(
        f"/{ref}", ref, value, lib_id, footprint, fields, description, keywords, made, Place("a.kicad_sch")
    )


def recognised(
    *components: Component, rulebook: Rulebook | None = None, settings: Settings | None = None
) -> tuple[tuple[Part, ...], tuple[Finding, ...]]:
    circuit = Circuit("test", components, ())
    return recognise(circuit, rulebook or load_rulebook(), settings or Settings())


def rules(folder: Path, text: str, name: str = "own.toml") -> Path:
    file = folder / name
    file.write_text(text, encoding="utf-8")
    return file
