"""Heat sinks: the chain θJC + θCS + θSA, and how a natural-convection sink worsens at a small rise.

Source: Aavid's correction of published θSA (rated at 75 K rise): 60 K 1.057, 50 K 1.106, 40 K 1.170, 30 K 1.257,
which is (75/ΔT)^0.25 to 0.1 %.
"""

from __future__ import annotations

RATED_RISE = 75.0
"""Rise [K] at which natural-convection sinks are catalogued."""


def correction(rise: float) -> float:
    """Factor on the catalogue θSA at a rise of the sink over the air [K]: (75/ΔT)^0.25, never below 1."""
    if rise <= 0:
        raise ValueError("a sink without rise carries nothing")
    return max(1.0, float((RATED_RISE / rise) ** 0.25))


def natural_factor(catalogue: float, watts: float) -> float:
    """θSA [K/W] that a sink has while it carries `watts`.

    With θ = θ75 · (75/ΔT)^0.25 and ΔT = θ · P the two close to θ = (θ75^4 · 75 / P)^0.2.

    Args:
        catalogue: θSA as catalogued at 75 K [K/W], not negative.
        watts: Heat carried [W]; without any the catalogue figure is returned.
    """
    if catalogue < 0 or watts < 0:
        raise ValueError("needs magnitudes")
    if watts == 0 or catalogue == 0:
        return catalogue
    return max(catalogue, float((catalogue**4 * RATED_RISE / watts) ** 0.2))


def needed_sink(limit: float, ambient: float, watts: float, junction_case: float, case_sink: float) -> float:
    """Greatest θSA [K/W] that keeps the junction at its limit: (Tj,max − Ta)/P − θJC − θCS.

    A negative result means that no sink does.
    """
    if watts <= 0:
        raise ValueError("a part without heat needs no sink")
    return (limit - ambient) / watts - junction_case - case_sink


def via_resistance(length: float, drill: float, plating: float, conductivity: float = 385.0) -> float:
    """K/W of one plated via: L / (k · π · d · t).

    Args:
        length: Board thickness [m].
        drill: Diameter [m].
        plating: Copper thickness [m], thin against the diameter.
        conductivity: k of copper [W/(m·K)].
    """
    import math

    if min(length, drill, plating, conductivity) <= 0:
        raise ValueError("needs positive figures")
    return length / (conductivity * math.pi * drill * plating)
