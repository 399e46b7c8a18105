"""The rails as a text tree: what feeds each rail, at which voltage, and what it feeds. Pure formatting."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Mapping

from analyzer.circuit import natural_key
from analyzer.evidence import Evidence
from analyzer.load import Loads
from analyzer.rail import Feed, Rail, Rails, Wiring
from analyzer.wording import show, show_span

WIDTH = 80
_DEEPEST = 12


def tree_text(rails: Rails, loads: Loads | None = None, width: int = WIDTH) -> str:
    """The tree of feeds, one line a rail, indented under what feeds it.

    Args:
        rails: The rails.
        loads: Their loads, where they are known.
        width: Greatest length of a line.

    Returns:
        Lines that end in a newline each; the same text for the same rails, whatever the locale or terminal.
    """
    return "".join(f"{line}\n" for line in _Tree(rails, loads, width).lines())


class _Tree:
    """Walks the feeds from the sources down; every rail's own subtree is written once."""

    def __init__(self, rails: Rails, loads: Loads | None, width: int) -> None:
        self.rails = rails
        self.loads = loads
        self.width = width
        self.kinds = {(w.part.ref, w.channel.name): w.channel.topology.value for w in rails.wirings}
        self.below: dict[str, list[tuple[Feed, Rail]]] = {}
        for rail in rails.rails:
            for feed in rail.feeds:
                if feed.from_rail is not None:
                    self.below.setdefault(feed.from_rail, []).append((feed, rail))
        for feeds in self.below.values():
            feeds.sort(key=lambda item: (natural_key(item[0].ref), item[0].channel, natural_key(item[1].name)))
        self.shown: set[str] = set()

    def lines(self) -> Iterable[str]:
        """All lines."""
        live = [rail for rail in self.rails.rails if not rail.is_ground]
        roots = [rail for rail in live if all(feed.from_rail is None for feed in rail.feeds)]
        for rail in sorted(roots, key=lambda rail: natural_key(rail.name)):
            yield from self._rail(rail, 0, _sources(rail))
        for rail in live:
            if rail.name not in self.shown:  # only reachable through a circle of feeds
                yield from self._rail(rail, 0, "in a circle of feeds")
        ground = [rail.name for rail in self.rails.rails if rail.is_ground]
        if ground:
            yield from self._wrapped(f"ground: {', '.join(sorted(ground, key=natural_key))}", 0)
        yield from self._open()

    def _rail(self, rail: Rail, depth: int, how: str) -> Iterable[str]:
        # deeper branches keep their order but stop moving right, so that names stay readable
        indent = 2 * min(depth, _DEEPEST)
        facts = [self._volts(rail), self._load(rail)]
        text = f"{how}{rail.name}" if depth else rail.name
        text += "  " + ", ".join(fact for fact in facts if fact)
        if not depth and how:
            text += f"  [{how}]"
        if rail.name in self.shown:
            if self.below.get(rail.name):
                text += "  (what it feeds is shown above)"
            yield from self._wrapped(text, indent)
            return
        self.shown.add(rail.name)
        yield from self._wrapped(text, indent)
        for feed, lower in self.below.get(rail.name, ()):
            yield from self._rail(lower, depth + 1, f"{self._feed(feed)} → ")

    def _feed(self, feed: Feed) -> str:
        kind = self.kinds.get((feed.ref, feed.channel), "")
        through = [ref for ref in feed.through if ref != feed.ref]
        via = f" via {', '.join(through)}" if through else ""
        channel = f".{feed.channel}" if feed.channel else ""
        share = f" ({feed.share:.0%} of the load)" if feed.share != 1.0 else ""
        return f"{feed.ref}{channel}{f' {kind}' if kind else ''}{via}{share}"

    def _volts(self, rail: Rail) -> str:
        if rail.volts is None:
            return "voltage not known"
        return f"{_volts(rail.volts)} {rail.volts.weakest.value}"

    def _load(self, rail: Rail) -> str:
        load = self.loads.by_rail.get(rail.name) if self.loads is not None else None
        if load is None or not (load.draws or load.gaps):
            return ""
        if load.is_complete:
            return f"load {show_span(load.known, 'A')}"
        gaps = f"{len(load.gaps)} without a current" if len(load.gaps) > 1 else "1 part without a current"
        if not load.known.nominal:
            return f"load not known, {gaps}"
        return f"load at least {show(load.known.nominal, 'A')}, {gaps}"

    def _open(self) -> Iterable[str]:
        """Root causes once, then which parts they leave open."""
        causes = {cause: None for rail in self.rails.rails for cause in rail.why_open.split("; ") if cause}
        left: dict[str, list[str]] = {}
        for wiring in self.rails.wirings:
            for reason in wiring.why_open:
                head, _, tail = reason.partition(": ")
                is_told = bool(tail) and all(cause in causes for cause in tail.split("; "))
                left.setdefault(head if is_told else reason, []).append(_channel(wiring))
        if causes or left:
            yield "not known:"
        for cause in causes:
            yield from self._wrapped(cause, 2)
        for reason, refs in left.items():
            yield from self._wrapped(f"{', '.join(refs)}: {reason}", 2)

    def _wrapped(self, text: str, indent: int) -> Iterable[str]:
        return textwrap.wrap(
            text,
            self.width,
            initial_indent=" " * indent,
            subsequent_indent=" " * (indent + 4),
            break_on_hyphens=False,
        )


def _channel(wiring: Wiring) -> str:
    return f"{wiring.part.ref}.{wiring.channel.name}" if wiring.channel.name else wiring.part.ref


def _sources(rail: Rail) -> str:
    found: Mapping[str, str] = {feed.ref: feed.kind for feed in rail.feeds}
    listed = ", ".join(
        f"{kind} {ref}".strip() for ref, kind in sorted(found.items(), key=lambda item: natural_key(item[0]))
    )
    return f"from {listed}" if listed else "no feed on the board"


def _volts(evidence: Evidence) -> str:
    return show_span(evidence.span, "V")
