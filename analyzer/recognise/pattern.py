"""Matching part names against shell-style patterns, in time bounded by the product of their lengths squared.

A pattern is upper case and holds `*`, `?`, and at most one each of `{maker}` (1 to 5 letters at its start) and `{code}`
(the voltage code). There is no backtracking that grows with the number of stars, so no pattern can hang.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

from analyzer import limits
from analyzer.rule import Pattern

CODE_FORMS = {
    "volts": re.compile(r"\d{1,2}(?:\.\d{1,3})?"),
    "decimal": re.compile(r"\d{1,2}\.\d{1,3}"),
    "dashed": re.compile(r"\d{1,2}-\d{1,2}"),
    "letter": re.compile(r"\d{1,2}V\d{1,2}"),
    "tenths": re.compile(r"\d{2}"),
    "hundredths": re.compile(r"\d{3}"),
}
"""How each decode's code is written. "table" and "adjustable" have no form of their own."""


_MAKER = re.compile(r"[A-Z]{1,5}")


@dataclass(frozen=True, slots=True)
class Hit:
    """A match: the code found ("" without one), the volts it reads as, and the maker's letters."""

    code: str
    volts: float | None
    maker: str


def glob(pattern: str, text: str) -> bool:
    """Whether `text` as a whole matches `pattern` with `*` and `?`; at most len(pattern) · len(text) steps."""
    p = t = 0
    star, back = -1, 0
    while t < len(text):
        if p < len(pattern) and pattern[p] == "*":
            star, back = p, t
            p += 1
        elif p < len(pattern) and pattern[p] in ("?", text[t]):
            p += 1
            t += 1
        elif star >= 0:
            back += 1
            p, t = star + 1, back
        else:
            return False
    return not pattern[p:].strip("*")


def core(pattern: str) -> str:
    """The longest literal piece of a pattern: a text without it cannot match."""
    return max(re.split(r"\*|\?|\{[a-z]+\}", pattern), key=len)


def match(pattern: Pattern, text: str, makers: tuple[str, ...] = ()) -> Hit | None:
    """The first way in which `text` (upper case) matches.

    Args:
        pattern: The pattern with its decode.
        text: Part name, upper case.
        makers: Accepted letters for `{maker}`; empty accepts any.
    """
    if len(text) > limits.NAME_LENGTH:
        return None
    rest, body = text, pattern.text
    maker = ""
    if body.startswith("{maker}"):
        found = _MAKER.match(text)
        if found is None:
            return None
        body = body.removeprefix("{maker}")
        for end in range(found.end(), 0, -1):
            hit = _match_body(pattern, body, text[end:])
            if hit is not None and (not makers or text[:end] in makers):
                return Hit(hit.code, hit.volts, text[:end])
        return None
    if makers and not text.startswith(makers):
        return None
    hit = _match_body(pattern, body, rest)
    return None if hit is None else Hit(hit.code, hit.volts, maker)


def _match_body(pattern: Pattern, body: str, text: str) -> Hit | None:
    if "{code}" not in body:
        return Hit("", None, "") if glob(body, text) else None
    head, tail = body.split("{code}")
    for start, code in _codes(pattern, text):
        if glob(head, text[:start]) and glob(tail, text[start + len(code) :]):
            return Hit(code, decoded(pattern, code), "")
    return None


def _codes(pattern: Pattern, text: str) -> Iterator[tuple[int, str]]:
    """Every place where a code may stand: no digit follows unless the pattern has it, so that no code is cut short."""
    if pattern.decode == "table":
        for code in pattern.table:
            start = text.find(code)
            while start >= 0:
                yield start, code
                start = text.find(code, start + 1)
        return
    form = CODE_FORMS[pattern.decode]
    head, _, tail = pattern.text.partition("{code}")
    goes_on = tail[:1].isdigit()
    for start in range(len(text)):
        found = form.match(text, start)
        if found is None or (not goes_on and text[found.end() : found.end() + 1].isdigit()):
            continue
        if head.endswith("*") and text[start - 1 : start].isdigit():
            continue
        if not pattern.codes or found[0] in pattern.codes:
            yield start, found[0]


def decoded(pattern: Pattern, code: str) -> float:
    """The volts a code stands for."""
    match pattern.decode:
        case "table":
            return pattern.table[code]
        case "tenths":
            return int(code) / 10
        case "hundredths":
            return int(code) / 100
        case "dashed":
            return float(code.replace("-", "."))
        case "letter":
            return float(code.replace("V", "."))
        case _:
            return float(code)
