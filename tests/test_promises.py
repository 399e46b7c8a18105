"""The README's promises and the list of hazards name tests: each name must be a test there is."""

from __future__ import annotations

import ast
import re
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
LISTS = (ROOT / "README.md", ROOT / "tests" / "reading" / "HAZARDS.md")


def names_in(file: Path) -> set[str]:
    tree = ast.parse(file.read_text(encoding="utf-8"))
    return {node.name for node in ast.walk(tree) if isinstance(node, ast.FunctionDef) and node.name.startswith("test_")}


@pytest.mark.parametrize("listing", LISTS, ids=lambda path: path.name)
def test_every_test_that_is_named_exists(listing: Path) -> None:
    named = re.findall(r"`(tests/[\w/]+\.(?:py|md))(?:::(test_\w+))?`", listing.read_text(encoding="utf-8"))
    assert named
    for file, test in named:
        assert (ROOT / file).is_file(), file
        assert not test or test in names_in(ROOT / file), f"{file}::{test}"
