"""A TOML table read key by key, so that all faults of a file are found at once, each with file, table and key."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.evidence import Evidence, Grade
from analyzer.grammar import parse
from analyzer.quantity import Dimension, Span
from analyzer.wording import show

_TYPES = {str: "text", bool: "true or false", int: "a whole number", float: "a number", list: "a list", dict: "a table"}


def read_toml(file: Path) -> dict[str, Any]:
    """The content of a TOML file.

    Raises:
        InputError: If it is missing, too large, not UTF-8 or not TOML.
    """
    import tomllib

    name = str(file)
    try:
        if file.stat().st_size > limits.SETTINGS_BYTES:
            raise InputError(
                Fault(f"larger than {limits.SETTINGS_BYTES} bytes", name, remedy="This cannot be a settings file.")
            )
        return tomllib.loads(file.read_bytes().decode("utf-8-sig"))
    except OSError as error:
        raise InputError(Fault(f"cannot be read ({error.strerror})", name)) from error
    except UnicodeDecodeError as error:
        raise InputError(Fault(f"is not UTF-8 text (byte {error.start})", name, remedy="Save it as UTF-8.")) from error
    except RecursionError as error:
        raise InputError(Fault("is nested too deeply", name)) from error
    except ValueError as error:
        what, _, at = str(error).partition(" (at ")
        remedy = 'Keys with other characters than letters, digits, "-" and "_" stand in quotes, texts always.'
        raise InputError(Fault(f"is not valid TOML: {what}", name, at.rstrip(")"), remedy)) from error


class Table:
    """One table of a TOML file; every wrong thing met while reading goes to `faults`.

    Attributes:
        file: The file, as the user named it.
        name: Name of the table as written in the file, without brackets; "" for the top of the file.
        nth: Its number, from 1, if it is one of an array of tables; else 0.
        faults: Faults found so far, shared by all tables of the file.
    """

    def __init__(self, file: Path, name: str, data: Mapping[str, Any], faults: list[Fault], nth: int = 0) -> None:
        self.file = file
        self.name = name
        self.nth = nth
        self.faults = faults
        self._data = data
        self._known: set[str] = set()

    def __contains__(self, key: str) -> bool:
        return key in self._data

    @property
    def keys(self) -> tuple[str, ...]:
        """All keys, in file order."""
        return tuple(self._data)

    def source(self, key: str) -> str:
        """Where a value was stated, for its evidence."""
        return f"{self.file.name} {self._place(key)}"

    def fault(self, key: str, what: str, remedy: str = "") -> None:
        """Note a fault at a key."""
        self.faults.append(Fault(what, str(self.file), self._place(key), remedy))

    def raw(self, key: str) -> Any:
        """The value as it stands; None if absent. The key counts as known from now on."""
        self._known.add(key)
        return self._data.get(key)

    def text(self, key: str) -> str | None:
        """A text that is not blank."""
        value = self._typed(key, str)
        if value is not None and not value.strip():
            self.fault(key, "is empty")
            return None
        return None if value is None else str(value).strip()

    def required(self, key: str) -> str | None:
        """A text that must be there."""
        if key not in self:
            self.fault(key, "is missing")
        return self.text(key)

    def boolean(self, key: str) -> bool | None:
        """True or false."""
        value = self._typed(key, bool)
        return None if value is None else bool(value)

    def whole(self, key: str, low: int, high: int) -> int | None:
        """A whole number between two limits."""
        value = self._typed(key, int)
        if value is not None and not low <= value <= high:
            self.fault(key, f"{value} lies outside {low} to {high}")
            return None
        return None if value is None else int(value)

    def choice(self, key: str, among: Iterable[str]) -> str | None:
        """One of several words."""
        value = self.text(key)
        known = list(among)
        if value is not None and value not in known:
            hint = near(value, known)
            self.fault(key, f"'{value}' is not known{hint}", "" if hint else f"Choose one of: {', '.join(known)}.")
            return None
        return value

    def texts(self, key: str) -> tuple[str, ...] | None:
        """A list of texts; a single text stands for a list of one."""
        value = self.raw(key)
        if isinstance(value, str):
            value = [value]
        if value is None:
            return None
        if not isinstance(value, list) or not all(isinstance(item, str) and item.strip() for item in value):
            self.fault(key, 'must be a list of texts, as ["a", "b"]')
            return None
        return tuple(item.strip() for item in value)

    def table(self, key: str) -> Table:
        """The table below a key, empty if absent or of another type."""
        value = self._typed(key, dict) or {}
        return Table(self.file, self._below(key), value, self.faults)

    def tables(self, key: str) -> list[Table]:
        """The tables of an array of tables."""
        value = self.raw(key)
        if value is None:
            return []
        if not isinstance(value, list) or not all(isinstance(item, dict) for item in value):
            self.fault(key, f"must be a list of tables, written [[{self._below(key)}]]")
            return []
        return [Table(self.file, self._below(key), item, self.faults, number) for number, item in enumerate(value, 1)]

    def quantity(
        self, key: str, dimension: Dimension, low: float = -math.inf, high: float = math.inf, *, above: bool = False
    ) -> Span | None:
        """A quantity between two limits; with `above` the lower one itself is excluded. Ratios may be plain numbers."""
        value = self.raw(key)
        if value is None:
            return None
        if isinstance(value, (int, float)) and not isinstance(value, bool):
            if dimension is not Dimension.RATIO:
                self.fault(
                    key, f"{value} has no unit", f'Write it as text with its unit, as "{value} {dimension.value}".'
                )
                return None
            value = repr(value)
        if not isinstance(value, str):
            self.fault(key, f"must be text with a unit, not {_kind(value)}")
            return None
        try:
            span = parse(value, dimension)
        except ValueError as error:
            self.fault(key, str(error))
            return None
        if span.low < low or span.high > high or (above and span.low == low):
            self.fault(key, f"'{value}' lies outside the possible: {_limits(low, high, dimension, above)}")
            return None
        return span

    def evidence(
        self,
        key: str,
        quantity: str,
        dimension: Dimension,
        low: float = -math.inf,
        high: float = math.inf,
        *,
        above: bool = False,
    ) -> Evidence | None:
        """A stated quantity as evidence."""
        span = self.quantity(key, dimension, low, high, above=above)
        return None if span is None else Evidence(quantity, span, dimension.value, self.source(key), Grade.STATED)

    def number(self, key: str, dimension: Dimension, low: float, high: float, *, above: bool = False) -> float | None:
        """A quantity without spread."""
        span = self.quantity(key, dimension, low, high, above=above)
        if span is not None and not span.is_exact:
            self.fault(key, "must be one value, not a range")
            return None
        return None if span is None else span.nominal

    def finish(self, *further: str) -> None:
        """Report every key nobody asked for; `further` are keys that exist but were not asked for this time."""
        known = [*self._known, *further]
        for key in self._data:
            if key not in known:
                self.fault(key, f"unknown {'key' if self.name else 'table'}{near(key, known)}")

    def _typed(self, key: str, kind: type) -> Any:
        value = self.raw(key)
        if value is not None and (not isinstance(value, kind) or (kind is int and isinstance(value, bool))):
            self.fault(key, f"must be {_TYPES[kind]}, not {_kind(value)}")
            return None
        return value

    def _below(self, key: str) -> str:
        return f"{self.name}.{key}" if self.name else key

    def _place(self, key: str) -> str:
        if self.nth:
            return f"[[{self.name}]] number {self.nth} {key}"
        return f"[{self.name}] {key}" if self.name else f"[{key}]"


def given(stated: Mapping[str, Any]) -> dict[str, Any]:
    """Only what was stated."""
    return {key: value for key, value in stated.items() if value is not None}


def near(word: str, known: Iterable[str]) -> str:
    """A hint at the nearest known spelling, "" if none is near."""
    import difflib

    by_case = {name.casefold(): name for name in sorted(known)}
    found = difflib.get_close_matches(word.casefold(), by_case, n=1, cutoff=0.6)
    return f"; did you mean '{by_case[found[0]]}'?" if found else ""


def _kind(value: Any) -> str:
    return _TYPES.get(type(value), "a date or time")


def _limits(low: float, high: float, dimension: Dimension, above: bool) -> str:
    ends = []
    if math.isfinite(low):
        ends.append(f"{'above' if above else 'at least'} {show(low, dimension.value)}")
    if math.isfinite(high):
        ends.append(f"at most {show(high, dimension.value)}")
    return ", ".join(ends)
