"""Taking currents over into heatledger.toml: a text-level merge that keeps every comment and every other line."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping

_TABLE = re.compile(r"^\s*\[+\s*([^\[\]]+?)\s*\]+\s*(#.*)?$")
_KEY = re.compile(r"""^\s*(?P<key>"(?:[^"\\]|\\.)*"|'[^']*'|[A-Za-z0-9_-]+)\s*=""")


def merged(text: str, draws: Mapping[str, str]) -> str:
    """The settings' text with `draws` in its [draws] table.

    A key that stands there gets its new value in place, with its comment; new keys follow the table's last key; without
    the table one is added at the end.

    Args:
        text: heatledger.toml as it is, may be empty.
        draws: Key ("U3", "U3@+3V3", "@+5V") → value text ("120 mA").

    Raises:
        ValueError: If the result would not read back as meant (values spread over lines, for example).
    """
    newline = "\r\n" if "\r\n" in text else "\n"
    lines = text.splitlines()
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
            if name in waiting:
                lines[number] = f"{line[: key.end()]} {_quoted(waiting.pop(name))}{_comment(line[key.end() :])}"
    fresh = [f"{_quoted(name)} = {_quoted(value)}" for name, value in waiting.items()]
    if last is None and fresh:
        lines += [*([""] if lines and lines[-1].strip() else []), "[draws]", *fresh]
    elif last is not None:
        lines[last + 1 : last + 1] = fresh
    result = newline.join(lines) + newline
    try:
        found = tomllib.loads(result).get("draws", {})
    except tomllib.TOMLDecodeError:
        found = {}
    if any(found.get(name) != value for name, value in draws.items()):
        raise ValueError("the [draws] table is written in a way that cannot be merged line by line")
    return result


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
