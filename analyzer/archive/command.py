"""`heatledger audit DIR...`: every project below some folders, one combined result."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Iterable, Iterator
from pathlib import Path

from analyzer.archive.pool import run, run_on_cluster
from analyzer.archive.work import INTERNAL_FAULT, Job, Outcome
from analyzer.errors import Fault, InputError, UsageError

ONE_BOARD = ("workbook", "json", "sarif", "page", "annotate", "currents", "variant", "chance", "allow_outside")
"""Options that mean one board: of many they would be taken for done."""


def run_archive(projects: tuple[Path, ...], arguments: argparse.Namespace) -> int:
    """Audit all `projects` and write one folder of results.

    Returns:
        2 if a board met an internal fault, else 3 if one could not be read or not wholly, else 5 if one fails
        the release gate, else 0.

    Raises:
        UsageError: If no folder for the results is named.
        InputError: If there is no project.
    """
    from analyzer.archive.combined import finish

    alone = [f"--{name.replace('_', '-')}" for name in ONE_BOARD if getattr(arguments, name) not in (None, False)]
    if alone:
        remedy = "Leave it out, or audit that board by itself."
        raise UsageError(Fault(f"{alone[0]} goes with a single board, not with several projects", remedy=remedy))
    if arguments.out is None:
        remedy = "Name a folder for their results: --out DIR."
        raise UsageError(Fault("several projects give several results", remedy=remedy))
    if not projects:
        names = ", ".join(str(path) for path in arguments.paths)
        raise InputError(Fault("no KiCad project in or below it", names, remedy="Name a folder that holds one."))
    jobs = list(_jobs(projects, arguments))
    outcomes = list(_watched(_outcomes(jobs, arguments), len(jobs)))
    report = finish(arguments.out, outcomes, arguments.since)
    for line in report:
        print(line)
    return _status(outcomes)


def _outcomes(jobs: list[Job], arguments: argparse.Namespace) -> Iterator[Outcome]:
    if arguments.cluster is not None:
        return run_on_cluster(jobs, arguments.cluster)
    return run(jobs, arguments.workers or os.cpu_count() or 1)


def _jobs(projects: tuple[Path, ...], arguments: argparse.Namespace) -> Iterator[Job]:
    from analyzer.commands.audit import today

    folders = [path.resolve().parent for path in projects]
    top = Path(os.path.commonpath(folders))
    for project, folder in zip(projects, folders, strict=True):
        label = (folder / project.stem).relative_to(top).as_posix()
        yield Job(
            project.resolve(),
            label,
            arguments.out.resolve() / label,
            arguments.settings and arguments.settings.resolve(),
            tuple(path.resolve() for path in arguments.rules),
            arguments.fail_on or "",
            today().isoformat(),
        )


def _watched(outcomes: Iterable[Outcome], total: int) -> Iterator[Outcome]:
    """Pass outcomes on, showing progress: a bar on a terminal, one plain line a board elsewhere."""
    if sys.stderr.isatty():
        from rich.console import Console
        from rich.progress import track

        # markup off: board names come from folder names
        yield from track(outcomes, "boards", total, console=Console(stderr=True, markup=False))
        return
    for number, outcome in enumerate(outcomes, 1):
        words = outcome.fault or ", ".join(f"{count} {verdict}" for verdict, count in outcome.counts if count)
        print(f"[{number}/{total}] {outcome.label}: {words or 'no regulators'}", file=sys.stderr, flush=True)
        yield outcome


def _status(outcomes: list[Outcome]) -> int:
    found = {outcome.status for outcome in outcomes}
    return next((status for status in (INTERNAL_FAULT, 3, 4, 5) if status in found), 0)
