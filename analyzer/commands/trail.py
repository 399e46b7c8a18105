"""`heatledger trail REF PATH`: every step and source of one part's budget."""

from __future__ import annotations

import argparse
import difflib
import shutil
from pathlib import Path

from analyzer.errors import Fault, InputError

EXAMPLES = """examples:
  heatledger trail U3 board.kicad_pro
  heatledger trail U3 board.kicad_pro --settings hot_site.toml"""


def options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's arguments."""
    parser.epilog = EXAMPLES
    parser.add_argument("ref", metavar="REF", help="reference of the part")
    parser.add_argument("path", type=Path, metavar="PATH", help="project, root sheet or folder with one project")
    parser.add_argument("--settings", type=Path, metavar="FILE", help="settings instead of heatledger.toml")
    parser.add_argument("--rules", type=Path, action="append", default=[], metavar="FILE", help="further rule file")
    parser.add_argument("--chance", type=int, metavar="SEED", help="add a seeded Monte-Carlo estimate")


def run(arguments: argparse.Namespace) -> int:
    """Print the trail.

    Raises:
        InputError: If the board has no budget for such a part.
    """
    from analyzer.audit import audit
    from analyzer.output.trail_text import trail_lines

    result = audit(
        arguments.path,
        settings_file=arguments.settings,
        rule_files=arguments.rules,
        chance_seed=arguments.chance,
    )
    entries = [entry for entry in result.ledger.entries if entry.ref == arguments.ref]
    if not entries:
        refs = [entry.ref for entry in result.ledger.entries]
        near = difflib.get_close_matches(arguments.ref, refs, 1)
        hint = f"Did you mean {near[0]}?" if near else f"Budgets: {', '.join(refs) or 'none'}."
        raise InputError(Fault(f"there is no budget for {arguments.ref}", str(arguments.path), remedy=hint))
    width = shutil.get_terminal_size((80, 24)).columns
    for entry in entries:
        print("\n".join(trail_lines(entry, width)))
    return 0
