"""The command line: picks a command, prints errors as errors, turns the outcome into an exit status.

Only the chosen command's module is imported, so that start-up stays cheap.
"""

from __future__ import annotations

import argparse
import importlib
import os
import sys
from collections.abc import Iterable, Sequence
from typing import NoReturn

from analyzer.errors import Fault, HeatledgerError, UsageError

COMMANDS = {
    "audit": "close the thermal budget of every regulator: console, workbook, JSON",
    "trail": "show every step and source of one part's budget",
    "rails": "show what feeds what, at which voltage and current",
    "gaps": "list the currents that are missing, with each rail's headroom",
    "nets": "print the netlist as read",
    "rules": "try, check or draft rule files",
    "adopt": "take currents typed into a workbook over into heatledger.toml",
}

CAUTION = "An estimate, not a measurement: verify on hardware; data sheet, local codes and qualified engineers decide."

EXIT_STATUSES = """exit status:
  0  nothing to report          3  input unreadable or invalid
  1  bad arguments              4  output conflict
  2  internal fault             5  findings at or above the chosen level"""

QUESTION = "Does every voltage regulator's junction stay below its rating, by what margin, on what evidence?"

EXAMPLES = """examples:
  heatledger audit board.kicad_pro --workbook board.xlsx
  heatledger trail U3 board.kicad_pro"""


class _Parser(argparse.ArgumentParser):
    """argparse, but wrong arguments raise our own error (argparse would exit with 2)."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(Fault(message, remedy=f"'{self.prog} --help' lists what there is."))


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line.

    Args:
        argv: Arguments without the program name; None takes the process's own.

    Returns:
        The exit status of `EXIT_STATUSES`.
    """
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            # a terminal that cannot show θ gets an escape, not a traceback
            stream.reconfigure(errors="backslashreplace")
    arguments = list(sys.argv[1:] if argv is None else argv)
    try:
        return _run(arguments)
    except HeatledgerError as error:
        for fault in error.faults:
            print(f"heatledger: {fault}", file=sys.stderr)
        return error.exit_status
    except BrokenPipeError:
        # the reader of a pipe went away: silence the interpreter's own flush at exit
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except Exception as error:
        if os.environ.get("HEATLEDGER_TRACE"):
            raise
        # a traceback means nothing to a user; the variable brings it back for a report
        print(f"heatledger: internal fault: {type(error).__name__}: {error}", file=sys.stderr)
        print("heatledger: please report it with the output of a run with HEATLEDGER_TRACE=1", file=sys.stderr)
        return 2
    except KeyboardInterrupt:
        print("heatledger: interrupted; what was finished is whole", file=sys.stderr)
        return 130


def _run(arguments: list[str]) -> int:
    name = next((word for word in arguments if not word.startswith("-")), None)
    parser = _Parser(
        prog="heatledger",
        description=f"{QUESTION}\n\n{EXAMPLES}",
        epilog=f"{EXIT_STATUSES}\n\n{CAUTION}",
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="store_true", help="print the version and end")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", parser_class=_Parser)
    options: list[str] = []
    for command, summary in COMMANDS.items():
        if name is None or command == name:
            sub = commands.add_parser(
                command,
                help=summary,
                description=summary[0].upper() + summary[1:] + ".",
                formatter_class=argparse.RawDescriptionHelpFormatter,
                allow_abbrev=False,
            )
            if command == name:
                importlib.import_module(f"analyzer.commands.{command}").options(sub)
                # examples help more than a list of options: they come first
                sub.description, sub.epilog = f"{sub.description}\n\n{sub.epilog}", None
                options = [word for action in sub._actions for word in action.option_strings]
    if name is not None and name not in COMMANDS:
        hint = _near(name, COMMANDS) or f"Commands: {', '.join(COMMANDS)}."
        raise UsageError(Fault(f"there is no command '{name}'", remedy=hint))
    parsed, unknown = parser.parse_known_args(arguments)
    if unknown:
        hint = _near(unknown[0].partition("=")[0], options) or f"'heatledger {name or ''} --help' lists what there is."
        raise UsageError(Fault(f"there is no option '{unknown[0]}'", remedy=hint))
    if parsed.version:
        from analyzer import __version__

        print(f"heatledger {__version__}")
        return 0
    if parsed.command is None:
        parser.print_help()
        return 1
    status: int = importlib.import_module(f"analyzer.commands.{parsed.command}").run(parsed)
    return status


def _near(word: str, known: Iterable[str]) -> str:
    from difflib import get_close_matches

    near = get_close_matches(word, list(known), 1)
    return f"Did you mean '{near[0]}'?" if near else ""


if __name__ == "__main__":
    sys.exit(main())
