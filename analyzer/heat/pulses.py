"""Pulsed loads: exact with a Foster network, and without one on the safe side of what is known.

Without a transient impedance a pulse longer than 10 ms counts as if it never ended. A shorter one that repeats counts
by its average heat (not by its average current: I² losses are made by the peaks) plus a tenth of the step from average
to peak, as if Zth(10 ms) were 10 % of θ. A die of 0.3 mm² on an infinite block of silicon reaches
2·√t/(A·√(π·k·ρ·c)) = 24 K/W in 10 ms (half-space under constant flux), a tenth of its package's 250 K/W; the published
SOT-223 network has 2 %.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from analyzer.findings import heat as kinds
from analyzer.findings.base import Finding
from analyzer.heat import transient
from analyzer.heat.case import Case, ChannelCase, Worked, worst
from analyzer.load import RailLoad
from analyzer.quantity import Span, total
from analyzer.wording import show

SHORT = 0.010
"""Longest pulse [s] that may count by its average heat without a transient impedance."""

SHORT_SHARE = 0.10
"""Share of θ that such a pulse is taken to reach within itself."""


@dataclass(frozen=True, slots=True)
class Pulsed:
    """Loads of a channel's rail while nothing pulses and while everything does, the longest pulse, shortest period."""

    rest: Span
    peak: Span
    on: float
    period: float | None

    @property
    def between(self) -> Span:
        """Any load from the least at rest to all peaks together."""
        return Span(min(self.rest.low, self.peak.low), self.peak.nominal, max(self.rest.high, self.peak.high))


def pulsed_load(load: RailLoad | None, share: float = 1.0) -> Pulsed | None:
    """All pulses of a rail taken together: their peaks coincide, for the longest of their times; None without any.

    A single pulse beside repeating ones is taken to repeat with them.
    """
    pulses = [draw.pulse for draw in load.draws if draw.pulse] if load else []
    if load is None or not pulses:
        return None
    steady = [draw.amps.span for draw in load.draws if not draw.pulse]
    rest = total([*steady, *(pulse.rest for pulse in pulses)]).scaled(share)
    peak = total([*steady, *(pulse.peak for pulse in pulses)]).scaled(share)
    on = max(pulse.on_seconds for pulse in pulses)
    period = min((pulse.period_seconds for pulse in pulses if pulse.period_seconds is not None), default=None)
    return Pulsed(rest, peak, on, None if period is None else max(on, period))


@dataclass(frozen=True, slots=True)
class Swing:
    """A case at rest and while it pulses, with the longest pulse and the shortest period of all its channels.

    Pulses need not meet, so while they come the load is anything between rest and all peaks together: the heat of
    a shunt, or of a converter whose efficiency is tabled, may be greatest in between or at rest.
    """

    rest: Case
    peak: Case
    on: float
    period: float | None


def swing_of(case: Case) -> Swing | None:
    """The two states of a case with pulsed loads; None if no load pulses."""
    loads = [None if one.model.own_load is not None else pulsed_load(one.rail, one.share) for one in case.channels]
    pulsed = [load for load in loads if load is not None]
    if not pulsed:
        return None

    def state(pick: str) -> Case:
        channels: list[ChannelCase] = []
        for one, load in zip(case.channels, loads, strict=True):
            channels.append(one if load is None else replace(one, load=load.between if pick == "peak" else load.rest))
        return replace(case, channels=tuple(channels))

    on = max(load.on for load in pulsed)
    period = min((load.period for load in pulsed if load.period is not None), default=None)
    return Swing(state("rest"), state("peak"), on, None if period is None else max(on, period))


def worked_swing(swing: Swing, ref: str, key: str) -> tuple[Worked, tuple[Finding, ...]]:
    """The worst corner of a pulsed case, its junction at the end of a pulse, and what to say of it."""
    peak = worst(swing.peak)
    path = swing.peak.path
    if path is None or peak.theta is None or peak.runs_away:
        return peak, ()
    shape = f"pulses of {show(swing.on, 's')}" + (f" every {show(swing.period, 's')}" if swing.period else "")
    base = worst(swing.rest)
    if path.foster and base.junction is not None and base.theta is not None:
        return replace(peak, junction=_through_network(path.foster, base, peak, swing)), ()
    if swing.on > SHORT or swing.period is None or path.measured is not None or path.sink is not None:
        # the tenth is about θJA; above a measured case or a heat sink most of θ is what 10 ms can reach
        message = f"{shape}: no transient impedance known, budgeted as if the pulse never ended"
        return peak, (kinds.PULSE_AS_DC.found(ref, message, key=key),)
    duty = swing.on / swing.period
    average = base.watts + duty * (peak.watts - base.watts)
    counted = average + SHORT_SHARE * max(0.0, peak.watts - average)
    counted = max(counted, base.watts)
    # the losses are the peak's at the peak's own junction: hotter than any that occurs, so the safe side
    theta = max(peak.theta, base.theta or 0.0)
    message = (
        f"{shape}: no transient impedance known, budgeted by {show(average, 'W')} on average and a tenth of the step"
    )
    worked = replace(peak, watts=counted, theta=theta, junction=peak.ambient + theta * counted)
    return worked, (kinds.PULSE_AS_DC.found(ref, message, key=key),)


def _through_network(network: transient.Foster, base: Worked, peak: Worked, swing: Swing) -> float:
    """The junction at the end of a pulse: the rest's steady rise and the pulses' rise through the network.

    Where the path's θ is larger than the network's end value the network is stretched to it: the safe side.
    """
    theta = max(base.theta or 0.0, peak.theta or 0.0)
    stretch = max(1.0, theta / transient.steady(network))
    step = max(0.0, peak.watts - base.watts)
    if swing.period is None:
        rise = step * transient.impedance(network, swing.on)
    else:
        rise = transient.periodic_peak(network, step, swing.on, swing.period)
    return (base.junction or base.ambient) + stretch * rise
