"""The workbook: live, printable, and the way currents get in. One module a sheet."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from analyzer.ledger import Ledger
    from analyzer.output.workbook.typed import Typed
    from analyzer.settings import Settings


def write_workbook(file: Path, ledger: Ledger, settings: Settings, typed: Typed | None = None) -> bool:
    """Write the workbook of a ledger.

    What was typed into a workbook that stands at `file` is carried over even when nobody asked for it, and that
    file is kept beside the new one as NAME.previous.xlsx.

    Args:
        file: Where to.
        ledger: The ledger.
        settings: The settings in force.
        typed: What was typed into an earlier workbook; None looks at `file` itself.

    Returns:
        Whether values typed before are carried over that this ledger does not know of: its verdicts say re-run.

    Raises:
        OutputError: If the file cannot be written, or holds something typed that `typed` does not; then the old one is
            whole.
    """
    from analyzer.output.workbook.build import write

    return write(file, ledger, settings, typed)
