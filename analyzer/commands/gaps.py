"""`heatledger gaps PATH`: the currents that are missing, with how much room each rail has left."""

from __future__ import annotations

import argparse
import shutil
from pathlib import Path

EXAMPLES = """examples:
  heatledger gaps board.kicad_pro
  heatledger gaps board.kicad_pro --settings hot_site.toml"""


def options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's arguments."""
    parser.epilog = EXAMPLES
    parser.add_argument("path", type=Path, metavar="PATH", help="project, root sheet or folder with one project")
    parser.add_argument("--settings", type=Path, metavar="FILE", help="settings instead of heatledger.toml")
    parser.add_argument("--rules", type=Path, action="append", default=[], metavar="FILE", help="further rule file")


def run(arguments: argparse.Namespace) -> int:
    """Print the gaps by rail; with none, say so."""
    from analyzer.audit import audit
    from analyzer.output.console import gap_lines, safe

    result = audit(arguments.path, settings_file=arguments.settings, rule_files=arguments.rules)
    lines = list(gap_lines(result.ledger, shutil.get_terminal_size((80, 24)).columns))
    print("\n".join(safe(line) for line in lines).strip() or "no current is missing")
    return 0
