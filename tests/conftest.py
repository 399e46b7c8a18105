"""What every test may use: where the references lie, and how their absence shows."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

import hypothesis
import pytest

ROOT = Path(__file__).resolve().parent.parent
REQUIRED = os.environ.get("HEATLEDGER_REQUIRE_OUTSIDE") == "1"

# where a failure blocks others the examples are the same every time; at a desk each run looks somewhere new
hypothesis.settings.register_profile("same", derandomize=True)
if REQUIRED:
    hypothesis.settings.load_profile("same")


def need(what: str | Path) -> Path:
    """Path of an outside program or folder; absent, the test is skipped, or fails where references are required."""
    found = shutil.which(what) if isinstance(what, str) else (what if what.exists() else None)
    if found is None:
        message = f"outside reference missing: {what}"
        if REQUIRED:
            pytest.fail(message)
        pytest.skip(message)
    return Path(found)


@pytest.fixture(scope="session")
def shared() -> Path:
    """Folder with the shared boards, connectivity cases and reference tables."""
    return need(Path(os.environ.get("HEATLEDGER_SHARED", ROOT.parent / "shared")))


@pytest.fixture(scope="session")
def fixture_boards() -> Path:
    """Folder with this project's own boards."""
    return ROOT / "fixture_boards"
