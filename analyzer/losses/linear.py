"""Linear regulators with a ground pin, floating adjustable ones, and those with a second, higher control supply."""

from __future__ import annotations

from analyzer.losses.base import End, Figures, Loss, LossModel, Point, amps, lacking, volts
from analyzer.rail import Wiring

_JUST_BELOW = 1 - 1e-9
"""Factor on the voltage at which regulation is lost, so that it is."""


def pass_heat(vin: float, vout: float, iout: float, ground: float) -> float:
    """Heat [W] of a linear regulator: (Vin − Vout) · Iout + Vin · Ignd.

    Args:
        vin: Input voltage [V], at least `vout`.
        vout: Output voltage [V].
        iout: Load [A].
        ground: Ground-pin current at this load [A].

    Source: Infineon TLE42994 data sheet Rev 1.2 p. 30, and common practice.

    Raises:
        ValueError: If a magnitude is negative or the input is below the output.
    """
    if min(vout, iout, ground) < 0 or vin < vout:
        raise ValueError(f"needs Vin ≥ Vout ≥ 0 and currents ≥ 0, not Vin {vin:g}, Vout {vout:g}, Iout {iout:g}")
    return (vin - vout) * iout + vin * ground


def short_circuit_heat(vin: float, limit: float) -> float:
    """Heat [W] while the output is shorted and the current limit holds: Vin · Ilim. Reported apart."""
    if vin < 0 or limit < 0:
        raise ValueError("voltage and current limit must not be negative")
    return vin * limit


def output_in_dropout(vin: float, vout: float, dropout: float) -> tuple[float, bool]:
    """The output voltage that is left, and whether it still regulates: Vin − Vout ≥ Vdo keeps Vout."""
    if vin - vout >= dropout:
        return vout, True
    return max(0.0, vin - dropout), False


def build(wiring: Wiring) -> LossModel:
    """Model of a linear regulator with a ground pin."""
    figures = Figures(wiring.channel)
    key = next((key for key in ("ground_current", "quiescent") if figures.has(key)), None)
    if key is None:
        return lacking("quiescent or ground current")
    dropout_of, ground_of = figures.reader("dropout", 0.0), figures.reader(key)

    def at(point: Point, end: End) -> Loss:
        vout, regulating = output_in_dropout(point.vin, point.vout, dropout_of(end, point.iout))
        ground = ground_of(end, point.iout)
        if not regulating:
            # PNP parts saturate in dropout and their ground current jumps
            ground = max(ground, figures.high("ground_current_dropout", end, point.iout, default=ground))
        through, own = (point.vin - vout) * point.iout, point.vin * ground
        return Loss(
            pass_heat(point.vin, vout, point.iout, ground),
            point.iout + ground,
            terms=(("pass element", through), ("ground current", own)),
            formula=lambda: (
                f"({volts(point.vin)} − {volts(vout)}) · {amps(point.iout)} + {volts(point.vin)} · {amps(ground)}"
            ),
            regulating=regulating,
        )

    def interior(least: float, most: float, vout: float, iout: float) -> tuple[float, ...]:
        # where the ground current jumps, the heat is greatest just as regulation is lost
        edge = (vout + figures.high("dropout", End.SEVERE, iout, default=0.0)) * _JUST_BELOW
        return (edge,) if least < edge < most and figures.has("ground_current_dropout") else ()

    used = figures.used(key, "dropout", "ground_current_dropout")
    loads = figures.knots(key, "dropout")
    return LossModel(at, used, interior=interior, loads=loads, iin_needs_voltages=False)


def build_floating(wiring: Wiring) -> LossModel:
    """Model of a three-terminal adjustable regulator: no ground pin, its bias current flows to the load.

    Source: LT1083/84/85 data sheet ("quiescent current flows into the load").
    """
    figures = Figures(wiring.channel)

    def at(point: Point, end: End) -> Loss:
        dropout = figures.high("dropout", end, point.iout, default=0.0)
        vout, regulating = output_in_dropout(point.vin, point.vout, dropout)
        adjust = figures.high("feedback_current", end, default=0.0)
        # the adjust current leaves at the adjust pin, that is from Vin to a potential below Vout
        watts = pass_heat(point.vin, vout, point.iout, adjust)
        return Loss(
            watts,
            point.iout + adjust,
            terms=(("pass element", (point.vin - vout) * point.iout), ("adjust current", point.vin * adjust)),
            formula=lambda: (
                f"({volts(point.vin)} − {volts(vout)}) · {amps(point.iout)} + {volts(point.vin)} · {amps(adjust)}"
            ),
            regulating=regulating,
        )

    used = figures.used("dropout", "feedback_current")
    return LossModel(at, used, loads=figures.knots("dropout"), iin_needs_voltages=False)


def two_supply_heat(vin: float, vcontrol: float, vout: float, iout: float, icontrol: float) -> float:
    """Heat [W] of a two-supply regulator: (Vin − Vout) · Iout + (Vctl − Vout) · Ictl.

    Source: LT3085 data sheet p. 16.
    """
    if vin < vout or vcontrol < vout or min(vout, iout, icontrol) < 0:
        raise ValueError("needs both supplies at or above the output, and no negative current")
    return (vin - vout) * iout + (vcontrol - vout) * icontrol


def build_two_supply(wiring: Wiring) -> LossModel:
    """Model of a regulator whose control circuit has a supply of its own."""
    figures = Figures(wiring.channel)
    missing = []
    if not figures.has("control_current") and not figures.has("control_ratio"):
        missing.append("control current or control ratio")
    if wiring.vcontrol is None:
        missing.append("control supply voltage")
    if missing or wiring.vcontrol is None:
        return lacking(*missing)
    control = wiring.vcontrol

    def at(point: Point, end: End) -> Loss:
        vcontrol = (
            max(abs(corner) for corner in control.span.corners) if end is End.SEVERE else abs(control.span.nominal)
        )
        icontrol = figures.high("control_current", end, point.iout, default=0.0)
        if figures.has("control_ratio"):
            icontrol = max(icontrol, point.iout / figures.low("control_ratio", end))
        dropout = figures.high("dropout", end, point.iout, default=0.0)
        vout, regulating = output_in_dropout(point.vin, point.vout, dropout)
        vcontrol = max(vcontrol, vout)
        return Loss(
            two_supply_heat(point.vin, vcontrol, vout, point.iout, icontrol),
            point.iout,
            terms=(("pass element", (point.vin - vout) * point.iout), ("control", (vcontrol - vout) * icontrol)),
            formula=lambda: (
                f"({volts(point.vin)} − {volts(vout)}) · {amps(point.iout)}"
                f" + ({volts(vcontrol)} − {volts(vout)}) · {amps(icontrol)}"
            ),
            regulating=regulating,
        )

    used = (*figures.used("dropout", "control_current", "control_ratio"), control)
    return LossModel(at, used, loads=figures.knots("dropout", "control_current"), iin_needs_voltages=False)
