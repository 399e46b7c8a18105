"""Linear battery chargers: hottest with an empty battery at full charge current.

What hangs on the battery pin is inside the charge current, which the part regulates as a sum. A power path that feeds
the system past it is a channel of its own in the rule, of kind load-switch or ideal-diode.
"""

from __future__ import annotations

from analyzer.evidence import Evidence
from analyzer.losses.base import End, Figures, Loss, LossModel, Point, amps, lacking, volts
from analyzer.rail import Wiring


def charger_heat(vin: float, vbattery: float, charge: float, quiescent: float = 0.0) -> float:
    """Heat [W] of a linear charger: (Vin − Vbat) · Icharge + Vin · Iq."""
    if min(vbattery, charge, quiescent) < 0 or vin < vbattery:
        raise ValueError("needs Vin ≥ Vbat and no negative current")
    return (vin - vbattery) * charge + vin * quiescent


def charge_current(wiring: Wiring) -> Evidence | None:
    """The charge current the part sets itself, where a rule or the wiring tells it."""
    return wiring.channel.figures.get("charge_current")


def build(wiring: Wiring) -> LossModel:
    """Model of a linear charger: the battery voltage is its lowest, at which full current starts."""
    figures = Figures(wiring.channel)
    current = charge_current(wiring)
    lacks = [] if current is not None else ["charge current"]
    if not figures.has("battery_low"):
        lacks.append("battery voltage at which full charge current starts")
    if lacks or current is None:
        return lacking(*lacks)

    def at(point: Point, end: End) -> Loss:
        battery = min(figures.low("battery_low", end), point.vin)
        own = figures.high("quiescent", end, default=0.0)
        return Loss(
            charger_heat(point.vin, battery, point.iout, own),
            point.iout + own,
            terms=(("charging", (point.vin - battery) * point.iout), ("quiescent", point.vin * own)),
            formula=lambda: (
                f"({volts(point.vin)} − {volts(battery)}) · {amps(point.iout)} + {volts(point.vin)} · {amps(own)}"
            ),
        )

    used = (current, *figures.used("battery_low", "quiescent"))
    return LossModel(at, used, own_load=current, iin_needs_voltages=False)
