"""Where the rule files lie that come with the program."""

from __future__ import annotations

from pathlib import Path


def rules_folder() -> Path:
    """Folder of the shipped rule files: inside the installed package, or beside it in a checkout."""
    package = Path(__file__).resolve().parent
    installed = package / "_rules"
    return installed if installed.is_dir() else package.parent / "rules"
