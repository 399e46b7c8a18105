"""What is connected with what: a union of nodes, and the names that join nodes at a distance."""

from __future__ import annotations

from dataclasses import dataclass, field

from analyzer.reading.hierarchy import SheetInstance
from analyzer.reading.names import Candidate, Rank, written


class Joins:
    """Nodes that can be joined; joined nodes have the same `root`."""

    def __init__(self) -> None:
        self._above: list[int] = []

    def new(self) -> int:
        """A node joined with nothing."""
        self._above.append(len(self._above))
        return len(self._above) - 1

    def root(self, node: int) -> int:
        """The node that stands for all that are joined with this one."""
        above = self._above
        while above[node] != node:
            above[node] = above[above[node]]
            node = above[node]
        return node

    def join(self, one: int, other: int) -> None:
        """Join two nodes and all that hang on them."""
        a, b = self.root(one), self.root(other)
        if a != b:
            self._above[max(a, b)] = min(a, b)


@dataclass(slots=True)
class Netting:
    """The growing netlist of a project.

    Attributes:
        joins: All nodes.
        candidates: (node, name it proposes for its net).
        no_connects: Nodes that carry a no-connect mark.
        drawn: Names that labels gave to nets as drawn, before equal names joined them.
        on_sheet: Sheet instance number → (node, name, rank) of everything named there.
    """

    joins: Joins = field(default_factory=Joins)
    candidates: list[tuple[int, Candidate]] = field(default_factory=list)
    no_connects: set[int] = field(default_factory=set)
    drawn: set[str] = field(default_factory=set)
    on_sheet: dict[int, list[tuple[int, str, Rank]]] = field(default_factory=dict)
    _global: dict[str, int] = field(default_factory=dict)
    _local: dict[tuple[int, str], int] = field(default_factory=dict)

    def local_node(self, sheet: SheetInstance, name: str) -> int:
        """The node of all that bears this name on one sheet instance."""
        key = (sheet.number, name)
        node = self._local.get(key)
        if node is None:
            node = self._local[key] = self.joins.new()
        return node

    def has_local(self, sheet: SheetInstance, name: str) -> bool:
        """Whether anything on the sheet instance bears this name so far."""
        return (sheet.number, name) in self._local

    def name(self, node: int, sheet: SheetInstance, name: str, rank: Rank, by: str | None = None) -> None:
        """Give a node a name.

        Args:
            node: The node.
            sheet: Where the name stands.
            name: The name as meant, without sheet path.
            rank: What kind of thing bears it.
            by: What proposes the name if that is not the name itself: the text of the bus.
        """
        if rank is not Rank.SHEET_PIN:
            self.joins.join(node, self.local_node(sheet, name))
        path, depth = "", 0
        if rank in {Rank.GLOBAL_LABEL, Rank.GLOBAL_POWER}:
            far = self._global.get(name)
            if far is None:
                far = self._global[name] = self.joins.new()
            self.joins.join(node, far)
        else:
            path, depth = sheet.name, sheet.depth
        full = path + written(name)
        self.on_sheet.setdefault(sheet.number, []).append((node, name, rank))
        self.candidates.append((node, Candidate(rank, depth, full if by is None else path + by, full)))
