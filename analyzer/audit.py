"""The main job: one board from its files to its ledger, stage by stage, each stage pure but the first."""

from __future__ import annotations

import math
import os
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from pathlib import Path

from analyzer.circuit import Circuit, InputFile, natural_key
from analyzer.evidence import Evidence, Grade
from analyzer.findings.base import Finding, Verdict, Weight
from analyzer.ledger import Entry, Ledger
from analyzer.load import Loads
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.rail import Rails
from analyzer.rule import Rulebook
from analyzer.settings import Settings

SETTINGS_NAME = "heatledger.toml"
TABLES = (".csv", ".tsv", ".xlsx")
"""Endings by which a path is a parts table."""


@dataclass(frozen=True)
class Audit:
    """Everything that was found out about one board: the ledger, and what each stage handed on."""

    ledger: Ledger
    circuit: Circuit
    parts: tuple[Part, ...]
    rails: Rails
    loads: Loads
    rulebook: Rulebook
    settings: Settings


def audit(
    path: Path,
    *,
    settings_file: Path | None = None,
    rule_files: Iterable[Path] = (),
    adjust: Callable[[Settings], Settings] = lambda settings: settings,
    variant: str | None = None,
    allow_outside: bool = False,
    chance_seed: int | None = None,
) -> Audit:
    """Audit one board.

    Args:
        path: A `.kicad_sch`, a `.kicad_pro`, a folder with one project, a netlist, or a parts table.
        settings_file: Settings to use; None looks for `heatledger.toml` beside the project.
        rule_files: Rule files besides those the settings name.
        adjust: Changes the settings as read: what was typed into a workbook beats them.
        variant: Design variant to audit.
        allow_outside: Whether sheets outside the project folder may be read.
        chance_seed: Seed of the Monte-Carlo estimate; None leaves it out.

    Raises:
        InputError: If an input is missing, unreadable or invalid.
    """
    from analyzer.reading import read
    from analyzer.recognise import load_rulebook
    from analyzer.settings_file import load_settings

    file = settings_file or settings_beside(path)
    settings = adjust(load_settings(file))
    base = file.parent if file else path.parent
    own_rules = [*(base / name for name in settings.rule_files), *rule_files]
    rulebook = load_rulebook(own_rules, beside=path if os.path.isdir(path) else path.parent)
    if path.suffix.lower() in TABLES:
        return _audit_table(path, rulebook, settings, chance_seed)
    circuit = read(path, settings=settings, variant=variant, allow_outside=allow_outside)
    return close(circuit, rulebook, settings, chance_seed)


def _audit_table(path: Path, rulebook: Rulebook, settings: Settings, chance_seed: int | None) -> Audit:
    """A parts table: one budget a row, without connectivity."""
    from analyzer.reading.parts_table import read_table
    from analyzer.table_audit import stages, unknown_rows

    table = read_table(path)
    circuit, parts, rails, loads, found = stages(path, table, rulebook)
    result = _budget(circuit, parts, rails, loads, rulebook, settings, found, chance_seed)
    return replace(result, ledger=replace(result.ledger, not_understood=tuple(unknown_rows(table, parts))))


def close(circuit: Circuit, rulebook: Rulebook, settings: Settings, chance_seed: int | None = None) -> Audit:
    """The pure part of the job: from the circuit as read to the closed ledger."""
    from analyzer.draws import find_loads
    from analyzer.rails import find_rails
    from analyzer.recognise import recognise
    from analyzer.settings_unused import unused_statements

    parts, recognition = recognise(circuit, rulebook, settings)
    recognition = (*recognition, *unused_statements(circuit, parts, settings))
    rails = find_rails(circuit, parts, rulebook, settings)
    loads = find_loads(circuit, parts, rails, settings, rulebook)
    return _budget(circuit, parts, rails, loads, rulebook, settings, recognition, chance_seed)


def _budget(
    circuit: Circuit,
    parts: tuple[Part, ...],
    rails: Rails,
    loads: Loads,
    rulebook: Rulebook,
    settings: Settings,
    recognition: Iterable[Finding],
    chance_seed: int | None,
) -> Audit:
    from analyzer.heat import close_entries
    from analyzer.heat.ratings import site_findings

    known = (*recognition, *rails.findings, *loads.findings)
    entries = close_entries(circuit, parts, rails, loads, rulebook, settings, known=known, chance_seed=chance_seed)
    of_entries = (finding for entry in entries for finding in entry.findings)
    findings = dict.fromkeys((*circuit.findings, *known, *site_findings(settings), *of_entries))
    ledger = Ledger(
        board=circuit.board,
        inputs=(
            *circuit.inputs,
            *(InputFile(name, digest) for name, digest in rulebook.files),
            *_settings_input(settings),
        ),
        settings=in_force(settings, circuit),
        entries=tuple(sorted(entries, key=_entry_key)),
        rails=rails.rails,
        loads=loads.by_rail,
        gaps=loads.gaps,
        findings=tuple(sorted(findings, key=_finding_key)),
        not_understood=_not_understood(parts),
        complete=circuit.complete,
        names={component.key: (component.value, component.place.sheet) for component in circuit.components},
    )
    return Audit(ledger, circuit, parts, rails, loads, rulebook, settings)


def settings_beside(path: Path) -> Path | None:
    """The settings file in the folder of the project, if there is one."""
    # os.path answers False where Path raises, for names longer than the system allows
    folder = path if os.path.isdir(path) else path.parent
    candidate = folder / SETTINGS_NAME
    return candidate if os.path.isfile(candidate) else None


def in_force(settings: Settings, circuit: Circuit) -> tuple[Evidence, ...]:
    """The board-wide assumptions as evidence: what was stated, and what was presumed in its place."""
    site, policy = settings.site, settings.policy
    grade = Grade.RULED if policy.verified else Grade.PRESUMED
    margins = (
        ("policy junction margin", policy.junction_over, "K"),
        ("policy warning margin", policy.junction_tight, "K"),
        ("policy input fraction", policy.input_fraction, "1"),
        ("policy current fraction", policy.current_fraction, "1"),
    )
    return (
        site.ambient,
        site.enclosure_rise,
        site.altitude,
        site.air_speed,
        settings.resistor_tolerance,
        *((circuit.copper_layers,) if circuit.copper_layers else ()),
        *((settings.board.pour,) if settings.board.pour else ()),
        *((settings.board.conductivity,) if settings.board.conductivity else ()),
        *(
            Evidence(name, Span.exact(value), unit, f"policy {policy.name}: {policy.source}", grade)
            for name, value, unit in margins
        ),
    )


def _settings_input(settings: Settings) -> tuple[InputFile, ...]:
    if not settings.file:
        return ()
    import hashlib

    data = Path(settings.file).read_bytes()
    return (InputFile(Path(settings.file).name, hashlib.sha256(data).hexdigest()),)


_VERDICTS = list(Verdict)
_WEIGHTS = list(Weight)

EntryKey = tuple[bool, int, float, tuple[tuple[int, int | str], ...], str]


def _entry_key(entry: Entry) -> EntryKey:
    margin = math.inf if entry.margin is None else entry.margin
    return (not entry.fitted, _VERDICTS.index(entry.verdict), margin, natural_key(entry.ref), entry.key)


def _finding_key(finding: Finding) -> tuple[int, str, tuple[tuple[int, int | str], ...], str, str]:
    return (
        _WEIGHTS.index(finding.weight),
        finding.name,
        natural_key(finding.subject),
        finding.where,
        finding.message,
    )


def _not_understood(parts: tuple[Part, ...]) -> tuple[str, ...]:
    return tuple(
        f"{part.ref} {part.identity}: {part.evidence}" for part in parts if part.rule is None and part.component.fitted
    )
