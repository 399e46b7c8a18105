"""`heatledger audit PATH...`: one board's ledger, or a whole archive's."""

from __future__ import annotations

import argparse
import os
import sys
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING

from analyzer.errors import Fault, UsageError

if TYPE_CHECKING:
    from analyzer.audit import Audit
    from analyzer.gate import Gate
    from analyzer.output.workbook.typed import Typed

EXAMPLES = """examples:
  heatledger audit board.kicad_pro --workbook board.xlsx
  heatledger audit ~/designs --out results --since results/archive.json"""


def options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's arguments."""
    parser.epilog = EXAMPLES
    add = parser.add_argument
    add("paths", nargs="+", type=Path, metavar="PATH", help="project, root sheet, netlist, parts table or folder(s)")
    add("--workbook", type=Path, metavar="FILE", help="write the annotated workbook (.xlsx)")
    add("--json", type=Path, metavar="FILE", help="write the machine-readable ledger ('-' prints it)")
    add("--sarif", type=Path, metavar="FILE", help="write the findings as SARIF 2.1.0")
    add("--page", type=Path, metavar="FILE", help="write a Markdown summary for a merge request")
    add("--annotate", type=Path, metavar="PARTS", help="copy a parts table (.xlsx, .csv) with result columns added")
    add("--currents", type=Path, metavar="FILE", help="take currents, notes and answers typed into this workbook")
    add("--settings", type=Path, metavar="FILE", help="settings instead of heatledger.toml beside the project")
    add("--rules", type=Path, action="append", default=[], metavar="FILE", help="further rule file (repeatable)")
    add("--variant", metavar="NAME", help="design variant to audit, or 'all' to compare them")
    add("--fail-on", choices=("over", "tight", "open", "never"), help="level that ends in exit status 5 (over)")
    add("--chance", type=int, metavar="SEED", help="add a seeded Monte-Carlo estimate over the spans")
    add("--allow-outside", action="store_true", help="read sheets that lie outside the project folder")
    add("--brief", action="store_true", help="print only the regulators and the summary")
    archive = parser.add_argument_group("archives (folders that hold several projects)")
    archive.add_argument("--out", type=Path, metavar="DIR", help="folder for the results of every board")
    archive.add_argument("--workers", type=int, default=0, metavar="N", help="worker processes (one per core)")
    archive.add_argument("--cluster", metavar="ADDRESS", help="run on this Dask cluster instead")
    archive.add_argument("--since", type=Path, metavar="RESULT", help="earlier JSON to report changes against")


def run(arguments: argparse.Namespace) -> int:
    """Run the audit.

    Returns:
        The exit status of the release gate.
    """
    from analyzer.archive.discover import find_projects, is_archive

    if arguments.workbook is not None and arguments.workbook.suffix.lower() != ".xlsx":
        remedy = f"Spreadsheet programs go by the ending: name it {arguments.workbook.stem}.xlsx."
        raise UsageError(Fault("--workbook writes .xlsx files only", str(arguments.workbook), remedy=remedy))
    if is_archive(arguments.paths):
        from analyzer.archive.command import run_archive

        return run_archive(find_projects(arguments.paths), arguments)
    if arguments.out is not None or arguments.cluster is not None:
        raise UsageError(Fault("--out and --cluster go with folders that hold several projects"))
    if arguments.variant == "all":
        from analyzer.commands.variants import run_variants

        return run_variants(arguments)
    return run_one(arguments)


def run_one(arguments: argparse.Namespace) -> int:
    """Audit the one board of `arguments.paths`, print it and write what was asked for."""
    from analyzer.reading.sexpr import no_collector

    # its values hold no circles worth looking for, and searching costs an eighth
    with no_collector():
        return _run_one(arguments)


def _run_one(arguments: argparse.Namespace) -> int:
    result = audited(arguments)
    gate = judged(result, arguments)
    if str(arguments.json) != "-":
        print_report(result, gate, arguments)
    written = write_files(result, gate, arguments)
    if str(arguments.json) != "-":
        for file in written:
            print(f"written: {file}")
        if arguments.since is not None:
            print_changes(result, arguments.since)
    return gate.status


def audited(arguments: argparse.Namespace) -> Audit:
    """The audit of the board, typed currents and the Monte-Carlo estimate included where asked for."""
    from analyzer.audit import audit

    typed = typed_before(arguments)
    extra = {"adjust": typed.applied_to} if typed is not None else {}
    return audit(
        arguments.paths[0],
        settings_file=arguments.settings,
        rule_files=arguments.rules,
        **extra,
        variant=arguments.variant,
        allow_outside=arguments.allow_outside,
        chance_seed=arguments.chance,
    )


def typed_before(arguments: argparse.Namespace) -> Typed | None:
    """What was typed into the workbook of `--currents`, if one is given."""
    if arguments.currents is None:
        return None
    from analyzer.output.workbook.typed_reading import read_typed

    return read_typed(arguments.currents)


def judged(result: Audit, arguments: argparse.Namespace) -> Gate:
    """The release gate at the level of the command line, else of the settings."""
    from analyzer.gate import judge

    level = arguments.fail_on or result.settings.fail_on
    return judge(result.ledger, result.settings.waivers, level, today())


def today() -> date:
    """The day waivers are judged on: SOURCE_DATE_EPOCH if set, so that a run can be repeated exactly."""
    epoch = os.environ.get("SOURCE_DATE_EPOCH")
    return date.fromtimestamp(int(epoch)) if epoch and epoch.isdecimal() else date.today()


def print_report(result: Audit, gate: Gate, arguments: argparse.Namespace) -> None:
    """Print the console report."""
    from analyzer.output.console import print_ledger

    standing = replace(result.ledger, findings=gate.standing)
    print_ledger(standing, sys.stdout, waived=len(gate.waived), brief=arguments.brief)


def print_changes(result: Audit, since: Path) -> None:
    """Print what changed since an earlier result."""
    from analyzer.archive.since import changes, read_standings, standings_of
    from analyzer.output.ledger_json import as_document

    board = result.ledger.board
    before = read_standings(since)
    for change in changes(before, standings_of(as_document(result.ledger), board)):
        print(change)


def write_files(result: Audit, gate: Gate, arguments: argparse.Namespace) -> list[Path]:
    """Write every output asked for; nothing is written when one of them would overwrite an input."""
    from analyzer.output.atomic import refuse_inputs

    targets = [arguments.workbook, arguments.json, arguments.sarif, arguments.page]
    asked = [target for target in targets if target is not None and str(target) != "-"]
    refuse_inputs(asked, [arguments.paths[0], *read_files(result, arguments)])
    ledger = result.ledger
    if arguments.workbook is not None:
        from analyzer.output.workbook import write_workbook

        if write_workbook(arguments.workbook, ledger, result.settings, typed_before(arguments)):
            note = "holds typed values that this run did not use; take them in with --currents"
            print(f"note: {arguments.workbook} {note} {arguments.workbook}", file=sys.stderr)
    if arguments.json is not None:
        from analyzer.output.ledger_json import write_json

        write_json(arguments.json, ledger)
    if arguments.sarif is not None:
        from analyzer.output.sarif import write_sarif

        write_sarif(arguments.sarif, ledger, gate)
    if arguments.page is not None:
        from analyzer.output.page import write_page

        write_page(arguments.page, ledger, gate)
    if arguments.annotate is not None:
        from analyzer.output.annotate import annotate

        asked.append(annotate(arguments.annotate, ledger))
    return asked


def read_files(result: Audit, arguments: argparse.Namespace) -> list[Path]:
    """Every file that was read, so that no output replaces one."""
    root = arguments.paths[0]
    folder = root if root.is_dir() else root.parent
    given = [arguments.settings, *arguments.rules]
    return [*(folder / file.path for file in result.ledger.inputs), *(path for path in given if path is not None)]
