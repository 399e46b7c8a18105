"""Loading rule files: shipped ones and the user's, all faults of all files at once."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Iterable
from pathlib import Path

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.recognise.rule_tables import load_rule, package_rule, rule, supply_rule
from analyzer.rule import LoadRule, PackageRule, Rule, Rulebook, SupplyRule
from analyzer.shipped import rules_folder
from analyzer.toml_table import Table, read_toml


def load_rulebook(files: Iterable[Path] = (), beside: Path | None = None) -> Rulebook:
    """All rules in force: those of `files` first, then the shipped ones.

    Args:
        files: The user's own files.
        beside: Folder that the ledger names these files from, so that it is the same wherever the tool was
            started; None keeps their paths as given.

    Raises:
        InputError: With every fault of every file.
    """
    shipped = rules_folder()
    own = list(files)
    if len(own) > limits.RULE_FILES:
        raise InputError(Fault(f"more than {limits.RULE_FILES} rule files"))
    faults: list[Fault] = []
    rules: list[Rule] = []
    loads: list[LoadRule] = []
    supplies: list[SupplyRule] = []
    packages: list[PackageRule] = []
    hashes: list[tuple[str, str]] = []
    for file, is_user in (*((file, True) for file in own), *((file, False) for file in shipped_files(shipped))):
        try:
            data = read_toml(file)
        except InputError as error:
            faults += error.faults
            continue
        shown = file if is_user else Path("rules") / file.relative_to(shipped)
        listed = Path(os.path.relpath(file, beside)) if is_user and beside else shown
        hashes.append((listed.as_posix(), hashlib.sha256(file.read_bytes()).hexdigest()))
        top = Table(shown, "", data, faults)
        name = shown.name
        rules += [rule(table, name, is_user) for table in top.tables("rule")]
        loads += [load_rule(table, name, is_user) for table in top.tables("load")]
        supplies += [found for table in top.tables("supply") if (found := supply_rule(table, name))]
        packages += [package_rule(table, name) for table in top.tables("package")]
        top.finish()
    if len(rules) > limits.RULES:
        faults.append(Fault(f"more than {limits.RULES} rules"))
    faults += _doubles(rules)
    if faults:
        raise InputError(faults)
    return Rulebook(tuple(rules), tuple(loads), tuple(supplies), tuple(packages), tuple(hashes))


def shipped_files(folder: Path) -> list[Path]:
    """The shipped rule files, in a fixed order; policies are read by the settings."""
    return sorted(file for file in folder.rglob("*.toml") if "policies" not in file.relative_to(folder).parts)


def _doubles(rules: list[Rule]) -> list[Fault]:
    seen: dict[str, Rule] = {}
    faults = []
    for one in rules:
        if seen.setdefault(one.where, one) is not one:
            file, _, entry = one.where.partition(" ")
            faults.append(Fault("two rules have this name", file, entry, "Rename one of them."))
    return faults
