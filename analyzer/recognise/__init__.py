"""Recognition: which components are regulators or passages, by rule file and by pins."""

from __future__ import annotations

from analyzer.recognise.recognise import recognise
from analyzer.recognise.rulebook import load_rulebook

__all__ = ["load_rulebook", "recognise"]
