"""The package for KiCad's plugin and content manager: `python -m analyzer.kicad.package OUT.zip`.

It puts the BOM script where KiCad finds it and holds nothing else to run; the tool itself is installed apart.
"""

from __future__ import annotations

import io
import json
import struct
import sys
import zipfile
import zlib
from pathlib import Path
from typing import Any

from analyzer import __version__

IDENTIFIER = "org.heatledger.audit"
SUMMARY = "Thermal budget of every voltage regulator on a board, as an annotated workbook"
FULL = (
    "Puts the BOM script kicad_plugin.py where KiCad finds it. Choose it in the schematic editor under "
    "Tools, Generate Legacy Bill of Materials: it starts the installed heatledger on the schematic and writes a "
    "workbook beside it. The program itself is installed with 'pipx install heatledger'. "
    "Its results are estimates, not measurements: verify on hardware."
)


def metadata() -> dict[str, Any]:
    """The package's description, as KiCad's schema for packages wants it."""
    return {
        "$schema": "https://go.kicad.org/pcm/schemas/v1",
        "name": "heatledger",
        "description": SUMMARY,
        "description_full": FULL,
        "identifier": IDENTIFIER,
        "type": "plugin",
        "author": {"name": "The heatledger authors", "contact": {}},
        "license": "Apache-2.0",
        "resources": {},
        "tags": ["thermal", "regulator", "bom"],
        "versions": [{"version": __version__, "status": "testing", "kicad_version": "9.0", "runtime": "ipc"}],
    }


def plugin() -> dict[str, Any]:
    """The plugin's own description: no buttons, for the schematic editor offers scripts in its BOM dialog."""
    return {
        "identifier": IDENTIFIER,
        "name": "heatledger",
        "description": SUMMARY,
        "runtime": {"type": "exec"},
        "actions": [],
    }


def build() -> bytes:
    """The package as a ZIP archive; the same bytes for the same version."""
    script = Path(__file__).resolve().parent.parent / "kicad_plugin.py"
    members = {
        "metadata.json": json.dumps(metadata(), indent=2).encode(),
        "plugins/kicad_plugin.py": script.read_bytes(),
        "plugins/plugin.json": json.dumps(plugin(), indent=2).encode(),
        "resources/icon.png": icon(),
    }
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, data in sorted(members.items()):
            archive.writestr(zipfile.ZipInfo(name, (1980, 1, 1, 0, 0, 0)), data)
    return buffer.getvalue()


SIZE = 64
PAPER, INK, HEAT = (250, 248, 240), (60, 70, 85), (205, 80, 40)


def icon() -> bytes:
    """A ledger page with three bars of rising heat, 64 × 64 pixels, as PNG."""
    rows = b"".join(b"\0" + b"".join(bytes(_pixel(x, y)) for x in range(SIZE)) for y in range(SIZE))
    head = struct.pack(">IIBBBBB", SIZE, SIZE, 8, 2, 0, 0, 0)
    pieces = ((b"IHDR", head), (b"IDAT", zlib.compress(rows, 9)), (b"IEND", b""))
    return b"\x89PNG\r\n\x1a\n" + b"".join(
        struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data)) for kind, data in pieces
    )


def _pixel(x: int, y: int) -> tuple[int, int, int]:
    if not (4 <= x < 60 and 4 <= y < 60) or x in (4, 59) or y in (4, 59):
        return INK
    bar, across = divmod(x - 12, 14)
    if 0 <= bar < 3 and across < 9 and y >= 46 - 12 * bar and y < 54:
        return HEAT
    return INK if y == 54 else PAPER


def main(argv: list[str]) -> int:
    """Write the package to the path given."""
    if len(argv) != 1:
        print("usage: python -m analyzer.kicad.package OUT.zip", file=sys.stderr)
        return 1
    from analyzer.output.atomic import write_bytes

    write_bytes(Path(argv[0]), build())
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
