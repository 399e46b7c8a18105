"""What a file's bytes must be before they are taken apart, and what is wrong with those that are not."""

from __future__ import annotations

import re
from collections.abc import Iterator

from analyzer.errors import Fault, InputError

GUARD = "\ufdd0"
"""Stands for two backslashes while kiutils reads; a Unicode noncharacter, so no text may contain it."""

_TOKEN = re.compile(r'"(?:[^"\\]|\\.)*+"|"|[()]', re.DOTALL)
_MARKER = re.compile(r"^(?:<{7} .*|={7}|>{7} .*)\r?$", re.MULTILINE)
_WORD = re.compile(r"\(\s*([^\s()\"]*)")

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


def check_kind(source: str, file: str, root: str) -> None:
    """Refuse a file of another kind, saying what it is.

    Raises:
        InputError: If the text does not begin with `(root`.
    """
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


def diagnose(source: str, file: str) -> Fault | None:
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
