"""Slashes in names: KiCad's XML netlists write those that belong to a name like those that separate sheets."""

from __future__ import annotations

import re

from analyzer.reading.netlist_tree import Branch

_AUTOMATIC = re.compile(r"(?:Net|unconnected)-\(")


class NameWriter:
    """Tells the two kinds of slash apart by the list of sheets, and writes names as the `.net` has them."""

    def __init__(self, root: Branch) -> None:
        design = root.first("design")
        names = [sheet.text_of("name") for sheet in design.all("sheet")] if design else []
        self._sheets: dict[str, str] = {"/": "/", "": ""}
        # parents first: a sheet's own name is what follows the longest path that is a sheet
        for name in sorted(set(names), key=len):
            if name not in self._sheets:
                above = self._longest(name.removesuffix("/"))
                self._sheets[name] = self._sheets[above] + _escaped(name[len(above) :].removesuffix("/")) + "/"

    def net(self, name: str) -> str:
        """A net's name with the slashes inside its parts written {slash}."""
        if not name.startswith("/") or _AUTOMATIC.match(name):
            return _escaped(name)
        above = self._longest(name)
        return self._sheets[above] + _escaped(name[len(above) :])

    def sheet(self, path: str) -> str:
        """A sheet path with the slashes inside sheet names written {slash}."""
        return self._sheets.get(path, path)

    def _longest(self, name: str) -> str:
        at = len(name)
        while (at := name.rfind("/", 0, at)) >= 0:
            if name[: at + 1] in self._sheets:
                return name[: at + 1]
        return ""


def _escaped(name: str) -> str:
    return name.replace("/", "{slash}")
