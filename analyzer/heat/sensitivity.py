"""Which input moves the junction most, each over its own span, the others at their worst."""

from __future__ import annotations

from dataclasses import replace

from analyzer.heat.case import Case, ChannelCase, worst
from analyzer.quantity import Span


def sensitivity(case: Case, hottest: float) -> tuple[tuple[str, float], ...]:
    """(name of the input, kelvin by which the junction falls with it at its nominal), largest first.

    Args:
        case: The case.
        hottest: Its worst junction [°C].
    """
    found = [(name, _junction(eased)) for name, eased in _eased(case)]
    moved = [(name, hottest - junction) for name, junction in found if junction is not None]
    return tuple(sorted(((name, kelvin) for name, kelvin in moved if kelvin > 0), key=lambda one: (-one[1], one[0])))


def _junction(case: Case) -> float | None:
    try:
        return worst(case).junction
    except ValueError:
        return None


def _eased(case: Case) -> list[tuple[str, Case]]:
    """The case with one input after another at its nominal; inputs without a span are left out."""
    found: list[tuple[str, Case]] = []
    if not case.ambient.is_exact:
        found.append(("ambient", replace(case, ambient=Span.exact(case.ambient.nominal))))
    if case.thin_air[0] != case.thin_air[1]:
        found.append(("altitude", replace(case, thin_air=(case.thin_air[0], case.thin_air[0]))))
    path = case.path
    if path is not None and not (path.solid.is_exact and path.air.is_exact):
        solid, air = Span.exact(path.solid.nominal), Span.exact(path.air.nominal)
        found.append(("θ", replace(case, path=replace(path, solid=solid, air=air))))
    for name, field in (("input voltage", "vin"), ("output voltage", "vout"), ("load", "load")):
        if any(not _span(one, field).is_exact for one in case.channels):
            found.append((name, _with_nominal(case, field)))
    return found


def _span(one: ChannelCase, field: str) -> Span:
    return {"vin": one.vin, "vout": one.vout, "load": one.load}[field]


def _with_nominal(case: Case, field: str) -> Case:
    channels = []
    for one in case.channels:
        exact = Span.exact(_span(one, field).nominal)
        vin, vout, load = one.vin, one.vout, one.load
        vin, vout, load = (
            exact if field == "vin" else vin,
            exact if field == "vout" else vout,
            exact if field == "load" else load,
        )
        channels.append(replace(one, vin=vin, vout=vout, load=load))
    return replace(case, channels=tuple(channels))
