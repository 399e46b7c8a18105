"""One regulator between two rails, put together by hand, for the tests of the thermal budget."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

from plain_figures import plain

from analyzer.circuit import Circuit, Component, Place
from analyzer.evidence import Evidence, Grade
from analyzer.findings.base import Finding
from analyzer.heat import close_entries
from analyzer.ledger import Entry
from analyzer.load import Draw, Gap, Loads, Pulse, RailLoad
from analyzer.part import Channel, Package, Part
from analyzer.quantity import Span, total
from analyzer.rail import Feed, Outside, Rail, Rails, Wiring
from analyzer.rule import (
    LINEARS,
    BoardClass,
    ChannelRule,
    Curve,
    EfficiencyMap,
    PackageRule,
    Rule,
    Rulebook,
    ThermalFigure,
    Topology,
)
from analyzer.settings import Board, PartStatement, Settings, Site


def number(value: float | Span, unit: str, quantity: str = "test", grade: Grade = Grade.RULED) -> Evidence:
    span = value if isinstance(value, Span) else Span.exact(value)
    return Evidence(quantity, span, unit, "test", grade)


UNITS = {
    "quiescent": "A",
    "dropout": "V",
    "junction_max": "°C",
    "junction_absolute_max": "°C",
    "input_max": "V",
    "input_absolute_max": "V",
    "output_current_max": "A",
    "efficiency": "1",
    "on_resistance": "Ω",
}


FIVE, THREE, TENTH = Span.exact(5.0), Span.exact(3.3), Span.exact(0.1)


@dataclass(frozen=True)
class Bench:
    """A regulator on the bench: change a field with `replace`, then `.entry()`."""

    topology: Topology = Topology.LINEAR
    vin: Span | None = FIVE
    vout: Span | None = THREE
    vin_grade: Grade = Grade.RULED
    draws: tuple[tuple[Span, Pulse | None], ...] = ((TENTH, None),)
    gaps: int = 0
    has_load: bool = True
    dropout_unknown: bool = False
    figures: dict[str, float | Span] = field(default_factory=lambda: {"quiescent": 0.0, "junction_max": 125.0})
    curves: dict[str, Curve] = field(default_factory=dict)
    efficiency_map: EfficiencyMap | None = None
    thermal: tuple[ThermalFigure, ...] | None = None
    theta: float | Span | None = 50.0
    theta_class: BoardClass | None = BoardClass.HIGH
    package: str | None = "SOT-223"
    packages: tuple[PackageRule, ...] = ()
    has_rule: bool = True
    fitted: bool = True
    complete: bool = True
    is_off: bool = False
    why_open: tuple[str, ...] = ()
    outside: tuple[Outside, ...] = ()
    known: tuple[Finding, ...] = ()
    site: Site = field(default_factory=Site)
    board: Board = field(default_factory=lambda: Board(board_class=BoardClass.HIGH, source="test"))
    statement: PartStatement = field(default_factory=PartStatement)
    settings: Settings = field(default_factory=Settings)
    ref: str = "U1"
    seed: int | None = None

    def but(self, **changes: object) -> Bench:
        return replace(self, **changes)  # type: ignore[arg-type]

    def with_figures(self, **figures: float | Span) -> Bench:
        return replace(self, figures={**self.figures, **figures})

    def in_air(self, ambient: float | Span = 40.0, altitude: float | Span = 0.0, rise: float = 0.0) -> Bench:
        site = replace(
            self.site,
            ambient=number(ambient, "°C"),
            altitude=number(altitude, "m"),
            enclosure_rise=number(rise, "K"),
        )
        return replace(self, site=site)

    def parts(self) -> tuple[Part, Wiring, RailLoad | None]:
        component = Component(
            f"/{self.ref}", self.ref, "REG", "Regs:Reg", "", {}, "", "", (), Place("b.kicad_sch"), self.fitted
        )
        given = {**plain(self.topology, self.figures, self.curves, self.efficiency_map), **self.figures}
        if self.topology in LINEARS and not self.dropout_unknown and "dropout" not in self.curves:
            given = {"dropout": 0.0, **given}
        figures = {key: number(value, UNITS.get(key, "1"), key) for key, value in given.items()}
        channel = Channel(
            "", self.topology, 1, {}, figures=figures, curves=self.curves, efficiency_map=self.efficiency_map
        )
        rule = (
            Rule("reg", "test", True, (), (), (), (ChannelRule("", self.topology, 1, {}),)) if self.has_rule else None
        )
        thermal = self.thermal
        if thermal is None:
            thermal = ()
            if self.theta is not None:
                theta = number(self.theta, "K/W", "θJA")
                thermal = (ThermalFigure(self.package or "", "test", theta_ja=theta, board=self.theta_class),)
        part = Part(
            component, "rule", rule, "Value", "REG", Package(self.package, ""), (channel,), thermal, "test rule"
        )
        wiring = Wiring(
            part,
            channel,
            f"IN_{self.ref}",
            f"IN_{self.ref}",
            f"OUT_{self.ref}",
            f"OUT_{self.ref}",
            "GND",
            vin=None if self.vin is None else number(self.vin, "V", "input voltage", self.vin_grade),
            vout=None if self.vout is None else number(self.vout, "V", "output voltage"),
            is_off=self.is_off,
            why_open=self.why_open,
            outside=self.outside,
        )
        load = None
        if self.has_load:
            drawn = tuple(
                Draw(f"D{n}", f"/D{n}", f"OUT_{self.ref}", number(span, "A"), "stated", pulse)
                for n, (span, pulse) in enumerate(self.draws)
            )
            gaps = tuple(Gap(f"X{n}", f"/X{n}", f"OUT_{self.ref}", "?", "/") for n in range(self.gaps))
            load = RailLoad(f"OUT_{self.ref}", drawn, gaps, total([draw.amps.span for draw in drawn]))
        return part, wiring, load

    def entry(self) -> Entry:
        return close((self,), replace(self.settings, site=self.site, board=self.board))[0]


def close(benches: tuple[Bench, ...], settings: Settings) -> tuple[Entry, ...]:
    built = [(bench, *bench.parts()) for bench in benches]
    rails = Rails(
        tuple(Rail(wiring.output_rail or "", (), feeds=(Feed(part.ref, "regulator"),)) for _, part, wiring, _ in built),
        tuple(wiring for _, _, wiring, _ in built),
    )
    loads = Loads({load.rail: load for *_, load in built if load is not None})
    circuit = Circuit("test", (), (), complete=all(bench.complete for bench in benches))
    book = Rulebook((), (), (), benches[0].packages)
    statements = {bench.ref: bench.statement for bench in benches}
    settings = replace(settings, parts=statements)
    known = tuple(finding for bench in benches for finding in bench.known)
    parts = tuple(part for _, part, _, _ in built)
    return close_entries(circuit, parts, rails, loads, book, settings, known=known, chance_seed=benches[0].seed)


def names(entry: Entry) -> set[str]:
    return {finding.name for finding in entry.findings}
