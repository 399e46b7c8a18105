"""The board-wide tables of `heatledger.toml`: table in, part of the settings out, faults left with the table."""

from __future__ import annotations

import re
from typing import Any

from analyzer.evidence import Evidence
from analyzer.gate import LEVELS
from analyzer.quantity import Dimension
from analyzer.rule import BoardClass
from analyzer.settings import Board, Site
from analyzer.toml_table import Table, given

_D = Dimension
COLDEST, HOTTEST = -100.0, 400.0
"""Temperatures outside are typing errors, not electronics [°C]."""


def site(table: Table) -> Site:
    """[site]: where the board works."""
    stated = {
        "ambient": table.evidence("ambient", "ambient", _D.TEMPERATURE, COLDEST, HOTTEST),
        "enclosure_rise": table.evidence("enclosure_rise", "enclosure rise", _D.TEMPERATURE_DIFFERENCE, 0, 200),
        "altitude": table.evidence("altitude", "altitude", _D.LENGTH, -500, 30_000),
        "air_speed": table.evidence("air_speed", "air speed", _D.SPEED, 0, 100),
        "cooling": table.choice("cooling", ("natural", "forced", "fan-box")),
        "altitude_exponent": table.number("altitude_exponent", _D.RATIO, 0, 2),
    }
    table.finish()
    return Site(**given(stated))


def board(table: Table) -> Board:
    """[board]: what the bare board is."""
    stated = {
        "board_class": board_class(table, "board_class"),
        "copper_layers": table.whole("copper_layers", 1, 100),
        "pour": table.evidence("pour", "copper area", _D.AREA, 0, 1),
        "conductivity": table.evidence("conductivity", "k_eff", _D.THERMAL_CONDUCTIVITY, 0, 1000, above=True),
        "source": table.source("board_class") if "board_class" in table else None,
    }
    table.finish()
    return Board(**given(stated))


def supplies(table: Table) -> tuple[dict[str, Evidence], dict[str, str]]:
    """[supplies]: net → voltage, and net → name of a standard supply."""
    volts: dict[str, Evidence] = {}
    names: dict[str, str] = {}
    for net in table.keys:
        text = table.text(net)
        if text is None:
            continue
        if _SUPPLY_NAME.fullmatch(text):
            names[net] = text
            continue
        found = table.evidence(net, "supply voltage", _D.VOLTAGE, -2000, 2000)
        if found:
            volts[net] = found
    return volts, names


_SUPPLY_NAME = re.compile(r"[A-Za-z][A-Za-z0-9.+_-]*|[A-Za-z0-9.+_]+(?:-[A-Za-z0-9.+_]+)*-[A-Za-z][A-Za-z0-9.+_-]*")
"""A supply's name: it starts with a letter, or has a word after a hyphen; a voltage has neither."""


def links(table: Table) -> dict[str, bool]:
    """[links]: reference → whether the part joins its nets to one rail."""
    stated = {ref: table.boolean(ref) for ref in table.keys}
    return {ref: joins for ref, joins in stated.items() if joins is not None}


def rule_files(table: Table) -> tuple[str, ...]:
    """[rules]: further rule files, relative to the settings file."""
    files = table.texts("files")
    table.finish()
    return files or ()


def fields(table: Table) -> dict[str, Any]:
    """[fields]: which symbol fields mean what."""
    below = table.table("unfitted")
    stated = {
        "draw_fields": table.texts("draws"),
        "unfitted_fields": {field: values for field in below.keys if (values := below.texts(field)) is not None},
        "unfitted_values": table.texts("unfitted_values"),
    }
    table.finish()
    return given(stated)


def defaults(table: Table) -> dict[str, Any]:
    """[defaults]: rules of thumb used where the drawing says nothing."""
    stated = {
        "resistor_tolerance": table.evidence("resistor_tolerance", "resistor tolerance", _D.RATIO, 0, 0.5),
        "shunt_max": table.number("shunt_max", _D.RESISTANCE, 0, 1000),
    }
    table.finish()
    return given(stated)


def gate(table: Table) -> dict[str, Any]:
    """[gate]: at which level the exit status becomes 5."""
    stated = {"fail_on": table.choice("fail_on", LEVELS)}
    table.finish()
    return given(stated)


def board_class(table: Table, key: str) -> BoardClass | None:
    """A board class by its name."""
    name = table.choice(key, [one.value for one in BoardClass])
    return BoardClass(name) if name else None
