"""Charge pumps: as lossy as a linear regulator from n times the input voltage.

Source: TI LT1054 data sheet SLVS033G p. 15: P = (Vcc − |Vout|) · Iout + Vcc · Iout · 0.2.
"""

from __future__ import annotations

from analyzer.losses.base import End, Figures, Loss, LossModel, Point, amps, lacking, volts
from analyzer.rail import Wiring


def pump_heat(vin: float, vout: float, iout: float, gain: float, own_current: float) -> float:
    """Heat [W] of a charge pump: (n · Vin − |Vout|) · Iout + Vin · Iown.

    Args:
        vin: Input voltage [V].
        vout: Magnitude of the output voltage [V], at most gain · vin.
        iout: Load [A].
        gain: n: 2 for a doubler, 1 for an inverter.
        own_current: Current of the pump itself: quiescent and drive [A].
    """
    if min(vin, vout, iout, gain, own_current) < 0 or vout > gain * vin:
        raise ValueError(f"needs n · Vin ≥ |Vout| and no negative magnitude: {gain:g} · {vin:g} and {vout:g}")
    return (gain * vin - vout) * iout + vin * own_current


def build(wiring: Wiring) -> LossModel:
    """Model of a charge pump."""
    figures = Figures(wiring.channel)
    lacks = [] if figures.has("gain") else ["gain (2 doubles, 1 inverts)"]
    if not figures.has("quiescent") and not figures.has("drive_fraction"):
        lacks.append("quiescent current")
    channel = wiring.channel
    regulates = channel.volts is not None or channel.reference is not None
    if not regulates and not figures.has("output_resistance"):
        # its no-load output would hide all of its transfer loss
        lacks.append("output resistance (the pump does not regulate)")
    if lacks:
        return lacking(*lacks)

    def at(point: Point, end: End) -> Loss:
        gain = figures.high("gain", end)
        drive = figures.high("drive_fraction", end, default=0.0)
        own = figures.high("quiescent", end, default=0.0) + drive * point.iout
        sag = point.iout * figures.high("output_resistance", end, default=0.0)
        # without regulation the output is what the input and the load leave, whatever it was named or found to be
        left = max(0.0, gain * point.vin - sag)
        vout = min(point.vout, left) if regulates else left
        return Loss(
            pump_heat(point.vin, vout, point.iout, gain, own),
            gain * point.iout + own,
            terms=(("transfer", (gain * point.vin - vout) * point.iout), ("own current", point.vin * own)),
            formula=lambda: (
                f"({gain:g} · {volts(point.vin)} − {volts(vout)}) · {amps(point.iout)}"
                f" + {volts(point.vin)} · {amps(own)}"
            ),
            regulating=not regulates or gain * point.vin - sag >= point.vout,
        )

    return LossModel(
        at, figures.used("gain", "quiescent", "drive_fraction", "output_resistance"), iin_needs_voltages=False
    )
