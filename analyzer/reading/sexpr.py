"""KiCad's S-expressions: bytes become nested lists, or one clear error that says where and why.

The tokenizer is kiutils'. Around it stand the checks it does not make (encoding, balance, stray text), and the
guard that keeps strings ending in a backslash whole. Strings stay escaped in the lists; `text` un-escapes
the few that are looked at.
"""

from __future__ import annotations

import gc
import re
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.reading.plain_text import GUARD, check_kind, decode, diagnose

Node = list[Any]
"""One expression: its keyword, then atoms (str, int, float) and nested expressions."""


# every string ends before a blank or ')' and none begins inside a word: what kiutils needs to read rightly
_WELL_QUOTED = re.compile(r'(?:[^"]*+(?<=[\s(])"[^"\\]*+(?:\\.[^"\\]*+)*+"(?=[\s)]))*+[^"]*+\Z', re.DOTALL)
_ESCAPE = re.compile(r"\\(.)", re.DOTALL)
_MEANING = {"n": "\n", "r": "\r", "t": "\t", "a": "\a", "b": "\b", "f": "\f", "v": "\v"}


def parse(data: bytes, file: str, root: str, *, bare_words: bool = False) -> Node:
    """Read one file into nested lists.

    Args:
        data: The bytes of the file.
        file: Its name for messages.
        root: Keyword the outermost expression must have, e.g. "kicad_sch".
        bare_words: Whether words stand without quotes, as in netlists of KiCad 5; they are kept as written.

    Raises:
        InputError: If the bytes are no such file; the message says what they are, and where they break.
    """
    source = decode(data, file)
    check_kind(source, file, root)
    guarded = (quote_words(source) if bare_words else source).replace("\\\\", GUARD)
    if not _WELL_QUOTED.match(guarded):
        raise InputError(diagnose(source, file) or Fault("a string runs into the next word", file))
    from kiutils.utils.sexpr import parse_sexp

    with no_collector():
        try:
            # in parentheses of our own and with a last word, so that text after the root shows
            outer = parse_sexp(f"({guarded} {GUARD})")
        except (AssertionError, IndexError):
            outer = []
    if len(outer) != 2 or not isinstance(outer[0], list) or outer[1] != GUARD:
        raise InputError(diagnose(source, file) or Fault("the parentheses do not match", file))
    tree: Node = outer[0]
    check_nesting(tree, file)
    return tree


@contextmanager
def no_collector() -> Iterator[None]:
    """Switch the cyclic garbage collector off for a while.

    Reading makes a million lists and no garbage, and every so many new lists the collector would search them all.
    """
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()


def text(atom: Any) -> str:
    """An atom as text, un-escaped; "" for a nested expression."""
    if type(atom) is str:
        if "\\" in atom or GUARD in atom:
            return _ESCAPE.sub(_meaning, atom).replace(GUARD, "\\")
        return atom
    return "" if isinstance(atom, list) else str(atom)


def first(node: Node, key: str) -> Node | None:
    """The first nested expression that begins with `key`."""
    for child in node:
        if type(child) is list and child and child[0] == key:
            return child
    return None


def every(node: Node, key: str) -> list[Node]:
    """All nested expressions that begin with `key`, in order."""
    return [child for child in node if type(child) is list and child and child[0] == key]


def word(node: Node, key: str, default: str = "") -> str:
    """The text of `(key "text")` inside `node`."""
    found = first(node, key)
    return text(found[1]) if found is not None and len(found) > 1 else default


def flag(node: Node, key: str, default: bool = False) -> bool:
    """A yes/no mark in any of its spellings: `key`, `(key)`, `(key yes)`, `(key no)`."""
    for child in node:
        if child == key:
            return True
        if type(child) is list and child and child[0] == key:
            return len(child) == 1 or child[1] == "yes" or child[1] == "true"
    return default


def quote_words(source: str) -> str:
    """The same text with every bare word in quotes, so that 3.30 and 007 survive as written."""
    return re.sub(r'"(?:[^"\\]|\\.)*+"|[^\s()"]+', _quoted, source, flags=re.DOTALL)


def check_nesting(tree: Node, file: str) -> None:
    """Refuse a tree nested deeper than `limits.NESTING`.

    Raises:
        InputError: If it is.
    """
    level: list[Node] = [tree]
    for _ in range(limits.NESTING):
        level = [child for node in level for child in node if type(child) is list]
        if not level:
            return
    raise InputError(
        Fault(f"nested deeper than {limits.NESTING} levels", file, remedy="No KiCad file is; this one is damaged.")
    )


def _quoted(match: re.Match[str]) -> str:
    found = match[0]
    if found[0] == '"':
        return found
    escaped = found.replace("\\", "\\\\")
    return f'"{escaped}"'


def _meaning(match: re.Match[str]) -> str:
    return _MEANING.get(match[1], match[1])
