"""What is fuzzed: each target takes any bytes, and only the errors that its reader documents may come out of it."""

from __future__ import annotations

import contextlib
import io
import os
import tempfile
import tomllib
import zipfile
from collections.abc import Callable, Iterator
from pathlib import Path

from analyzer.component_value import component_value
from analyzer.errors import HeatledgerError
from analyzer.grammar import parse, parse_load
from analyzer.output.workbook.typed_reading import read_typed
from analyzer.quantity import Dimension
from analyzer.reading import read
from analyzer.reading.sexpr import parse as parse_expression
from analyzer.recognise.rule_tables import load_rule, package_rule, rule, supply_rule
from analyzer.settings_file import read_settings
from analyzer.toml_table import Table

ROOT = Path(__file__).resolve().parent.parent.parent
FOLDER = Path(tempfile.gettempdir()) / f"heatledger-fuzz-{os.getpid()}"


def _file(name: str, data: bytes) -> Path:
    FOLDER.mkdir(exist_ok=True)
    path = FOLDER / name
    path.write_bytes(data)
    return path


def expression(data: bytes) -> None:
    """The reader of S-expressions, with words quoted and bare."""
    for bare in (False, True):
        with contextlib.suppress(HeatledgerError):
            parse_expression(data, "p.kicad_sch", "kicad_sch", bare_words=bare)


def schematic(data: bytes) -> None:
    """A whole schematic, from its file to the circuit."""
    with contextlib.suppress(HeatledgerError):
        read(_file("p.kicad_sch", data))


def netlist(data: bytes) -> None:
    """Netlists, both writings."""
    with contextlib.suppress(HeatledgerError):
        read(_file("b.xml" if data.lstrip().startswith(b"<") else "b.net", data))


def quantity(data: bytes) -> None:
    """Quantities of every dimension, loads, and values of components."""
    text = data.decode("utf-8", errors="replace")
    component_value(text)
    for dimension in Dimension:
        with contextlib.suppress(ValueError):
            parse(text, dimension)
    with contextlib.suppress(ValueError):
        parse_load(text)


def _toml(data: bytes) -> Table | None:
    try:
        return Table(Path("t.toml"), "", tomllib.loads(data.decode("utf-8")), [])
    except (ValueError, RecursionError):
        # `read_toml` says both in one line; the library's parser recurses
        return None


def rules(data: bytes) -> None:
    """Tables of rule files; every fault goes to their list."""
    top = _toml(data)
    if top is None:
        return
    for table in top.tables("rule"):
        rule(table, "t.toml", True)
    for table in top.tables("load"):
        load_rule(table, "t.toml", True)
    for table in top.tables("supply"):
        supply_rule(table, "t.toml")
    for table in top.tables("package"):
        package_rule(table, "t.toml")
    top.finish()


def settings(data: bytes) -> None:
    """The settings of a board."""
    top = _toml(data)
    if top is None:
        return
    with contextlib.suppress(HeatledgerError):
        read_settings(top)


_MEMBER = "xl/worksheets/sheet5.xml"


def workbook(data: bytes) -> None:
    """What was typed into a workbook: an archive of any bytes, or ours with a sheet of any bytes."""
    if data[:1] == b"P":
        path = _file("w.xlsx", data)
    else:
        packed = io.BytesIO()
        with zipfile.ZipFile(packed, "w") as made:
            for name, content in _members().items():
                made.writestr(name, data if name == _MEMBER else content)
        path = _file("w.xlsx", packed.getvalue())
    with contextlib.suppress(HeatledgerError):
        read_typed(path)


_MEMBERS: dict[str, bytes] = {}


def _members() -> dict[str, bytes]:
    if not _MEMBERS:
        with zipfile.ZipFile(io.BytesIO(_workbook())) as archive:
            _MEMBERS.update({name: archive.read(name) for name in archive.namelist()})
    return _MEMBERS


def _workbook() -> bytes:
    from analyzer.audit import audit
    from analyzer.output.workbook import write_workbook

    result = audit(ROOT / "fixture_boards" / "lane_lamp")
    FOLDER.mkdir(exist_ok=True)
    path = FOLDER / "seed.xlsx"
    write_workbook(path, result.ledger, result.settings)
    return path.read_bytes()


def _texts(*patterns: str) -> Iterator[bytes]:
    for pattern in patterns:
        for path in sorted(ROOT.glob(pattern)):
            yield path.read_bytes()


def _cases(ending: str) -> Iterator[bytes]:
    """Small cases beside the checkout, where they are."""
    folder = Path(os.environ.get("HEATLEDGER_SHARED", ROOT.parent / "shared")) / "connectivity_cases"
    for path in sorted(folder.rglob(f"*{ending}")) if folder.is_dir() else ():
        if path.stat().st_size < 65_536:
            yield path.read_bytes()


def _sheets() -> Iterator[bytes]:
    yield from _texts("fixture_boards/*/*.kicad_sch")
    yield from _cases(".kicad_sch")


def _netlists() -> Iterator[bytes]:
    yield b'(export (version "E") (components (comp (ref "R1") (value "1k"))) (nets (net (code "1") (name "A"))))'
    yield b"<export version='E'><components><comp ref='R1'><value>1k</value></comp></components><nets/></export>"
    yield from _cases(".net")
    yield from _cases(".xml")


def _quantities() -> Iterator[bytes]:
    for text in (
        "120 mA",
        "80..150 mA",
        "100/150 mA",
        "24 V ±5 %",
        "2 A for 5 ms every 100 ms else 10 mA",
        "4k7 1%",
        "10k/R0402",
        "1.0uH/4.2A/DCR=35mR/0420",
        "-20..60 °C",
        "0.5 W",
        "300 mm²",
    ):
        yield text.encode()


def _books() -> Iterator[bytes]:
    book = _workbook()
    yield book
    with zipfile.ZipFile(io.BytesIO(book)) as archive:
        yield archive.read(_MEMBER)


TARGETS: dict[str, tuple[Callable[[bytes], None], Callable[[], Iterator[bytes]]]] = {
    "expression": (expression, _sheets),
    "schematic": (schematic, _sheets),
    "netlist": (netlist, _netlists),
    "quantity": (quantity, _quantities),
    "rules": (rules, lambda: _texts("rules/*.toml", "fixture_boards/*/rules.toml")),
    "settings": (settings, lambda: _texts("fixture_boards/*/heatledger.toml", "rules/policies/*.toml")),
    "workbook": (workbook, _books),
}
"""Name → (target, its seeds)."""
