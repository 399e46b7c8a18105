"""What the README shows is what the program prints."""

from __future__ import annotations

import os
import re
import subprocess
import sys

from conftest import ROOT

BLOCK = re.compile(r"<!-- output of: heatledger (.+?) -->\n```\n(.*?)```\n", re.DOTALL)


def test_every_shown_output_is_the_real_one() -> None:
    shown = BLOCK.findall((ROOT / "README.md").read_text(encoding="utf-8"))
    assert shown
    for command, text in shown:
        environment = {**os.environ, "COLUMNS": "100", "NO_COLOR": "1", "PYTHONIOENCODING": "utf-8"}
        done = subprocess.run(
            [sys.executable, "-m", "analyzer.cli", *command.split()],
            cwd=ROOT,
            env=environment,
            capture_output=True,
            encoding="utf-8",
            check=False,
        )
        assert done.stdout == text, command


def test_both_commands_set_everything_up_themselves() -> None:
    commands = re.findall(r"^    (python3 -m venv .*)$", (ROOT / "README.md").read_text(encoding="utf-8"), re.MULTILINE)
    assert len(commands) == 2
    assert all(" && .venv/bin/pip install " in command for command in commands)
    assert "pytest" in commands[1]
