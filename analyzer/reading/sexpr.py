"""KiCad's S-expressions: bytes become nested lists, or one clear error that says where and why.

The tokenizer is kiutils'. Around it stand the checks it does not make (encoding, balance, stray text), and the
guard that keeps strings ending in a backslash whole. Strings stay escaped in the lists; `text` un-escapes
the few that are looked at.
"""

from __future__ import annotations

import gc
import re
from collections.abc import Iterator
from typing import Any

from analyzer import limits
from analyzer.errors import Fault, InputError

Node = list[Any]
"""One expression: its keyword, then atoms (str, int, float) and nested expressions."""

GUARD = "\ufdd0"
"""Stands for two backslashes while kiutils reads; a Unicode noncharacter, so no text may contain it."""

# every string ends before a blank or ')' and none begins inside a word: what kiutils needs to read rightly
_WELL_QUOTED = re.compile(r'(?:[^"]*+(?<=[\s(])"[^"\\]*+(?:\\.[^"\\]*+)*+"(?=[\s)]))*+[^"]*+\Z', re.DOTALL)
_TOKEN = re.compile(r'"(?:[^"\\]|\\.)*+"|"|[()]', re.DOTALL)
_MARKER = re.compile(r"^(?:<{7} .*|={7}|>{7} .*)\r?$", re.MULTILINE)
_WORD = re.compile(r"\(\s*([^\s()\"]*)")
_ESCAPE = re.compile(r"\\(.)", re.DOTALL)
_MEANING = {"n": "\n", "r": "\r", "t": "\t", "a": "\a", "b": "\b", "f": "\f", "v": "\v"}

KINDS = {
    "kicad_sch": "a schematic (.kicad_sch)",
    "kicad_pcb": "a board (.kicad_pcb)",
    "kicad_symbol_lib": "a symbol library (.kicad_sym)",
    "footprint": "a footprint (.kicad_mod)",
    "module": "a footprint of KiCad 5 (.kicad_mod)",
    "kicad_wks": "a drawing sheet (.kicad_wks)",
    "kicad_dru": "design rules (.kicad_dru)",
    "export": "a netlist (.net)",
    "sym_lib_table": "a symbol library table",
    "fp_lib_table": "a footprint library table",
}


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
    _check_kind(source, file, root)
    guarded = (quote_words(source) if bare_words else source).replace("\\\\", GUARD)
    if not _WELL_QUOTED.match(guarded):
        raise InputError(_diagnose(source, file) or Fault("a string runs into the next word", file))
    from kiutils.utils.sexpr import parse_sexp

    collecting = gc.isenabled()
    gc.disable()  # nothing is garbage here, but a million new lists would make the collector search every time
    try:
        outer = parse_sexp(f"({guarded})")  # in parentheses of our own, so that text after the root shows
    except (AssertionError, IndexError):
        outer = []
    finally:
        if collecting:
            gc.enable()
    if len(outer) != 1 or not isinstance(outer[0], list):
        raise InputError(_diagnose(source, file) or Fault("the parentheses do not match", file))
    tree: Node = outer[0]
    check_nesting(tree, file)
    return tree


def decode(data: bytes, file: str) -> str:
    """The text of a file that must be UTF-8, without byte-order mark and with plain line ends.

    Raises:
        InputError: If it is empty, UTF-16, holds NUL bytes or merge markers, or is not UTF-8.
    """
    if not data.strip():
        raise InputError(Fault("the file is empty", file, remedy="Restore it from a backup or save it in KiCad."))
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise InputError(Fault("the file is UTF-16, not UTF-8", file, remedy="Save it as UTF-8; KiCad writes UTF-8."))
    if data.startswith(b"PK\x03\x04"):
        raise InputError(Fault("this is a ZIP archive", file, remedy="Unpack it and give the project inside."))
    nul = data.find(b"\0")
    if nul >= 0:
        raise InputError(Fault(f"NUL byte at byte {nul}", file, remedy="The file is damaged; save it again in KiCad."))
    try:
        source = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise InputError(
            Fault(f"not UTF-8 at byte {error.start}", file, f"line {line}", "Save the file as UTF-8.")
        ) from None
    if "\r" in source:
        source = source.replace("\r\n", "\n").replace("\r", "\n")
    if GUARD in source:
        line = source.count("\n", 0, source.index(GUARD)) + 1
        raise InputError(Fault("the noncharacter U+FDD0 is not allowed in text", file, f"line {line}"))
    if "<<<<<<<" in source or ">>>>>>>" in source:
        marks = [source.count("\n", 0, m.start()) + 1 for m in _MARKER.finditer(source)]
        if marks:
            raise InputError(
                Fault(
                    f"unresolved merge conflict in lines {marks[0]}-{marks[-1]}",
                    file,
                    remedy="Resolve the conflict in version control and save the file in KiCad.",
                )
            )
    return source


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
            return len(child) == 1 or child[1] in {"yes", "true"}
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
    return found if found[0] == '"' else f'"{found}"'


def _meaning(match: re.Match[str]) -> str:
    return _MEANING.get(match[1], match[1])


def _check_kind(source: str, file: str, root: str) -> None:
    start = source.lstrip()
    wanted = KINDS[root]
    if start.startswith("EESchema Schematic File Version"):
        raise InputError(
            Fault(
                "this is a schematic of KiCad 5 or older",
                file,
                remedy="Open and save it in KiCad 6 or newer, or give its netlist (.net or .xml).",
            )
        )
    if start.startswith("<"):
        raise InputError(Fault(f"this is XML, not {wanted}", file, remedy=f"Give {wanted}."))
    if start.startswith("{"):
        raise InputError(Fault(f"this is JSON (a project file?), not {wanted}", file, remedy=f"Give {wanted}."))
    head = _WORD.match(start)
    if head is None:
        raise InputError(Fault(f"this is not {wanted}", file, "line 1", f"Give {wanted}."))
    if head[1].strip('"') != root:
        found = KINDS.get(head[1], f"a file of kind '{head[1][:40]}'")
        raise InputError(Fault(f"this is {found}, not {wanted}", file, remedy=f"Give {wanted}."))


def _diagnose(source: str, file: str) -> Fault | None:
    """What is wrong with the parentheses and quotes of a text, by line; None if nothing is."""
    opened: list[int] = []
    ended = False
    for token in _tokens(source):
        at, what = token
        if what == "(":
            if ended:
                return Fault("a second expression follows the end of the data", file, f"line {_line(source, at)}")
            opened.append(at)
        elif what == ")":
            if not opened:
                return Fault("extra ')'", file, f"line {_line(source, at)}", "Remove it, or restore the file.")
            opened.pop()
            ended = not opened
        elif what == '"':
            return Fault("a string that begins here never ends", file, f"line {_line(source, at)}", "Restore the file.")
        elif ended:
            return Fault("there is text after the end of the data", file, f"line {_line(source, at)}")
        elif (end := at + len(what)) < len(source) and not (source[end].isspace() or source[end] == ")"):
            return Fault("a blank is missing after a string", file, f"line {_line(source, end)}")
        elif at and not (source[at - 1].isspace() or source[at - 1] == "("):
            return Fault("a blank is missing before a string", file, f"line {_line(source, at)}")
    if opened:
        inner = opened[-1]
        head = _WORD.match(source, inner)
        return Fault(
            f"the file ends inside ({head[1] if head else ''} ... opened at line {_line(source, inner)}",
            file,
            remedy="The file was cut short; restore it from a backup or save it again in KiCad.",
        )
    return None


def _tokens(source: str) -> Iterator[tuple[int, str]]:
    for match in _TOKEN.finditer(source):
        yield match.start(), match[0]


def _line(source: str, at: int) -> int:
    return source.count("\n", 0, at) + 1
