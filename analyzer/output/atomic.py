"""Writing files: complete or not at all, and never over an input."""

from __future__ import annotations

import errno
import os
import tempfile
from collections.abc import Iterable
from pathlib import Path

from analyzer.errors import Fault, OutputError


def write_text(file: Path, text: str) -> None:
    """Write a text as UTF-8; see `write_bytes`."""
    write_bytes(file, text.encode("utf-8"))


def write_bytes(file: Path, data: bytes) -> None:
    """Write a file so that a reader sees the old one or the new one, whatever happens in between.

    Raises:
        OutputError: If the folder is missing or closed, the disk is full, or the file is locked elsewhere.
    """
    name = str(file)
    temporary: str | None = None
    try:
        handle, temporary = tempfile.mkstemp(dir=file.parent, prefix=f".{file.name}.", suffix=".part")
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        os.chmod(temporary, _mode(file))
        os.replace(temporary, file)
        temporary = None
    except OSError as error:
        raise OutputError(Fault(_what(error), name, remedy=_remedy(error))) from error
    finally:
        if temporary is not None:
            _forget(temporary)


def _mode(file: Path) -> int:
    """The mode the file has, or would get if it were made in the usual way."""
    try:
        return file.stat().st_mode & 0o777
    except OSError:
        mask = os.umask(0)
        os.umask(mask)
        return 0o666 & ~mask


def _forget(temporary: str) -> None:
    try:
        os.unlink(temporary)
    except OSError:
        # the folder itself may be gone; there is nothing left to tidy up
        return


def _what(error: OSError) -> str:
    if error.errno == errno.ENOENT:
        return "cannot be written: its folder does not exist"
    return f"cannot be written ({error.strerror or error})"


def _remedy(error: OSError) -> str:
    if error.errno in (errno.EACCES, errno.EPERM, errno.EBUSY):
        return "Close it where it is open, or choose a folder you may write to; nothing was lost."
    if error.errno in (errno.ENOSPC, errno.EDQUOT):
        return "Make room on the disk; an older file of this name is still whole."
    return "Choose another place; an older file of this name is still whole."


def refuse_inputs(outputs: Iterable[Path], inputs: Iterable[Path]) -> None:
    """Refuse outputs that are inputs, by real path or by being the same file under another name.

    Raises:
        OutputError: For the first such output, or for two outputs that are one file.
    """
    taken = {_identity(path) for path in inputs}
    seen: dict[object, Path] = {}
    for output in outputs:
        identity = _identity(output)
        if identity in taken:
            remedy = "Inputs are never written: choose another name."
            raise OutputError(Fault("is an input of this run", str(output), remedy=remedy))
        if identity in seen:
            raise OutputError(Fault(f"is asked for twice (also as {seen[identity]})", str(output)))
        seen[identity] = output
        if output.is_dir():
            raise OutputError(Fault("is a folder, not a file", str(output), remedy="Name a file."))


def _identity(path: Path) -> object:
    try:
        status = path.stat()
        return (status.st_dev, status.st_ino)
    except OSError:
        return os.path.realpath(path)
