"""What `heatledger.toml` states about single parts: [draws], [parts.REF], [[coupling]]."""

from __future__ import annotations

from collections.abc import Iterable

from analyzer.evidence import Evidence, Grade
from analyzer.grammar import parse_load
from analyzer.quantity import Dimension
from analyzer.rule import FIGURES, figure_limits
from analyzer.settings import Coupling, PartStatement, StatedDraw
from analyzer.settings_tables import COLDEST, HOTTEST, board_class
from analyzer.toml_table import Table, given

_D = Dimension


def draws(table: Table) -> tuple[StatedDraw, ...]:
    """[draws]: "REF", "REF@RAIL" or "@RAIL" → a current, or { watts = … }."""
    found = (stated_draw(table, key) for key in table.keys)
    return tuple(draw for draw in found if draw)


def stated_draw(table: Table, key: str) -> StatedDraw | None:
    """One stated draw."""
    ref, _, rail = key.partition("@")
    ref, rail = ref.strip(), rail.strip()
    if not ref and not rail:
        table.fault(key, "names neither a part nor a rail", 'Write "U3", "U3@RAIL" or "@RAIL".')
        return None
    if isinstance(table.raw(key), dict):
        return _power_or_current(table.table(key), ref, rail)
    return _current(table, key, ref, rail)


def _power_or_current(table: Table, ref: str, rail: str) -> StatedDraw | None:
    watts = table.evidence("watts", "power of the load", _D.POWER, 0)
    current = _current(table, "amps", ref, rail) if "amps" in table else None
    table.finish("amps")
    if ("watts" in table) == ("amps" in table):
        table.fault("watts", "state either watts or amps")
        return None
    return StatedDraw(ref, rail, watts=watts) if watts else current


def _current(table: Table, key: str, ref: str, rail: str) -> StatedDraw | None:
    text = table.text(key)
    if text is None:
        return None
    try:
        span, pulse = parse_load(text)
    except ValueError as error:
        table.fault(key, str(error))
        return None
    if span.low < 0 or (pulse and min(pulse.peak.low, pulse.rest.low) < 0):
        table.fault(key, f"'{text}' is a negative current", "State what the part takes, without a sign.")
        return None
    return StatedDraw(ref, rail, Evidence("load current", span, "A", table.source(key), Grade.STATED), pulse=pulse)


def parts(table: Table) -> dict[str, PartStatement]:
    """[parts.REF]: statements about single parts."""
    return {ref: part(table.table(ref)) for ref in table.keys}


def part(table: Table) -> PartStatement:
    """One [parts.REF] table."""
    theta = _D.THERMAL_RESISTANCE
    stated = {
        "rule": table.text("rule"),
        "identity": table.text("identity"),
        "package": table.text("package"),
        "vin": table.evidence("vin", "input voltage", _D.VOLTAGE, -2000, 2000),
        "vout": table.evidence("vout", "output voltage", _D.VOLTAGE, -2000, 2000),
        "theta_ja": table.evidence("theta_ja", "θJA", theta, 0, 2000, above=True),
        "board_class": board_class(table, "board_class"),
        "pour": table.evidence("pour", "copper area", _D.AREA, 0, 1),
        "vias": table.whole("vias", 1, 1000),
        "heat_sink": _heat_sink(table.table("heat_sink")) if "heat_sink" in table else None,
        "case_measured": table.evidence("case_measured", "case temperature", _D.TEMPERATURE, COLDEST, HOTTEST),
        "board_measured": table.evidence("board_measured", "board temperature", _D.TEMPERATURE, COLDEST, HOTTEST),
        "junction_max": table.evidence("junction_max", "junction limit", _D.TEMPERATURE, COLDEST, HOTTEST),
        "share": table.number("share", _D.RATIO, 0, 1),
        "is_regulator": table.boolean("is_regulator"),
    }
    named = {key: _figure(table, key) for key in FIGURES}
    table.finish("heat_sink")
    return PartStatement(**given(stated), figures={key: figure for key, figure in named.items() if figure})


def _figure(table: Table, key: str) -> Evidence | None:
    figure = FIGURES[key]
    if figure.dimension is Dimension.TEMPERATURE:
        return table.evidence(key, figure.meaning, figure.dimension, COLDEST, HOTTEST)
    low, high, above = figure_limits(key)
    return table.evidence(key, figure.meaning, figure.dimension, low, high, above=above)


def _heat_sink(table: Table) -> tuple[Evidence, Evidence, Evidence] | None:
    theta = _D.THERMAL_RESISTANCE
    chain = (
        table.evidence("theta_jc", "θJC", theta, 0, 2000),
        table.evidence("theta_cs", "θCS", theta, 0, 2000),
        table.evidence("theta_sa", "θSA", theta, 0, 2000, above=True),
    )
    for key in ("theta_jc", "theta_cs", "theta_sa"):
        if key not in table:
            table.fault(key, "is missing", "A heat-sink chain needs theta_jc, theta_cs and theta_sa.")
    table.finish()
    jc, cs, sa = chain
    return (jc, cs, sa) if jc and cs and sa else None


def coupling(entries: Iterable[Table]) -> tuple[Coupling, ...]:
    """[[coupling]]: kelvin at one part per watt in another."""
    found = []
    for entry in entries:
        ref, by = entry.required("ref"), entry.required("by")
        theta = entry.evidence("theta", "coupling resistance", _D.THERMAL_RESISTANCE, 0, 2000)
        distance = entry.evidence("distance", "distance of neighbours", _D.LENGTH, 0.0015, 1)
        if "theta" not in entry and "distance" not in entry:
            entry.fault("theta", "is missing", "Give theta, which counts, or distance, which only informs.")
        if ref and ref == by:
            entry.fault("by", f"{ref} cannot be its own neighbour")
        entry.finish()
        if ref and by and (theta or distance):
            found.append(Coupling(ref, by, theta, distance))
    return tuple(found)
