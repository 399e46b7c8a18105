"""Figures that say outright what the loss models would otherwise presume, for tests of the formulas alone."""

from __future__ import annotations

from collections.abc import Mapping

from analyzer.quantity import Span
from analyzer.rule import Curve, EfficiencyMap, Topology


def plain(
    topology: Topology,
    figures: Mapping[str, Span | float],
    curves: Mapping[str, Curve] | None = None,
    mapped: EfficiencyMap | None = None,
) -> dict[str, Span | float]:
    """Figures that keep presumptions away: an efficiency measured hot, no idle loss, resistances without a tempco."""
    found: dict[str, Span | float] = {}
    if mapped is not None or ("efficiency" in {*figures, *(curves or {})} and "efficiency_hot_loss" not in figures):
        found["efficiency_temperature"] = 125.0
    if "efficiency" in figures and topology is not Topology.CONTROLLER:
        found["quiescent"] = 0.0
    if mapped is not None or "efficiency" in {*figures, *(curves or {})}:
        found["efficiency_output"] = 0.0
    if any(key in figures for key in ("on_resistance", "high_side_resistance", "low_side_resistance")):
        found["resistance_tempco"] = 0.0
    return found
