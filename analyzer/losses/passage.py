"""What passes current: load switches, eFuses, ideal diodes, power multiplexers, diodes and pass transistors.

Source of I²·Ron with the hot figure: TI TPS22968 data sheet section 10.2.2.3, TI TPS2062-1 SLVS714B.
"""

from __future__ import annotations

import math

from analyzer.losses.base import REFERENCE_CELSIUS, End, Figures, Loss, LossModel, Point, amps, lacking, volts
from analyzer.rail import Wiring
from analyzer.rule import Topology
from analyzer.wording import show

_SAME_VOLTS = 0.1
"""Fraction by which the nominal voltages on both sides of a switch that is on may differ by tolerances of names."""


def switch_heat(current: float, resistance: float, channels: float = 1.0) -> float:
    """Heat [W] of `channels` equal switches that share `current` [A] equally: I² · R / n."""
    if resistance < 0 or channels < 1:
        raise ValueError("needs a resistance ≥ 0 and at least one channel")
    return current * current * resistance / channels


def build_switch(wiring: Wiring) -> LossModel:
    """Model of a part known by its on-resistance or, for regulated drops, its forward drop."""
    figures = Figures(wiring.channel)
    if figures.has("forward_drop") and not figures.has("on_resistance"):
        return build_diode(wiring)
    if not figures.has("on_resistance"):
        return lacking("on-resistance or forward drop")
    is_pass_element = stands_apart(wiring)

    def at(point: Point, end: End) -> Loss:
        resistance = figures.high("on_resistance", end) * figures.hot(end, point.junction)
        channels = figures.low("pass_channels", End.NOMINAL, default=1.0)
        own = figures.high("quiescent", end, default=0.0)
        passed = switch_heat(point.iout, resistance, channels)
        shared = f" / {channels:g}" if channels != 1 else ""
        drop = figures.high("forward_drop", end, point.iout, default=0.0)
        if is_pass_element:
            drop = max(drop, point.vin - point.vout, 0.0)
        if drop * point.iout > passed:
            # an ideal diode holds its drop at light load; a pass transistor takes what input and output differ by
            passed = drop * point.iout
            return Loss(
                passed + point.vin * own,
                point.iout + own,
                terms=(("drop", passed), ("quiescent", point.vin * own)),
                formula=lambda: f"{volts(drop)} · {amps(point.iout)} + {volts(point.vin)} · {amps(own)}",
            )
        return Loss(
            passed + point.vin * own,
            point.iout + own,
            terms=(("on-resistance", passed), ("quiescent", point.vin * own)),
            formula=lambda: (
                f"({amps(point.iout)})² · {show(resistance, 'Ω')}{shared} + {volts(point.vin)} · {amps(own)}"
            ),
        )

    used = figures.used("on_resistance", "resistance_tempco", "pass_channels", "quiescent", "forward_drop")
    notes = () if figures.has("quiescent") else ("quiescent current not given: taken as nothing beside the load",)
    return LossModel(
        at,
        used,
        notes=notes,
        loads=figures.knots("forward_drop"),
        iin_needs_voltages=False,
        heats=figures.has("resistance_tempco"),
    )


def stands_apart(wiring: Wiring) -> bool:
    """Whether a series transistor works as a pass element: its output is nominally not its input.

    The spans may overlap all the same: a 12 V input may fall to 5 V, where a 5 V output is all it leaves.
    """
    if wiring.channel.topology is not Topology.SERIES_TRANSISTOR or wiring.vin is None or wiring.vout is None:
        return False
    vin, vout = abs(wiring.vin.span.nominal), abs(wiring.vout.span.nominal)
    drop = wiring.channel.figures.get("forward_drop")
    return vin - (drop.span.nominal if drop else 0.0) > vout * (1 + _SAME_VOLTS)


def build_diode(wiring: Wiring) -> LossModel:
    """Model of a series diode: Vf · I. A drop that falls with temperature is not credited above 25 °C.

    Where another source can feed its output, it may have to block that whole voltage: with a leakage given, the
    heat of that counts where it is the greater, and may run away.
    """
    figures = Figures(wiring.channel)
    if not figures.has("forward_drop"):
        return lacking("forward drop")

    def at(point: Point, end: End) -> Loss:
        tempco = figures.high("forward_drop_tempco", end, default=0.0)
        hot = max(1.0, 1.0 + tempco * (point.junction - REFERENCE_CELSIUS))
        drop = figures.high("forward_drop", end, point.iout) * hot
        own = figures.high("quiescent", end, default=0.0)
        found = Loss(
            drop * point.iout + point.vin * own,
            point.iout + own,
            terms=(("forward drop", drop * point.iout), ("quiescent", point.vin * own)),
            formula=lambda: (
                f"{volts(drop)} · {amps(point.iout)}" + (f" + {volts(point.vin)} · {amps(own)}" * (own > 0))
            ),
        )
        if not blocks:
            return found
        leakage = figures.high("reverse_leakage", end)
        blocked = leakage_heat(point.vout, leakage, point.junction)
        if blocked <= found.watts:
            return found
        return Loss(
            blocked,
            found.iin,
            terms=(("reverse leakage", blocked),),
            formula=lambda: (
                f"{volts(point.vout)} · {amps(leakage)} · 2^(({point.junction:.1f} − 25)/10) while it blocks"
            ),
        )

    blocks = wiring.has_other_feed and figures.has("reverse_leakage")
    used = figures.used("forward_drop", "forward_drop_tempco", "quiescent", *(["reverse_leakage"] if blocks else []))
    notes = ("another source can feed its output: leakage is taken to double every 10 K (from memory)",) * blocks
    heats = blocks or figures.has("forward_drop_tempco")
    return LossModel(at, used, notes=notes, loads=figures.knots("forward_drop"), iin_needs_voltages=False, heats=heats)


def leakage_heat(reverse: float, leakage_cold: float, junction: float, doubling: float = 10.0) -> float:
    """Heat [W] of a diode in reverse: Vr · Ir, Ir doubling every `doubling` kelvin above 25 °C.

    The 10 K are common practice for Schottky diodes (from memory).
    """
    if reverse < 0 or leakage_cold < 0 or doubling <= 0:
        raise ValueError("needs magnitudes, and a positive doubling step")
    return reverse * leakage_cold * math.pow(2.0, (junction - REFERENCE_CELSIUS) / doubling)
