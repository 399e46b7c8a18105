"""The list of all kinds of finding, made from the modules of this package."""

from __future__ import annotations

import importlib
import pkgutil

import analyzer.findings
from analyzer.findings.base import FindingKind


def every_kind() -> tuple[FindingKind, ...]:
    """Every kind of finding there is, by name.

    Raises:
        ValueError: If two kinds share a name.
    """
    kinds: dict[str, FindingKind] = {}
    for module in pkgutil.iter_modules(analyzer.findings.__path__):
        for value in vars(importlib.import_module(f"analyzer.findings.{module.name}")).values():
            if isinstance(value, FindingKind) and kinds.setdefault(value.name, value) is not value:
                raise ValueError(f"two kinds of finding are named {value.name}")
    return tuple(kinds[name] for name in sorted(kinds))
