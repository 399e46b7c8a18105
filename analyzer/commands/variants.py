"""`heatledger audit PATH --variant all`: one ledger for each design variant, compared with the base."""

from __future__ import annotations

import argparse
import copy
from pathlib import Path

from analyzer.errors import Fault, InputError, UsageError


def run_variants(arguments: argparse.Namespace) -> int:
    """Audit the base design and every variant; outputs get the variant's name before their ending.

    Returns:
        The worst exit status among them.

    Raises:
        UsageError: If an earlier result is to be compared too.
        InputError: If the project has no variants.
    """
    from analyzer.archive.since import Standings, changes, standings_of
    from analyzer.commands.audit import audited, judged, print_report, write_files
    from analyzer.output.ledger_json import as_document
    from analyzer.reading import variants

    if arguments.since is not None:
        remedy = "Name one variant to compare with an earlier result."
        raise UsageError(Fault("--variant all compares with the base design, not with --since", remedy=remedy))
    (path,) = arguments.paths
    names = variants(path)
    if not names:
        raise InputError(Fault("the project has no design variants", str(path), remedy="Leave out --variant."))
    statuses: list[int] = []
    base: Standings | None = None
    for name in (None, *names):
        one = copy.copy(arguments)
        one.variant = name
        for output in ("workbook", "json", "sarif", "page"):
            setattr(one, output, _named(getattr(arguments, output), name))
        result = audited(one)
        gate = judged(result, one)
        print(f"variant: {name or 'base design'}")
        print_report(result, gate, one)
        for file in write_files(result, gate, one):
            print(f"written: {file}")
        now = standings_of(as_document(result.ledger), "")
        if base is None:
            base = now
        for change in changes(base, now):
            print(f"against the base design, {change}")
        statuses.append(gate.status)
        print()
    return max(statuses)


def _named(file: Path | None, variant: str | None) -> Path | None:
    if file is None or variant is None or str(file) == "-":
        return file
    safe = "".join(character if character.isalnum() or character in "-_." else "_" for character in variant)
    return file.with_name(f"{file.stem}.{safe}{file.suffix}")
