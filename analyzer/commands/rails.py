"""`heatledger rails PATH`: what feeds what, at which voltage and current, and through what."""

from __future__ import annotations

import argparse
from pathlib import Path

EXAMPLES = """examples:
  heatledger rails board.kicad_pro
  heatledger rails board.kicad_pro --rules parts.toml"""


def options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's arguments."""
    parser.epilog = EXAMPLES
    add = parser.add_argument
    add("path", type=Path, metavar="PATH", help="project, root sheet, folder with one project, or netlist")
    add("--settings", type=Path, metavar="FILE", help="settings instead of heatledger.toml beside the project")
    add("--rules", type=Path, action="append", default=[], metavar="FILE", help="further rule file (repeatable)")
    add("--variant", metavar="NAME", help="design variant to read")
    add("--allow-outside", action="store_true", help="read sheets that lie outside the project folder")


def run(arguments: argparse.Namespace) -> int:
    """Print the tree.

    Returns:
        0: the tree is for a person's eyes; findings are the audit's matter.
    """
    from analyzer.audit import audit
    from analyzer.rails.tree import tree_text

    result = audit(
        arguments.path,
        settings_file=arguments.settings,
        rule_files=arguments.rules,
        variant=arguments.variant,
        allow_outside=arguments.allow_outside,
    )
    print(tree_text(result.rails, result.loads), end="")
    return 0
