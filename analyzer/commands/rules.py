"""`heatledger rules`: try a part's name, check rule files, draft rules for parts not understood."""

from __future__ import annotations

import argparse
from pathlib import Path

EXAMPLES = """examples:
  heatledger rules try QX1117-3.3 --footprint SOT-223-3_TabPin2
  heatledger rules check parts.toml --board board.kicad_pro
  heatledger rules draft board.kicad_pro --output parts.toml
  heatledger rules schema > rules.schema.json

exit status: 5 when 'check' finds entries that others hide, else 0"""

_FOUND = 5


def options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's arguments."""
    parser.epilog = EXAMPLES
    doing = parser.add_subparsers(dest="doing", metavar="try|check|draft|schema", required=True)
    one = doing.add_parser("try", help="show which rule a part's name matches, and why others do not")
    one.add_argument("text", metavar="TEXT", help="part number or value")
    one.add_argument("--footprint", default="", metavar="F", help="footprint name, to show package and thermal data")
    _add_rules(one)
    check = doing.add_parser("check", help="validate rule files; list entries that others hide")
    check.add_argument("files", type=Path, nargs="*", metavar="FILE", help="rule files; none checks the shipped ones")
    check.add_argument(
        "--board", type=Path, nargs="+", default=[], metavar="PATH", help="list entries that match no part of these"
    )
    draft = doing.add_parser("draft", help="write rules to fill in for parts not understood or without thermal data")
    draft.add_argument("path", type=Path, metavar="PATH", help="project, root sheet, folder with one project, netlist")
    draft.add_argument("--output", type=Path, metavar="FILE", help="file to write; it must not exist yet")
    draft.add_argument("--settings", type=Path, metavar="FILE", help="settings instead of heatledger.toml beside it")
    _add_rules(draft)
    doing.add_parser("schema", help="print the JSON Schema of rule files")


def _add_rules(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--rules", type=Path, action="append", default=[], metavar="FILE", help="further rule file (repeatable)"
    )


def run(arguments: argparse.Namespace) -> int:
    """Do what was asked.

    Returns:
        0, or 5 when `check` finds entries that others hide.
    """
    match arguments.doing:
        case "try":
            return _try(arguments)
        case "check":
            return _check(arguments)
        case "draft":
            return _draft(arguments)
        case _:
            from analyzer.recognise.schema import schema_text

            print(schema_text(), end="")
            return 0


def _try(arguments: argparse.Namespace) -> int:
    from analyzer.recognise import load_rulebook
    from analyzer.recognise.explain import explain

    for line in explain(arguments.text, arguments.footprint, load_rulebook(arguments.rules)):
        print(line)
    return 0


def _check(arguments: argparse.Namespace) -> int:
    from analyzer.reading import read
    from analyzer.recognise import load_rulebook
    from analyzer.recognise.rule_checks import file_of, shadowed, unused
    from analyzer.settings import Settings

    rulebook = load_rulebook(arguments.files)
    asked = frozenset(file.name for file in arguments.files)
    names = asked or frozenset(file_of(rule) for rule in rulebook.rules)
    hidden = list(shadowed(rulebook, names))
    circuits = [read(path, settings=Settings()) for path in arguments.board]
    for line in (*hidden, *(unused(rulebook, names, circuits) if circuits else ())):
        print(line)
    rules = sum(file_of(rule) in names for rule in rulebook.rules)
    print(f"{len(names)} files, {rules} rules: valid; {len(hidden)} hidden by others")
    return _FOUND if hidden else 0


def _draft(arguments: argparse.Namespace) -> int:
    from analyzer.audit import settings_beside
    from analyzer.reading import read
    from analyzer.recognise import load_rulebook, recognise
    from analyzer.recognise.draft import draft
    from analyzer.settings_file import load_settings

    file = arguments.settings or settings_beside(arguments.path)
    settings = load_settings(file)
    base = file.parent if file else Path()
    rulebook = load_rulebook([*(base / name for name in settings.rule_files), *arguments.rules])
    circuit = read(arguments.path, settings=settings)
    parts, findings = recognise(circuit, rulebook, settings)
    text = draft(circuit, parts, findings)
    if arguments.output is None:
        print(text, end="")
        return 0
    from analyzer.errors import Fault, OutputError
    from analyzer.output.atomic import write_text

    if arguments.output.exists():
        raise OutputError(Fault("exists already; a draft never replaces a file", str(arguments.output)))
    write_text(arguments.output, text)
    return 0
