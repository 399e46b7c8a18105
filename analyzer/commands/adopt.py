"""`heatledger adopt FILE.xlsx PATH`: currents typed into a workbook become lines of heatledger.toml."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

from analyzer.errors import Fault, InputError

if TYPE_CHECKING:
    from analyzer.output.settings_merge import Value
    from analyzer.output.workbook.typed import Typed

EXAMPLES = """examples:
  heatledger adopt board.xlsx board.kicad_pro
  heatledger adopt board.xlsx board.kicad_pro --dry-run"""


def options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's arguments."""
    parser.epilog = EXAMPLES
    parser.add_argument("workbook", type=Path, metavar="FILE", help="workbook that currents were typed into")
    parser.add_argument("path", type=Path, metavar="PATH", help="project whose heatledger.toml takes them")
    parser.add_argument("--dry-run", "-n", action="store_true", help="print the result instead of writing it")


def run(arguments: argparse.Namespace) -> int:
    """Merge the currents and say what was taken over.

    Raises:
        InputError: If the workbook or the settings cannot be read.
        OutputError: If the settings cannot be written.
    """
    from analyzer.audit import SETTINGS_NAME
    from analyzer.output.atomic import write_text
    from analyzer.output.settings_merge import merged
    from analyzer.output.workbook.typed_reading import read_typed
    from analyzer.settings_file import load_settings

    typed = read_typed(arguments.workbook)
    folder = arguments.path if arguments.path.is_dir() else arguments.path.parent
    if not folder.is_dir():
        raise InputError(Fault("does not exist", str(folder)))
    file = folder / SETTINGS_NAME
    text = ""
    if file.is_file():
        load_settings(file)
        text = file.read_bytes().decode("utf-8")
    draws = _draws(typed, arguments.workbook)
    for line in _left(typed):
        print(f"not taken over: {line}", file=sys.stderr)
    if not draws:
        print("no currents were typed into the workbook; nothing changed")
        return 0
    try:
        result = merged(text, draws)
    except ValueError as error:
        raise InputError(Fault(str(error), str(file), "[draws]", "Write one key a line there.")) from error
    if arguments.dry_run:
        print(result, end="")
        return 0
    write_text(file, result)
    for key, value in draws.items():
        print(f"{key} = {value if isinstance(value, str) else value['watts']}")
    print(f"written: {file}")
    return 0


def _draws(typed: Typed, workbook: Path) -> dict[str, Value]:
    """Key → value of every typed current.

    Raises:
        InputError: If one key stands for two parts, for the settings know parts by reference only.
    """
    found: dict[str, Value] = {}
    for draw, cells in zip(typed.draws, typed.cells.values(), strict=True):
        key, text = _key(draw.ref, draw.rail), _text(cells)
        if key in found:
            remedy = "Number the parts again, audit, and type their currents anew."
            raise InputError(Fault(f"two parts are called {key}", str(workbook), "Currents", remedy))
        found[key] = {"watts": text} if draw.amps is None else text
    return found


def _left(typed: Typed) -> Iterator[str]:
    """What was typed that [draws] has no place for: an audit without the workbook would not know it."""
    for name, value in typed.settings.items():
        yield f"{name} = {value:g} of the Settings sheet"
    if typed.board_class is not None:
        yield f"board class {typed.board_class.value} of the Settings sheet"
    for ref, theta in typed.thetas.items():
        yield f"θ of {ref}, {theta:g} K/W, of the Regulators sheet"


def _key(ref: str, rail: str) -> str:
    return f"{ref}@{rail}" if rail else ref


def _text(cells: tuple[object, object, object]) -> str:
    """The typed cells in the settings' grammar; numbers are amperes."""
    given = [cell if isinstance(cell, str) else f"{cell!r} A" for cell in cells if cell is not None]
    if len(given) == 1:
        return given[0]
    if len(given) == 2 and cells[1] is None:
        return f"{given[0]}..{given[1]}"
    low, nominal, high = (given[0], given[1], given[-1]) if len(given) == 3 else _two(cells, given)
    return f"{low} / {nominal} / {high}"


def _two(cells: tuple[object, object, object], given: list[str]) -> tuple[str, str, str]:
    return (given[0], given[1], given[1]) if cells[0] is not None else (given[0], given[0], given[1])
