"""Taking currents over into heatledger.toml: a text-level merge that keeps every comment and every other line."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from typing import Any

_MARK = "\ufeff"
"""What some editors put before the text of a UTF-8 file."""

_LINE = re.compile(r"[^\n]*\n|[^\n]+")
_TABLE = re.compile(r"^\s*\[+\s*([^\[\]]+?)\s*\]+\s*(#.*)?$")
_KEY = re.compile(r"""^\s*(?P<key>"(?:[^"\\]|\\.)*"|'[^']*'|[A-Za-z0-9_-]+)\s*=""")


Value = str | Mapping[str, str]


def merged(text: str, draws: Mapping[str, Value]) -> str:
    """The settings' text with `draws` in its [draws] table; every other line keeps its bytes and its line ending.

    A key that stands there gets its new value in place, with its comment; new keys follow the table's last key; without
    the table one is added at the end. A current stated for a part as a whole ("U3") becomes a comment where one on a
    rail of it ("U3@+3V3") takes its place.

    Args:
        text: heatledger.toml as it is, may be empty.
        draws: Key ("U3", "U3@+3V3", "@+5V") → value text ("120 mA"), or a table ({"watts": "1.2 W"}).

    Raises:
        ValueError: If the result would not read back as meant (values spread over lines, for example).
    """
    if text.startswith(_MARK):
        return _MARK + merged(text.removeprefix(_MARK), draws)
    newline = "\r\n" if "\r\n" in text else "\n"
    # no splitlines: to TOML the other separators of Unicode are characters like any
    lines = _LINE.findall(text)
    if lines and not lines[-1].endswith("\n"):
        lines[-1] += newline
    waiting = dict(draws)
    inside, last = False, None
    for number, line in enumerate(lines):
        table = _TABLE.match(line)
        if table:
            inside = table[1].strip() == "draws"
            last = number if inside else last
            continue
        key = _KEY.match(line) if inside else None
        if key:
            last = number
            name = _unquoted(key["key"])
            if name in _replaced(draws):
                lines[number] = f"# {line}"
            elif name in waiting:
                ending = "\r\n" if line.endswith("\r\n") else "\n"
                rest = _comment(line[key.end() :].rstrip("\r\n"))
                lines[number] = f"{line[: key.end()]} {_written(waiting.pop(name))}{rest}{ending}"
    fresh = [f"{_quoted(name)} = {_written(value)}{newline}" for name, value in waiting.items()]
    if last is None and fresh:
        lines += [*([newline] if lines and lines[-1].strip() else []), f"[draws]{newline}", *fresh]
    elif last is not None:
        lines[last + 1 : last + 1] = fresh
    result = "".join(lines)
    if _read(result) != _meant(text, draws):
        raise ValueError("the [draws] table is written in a way that cannot be merged line by line")
    return result


def _read(text: str) -> dict[str, Any] | None:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        return None


def _meant(text: str, draws: Mapping[str, Value]) -> dict[str, Any]:
    """What the merged text must read as: everything as before but for these draws."""
    before = _read(text) or {}
    there = before.get("draws", {})
    kept = {name: value for name, value in there.items() if name not in _replaced(draws)} if there else {}
    return {**before, "draws": {**kept, **draws}}


def _replaced(draws: Mapping[str, Value]) -> set[str]:
    """References without a rail whose statement gives way to one on a rail."""
    return {name.partition("@")[0] for name in draws if not name.startswith("@") and "@" in name}


def _written(value: Value) -> str:
    if isinstance(value, str):
        return _quoted(value)
    return "{ " + ", ".join(f"{key} = {_quoted(text)}" for key, text in value.items()) + " }"


def _unquoted(key: str) -> str:
    return str(next(iter(tomllib.loads(f"{key} = 0"))))


def _quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def _comment(rest: str) -> str:
    """The comment behind a value, with the blanks before it."""
    quote = ""
    for at, c in enumerate(rest):
        if quote:
            quote = "" if c == quote and rest[at - 1] != "\\" else quote
        elif c in "\"'":
            quote = c
        elif c == "#":
            return rest[len(rest[:at].rstrip()) :]
    return ""
