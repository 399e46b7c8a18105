"""An exposed pad or tab on a patch of copper: θJC(bottom) + vias + the board as a radial fin.

Used only where no θJA is known: never to go below a published one. Against published finite-element results of SOT-223
the fin is good to 3 %, of other packages within −26 % and +50 %; so its θ is raised by 1.35, or by 2 where inner planes
carry the heat, whose constrictions it does not know (published 1.1 to 2.0).
"""

from __future__ import annotations

import math

from analyzer.evidence import Evidence, Grade
from analyzer.findings import heat as kinds
from analyzer.heat.coupling import BOTH_FACES, bessel_k
from analyzer.heat.path.base import ThermalPath
from analyzer.heat.path.board import POUR_AREA
from analyzer.heat.path.sink import via_resistance
from analyzer.part import Part
from analyzer.quantity import Span
from analyzer.rule import BoardClass
from analyzer.wording import show

PATCH = 385.0 * 35e-6 + 0.3 * 1.5e-3
"""kt [W/K] of 35 µm copper on 1.5 mm of FR-4 (k 0.3 W/mK across its plane)."""

PAD_RADIUS = 2e-3
ONE_VIA = via_resistance(1.6e-3, 0.3e-3, 25e-6)
"""K/W of a 0.3 mm via, plated 25 µm, through 1.6 mm."""

OUTER_FACTOR, INNER_FACTOR = 1.35, 2.0


def fin(area: float, radius: float = PAD_RADIUS, conductance: float = PATCH, film: float = BOTH_FACES) -> float:
    """θBA [K/W] of a round patch heated in its middle, nothing flowing over its rim.

    G = 2π·kt·m·r1·[K1(m·r1)·I1(m·r2) − I1(m·r1)·K1(m·r2)] / [K0(m·r1)·I1(m·r2) + I0(m·r1)·K1(m·r2)] + h·π·r1², θ = 1/G,
    m = √(h/kt). Source: the annular fin with adiabatic tip (textbook; Biber, "circuit board as radial fin").

    Args:
        area: Copper area [m²], more than the pad's own.
        radius: Radius of the pad r1 [m].
        conductance: kt [W/K].
        film: Heat transfer of both faces together [W/(m²·K)].
    """
    rim = math.sqrt(area / math.pi) if area > 0 else 0.0
    if not 0 < radius < rim or min(conductance, film) <= 0:
        raise ValueError("needs positive figures and more copper than the pad itself")
    m = math.sqrt(film / conductance)
    near, far = m * radius, m * rim
    flow = bessel_k(1, near) * bessel_i(1, far) - bessel_i(1, near) * bessel_k(1, far)
    rise = bessel_k(0, near) * bessel_i(1, far) + bessel_i(0, near) * bessel_k(1, far)
    return 1.0 / (2 * math.pi * conductance * near * flow / rise + film * math.pi * radius * radius)


def bessel_i(order: int, x: float) -> float:
    """Modified Bessel function of the first kind I0 or I1, by its series Σ (x/2)^(2k+n) / (k!·(k+n)!).

    Source: Abramowitz and Stegun 9.6.10.

    Raises:
        ValueError: For x outside 0 … 50, where the series needs few terms.
    """
    if not 0 <= x <= 50:
        raise ValueError("x lies outside 0 to 50")
    term = (x / 2) ** order / math.factorial(order)
    total, k = term, 0
    while term > 1e-17 * total:
        k += 1
        term *= (x / 2) ** 2 / (k * (k + order))
        total += term
    return total


def pad_path(
    part: Part, junction_case: Evidence, pour: Evidence, vias: int | None, design: BoardClass
) -> ThermalPath | None:
    """The path through the pad into the copper stated for it; None below 300 mm², where the estimate does not hold."""
    area = pour.span.low
    if area < POUR_AREA:
        return None
    factor = INNER_FACTOR if design is BoardClass.HIGH else OUTER_FACTOR
    through = ONE_VIA / vias if vias else 0.0
    board = Evidence(
        "board around the pad",
        Span.exact(fin(area) * factor),
        "K/W",
        "radial fin, 35 µm of copper, 20 W/(m²·K)",
        Grade.PRESUMED,
        f"{show(fin(area), 'K/W')} · {factor:g}",
        (pour,),
    )
    words = f"θJC(bottom) + {f'{vias} vias + ' if vias else ''}board estimate at {area * 1e6:.0f} mm²"
    message = f"θ of {show(junction_case.span.high + through + board.span.high, 'K/W')} is an estimate: {words}"
    finding = kinds.THETA_ESTIMATED.found(part.ref, message, junction_case.source, key=part.key)
    solid = junction_case.span + Span.exact(through)
    return ThermalPath(solid, board.span, (junction_case, board), findings=(finding,), words=words)
