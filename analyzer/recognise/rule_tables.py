"""Tables of rule files as frozen rules. Every fault of a file goes to the tables' common list."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise

from analyzer import limits
from analyzer.evidence import Evidence, Grade
from analyzer.grammar import parse
from analyzer.quantity import Dimension, Span
from analyzer.recognise.pattern import CODE_FORMS
from analyzer.rule import (
    FIGURES,
    BoardClass,
    ChannelRule,
    Curve,
    EfficiencyMap,
    LoadRule,
    PackageRule,
    Pattern,
    Role,
    Rule,
    SupplyRule,
    ThermalFigure,
    Topology,
    figure_limits,
)
from analyzer.settings_tables import COLDEST, HOTTEST
from analyzer.toml_table import Table

LETTERS = ("U", "IC", "VR", "PS", "REG", "A", "N", "M", "MOD", "T", "TR", "PWR")
"""Reference letters a regulator may have unless its rule says otherwise."""

DECODES = (*CODE_FORMS, "table", "adjustable")
FROM_MEMORY = "from memory, unverified"
SIGNS = {"positive": 1, "negative": -1}
THETAS = ("theta_ja", "theta_jc_top", "theta_jc_bottom", "psi_jt", "psi_jb")


class Source:
    """Where the figures of one entry come from, and how far to trust them."""

    def __init__(self, table: Table, file: str, entry: str, default: str = "", verified: bool = True) -> None:
        self.text = table.text("source") or default
        stated = table.boolean("verified")
        self.verified = verified if stated is None else stated and verified
        self.where = f"{file} [{entry}]"

    def evidence(self, quantity: str, span: Span, unit: str) -> Evidence:
        """A figure as evidence; figures from memory are presumed only."""
        grade = Grade.RULED if self.verified else Grade.PRESUMED
        source = f"{self.where}: {self.text}" if self.text else self.where
        return Evidence(quantity, span, unit, source, grade, note="" if self.verified else FROM_MEMORY)


def rule(table: Table, file: str, is_user: bool) -> Rule:
    """One [[rule]]."""
    name = table.required("name") or ""
    source = Source(table, file, name)
    patterns = _patterns(table)
    channels = _channels(table, source)
    thermal = tuple(found for entry in table.tables("thermal") if (found := _thermal(entry, file, name, source)))
    entry = Rule(
        name,
        source.where,
        is_user,
        patterns,
        tuple(maker.upper() for maker in table.texts("makers") or ()),
        tuple(table.texts("letters") or LETTERS),
        channels,
        thermal,
        table.texts("external") or (),
        source.verified,
        source.text,
    )
    table.text("note")
    table.finish(*FIGURES)
    return entry


def _patterns(table: Table) -> tuple[Pattern, ...]:
    found = []
    for entry in table.tables("match"):
        text = (entry.required("pattern") or "").upper().replace("{CODE}", "{code}").replace("{MAKER}", "{maker}")
        decode = entry.choice("decode", DECODES) or ""
        codes = entry.texts("codes") or ()
        codes_of = entry.table("table")
        volts = {
            code.upper(): span.nominal for code in codes_of.keys if (span := codes_of.quantity(code, Dimension.VOLTAGE))
        }
        entry.finish()
        if len(text) > limits.PATTERN_LENGTH:
            entry.fault("pattern", f"is longer than {limits.PATTERN_LENGTH} characters")
        elif text and not text.replace("*", "").replace("?", "").replace("{code}", "").replace("{maker}", ""):
            entry.fault("pattern", "matches every name", "Write at least one letter or digit of the part's name.")
        elif text.count("{code}") > 1 or "{maker}" in text[1:]:
            entry.fault("pattern", "may hold {code} once, and {maker} only at its start")
        elif "{code}" in text and decode in ("", "adjustable"):
            entry.fault("decode", "is missing: how does {code} read?", f"Choose one of: {', '.join(DECODES)}.")
        elif decode == "table" and not volts:
            entry.fault("table", "is missing", 'Write it as table = { A = "3.3 V", B = "5 V" }.')
        else:
            found.append(Pattern(text, decode, volts, codes))
    if not found and not table.faults:
        table.fault("match", "is missing", 'Write match = [{ pattern = "QX1234*" }].')
    return tuple(found)


def _channels(table: Table, source: Source) -> tuple[ChannelRule, ...]:
    """The rule's own figures hold for all channels; a [[rule.channel]] adds to or replaces them."""
    base = _channel(table, source, None)
    entries = table.tables("channel")
    if not entries:
        return (base,)
    found = tuple(_channel(entry, source, base) for entry in entries)
    for entry in entries:
        entry.finish(*FIGURES)
    return found


def _channel(table: Table, source: Source, base: ChannelRule | None) -> ChannelRule:
    kind = table.choice("kind", [topology.value for topology in Topology])
    sign = table.choice("sign", SIGNS)
    across = table.choice("reference_across", ("lower", "upper"))
    if kind is None and base is None:
        table.fault("kind", "is missing", f"Choose one of: {', '.join(topology.value for topology in Topology)}.")
    figures, curves = _figures(table, source)
    pins_table = table.table("pins")
    pins = {Role(role): names for role in pins_table.keys if role in set(Role) and (names := pins_table.texts(role))}
    pins_table.finish(*(role.value for role in Role))
    span = table.quantity("volts", Dimension.VOLTAGE)
    volts = source.evidence("output voltage", span, "V") if span else None
    mapped = _efficiency_map(table, source)
    topology = Topology(kind) if kind else base.topology if base else Topology.LINEAR
    inherited = base or ChannelRule("", topology, 1, {})
    return ChannelRule(
        (table.text("name") or "") if base else "",
        topology,
        SIGNS[sign] if sign else inherited.sign,
        {**inherited.pins, **pins},
        across or inherited.reference_across,
        volts or inherited.volts,
        {**inherited.figures, **figures},
        {**inherited.curves, **curves},
        mapped or inherited.efficiency_map,
    )


def _figures(table: Table, source: Source) -> tuple[dict[str, Evidence], dict[str, Curve]]:
    figures: dict[str, Evidence] = {}
    curves: dict[str, Curve] = {}
    for key in (key for key in FIGURES if key in table):
        figure = FIGURES[key]
        name = key.replace("_", " ")
        low, high, above = (
            (COLDEST, HOTTEST, False) if figure.dimension is Dimension.TEMPERATURE else figure_limits(key)
        )
        if figure.may_be_curve and isinstance(table.raw(key), list):
            points = _points(table, key, Dimension.CURRENT, figure.dimension, (low, high, above))
            if points:
                hull = Span.hull(*(span for _, span in points))
                curves[key] = Curve(points, "load", source.evidence(f"{name} over load", hull, figure.dimension.value))
        elif (span := table.quantity(key, figure.dimension, low, high, above=above)) is not None:
            figures[key] = source.evidence(name, span, figure.dimension.value)
    return figures, curves


def _points(
    table: Table, key: str, across: Dimension, up: Dimension, limits: tuple[float, float, bool]
) -> tuple[tuple[float, Span], ...]:
    """A table of [x, value] rows with rising x from 0 on, the values inside (least, greatest, least excluded)."""
    rows = table.raw(key)
    found: list[tuple[float, Span]] = []
    for row in rows if isinstance(rows, list) else []:
        if not isinstance(row, list) or len(row) != 2 or not all(isinstance(cell, str) for cell in row):
            table.fault(key, 'must be rows of two texts, as [["100 mA", "5 mA"], ["1 A", "30 mA"]]')
            return ()
        try:
            found.append((parse(row[0], across).nominal, parse(row[1], up)))
        except ValueError as error:
            table.fault(key, str(error))
            return ()
    if len(found) < 2 or found[0][0] < 0 or any(b[0] <= a[0] for a, b in pairwise(found)):
        table.fault(key, "needs at least two rows, the first column rising")
        return ()
    low, high, above = limits
    if any(span.low < low or span.high > high or (above and span.low == low) for _, span in found):
        table.fault(key, "has a value outside the possible", "Check the numbers against the data sheet.")
        return ()
    return tuple(found)


def _efficiency_map(table: Table, source: Source) -> EfficiencyMap | None:
    rows = table.raw("efficiency_map")
    if rows is None:
        return None
    points: list[tuple[float, float, Span]] = []
    for row in rows if isinstance(rows, list) else [None]:
        if not isinstance(row, list) or len(row) != 3 or not all(isinstance(cell, str) for cell in row):
            table.fault("efficiency_map", 'must be rows of three texts, as ["1 A", "12 V", "88 %"]')
            return None
        try:
            load, vin = parse(row[0], Dimension.CURRENT).nominal, parse(row[1], Dimension.VOLTAGE).nominal
            points.append((load, vin, parse(row[2], Dimension.RATIO)))
            low, high, _ = figure_limits("efficiency")
            if load < 0 or not low < points[-1][2].low <= points[-1][2].high <= high:
                raise ValueError(f"'{row[2]}' at '{row[0]}' is no efficiency at a load")
        except ValueError as error:
            table.fault("efficiency_map", str(error))
            return None
    points.sort(key=lambda point: point[:2])
    grid = {(load, vin) for load, vin, _ in points}
    if len(grid) != len({x for x, _ in grid}) * len({y for _, y in grid}) or len(grid) != len(points):
        table.fault("efficiency_map", "must give every load at every input voltage once")
        return None
    hull = Span.hull(*(span for _, _, span in points))
    return EfficiencyMap(tuple(points), source.evidence("efficiency over load and input voltage", hull, "1"))


def _thermal(table: Table, file: str, name: str, above: Source) -> ThermalFigure | None:
    package = table.required("package")
    source = Source(table, file, name, above.text, above.verified)
    theta = Dimension.THERMAL_RESISTANCE
    thetas: dict[str, Evidence] = {}
    for key in THETAS:
        # nothing is cooled without resistance; ψ may come near to none
        span = table.quantity(key, theta, 0, 2000, above=key.startswith("theta"))
        if span is not None:
            symbol = key.replace("theta_", "θ").replace("psi_", "ψ").replace("_", " ")
            thetas[key] = source.evidence(symbol.upper().replace("Θ", "θ").replace("Ψ", "ψ"), span, theta.value)
    board = table.choice("board", [one.value for one in BoardClass])
    curves = {}
    for key, across, axis in (("copper", Dimension.AREA, "copper"), ("air", Dimension.SPEED, "air")):
        if table.raw(key) is not None and (points := _points(table, key, across, theta, (0, 2000, True))):
            hull = Span.hull(*(span for _, span in points))
            curves[key] = Curve(points, axis, source.evidence(f"θJA over {axis}", hull, theta.value))
    foster = _foster(table)
    table.text("note")
    table.finish()
    if package is None:
        return None
    return ThermalFigure(
        package,
        source.text,
        source.verified,
        board=BoardClass(board) if board else None,
        copper=curves.get("copper"),
        air=curves.get("air"),
        foster=foster,
        **thetas,
    )


def _foster(table: Table) -> tuple[tuple[float, float], ...]:
    rows = table.raw("foster")
    found = []
    for row in rows if isinstance(rows, list) else []:
        if not isinstance(row, list) or len(row) != 2 or not all(isinstance(cell, str) for cell in row):
            table.fault("foster", 'must be rows of two texts, as [["0.8 K/W", "48 us"]]')
            return ()
        try:
            found.append((parse(row[0], Dimension.THERMAL_RESISTANCE).nominal, parse(row[1], Dimension.TIME).nominal))
        except ValueError as error:
            table.fault("foster", str(error))
            return ()
        if found[-1][0] <= 0 or found[-1][1] <= 0:
            table.fault("foster", f"{row[0]}, {row[1]} is no stage", "Each needs a resistance and a time above 0.")
            return ()
    return tuple(found)


def load_rule(table: Table, file: str, is_user: bool) -> LoadRule:
    """One [[load]]: supply currents of a part that is no regulator."""
    name = table.required("name") or ""
    source = Source(table, file, name)
    patterns = _patterns(table)
    supplies = table.table("supplies")
    found = tuple(
        (pin.upper(), source.evidence(f"supply current at {pin}", span, "A"))
        for pin in supplies.keys
        if (span := supplies.quantity(pin, Dimension.CURRENT, 0))
    )
    supplies.finish()
    table.finish()
    return LoadRule(name, source.where, is_user, patterns, found)


def supply_rule(table: Table, file: str) -> SupplyRule | None:
    """One [[supply]]: a supply that a standard defines."""
    name = table.required("name") or ""
    source = Source(table, file, name)
    span = table.quantity("volts", Dimension.VOLTAGE)
    nets = tuple(net.upper() for net in table.texts("nets") or ()) if table.raw("nets") else ()
    table.text("note")
    table.finish()
    if span is None:
        table.fault("volts", "is missing")
        return None
    return SupplyRule(name, nets, source.evidence(f"supply {name}", span, "V"))


def package_rule(table: Table, file: str) -> PackageRule:
    """One [[package]]: a package family with its generic θJA by board class."""
    family = table.required("name") or ""
    source = Source(table, file, family)
    spellings = tuple(text.upper() for text in table.texts("footprints") or ())
    thetas = table.table("theta_ja")
    theta: Mapping[BoardClass, Evidence] = {
        board: source.evidence(f"θJA of {family} (generic)", span, "K/W")
        for board in BoardClass
        if (span := thetas.quantity(board.value, Dimension.THERMAL_RESISTANCE, 0, 2000, above=True))
    }
    thetas.finish()
    note = table.text("note") or ""
    table.finish()
    return PackageRule(family, spellings, theta, note)
