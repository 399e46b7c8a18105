"""Every fixture and shared board gives its golden ledger; `python tests/golden/golden.py` renews them."""

from __future__ import annotations

from pathlib import Path

import pytest
from golden import HERE, fixture_files, output, shared_files


@pytest.mark.parametrize("name", list(fixture_files()))
def test_a_fixture_board_gives_its_golden_ledger(name: str) -> None:
    assert output(fixture_files()[name]) == (HERE / name).read_text(encoding="utf-8")


@pytest.mark.boards
def test_the_shared_boards_give_their_golden_regulators(shared: Path) -> None:
    commands = shared_files(shared)
    assert {path.name for path in HERE.glob("shared_*.txt")} == set(commands)
    for name, command in commands.items():
        assert output(command) == (HERE / name).read_text(encoding="utf-8"), name
