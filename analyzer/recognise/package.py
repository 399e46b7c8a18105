"""Package family from a footprint's name: KiCad's, IPC-7351's and home-made spellings."""

from __future__ import annotations

import re
from collections.abc import Sequence
from functools import lru_cache

from analyzer.part import Package
from analyzer.recognise.pattern import core, glob
from analyzer.rule import PackageRule

_PAD = re.compile(r"[-_]\d?EP(?:[_-]|$)|_EP\d|EXPOSED|POWERPAD|-EP\b|THERMALPAD")
_VIAS = re.compile(r"THERMAL_?VIAS?")
_TAB = re.compile(r"TABPIN([0-9A-Z]+)")
_core = lru_cache(maxsize=4096)(core)


def read_package(footprint: str, packages: Sequence[PackageRule], source: str = "footprint") -> Package:
    """Package of a footprint: the first family one of whose spellings matches.

    Args:
        footprint: Footprint field, with or without library nickname.
        packages: Families in the order of the rule files.
        source: Where the name was found.
    """
    name = footprint.rpartition(":")[2].upper()
    has_pad = bool(_PAD.search(name))
    for rule in packages:
        if any(_core(spelling) in name and glob(spelling, name) for spelling in rule.spellings):
            tab = _TAB.search(name)
            return Package(rule.family, footprint, has_pad, bool(_VIAS.search(name)), tab[1] if tab else None, source)
    return Package(None, footprint, has_pad, bool(_VIAS.search(name)), None, source)
