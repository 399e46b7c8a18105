"""Discrete series regulators: a bipolar transistor whose base a Zener diode holds."""

from __future__ import annotations

import re
from collections.abc import Iterable

from analyzer.circuit import Component, plain_name
from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rails.kinds import Kind
from analyzer.rails.power import Power
from analyzer.rails.wiring import diode_end

BASE_EMITTER = Span(0.5, 0.7, 0.9)
"""Base-emitter drop of a silicon transistor under load (common practice) [V]."""
ZENER_TOLERANCE = 0.05
_VOLTS = re.compile(
    r"(?<!\d)(?P<whole>\d{1,2})V(?P<part>\d)?(?!\d)|(?<![\d.])(?P<plain>\d{1,2}(?:\.\d{1,2})?)\s*V(?![A-Z])"
)


def zener_volts(component: Component) -> float | None:
    """Zener voltage from a value such as "5V6", "BZX84C5V6" or "12V"; None if it states none."""
    found = _VOLTS.search(component.value.upper())
    if found is None:
        return None
    return float(found["plain"] or f"{found['whole']}.{found['part'] or '0'}")


def follower(power: Power, component: Component) -> tuple[str, str, Evidence | None] | None:
    """(source group, sink group, output voltage or None) of a transistor that follows its base into a supply.

    None if the part is no such thing: collector and emitter must both be supplies, and neither be ground.
    """
    of = power.mesh.groups.of
    ends = {plain_name(pin.name).upper(): of(pin.net) for pin in component.pins}
    collector, emitter, base = (ends.get(name) for name in ("C", "E", "B"))
    if collector is None or emitter is None or base is None or len({collector, emitter, base}) < 3:
        return None
    if {collector, emitter, base} & (power.ground | power.mesh.joined.pulsed):
        return None
    if base in power.rails or emitter not in power.rails:
        return None
    if collector not in power.rails and not power.is_entry(collector):
        return None
    return collector, emitter, _held_by_zener(power, component, base)


def _held_by_zener(power: Power, component: Component, base: str) -> Evidence | None:
    for diode in _clamps(power, base):
        groups = {diode_end(pin): power.mesh.groups.of(pin.net) for pin in diode.pins}
        volts = zener_volts(diode)
        if volts is None or groups.get("K") != base or groups.get("A") not in power.ground:
            continue
        held = Span.around(volts, ZENER_TOLERANCE)
        span = held - BASE_EMITTER
        if span.low <= 0:
            continue
        return Evidence(
            "output voltage",
            span,
            "V",
            f"{component.ref} follows {diode.ref} '{diode.value}'",
            Grade.PRESUMED,
            f"{volts:g} V ±5 % less {BASE_EMITTER.low:g} to {BASE_EMITTER.high:g} V",
            note="Zener tolerance and base-emitter drop presumed, common practice",
        )
    return None


def _clamps(power: Power, group: str) -> Iterable[Component]:
    for component, _ in power.mesh.pins(group):
        if power.mesh.joined.kinds[component.key] in (Kind.CLAMP, Kind.DIODE) and component.fitted:
            yield component
