"""Looking at a workbook's archive before anything unpacks it: its directory tells its sizes."""

from __future__ import annotations

import zipfile
from pathlib import Path

from analyzer import limits
from analyzer.errors import Fault, InputError


def check_archive(path: Path) -> None:
    """Refuse what is no workbook, is damaged, or would unpack to more than any workbook holds.

    Raises:
        InputError: With what is wrong.
    """
    name = str(path)
    try:
        with zipfile.ZipFile(path) as archive:
            entries = archive.infolist()
    except FileNotFoundError as error:
        raise InputError(Fault("does not exist", name)) from error
    except OSError as error:
        raise InputError(Fault(f"cannot be read ({error.strerror})", name)) from error
    except (zipfile.BadZipFile, ValueError, NotImplementedError) as error:
        raise InputError(
            Fault("is no .xlsx workbook, or is damaged", name, remedy="Save it again as .xlsx.")
        ) from error
    unpacked = sum(entry.file_size for entry in entries)
    packed = sum(entry.compress_size for entry in entries)
    remedy = "It is refused unopened; real workbooks are far smaller."
    if len(entries) > limits.WORKBOOK_ENTRIES:
        raise InputError(Fault(f"holds {len(entries)} parts, more than {limits.WORKBOOK_ENTRIES}", name, remedy=remedy))
    if unpacked > limits.WORKBOOK_UNPACKED:
        raise InputError(Fault(f"would unpack to {unpacked // 1024**2} MB", name, remedy=remedy))
    if packed and unpacked / packed > limits.WORKBOOK_RATIO and unpacked > 1024**2:
        raise InputError(Fault(f"is packed {unpacked // packed} to 1, as only bombs are", name, remedy=remedy))
    if not any(entry.filename == "[Content_Types].xml" for entry in entries):
        raise InputError(Fault("is a ZIP archive but no workbook", name, remedy="Save it as .xlsx."))
