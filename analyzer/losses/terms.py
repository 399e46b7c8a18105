"""Loss terms of switching converters, each a formula of its own.

Source of the set: TI TPS54678 data sheet section 10.3 and TI LMR12015 data sheet section 8.2.1.10.8, which print the
same terms; boost terms from TI LM2735 (SNVS485) section 10.3.4.1.
"""

from __future__ import annotations


def _not_negative(**values: float) -> None:
    for name, value in values.items():
        if value < 0:
            raise ValueError(f"{name} must not be negative, is {value:g}")


def buck_duty(vin: float, vout: float, diode_drop: float = 0.0, switch_drop: float = 0.0) -> float:
    """Duty cycle of a buck: D = (Vout + Vd) / (Vin + Vd − Vsw), at most 1.

    Args:
        vin: Input voltage [V], positive.
        vout: Output voltage [V].
        diode_drop: Drop of the rectifier [V]; 0 for a synchronous one.
        switch_drop: Drop of the switch [V].
    """
    _not_negative(vin=vin, vout=vout, diode_drop=diode_drop, switch_drop=switch_drop)
    across = vin + diode_drop - switch_drop
    return 1.0 if across <= vout + diode_drop else (vout + diode_drop) / across


def loaded_duty(vin: float, vout: float, current: float, high_side: float, low_side: float, coil: float) -> float:
    """Duty cycle of a synchronous buck that carries `current`: D = (Vout + I·(Rls + Rdc)) / (Vin − I·(Rhs − Rls)).

    From the volt-seconds of the inductor over one cycle: (Vin − I·(Rhs + Rdc) − Vout) · D = (Vout + I·(Rls + Rdc)) ·
    (1 − D). Above the ideal Vout/Vin, most of all near dropout; 1 where the input does not suffice.

    Args:
        vin: Input voltage [V], positive.
        vout: Output voltage [V].
        current: Inductor current [A].
        high_side: On-resistance of the high-side switch [Ω].
        low_side: On-resistance of the low-side switch [Ω].
        coil: Resistance of the inductor [Ω].
    """
    _not_negative(vin=vin, vout=vout, current=current, high_side=high_side, low_side=low_side, coil=coil)
    if vin - current * (high_side + coil) <= vout:
        return 1.0
    return (vout + current * (low_side + coil)) / (vin - current * (high_side - low_side))


def boost_duty(vin: float, vout: float, diode_drop: float = 0.0) -> float:
    """Duty cycle of a boost: D = 1 − Vin / (Vout + Vd), at least 0."""
    _not_negative(vin=vin, vout=vout, diode_drop=diode_drop)
    return max(0.0, 1.0 - vin / (vout + diode_drop))


def conduction(current: float, resistance: float, share: float = 1.0) -> float:
    """Conduction loss [W] of a switch that carries `current` [A] for the fraction `share` of the time: I² · R · D."""
    _not_negative(resistance=resistance, share=share)
    return current * current * resistance * share


def saturation(current: float, drop: float, share: float = 1.0) -> float:
    """Conduction loss [W] of a bipolar switch or a diode: V · I · D."""
    _not_negative(current=current, drop=drop, share=share)
    return current * drop * share


def switching(voltage: float, current: float, frequency: float, rise: float, fall: float) -> float:
    """Overlap loss [W] of both edges: ½ · V · I · f · (tr + tf)."""
    _not_negative(voltage=voltage, current=current, frequency=frequency, rise=rise, fall=fall)
    return 0.5 * voltage * current * frequency * (rise + fall)


def dead_time(current: float, drop: float, frequency: float, seconds: float) -> float:
    """Loss [W] in the body diode during both dead times: f · I · Vf · t."""
    _not_negative(current=current, drop=drop, frequency=frequency, seconds=seconds)
    return frequency * current * drop * seconds


def gate_drive(charge: float, voltage: float, frequency: float) -> float:
    """Gate drive loss [W]: Qg · V · f."""
    _not_negative(charge=charge, voltage=voltage, frequency=frequency)
    return charge * voltage * frequency
