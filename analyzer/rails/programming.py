"""What a part is programmed to by resistance from its SET pin to ground."""

from __future__ import annotations

from dataclasses import replace

from analyzer.evidence import Evidence, Grade
from analyzer.part import Channel
from analyzer.quantity import Span
from analyzer.rails.network import End, network_at
from analyzer.rails.power import Power
from analyzer.rails.wiring import Trace
from analyzer.rule import Role
from analyzer.settings import Settings
from analyzer.wording import show

NOT_PLAIN = "the network at the SET pin is not plain resistance to ground"


def set_resistance(power: Power, trace: Trace, settings: Settings) -> tuple[Evidence | None, tuple[str, ...]]:
    """Resistance [Ω] between the SET pin and ground, or why it is not known."""
    tap = power.mesh.groups.of(trace.channel.pins[Role.SET][0].net)
    network = network_at(power.mesh, tap, None, frozenset(), power.is_rail, trace.part.key)
    if network.trouble or network.trimmers or network.switches or len(network.legs_of(End.GROUND)) != len(network.legs):
        return None, network.trouble or (NOT_PLAIN,)
    parallel = [item for item in network.resistances if tap in (item.one, item.other)]
    if not parallel or len(parallel) != len(network.resistances):
        return None, (NOT_PLAIN,)
    span = Span(*(1 / sum(1 / item.span.corners[corner] for item in parallel) for corner in (0, 1, 2)))
    parents = () if all(item.tolerance_stated for item in parallel) else (settings.resistor_tolerance,)
    source = f"{trace.part.ref} SET resistor"
    return Evidence("programming resistance", span, "Ω", source, Grade.DERIVED, parents=parents), ()


def programmed(power: Power, trace: Trace, settings: Settings) -> tuple[Channel, tuple[str, ...]]:
    """The channel with the charge current that its resistor sets, charge_gain / R; and why that is not known."""
    channel = trace.channel
    gain = channel.figures.get("charge_gain")
    if gain is None or "charge_current" in channel.figures:
        return channel, ()
    if Role.SET not in channel.pins:
        return channel, ("charge current: no SET pin found for its resistor",)
    ohms, why = set_resistance(power, trace, settings)
    if ohms is None:
        return channel, why
    current = Evidence(
        "charge current",
        Span(gain.span.low / ohms.span.high, gain.span.nominal / ohms.span.nominal, gain.span.high / ohms.span.low),
        "A",
        ohms.source,
        Grade.DERIVED,
        f"{show(gain.span.nominal, 'V')} / {show(ohms.span.nominal, 'Ω')}",
        (gain, ohms),
    )
    return replace(channel, figures={**channel.figures, "charge_current": current}), ()
