"""Text variables: `${NAME}` in labels, fields and notes, and the small sums `@{1+2}` of KiCad 10."""

from __future__ import annotations

import ast
import operator
import re
from collections.abc import Callable

from analyzer import limits

Lookup = Callable[[str], "str | None"]
"""Gives the raw text of a variable, or None if it is unknown here."""

_VARIABLE = re.compile(r"\$\{([^{}]*)\}")
_SUM = re.compile(r"@\{([^{}]*)\}")
_OPERATIONS: dict[type[ast.AST], Callable[..., float]] = {
    ast.Add: operator.add,
    ast.Sub: operator.sub,
    ast.Mult: operator.mul,
    ast.Div: operator.truediv,
    ast.USub: operator.neg,
    ast.UAdd: operator.pos,
}
_LONGEST_SUM = 200


class VariableCycleError(Exception):
    """Variables refer to each other in a circle, nest too deeply, or grow too long."""


def put_in(source: str, lookup: Lookup) -> str:
    """A text with its variables put in; unknown ones stay as written.

    Raises:
        VariableCycleError: If they refer to each other in a circle or grow beyond the limits.
    """
    if "${" not in source and "@{" not in source:
        return source
    done = _put_in(source, lookup, {}, ())
    return _SUM.sub(_sum, done) if "@{" in done else done


def _put_in(source: str, lookup: Lookup, known: dict[str, str], active: tuple[str, ...]) -> str:
    def one(match: re.Match[str]) -> str:
        name = match[1]
        if name in known:
            return known[name]
        if name in active or len(active) >= limits.VARIABLE_DEPTH:
            raise VariableCycleError(name)
        raw = lookup(name)
        if raw is None:
            return match[0]
        known[name] = _put_in(raw, lookup, known, (*active, name)) if "${" in raw else raw
        return known[name]

    length = 0
    pieces: list[str] = []
    end = 0
    for match in _VARIABLE.finditer(source):
        pieces += (source[end : match.start()], one(match))
        length += len(pieces[-1]) + len(pieces[-2])
        if length > limits.TEXT_LENGTH:
            raise VariableCycleError(match[1])
        end = match.end()
    pieces.append(source[end:])
    return "".join(pieces)


def _sum(match: re.Match[str]) -> str:
    if len(match[1]) > _LONGEST_SUM:
        return match[0]
    try:
        return f"{_value(ast.parse(match[1].strip(), mode='eval').body):g}"
    except (SyntaxError, ValueError, ArithmeticError, RecursionError, MemoryError):
        return match[0]


def _value(node: ast.AST) -> float:
    if isinstance(node, ast.Constant) and isinstance(node.value, int | float):
        return float(node.value)
    if isinstance(node, ast.BinOp) and type(node.op) in _OPERATIONS:
        return _OPERATIONS[type(node.op)](_value(node.left), _value(node.right))
    if isinstance(node, ast.UnaryOp) and type(node.op) in _OPERATIONS:
        return _OPERATIONS[type(node.op)](_value(node.operand))
    raise ValueError("no sum")
