"""Draws small schematics as text, for tests: every coordinate in millimetres, every symbol's uuid its reference."""

from __future__ import annotations

from pathlib import Path

ROOT = "00000000-0000-4000-8000-000000000001"
FONT = "(effects (font (size 1.27 1.27)))"

At = tuple[float, float]


def pin(
    number: str, name: str = "~", kind: str = "passive", at: At = (0, 0), *, hide: bool = False, more: str = ""
) -> str:
    mark = "(hide yes)" if hide else ""
    return (
        f"(pin {kind} line (at {at[0]} {at[1]} 0) (length 2.54) {mark}"
        f' (name "{name}" {FONT}) (number "{number}" {FONT}) {more})'
    )


def library(name: str, *pins: str, power: str = "", reference: str = "U", units: dict[str, str] | None = None) -> str:
    """A library symbol; `units` maps "unit_style" to pins, default everything in unit 1."""
    drawn = units or {"1_1": " ".join(pins)}
    bodies = " ".join(f'(symbol "{name}_{key}" {body})' for key, body in drawn.items())
    return (
        f'(symbol "t:{name}" {power} (in_bom yes) (on_board yes)'
        f' (property "Reference" "{reference}" (at 0 0 0)) (property "Value" "{name}" (at 0 0 0)) {bodies})'
    )


TP = library("TP", pin("1", "1"), reference="TP")
"""A test point: one pin at its origin."""
R = library("R", pin("1", "~", at=(0, 2.54)), pin("2", "~", at=(0, -2.54)), reference="R")
"""A resistor: pin 1 above, pin 2 below its origin."""


def part(
    ref: str,
    lib: str,
    at: At,
    *,
    unit: int | str = 1,
    turn: str = "0",
    value: str | None = None,
    uuid: str | None = None,
    path: str = f"/{ROOT}",
    fields: dict[str, str] | None = None,
    more: str = "",
    variant: str = "",
) -> str:
    own = {"Reference": ref, "Value": lib if value is None else value, "Footprint": "", **(fields or {})}
    drawn = " ".join(f'(property "{name}" "{text}" (at {at[0]} {at[1]} 0))' for name, text in own.items())
    return (
        f'(symbol (lib_id "t:{lib}") (at {at[0]} {at[1]} {turn}) (unit {unit}) {more} (uuid "{uuid or ref}") {drawn}'
        f' (instances (project "p" (path "{path}" (reference "{ref}") (unit {unit}) {variant}))))'
    )


def wire(a: At, b: At, kind: str = "wire") -> str:
    return f"({kind} (pts (xy {a[0]} {a[1]}) (xy {b[0]} {b[1]})) (stroke (width 0) (type default)))"


def label(text: str, at: At, kind: str = "label") -> str:
    return f'({kind} "{text}" (at {at[0]} {at[1]} 0) {FONT})'


def junction(at: At) -> str:
    return f"(junction (at {at[0]} {at[1]}) (diameter 0))"


def no_connect(at: At) -> str:
    return f"(no_connect (at {at[0]} {at[1]}))"


def sheet(
    name: str, file: str, *pins: tuple[str, At], uuid: str | None = None, at: At = (200, 200), more: str = ""
) -> str:
    drawn = " ".join(f'(pin "{text}" input (at {x} {y} 180) {FONT})' for text, (x, y) in pins)
    return (
        f'(sheet (at {at[0]} {at[1]}) (size 20 200) {more} (uuid "{uuid or name}")'
        f' (property "Sheetname" "{name}" (at 0 0 0)) (property "Sheetfile" "{file}" (at 0 0 0)) {drawn})'
    )


def schematic(*items: str, libs: tuple[str, ...] = (TP, R), version: int | str = 20250114, uuid: str = ROOT) -> str:
    body = "\n".join(items)
    head = f'(kicad_sch (version {version}) (generator "eeschema") (uuid "{uuid}")'
    return f"{head}\n(lib_symbols {' '.join(libs)})\n{body}\n)\n"


def save(folder: Path, name: str, text: str, project: str | None = "{}") -> Path:
    """Write a schematic, and beside it a project file unless `project` is None; returns the schematic's path."""
    path = folder / f"{name}.kicad_sch"
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(text, encoding="utf-8")
    if project is not None:
        path.with_suffix(".kicad_pro").write_text(project, encoding="utf-8")
    return path
