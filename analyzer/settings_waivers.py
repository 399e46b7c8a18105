"""[[waiver]] of `heatledger.toml`: findings accepted by a person."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import date

from analyzer.settings import Waiver
from analyzer.toml_table import Table, near


def waivers(entries: Iterable[Table]) -> tuple[Waiver, ...]:
    """[[waiver]]: findings accepted with a reason."""
    found = []
    for entry in entries:
        finding, subject, reason = _finding(entry), entry.required("subject"), entry.required("reason")
        expires = _day(entry, "expires")
        entry.finish()
        if finding and subject and reason:
            where = f"{entry.file.name} [[waiver]] number {entry.number}"
            found.append(Waiver(finding, subject, reason, expires, where))
    return tuple(found)


def _finding(entry: Table) -> str | None:
    from analyzer.findings.catalogue import every_kind

    if "finding" not in entry:
        return entry.required("finding")
    name = entry.text("finding")
    known = {kind.name for kind in every_kind()}
    if name is not None and name not in known:
        entry.fault("finding", f"'{name}' is no kind of finding{near(name, known)}")
        return None
    return name


def _day(entry: Table, key: str) -> str | None:
    value = entry.raw(key)
    if value is None or type(value) is date:
        return None if value is None else value.isoformat()
    try:
        return date.fromisoformat(value).isoformat()
    except (TypeError, ValueError):
        entry.fault(key, "must be a day, written 2027-03-31")
        return None
