"""Pulsed loads: exact with a Foster network, and without one on the safe side of what is known.

Without a transient impedance a pulse of up to 10 ms counts by its average, for packages take longer than 0.1 s to warm
(published SOT-223 network: Zth(10 ms) is 2 % of the steady value); a longer pulse counts as if it never ended.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from analyzer.findings import heat as kinds
from analyzer.findings.base import Finding
from analyzer.heat import transient
from analyzer.heat.case import Case, Worked, worst
from analyzer.heat.draft import Draft
from analyzer.load import Pulse, RailLoad
from analyzer.quantity import Span, total
from analyzer.wording import show

SHORT = 0.010
"""Longest pulse [s] that may count by its average without a transient impedance."""


@dataclass(frozen=True, slots=True)
class Pulsed:
    """The pulsed load of a channel's rail: steady draws besides, all pulses together."""

    rest: Span
    peak: Span
    on: float
    period: float | None


def pulsed_load(load: RailLoad | None, share: float = 1.0) -> Pulsed | None:
    """All pulses of a rail taken together: their peaks coincide, for the longest of their times; None without any."""
    pulses: list[tuple[Pulse, Span]] = [(d.pulse, d.amps.span) for d in load.draws if d.pulse] if load else []
    if load is None or not pulses:
        return None
    steady = total([draw.amps.span for draw in load.draws if not draw.pulse])
    rest = total([steady, *(pulse.rest for pulse, _ in pulses)]).scaled(share)
    peak = total([steady, *(pulse.peak for pulse, _ in pulses)]).scaled(share)
    periods = [pulse.period_seconds for pulse, _ in pulses if pulse.period_seconds]
    single = any(pulse.period_seconds is None for pulse, _ in pulses)
    on = max(pulse.on_seconds for pulse, _ in pulses)
    return Pulsed(rest, peak, on, None if single or not periods else max(on, min(periods)))


def with_pulses(draft: Draft, steady: Worked) -> tuple[Case, Worked, tuple[Finding, ...]]:
    """The case and its worst corner with the pulses of its first channel's load in it, and what to say of them."""
    pulsed = pulsed_load(draft.loads[0] if draft.loads else None)
    case = draft.case
    if pulsed is None or not case.channels or case.path is None:
        return case, steady, ()
    first, *rest = case.channels
    part = draft.part
    at_peak = replace(case, channels=(replace(first, load=pulsed.peak), *rest))
    shape = f"{show(pulsed.peak.high, 'A')} for {show(pulsed.on, 's')}"
    if pulsed.period:
        shape += f" every {show(pulsed.period, 's')}"
    if not case.path.foster:
        if pulsed.on <= SHORT and pulsed.period:
            message = f"{shape}: no transient impedance known, budgeted by its average (pulse up to 10 ms)"
            return case, steady, (kinds.PULSE_AS_DC.found(part.ref, message, key=part.key),)
        message = f"{shape}: no transient impedance known, budgeted as if the pulse never ended"
        return at_peak, worst(at_peak), (kinds.PULSE_AS_DC.found(part.ref, message, key=part.key),)
    base = worst(replace(case, channels=(replace(first, load=pulsed.rest), *rest)))
    peak = worst(at_peak)
    junction = _peak_junction(case, base, peak, pulsed)
    return at_peak, replace(peak, junction=junction), ()


def _peak_junction(case: Case, base: Worked, peak: Worked, pulsed: Pulsed) -> float | None:
    """The junction at the end of a pulse: the rest's steady rise and the pulses' rise through the network.

    Where the path's θ is larger than the network's end value the network is stretched to it: the safe side.
    """
    if case.path is None or base.junction is None or base.theta is None:
        return None
    network = case.path.foster
    stretch = max(1.0, base.theta / transient.steady(network))
    step = max(0.0, peak.watts - base.watts)
    if pulsed.period is None:
        rise = step * transient.impedance(network, pulsed.on)
    else:
        rise = transient.periodic_peak(network, step, pulsed.on, pulsed.period)
    return base.junction + stretch * rise
