"""Class of a board, and what a θJA measured on a better board is worth on it.

Board classes follow JESD51-3 (low-K), JESD51-7 (high-K); the published ratios of one package on both are below.
"""

from __future__ import annotations

from collections.abc import Mapping

from analyzer.circuit import Circuit
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rule import BoardClass
from analyzer.settings import PartStatement, Settings

POUR_AREA = 300e-6
"""Copper on the heat-carrying pin [m²] from which the pour class counts: 300 mm², as in the published tables."""

HIGH_CONDUCTIVITY = 15.0
"""k_eff [W/(m·K)] that parts low from high: FIDES FAQ, node 498."""

HIGH_LAYERS = 4

_LEADED = (1.65, 1.44)
_PADDED = (3.21, 1.54)

RATIOS: Mapping[str, tuple[float, float]] = {
    # (footprint only / 2s2p, 300 mm² / 2s2p), largest seen for the package
    "SOIC-8": (1.56, 1.26),  # TI SLOU061A 176 against TLE42694G 113; TLE42694G DS Rev 1.2 p. 10 170, 142, 113
    "SOIC-14-fused": (1.65, 1.16),  # TLE42694GM DS Rev 1.2 p. 10: 104, 73, 63
    "TSSOP-EP": (3.09, 1.34),  # TLE42694E DS Rev 1.2 p. 10: 145, 63, 47
    "DFN-1x1": _PADDED,
    "DFN-2x2": _PADDED,  # TLS715B0 DS Rev 1.1 (leadless with pad): 196, 94, 61
    "DFN-3x3": _PADDED,
    "QFN": _PADDED,
    "MSOP-EP": _PADDED,
    "SOIC-8-EP": _PADDED,
    "SOT-23-5": (2.68, 1.44),  # TLE4250-2G DS p. 5 (SCT595): 217, 117, 81
    "SOT-223": (3.3, 1.6),  # Infineon SOT223-4-2 164.3 and 81.2 against TPS7A45xx 50.5
    "TO-252": _PADDED,  # tab packages follow the leadless ones with pad, for want of a pair of their own
    "TO-263": _PADDED,
    "SOT-89": _PADDED,
    "TO-220": (1.0, 1.0),  # stands in the air: the board does not matter
    "TO-92": (1.0, 1.0),
    "TO-3": (1.0, 1.0),
}
"""By package family; other leaded packages take the largest ratio seen for one without a pad."""


def correction(package: str | None, measured: BoardClass, design: BoardClass) -> float:
    """Factor that a θJA of class `measured` needs on a board of class `design`; never below 1: no credit is given."""
    low, pour = RATIOS.get(package or "", _LEADED)
    against_high = {BoardClass.LOW: low, BoardClass.POUR: pour, BoardClass.HIGH: 1.0}
    return max(1.0, against_high[design] / against_high[measured])


def effective_conductivity(layers: list[tuple[float, float]], thickness: float, copper: float = 385.0) -> float:
    """In-plane k_eff [W/(m·K)] of a board: Σ k·t·cover / thickness.

    Args:
        layers: (copper thickness [m], covered fraction) of each layer.
        thickness: Board thickness [m].
        copper: k of copper [W/(m·K)].
    """
    if thickness <= 0 or any(t < 0 or not 0 <= cover <= 1 for t, cover in layers):
        raise ValueError("needs a positive thickness and cover fractions between 0 and 1")
    return sum(copper * t * cover for t, cover in layers) / thickness


def design_class(circuit: Circuit, settings: Settings, stated: PartStatement) -> tuple[BoardClass, Evidence]:
    """Class of the board at a part: stated there, stated for the board, by its conductivity, pour or layers."""
    board = settings.board
    file = settings.file or "settings"
    if stated.board_class is not None:
        return stated.board_class, _why(stated.board_class, "stated for this part", file, Grade.STATED)
    if stated.pour is not None:
        found = BoardClass.POUR if stated.pour.span.low >= POUR_AREA else BoardClass.LOW
        return found, _why(found, "by the copper stated at this part", stated.pour.source, Grade.STATED)
    if board.board_class is not None:
        return board.board_class, _why(board.board_class, "stated", board.source or file, Grade.STATED)
    if board.conductivity is not None:
        found = BoardClass.HIGH if board.conductivity.span.low >= HIGH_CONDUCTIVITY else BoardClass.LOW
        return found, _why(found, "by k_eff (FIDES limit 15 W/mK)", board.conductivity.source, Grade.DERIVED)
    if board.pour is not None and board.pour.span.low >= POUR_AREA:
        return BoardClass.POUR, _why(BoardClass.POUR, "by the copper stated", board.pour.source, Grade.STATED)
    layers, source = board.copper_layers, board.source or file
    if layers is None and circuit.copper_layers is not None:
        layers, source = int(circuit.copper_layers.span.nominal), circuit.copper_layers.source
    if layers is None:
        return BoardClass.LOW, _why(BoardClass.LOW, "layers not known: the poorest class", "default", Grade.PRESUMED)
    if layers >= HIGH_LAYERS:
        note = f"{layers} copper layers: solid planes and vias presumed"
        return BoardClass.HIGH, _why(BoardClass.HIGH, note, source, Grade.PRESUMED)
    return BoardClass.LOW, _why(BoardClass.LOW, f"{layers} copper layers, no pour stated", source, Grade.PRESUMED)


def _why(found: BoardClass, note: str, source: str, grade: Grade) -> Evidence:
    rank = list(BoardClass).index(found)
    return Evidence(f"board class {found.value}", Span.exact(float(rank)), "rank", source, grade, note=note)
