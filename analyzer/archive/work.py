"""What a worker process does with one board: audit it, write its files, hand back a few figures.

Only the small `Outcome` travels back, so that the parent's memory does not grow with what the boards hold.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from pathlib import Path

from analyzer.errors import HeatledgerError
from analyzer.findings.base import Verdict

INTERNAL_FAULT = 2


@dataclass(frozen=True, slots=True)
class Job:
    """One board to audit.

    Attributes:
        project: Its project or root schematic file.
        label: Its path relative to the archive, with "/", by which reports name it.
        out: Folder that its workbook and JSON go into; made if absent.
        settings_file: Settings for all boards; None takes the one beside each project.
        rule_files: Further rule files.
        level: Level of the release gate; "" takes the one of each board's settings.
        today: The day waivers are judged on, ISO 8601.
    """

    project: Path
    label: str
    out: Path
    settings_file: Path | None = None
    rule_files: tuple[Path, ...] = ()
    level: str = ""
    today: str = "1970-01-01"


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of one board.

    Attributes:
        label: The job's label.
        status: Exit status this board alone would have given.
        counts: Fitted parts by verdict word.
        worst_margin: Smallest margin of a part with a junction temperature [K]; None when there is none.
        worst_part: Reference of that part.
        worst_is_bound: True where something of that part is missing, so that its margin is at most this.
        gaps: Number of missing currents.
        ledger_file: Path of its JSON; "" if the board failed.
        workbook_file: Path of its workbook; "" if the board failed.
        fault: Why it failed, one line; "" otherwise.
    """

    label: str
    status: int
    counts: tuple[tuple[str, int], ...] = ()
    worst_margin: float | None = None
    worst_part: str = ""
    worst_is_bound: bool = False
    gaps: int = 0
    ledger_file: str = ""
    workbook_file: str = ""
    fault: str = ""


def work(job: Job) -> Outcome:
    """Audit one board and write its workbook and JSON; whatever goes wrong becomes part of the outcome."""
    try:
        return _work(job)
    except HeatledgerError as error:
        return Outcome(job.label, error.exit_status, fault=str(error.faults[0]))
    except (OSError, ValueError, ArithmeticError, LookupError, TypeError, MemoryError, RecursionError) as error:
        # one board's trouble must not end the archive's run; its own audit would show the details
        return Outcome(job.label, INTERNAL_FAULT, fault=f"internal fault: {type(error).__name__}: {error}")


def _work(job: Job) -> Outcome:
    from analyzer.audit import audit
    from analyzer.gate import judge
    from analyzer.output.ledger_json import write_json
    from analyzer.output.workbook import write_workbook

    result = audit(job.project, settings_file=job.settings_file, rule_files=job.rule_files)
    ledger = result.ledger
    gate = judge(ledger, result.settings.waivers, job.level or result.settings.fail_on, date.fromisoformat(job.today))
    job.out.mkdir(parents=True, exist_ok=True)
    ledger_file, workbook_file = job.out / "ledger.json", job.out / "ledger.xlsx"
    write_json(ledger_file, ledger)
    write_workbook(workbook_file, ledger, result.settings)
    known = [entry for entry in ledger.entries if entry.fitted and entry.margin is not None]
    worst = min(known, key=lambda entry: entry.margin or 0.0, default=None)
    return Outcome(
        job.label,
        gate.status,
        tuple((verdict.value, ledger.count(verdict)) for verdict in Verdict),
        worst.margin if worst else None,
        worst.ref if worst else "",
        worst is not None and worst.is_bound,
        sum(1 for gap in ledger.gaps if not gap.follows),
        str(ledger_file),
        str(workbook_file),
    )
