"""Heat: from losses to junction temperature, margin and verdict."""

from __future__ import annotations

from analyzer.heat.budget import close_entries

__all__ = ["close_entries"]
