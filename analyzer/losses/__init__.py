"""Losses: one topology a file. What a part takes from its input, and what it turns into heat."""

from __future__ import annotations

from analyzer.losses.dispatch import input_current, model_of

__all__ = ["input_current", "model_of"]
