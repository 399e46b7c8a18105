"""Opening input files: only regular ones, only so large, only inside the project; each is noted with its hash."""

from __future__ import annotations

import hashlib
import os
import stat
from dataclasses import dataclass, field
from pathlib import Path

from analyzer import limits
from analyzer.circuit import InputFile
from analyzer.errors import Fault, InputError


class OutsideError(InputError):
    """The file lies outside the project folder and may not be opened."""


@dataclass(slots=True)
class Files:
    """The files of one project.

    Attributes:
        root: The project folder.
        allow_outside: Whether files outside it may be opened.
        inputs: Every file opened so far, by its path relative to the root.
    """

    root: Path
    allow_outside: bool = False
    inputs: dict[str, InputFile] = field(default_factory=dict)
    _bytes: int = 0

    def name(self, path: Path) -> str:
        """Path for messages and the list of inputs: relative to the project folder, with forward slashes."""
        return Path(os.path.relpath(path, self.root)).as_posix()

    def read(self, path: Path, most: int = limits.SHEET_BYTES, *, asked_for: bool = False) -> bytes:
        """The bytes of a file.

        Args:
            path: The file.
            most: Largest size accepted [bytes].
            asked_for: Whether the user named this very file; then it may be a link to another folder.

        Raises:
            InputError: If it is missing, no regular file, too large, not readable, or outside the project.
        """
        name = self.name(path)
        if not (self.allow_outside or asked_for) and not is_inside(path, self.root):
            raise OutsideError(
                Fault(
                    f"the file lies outside the project folder {self.root}",
                    str(path),
                    remedy="Move it into the project, or allow it with --allow-outside.",
                )
            )
        data = read_regular(path, most, name)
        self._bytes += len(data)
        if self._bytes > limits.PROJECT_BYTES:
            raise InputError(Fault(f"the project's files together exceed {limits.PROJECT_BYTES // 2**20} MiB", name))
        self.inputs[name] = InputFile(name, hashlib.sha256(data).hexdigest())
        return data


def is_inside(path: Path, folder: Path) -> bool:
    """Whether a file really lies in a folder, symbolic links followed."""
    return Path(os.path.realpath(path)).is_relative_to(os.path.realpath(folder))


def read_regular(path: Path, most: int, name: str) -> bytes:
    """The bytes of a regular file of at most `most` bytes.

    Raises:
        InputError: If it is anything else, or cannot be read.
    """
    try:
        # without O_NONBLOCK opening a FIFO would wait for a writer for ever
        handle = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0))
    except FileNotFoundError:
        raise InputError(Fault("no such file", name, remedy="Check the path.")) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(Fault(f"cannot be opened: {reason}", name)) from None
    try:
        if not stat.S_ISREG(os.fstat(handle).st_mode):
            raise InputError(Fault("not a regular file", name, remedy="Give a file, not a folder or device."))
        with os.fdopen(handle, "rb", closefd=False) as stream:
            data = stream.read(most + 1)
    except OSError as error:
        raise InputError(Fault(f"cannot be read: {error.strerror}", name)) from None
    finally:
        os.close(handle)
    if len(data) > most:
        raise InputError(Fault(f"larger than {most // 2**20} MiB", name, remedy="No real file of this kind is."))
    return data
