"""The ledger: one board's result. An entry is one part's thermal budget. `analyzer.heat` closes it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from analyzer.circuit import InputFile
from analyzer.evidence import Evidence, Grade
from analyzer.findings.base import Finding, Verdict
from analyzer.load import Gap, RailLoad
from analyzer.quantity import Span
from analyzer.rail import Rail


@dataclass(frozen=True, slots=True)
class ChannelPoint:
    """One channel at one corner: the numbers its dissipation was computed from.

    Attributes:
        channel: Channel name.
        vin, vout: Voltages relative to the part's ground pin [V].
        iout: Load [A].
        iin: Current taken from the input rail [A].
        watts: Heat in the part [W].
        elsewhere: (reference or name, watts) of losses of this channel outside the part.
        formula: The loss formula with its numbers put in.
    """

    channel: str
    vin: float
    vout: float
    iout: float
    iin: float
    watts: float
    elsewhere: tuple[tuple[str, float], ...] = ()
    formula: str = ""


@dataclass(frozen=True, slots=True)
class Corner:
    """One corner of an entry, worked through to the junction.

    Attributes:
        name: Which ends it takes, in words ("input high, output low, load high, ambient high").
        channels: The channels at this corner.
        watts: Heat in the package [W].
        ambient: Air around the part, enclosure rise and neighbours included [°C].
        theta: Junction to ambient, altitude and corrections included [K/W]; None if unknown.
        junction: Junction temperature [°C]; None if θ is unknown.
    """

    name: str
    channels: tuple[ChannelPoint, ...]
    watts: float
    ambient: float
    theta: float | None
    junction: float | None


@dataclass(frozen=True, slots=True)
class Output:
    """One output of an entry, as the machine-readable contract has it."""

    channel: str
    net: str
    rail: str
    volts: Span | None
    load: Span | None


@dataclass(frozen=True, slots=True)
class Input:
    """The input of an entry."""

    net: str
    rail: str
    volts: Span | None


@dataclass(frozen=True, slots=True)
class Headroom:
    """Further current [A] an entry can carry beyond its known load before it turns tight, then over.

    `bounded_by` says what ends it: "junction", "rated current" or "dropout".
    """

    tight: float
    over: float
    bounded_by: str


@dataclass(frozen=True, slots=True)
class Remedy:
    """Something that would help, with its numbers; never a promise.

    Attributes:
        kind: "greatest ambient", "greatest load", "θ needed", "heat sink", "series resistor", ...
        text: One sentence with numbers and units.
        numbers: The numbers by name, for the workbook.
    """

    kind: str
    text: str
    numbers: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Step:
    """One line of a trail, in the order of computation.

    Attributes:
        what: The quantity.
        formula: Formula with the numbers put in; "" for a number that was read.
        value: Value with its unit as text.
        source: Where it came from.
        grade: How far to trust it.
        corner: The corner it belongs to, "" where it is the same at all.
    """

    what: str
    formula: str
    value: str
    source: str
    grade: Grade
    corner: str = ""


@dataclass(frozen=True)
class Entry:
    """The thermal budget of one part.

    Attributes:
        key, ref, sheet, part, value: Identity; `part` is the part number or name it was recognised by.
        kind: Topology of its first channel.
        fitted: False for parts that are not populated; they get an entry without a verdict of their own.
        rule: Name of the rule, None for "looks like a regulator, no rule".
        package: Package family, None if not understood.
        input: Its input; None if none was found.
        outputs: Its outputs.
        nominal, worst: The nominal and the worst corner; None while something they need is missing.
        limit: Junction limit: the lower of data sheet and margin policy [°C].
        data_sheet_limit, policy_limit: The two kept apart [°C].
        tight_above: Junction above which the verdict is tight [°C].
        headroom: None where it cannot be computed.
        greatest_load: Load that would bring the junction just to the limit, with everything else at its
            worst; known even where the load is not [A].
        rated_load: The part's own rating [A].
        verdict: The word.
        missing: What is missing for closing the budget, one line each; what is known may be over all the same.
        grade: Worst grade of all evidence used.
        findings: What to look at.
        evidence: Every number used.
        steps: The trail.
        remedies: What would help.
        sensitivity: (name of the input, kelvin by which the junction falls with it at its nominal), largest first.
        chance: (chance of exceeding the limit, 5 % and 95 % junction) of the Monte-Carlo run, if asked for.
        live: What the workbook needs for live formulas: name → number at the worst corner.
    """

    key: str
    ref: str
    sheet: str
    part: str
    value: str
    kind: str
    fitted: bool
    rule: str | None
    package: str | None
    input: Input | None
    outputs: tuple[Output, ...]
    nominal: Corner | None
    worst: Corner | None
    limit: float | None
    data_sheet_limit: float | None
    policy_limit: float | None
    tight_above: float | None
    headroom: Headroom | None
    greatest_load: float | None
    rated_load: float | None
    verdict: Verdict
    missing: tuple[str, ...]
    grade: Grade
    findings: tuple[Finding, ...] = ()
    evidence: tuple[Evidence, ...] = ()
    steps: tuple[Step, ...] = ()
    remedies: tuple[Remedy, ...] = ()
    sensitivity: tuple[tuple[str, float], ...] = ()
    chance: tuple[float, float, float] | None = None
    live: Mapping[str, float] = field(default_factory=dict)

    @property
    def margin(self) -> float | None:
        """Limit less worst junction [K]; None if either is unknown."""
        if self.limit is None or self.worst is None or self.worst.junction is None:
            return None
        return self.limit - self.worst.junction

    @property
    def is_bound(self) -> bool:
        """Whether heat and junction are lower bounds, and the margin an upper one, for something is missing."""
        return bool(self.missing)


@dataclass(frozen=True)
class Ledger:
    """The result for one board.

    Attributes:
        board: Name of the project.
        inputs: Every file read, with its hash.
        settings: The settings in force as evidence, defaults included.
        entries: Worst first: over, open, tight, clear; within a verdict by margin, then by reference.
        rails: Rails in tree order: sources first.
        loads: Load of every rail, by name.
        gaps: All gaps.
        findings: All findings, heaviest first, entries' own included.
        not_understood: Findings' subjects that look like power parts but were not understood, one line each.
        complete: False when part of the drawing could not be read.
        names: Identity of every part → its value and sheet, for lists that name parts.
    """

    board: str
    inputs: tuple[InputFile, ...]
    settings: tuple[Evidence, ...]
    entries: tuple[Entry, ...]
    rails: tuple[Rail, ...]
    loads: Mapping[str, RailLoad]
    gaps: tuple[Gap, ...]
    findings: tuple[Finding, ...]
    not_understood: tuple[str, ...] = ()
    complete: bool = True
    names: Mapping[str, tuple[str, str]] = field(default_factory=dict)

    def count(self, verdict: Verdict) -> int:
        """How many fitted parts carry this verdict."""
        return sum(1 for entry in self.entries if entry.fitted and entry.verdict is verdict)
