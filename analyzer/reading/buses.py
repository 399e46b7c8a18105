"""Buses: what a label's text means as a bus, and which members of joined buses are one net."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass

from analyzer import limits

_VECTOR = re.compile(r"((?:[~_^]\{)?)([^\s{}\[\]]*)\[(\d{1,10})\.\.(\d{1,10})\](\}?)([+\-PN]?)\Z")


class BusError(Exception):
    """A bus text that is understood but cannot be expanded: too many members, or an alias in a circle."""


@dataclass(frozen=True, slots=True)
class Bus:
    """A bus text taken apart.

    Attributes:
        members: Net names of the members in order, without sheet path.
        keys: What each member is matched by: its index in a vector, its own name in a group.
        is_vector: Whether it is a vector; vectors join vectors, groups join groups.
        lone: The single plain member of a group that has no other, "" otherwise: maybe an alias nobody defined.
    """

    members: tuple[str, ...]
    keys: tuple[int | str, ...]
    is_vector: bool
    lone: str = ""


def read_bus(label: str, aliases: Mapping[str, tuple[str, ...]]) -> Bus | None:
    """The bus a label names, or None if it names a plain net.

    Raises:
        BusError: If it has too many members, or an alias contains itself.
    """
    if label.endswith("}") and (group := _group(label)) is not None:
        prefix, words = group
        names = _expand(words, aliases, ())
        dot = f"{prefix}." if prefix else ""
        lone = names[0] if len(names) == 1 and words == names else ""
        return Bus(tuple(dot + name for name in names), tuple(names), is_vector=False, lone=lone)
    if "[" in label and (vector := _vector(label)) is not None:
        return Bus(tuple(vector), tuple(range(len(vector))), is_vector=True)
    return None


def _vector(label: str) -> list[str] | None:
    match = _VECTOR.match(label)
    if match is None:
        return None
    opening, prefix, first, last, closing, suffix = match.groups()
    if bool(opening) != bool(closing) or first == last:
        return None
    low, high = sorted((int(first), int(last)))
    if high - low >= limits.BUS_MEMBERS:
        raise BusError(f"bus '{label}' has {high - low + 1} members; at most {limits.BUS_MEMBERS} are read")
    return [f"{opening}{prefix}{index}{closing}{suffix}" for index in range(low, high + 1)]


def _group(label: str) -> tuple[str, list[str]] | None:
    """Prefix and members of a group; None if the braces are only formatting, or nested."""
    prefix: list[str] = []
    members: list[str] = []
    current = ""
    inside = False
    formatting = 0
    for at, char in enumerate(label):
        if char == "{":
            if at and label[at - 1] in "~_^$":
                formatting += 1
                current += char
            elif inside or formatting:
                return None
            else:
                inside = True
                prefix, current = [current], ""
        elif char == "}":
            if formatting:
                formatting -= 1
                current += char
            elif inside and at == len(label) - 1:
                members.append(current)
                return "".join(prefix), [member for member in members if member]
            else:
                return None
        elif inside and not formatting and char in " ,":
            members.append(current)
            current = ""
        elif not inside and char.isspace():
            return None
        else:
            current += char
    return None


def _expand(words: list[str], aliases: Mapping[str, tuple[str, ...]], active: tuple[str, ...]) -> list[str]:
    names: list[str] = []
    for word in words:
        if word in active:
            raise BusError(f"bus alias '{word}' contains itself")
        if word in aliases:
            names += _expand(list(aliases[word]), aliases, (*active, word))
        else:
            names += _vector(word) or [word]
        if len(names) > limits.BUS_MEMBERS:
            raise BusError(f"a bus has more than {limits.BUS_MEMBERS} members")
    return names
