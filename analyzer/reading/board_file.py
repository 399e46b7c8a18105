"""The number of copper layers, from the head of the board file beside the schematic."""

from __future__ import annotations

import os
import re
from pathlib import Path

from analyzer import limits
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.reading.files import Files
from analyzer.reading.report import Report

_LAYERS = re.compile(r"\(\s*layers\s((?:\s*\(\s*\d+[^()]*\))+)")
_LAYER = re.compile(r'\(\s*\d+\s+"?([^\s"()]+)"?\s+"?(\w+)')
_COPPER = {"signal", "power", "mixed", "jumper"}


def copper_layers(schematic: Path, files: Files, report: Report) -> Evidence | None:
    """How many copper layers the board of this schematic has; None if there is no board file that says so.

    Only the head of the file is read: its list of layers stands before everything large.
    """
    board = schematic.with_suffix(".kicad_pcb")
    if not os.path.isfile(board):
        return None
    del report
    with board.open("rb") as stream:
        head = stream.read(limits.BOARD_HEAD_BYTES).decode("utf-8", errors="replace")
    if not head.lstrip("\ufeff \t\r\n").startswith("(kicad_pcb"):
        return None
    layers = _LAYERS.search(head)
    if layers is None:
        return None
    found = {name for name, kind in _LAYER.findall(layers[1]) if kind in _COPPER and name.endswith(".Cu")}
    if not found:
        return None
    source = f"{files.name(board)}: list of layers"
    return Evidence("copper layers", Span.exact(float(len(found))), "layers", source, Grade.DERIVED)
