"""Draw the README's picture of a workbook: audit a fixture board, print its pages with LibreOffice, crop two of them.

Run it by hand after a change of the workbook: python fixture_boards/picture.py   (needs soffice and pdftoppm)
"""

from __future__ import annotations

import subprocess
import sys
import tempfile
from pathlib import Path

HERE = Path(__file__).resolve().parent
BOARD = "lane_lamp"
DPI = 130
PAGES = {"regulators": (3, (40, 50, 1440, 200)), "currents": (5, (40, 50, 1440, 360))}
"""Name → page, and the part of it to keep: left, top, width, height in pixels."""


def main() -> None:
    with tempfile.TemporaryDirectory() as name:
        work = Path(name)
        book = work / f"{BOARD}.xlsx"
        run([sys.executable, "-m", "analyzer.cli", "audit", str(HERE / BOARD), "--workbook", str(book)], HERE.parent)
        run(["soffice", "--headless", "--convert-to", "pdf", book.name], work)
        for label, (page, box) in PAGES.items():
            place = [text for flag, pixels in zip("xyWH", box, strict=True) for text in (f"-{flag}", str(pixels))]
            command = ["pdftoppm", "-png", "-r", str(DPI), "-f", str(page), "-singlefile", *place, f"{BOARD}.pdf"]
            run([*command, str(HERE / BOARD / f"workbook_{label}")], work)


def run(command: list[str], folder: Path) -> None:
    """Run a program quietly; an audit with findings ends in 5."""
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False)
    if done.returncode not in (0, 5):
        raise SystemExit(done.stdout + done.stderr)


if __name__ == "__main__":
    main()
