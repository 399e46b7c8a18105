"""Thermal paths: one resistance model a file."""

from __future__ import annotations

from analyzer.heat.path.base import ThermalPath
from analyzer.heat.path.select import thermal_path

__all__ = ["ThermalPath", "thermal_path"]
