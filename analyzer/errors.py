"""One family of errors: each says in which file, where in it, what is wrong, and what to do.

A traceback shown to a user is a bug; everything the user can cause ends in one of these.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that is wrong with an input.

    Attributes:
        what: What is wrong, in one sentence without a final full stop.
        file: The file it is in, as the user named it; empty when no file is concerned.
        place: Where in the file: a line ("line 12"), an entry and key ("[site] ambient"), a symbol.
        remedy: What to do about it; empty when the sentence already says so.
    """

    what: str
    file: str = ""
    place: str = ""
    remedy: str = ""

    def __str__(self) -> str:
        head = ": ".join(part for part in (self.file, self.place, self.what) if part)
        return f"{head}. {self.remedy}" if self.remedy else head


class HeatledgerError(Exception):
    """Base of all errors this program raises on purpose; never raised directly.

    Attributes:
        faults: Every fault found, in file order.
        exit_status: The exit status the command line ends with.
    """

    exit_status = 2

    def __init__(self, faults: Fault | Iterable[Fault]) -> None:
        self.faults: tuple[Fault, ...] = (faults,) if isinstance(faults, Fault) else tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))

    def __reduce__(self) -> tuple[type[HeatledgerError], tuple[tuple[Fault, ...]]]:
        # worker processes hand errors back to their parent
        return type(self), (self.faults,)


class UsageError(HeatledgerError):
    """The command line asks for something that makes no sense (exit status 1)."""

    exit_status = 1


class InputError(HeatledgerError):
    """An input file is missing, unreadable or invalid (exit status 3)."""

    exit_status = 3


class OutputError(HeatledgerError):
    """An output cannot be written: locked, no room, or it would overwrite an input (exit status 4)."""

    exit_status = 4
