"""Step-down converters: synchronous, with an external diode, with a bipolar switch, or wired as an inverter."""

from __future__ import annotations

from analyzer.losses import efficiency, terms
from analyzer.losses.base import REFERENCE_CELSIUS, End, Figures, Loss, LossModel, Point, high, lacking, outside
from analyzer.losses.by_efficiency import Around, model_by_efficiency
from analyzer.losses.elsewhere import OPPOSITE, Outsides, outside_notes, outsides
from analyzer.rail import Wiring
from analyzer.wording import show

_TIMES = ("switching_frequency", "rise_time", "fall_time")
_KEYS = (
    *_TIMES,
    "high_side_resistance",
    "low_side_resistance",
    "saturation_voltage",
    "resistance_tempco",
    "quiescent",
    "dead_time",
    "body_diode_drop",
    "gate_charge",
    "gate_voltage",
    "boost_current",
    "boost_voltage",
    "diode_drop",
)


def is_inverting(wiring: Wiring) -> bool:
    """Whether the part's ground pin is its own output: a buck wired as an inverter."""
    return wiring.ground_rail is not None and wiring.ground_rail == wiring.output_rail


def build(wiring: Wiring) -> LossModel:
    """Model of a buck: from its efficiency where one is given, else from its loss terms."""
    if efficiency.is_given(wiring.channel):
        return _from_efficiency(wiring)
    lacks = missing_terms(wiring)
    if lacks:
        return lacking("efficiency, or for its loss terms: " + ", ".join(lacks))
    return _from_terms(wiring)


def missing_terms(wiring: Wiring) -> tuple[str, ...]:
    """Which figures the loss terms lack, in words."""
    figures = Figures(wiring.channel)
    lacks = []
    if not figures.has("high_side_resistance") and not figures.has("saturation_voltage"):
        lacks.append("high-side on-resistance or saturation voltage")
    if not figures.has("low_side_resistance") and not _diodes(wiring, figures):
        lacks.append("low-side on-resistance or the rectifier's drop")
    lacks += [key.replace("_", " ") for key in _TIMES if not figures.has(key)]
    if not figures.has("quiescent"):
        lacks.append("quiescent current")
    return tuple(lacks)


def _diodes(wiring: Wiring, figures: Figures) -> bool:
    return figures.has("diode_drop") or any(drop for _, _, drop, _ in outside(wiring, "diode"))


def _from_efficiency(wiring: Wiring) -> LossModel:
    inverts = is_inverting(wiring)

    def at(point: Point, end: End, found: float, around: Around) -> Loss:
        supply = point.vin - point.vout if inverts else point.vin
        if supply <= 0 or (not inverts and point.vin <= point.vout):
            return _below(point, found)
        duty = terms.buck_duty(point.vin, point.vout)
        coil = point.iout / (1 - duty) if inverts else point.iout
        rectifier = point.iout if inverts else point.iout * least_off_time(point.vin, point.vout, found)
        parts = around.shares(end, coil, rectifier)
        return efficiency.loss_from_efficiency(wiring.channel, point, end, found, supply, *parts)

    return model_by_efficiency(wiring, at, interior_voltages)


def _below(point: Point, found: float) -> Loss:
    """Input below the output: the switch stays on and the output follows; the loss is counted as if it regulated."""
    power = point.vout * point.iout
    total = efficiency.total_loss(power, found)
    iin = power / found / point.vin if point.vin > 0 else 0.0
    return Loss(total, iin, formula=lambda: f"{show(power, 'W')} · (1/{found:.3f} − 1)", regulating=False)


def least_off_time(vin: float, vout: float, efficiency_there: float) -> float:
    """Smallest fraction of the time in which a buck's rectifier can conduct: 1 − Vout/(η·Vin), at least 0.

    While the switch is on, the input carries the inductor's current, so D ≤ Iin/Iout = Vout/(η·Vin) (charge balance).
    The ideal duty Vout/Vin would find the rectifier too much of the loss, and the part too little.
    """
    if vin <= 0 or not 0 < efficiency_there <= 1:
        raise ValueError(f"needs Vin > 0 and 0 < η ≤ 1, not {vin:g} and {efficiency_there:g}")
    return max(0.0, 1.0 - vout / (efficiency_there * vin))


def interior_voltages(low: float, high: float, _vout: float, _iout: float) -> tuple[float, ...]:
    """Input voltages between the ends that a search for the worst one should try.

    Conduction falls and switching rises with the input voltage, so the heat has at most a minimum between the ends;
    efficiency maps may have a maximum there, so an even grid is tried as well.
    """
    return tuple(low + (high - low) * step / 8 for step in range(1, 8))


def _from_terms(wiring: Wiring) -> LossModel:
    figures = Figures(wiring.channel)
    inverts = is_inverting(wiring)
    others = outsides(wiring)

    def at(point: Point, end: End) -> Loss:
        return _terms_at(wiring, figures, others, point, end, inverts)

    def interior(low: float, high: float, vout: float, iout: float) -> tuple[float, ...]:
        """Where the duty reaches 1 the heat has a peak: cold and hot, with and without the inductor's resistance."""
        coil = others.inductor[1].high if others.inductor else 0.0
        across = figures.high("high_side_resistance", End.SEVERE, default=0.0)
        drop = figures.high("saturation_voltage", End.SEVERE, default=0.0)
        kinks = {
            vout + drop + iout * (across * figures.hot(End.SEVERE, junction) + dcr)
            for junction in (REFERENCE_CELSIUS, 75.0, 125.0)
            for dcr in (0.0, coil)
        }
        return (*interior_voltages(low, high, vout, iout), *(edge for edge in sorted(kinks) if low < edge < high))

    return LossModel(
        at,
        tuple(dict.fromkeys((*figures.used(*_KEYS), *others.used))),
        notes=outside_notes(wiring, others),
        interior=interior,
        heats=figures.has("resistance_tempco"),
    )


def _terms_at(wiring: Wiring, figures: Figures, others: Outsides, point: Point, end: End, inverts: bool) -> Loss:
    vin, load = point.vin, point.iout
    hot = figures.hot(end, point.junction)
    synchronous = figures.has("low_side_resistance")
    drop = 0.0 if synchronous else _rectifier_drop(wiring, figures, end)
    saturation = figures.high("saturation_voltage", end, default=0.0)
    resistance = figures.high("high_side_resistance", end, default=0.0) * hot
    switch_drop = saturation
    if not synchronous:
        # published sums take the switch's own drop into the duty where a diode rectifies, and leave it out elsewhere
        ideal = terms.buck_duty(vin, point.vout)
        switch_drop += resistance * (load / (1 - ideal) if inverts and ideal < 1 else load)
    low_side = figures.high("low_side_resistance", end, default=0.0) * hot
    known = others.inductor[1] if others.inductor else None
    dcr = high(known, end) if known is not None else 0.0
    if synchronous and not saturation and not inverts:
        duty = terms.loaded_duty(vin, point.vout, load, resistance, low_side, dcr)
    else:
        duty = terms.buck_duty(vin, point.vout, drop, min(switch_drop, vin))
    if inverts and duty >= 1:
        raise ValueError(f"no duty cycle makes {show(point.vout, 'V')} from {show(vin - point.vout, 'V')} in")
    coil = load / (1 - duty) if inverts else load
    frequency = figures.high("switching_frequency", end)
    rise, fall = figures.high("rise_time", end), figures.high("fall_time", end)
    found = [
        ("high side", terms.conduction(coil, resistance, duty)),
        ("saturation", terms.saturation(coil, saturation, duty)),
        ("low side", terms.conduction(coil, low_side, 1 - duty)),
        ("switching", terms.switching(vin, coil, frequency, rise, fall)),
        ("quiescent", vin * figures.high("quiescent", end)),
    ]
    if figures.has("dead_time", "body_diode_drop"):
        seconds, body = figures.high("dead_time", end), figures.high("body_diode_drop", end)
        found.append(("dead time", terms.dead_time(coil, body, frequency, seconds)))
    if figures.has("gate_charge"):
        gate = figures.high("gate_voltage", end, default=vin)
        found.append(("gate drive", terms.gate_drive(figures.high("gate_charge", end), gate, frequency)))
    if figures.has("boost_current", "boost_voltage"):
        found.append(("bootstrap", figures.high("boost_current", end) * figures.high("boost_voltage", end)))
    inside = [(name, watts) for name, watts in found if watts]
    elsewhere = others.shares(OPPOSITE[end], coil, coil * (1 - duty))
    watts = sum(value for _, value in inside)
    supply = vin - point.vout if inverts else vin
    power = point.vout * load + watts + elsewhere.watts
    return Loss(
        watts,
        power / supply if supply > 0 else 0.0,
        elsewhere.items,
        tuple(inside),
        lambda: " + ".join(f"{name} {show(value, 'W')}" for name, value in inside) + f" at D {duty:.3f}",
        regulating=supply > 0 and (inverts or vin > point.vout + load * (resistance + dcr) + saturation),
    )


def _rectifier_drop(wiring: Wiring, figures: Figures, end: End) -> float:
    drops = [drop for _, _, drop, _ in outside(wiring, "diode") if drop is not None]
    if drops:
        return max(high(drop, end) for drop in drops)
    return figures.high("diode_drop", end)
