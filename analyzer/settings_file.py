"""`heatledger.toml`: what a person states about a board, read into `Settings` with all faults at once."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from analyzer import settings_tables as tables
from analyzer.errors import Fault, InputError
from analyzer.settings import Settings
from analyzer.settings_parts import coupling, draws, parts
from analyzer.settings_policy import policy
from analyzer.settings_waivers import waivers
from analyzer.toml_table import Table, read_toml


def load_settings(file: Path | None) -> Settings:
    """The settings of a board, defaults where the file says nothing; None gives all defaults.

    Raises:
        InputError: If the file or a policy file it names is missing, unreadable or invalid, with every fault found.
    """
    if file is None:
        return Settings()
    faults: list[Fault] = []
    settings = read_settings(Table(file, "", read_toml(file), faults))
    if faults:
        raise InputError(faults)
    return settings


def read_settings(top: Table) -> Settings:
    """Settings from the top table of a file; faults are left with the table."""
    stated: dict[str, Any] = {
        "site": tables.site(top.table("site")),
        "board": tables.board(top.table("board")),
        "policy": policy(top.table("policy")),
        "draws": draws(top.table("draws")),
        "parts": parts(top.table("parts")),
        "links": tables.links(top.table("links")),
        "rule_files": tables.rule_files(top.table("rules")),
        "coupling": coupling(top.tables("coupling")),
        "waivers": waivers(top.tables("waiver")),
        "file": str(top.file),
    }
    stated["supplies"], stated["supply_names"] = tables.supplies(top.table("supplies"))
    stated |= tables.fields(top.table("fields"))
    stated |= tables.defaults(top.table("defaults"))
    stated |= tables.gate(top.table("gate"))
    top.finish()
    return Settings(**stated)
