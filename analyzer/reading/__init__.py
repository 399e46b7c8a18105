"""Reading: files become a Circuit. Only this room and `output` touch files."""

from __future__ import annotations

from pathlib import Path

from analyzer.circuit import Circuit
from analyzer.settings import Settings

_DEFAULTS = Settings()


def read(
    path: Path, *, settings: Settings = _DEFAULTS, variant: str | None = None, allow_outside: bool = False
) -> Circuit:
    """Read a board.

    Args:
        path: A `.kicad_sch`, a `.kicad_pro`, a folder with one project, or a netlist (`.net`, `.xml`).
        settings: For the user's own ways of marking parts as not fitted.
        variant: Design variant to read; None for the base design.
        allow_outside: Whether sheets outside the project folder may be read.

    Raises:
        InputError: If the input is missing, unreadable or of another kind. Faults of single sheets and
            symbols become findings instead, and the circuit is marked incomplete.
    """
    from analyzer.reading.entry import read_board

    return read_board(path, settings, variant, allow_outside=allow_outside)


def variants(path: Path) -> tuple[str, ...]:
    """Names of the design variants of a project or netlist, in the order they are defined.

    Raises:
        InputError: If the input is missing or unreadable.
    """
    from analyzer.reading.entry import variant_names

    return variant_names(path)
