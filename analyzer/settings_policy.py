"""[policy] of `heatledger.toml`, and the shipped policy files: margins apart from the data sheet's own limits."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

from analyzer.quantity import Dimension
from analyzer.settings import Policy
from analyzer.settings_tables import COLDEST, HOTTEST
from analyzer.shipped import rules_folder
from analyzer.toml_table import Table, given, read_toml


def policy(table: Table) -> Policy:
    """[policy]: the name of a shipped policy, and figures that replace its own."""
    name = table.text("name")
    base = Policy()
    if name and name != base.name:
        base = _shipped_policy(table, name)
    figures = _policy_figures(table)
    table.finish()
    if figures and "source" not in figures:
        figures["source"] = f"{base.source}, with figures stated in {table.file.name}"
    return replace(base, **figures)


def read_policy(table: Table) -> Policy:
    """A policy file: the same keys at its top."""
    name = table.text("name")
    figures = _policy_figures(table)
    table.finish()
    return Policy(**{"name": name or table.file.stem} | figures)


def _policy_figures(table: Table) -> dict[str, Any]:
    kelvin, ratio = Dimension.TEMPERATURE_DIFFERENCE, Dimension.RATIO
    return given(
        {
            "junction_over": table.number("junction_over", kelvin, 0, 200),
            "junction_tight": table.number("junction_tight", kelvin, 0, 200),
            "junction_factor": table.number("junction_factor", ratio, 0, 1, above=True),
            "junction_cap": table.number("junction_cap", Dimension.TEMPERATURE, COLDEST, HOTTEST),
            "input_fraction": table.number("input_fraction", ratio, 0, 1, above=True),
            "current_fraction": table.number("current_fraction", ratio, 0, 1, above=True),
            "verified": table.boolean("verified"),
            "source": table.text("source"),
        }
    )


def _shipped_policy(table: Table, name: str) -> Policy:
    folder = rules_folder() / "policies"
    known = {file.stem: file for file in sorted(folder.glob("*.toml"))}
    if table.choice("name", ["house", *known]) is None or name not in known:
        return Policy()
    return read_policy(Table(Path("policies") / known[name].name, "", read_toml(known[name]), table.faults))
