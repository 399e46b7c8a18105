"""A thermal path: how many kelvin a part's junction stands above the air for each watt."""

from __future__ import annotations

from dataclasses import dataclass

from analyzer.evidence import Evidence
from analyzer.findings.base import Finding
from analyzer.heat.path.sink import natural_factor
from analyzer.quantity import ZERO, Span


@dataclass(frozen=True, slots=True)
class ThermalPath:
    """From junction to air, or to a measured spot.

    Attributes:
        solid: Part of the resistance that altitude does not touch [K/W]; nothing where only θJA is known.
        air: Part that thin air raises [K/W].
        sink: Catalogue θSA of a heat sink in natural convection [K/W], rated at 75 K rise; None without one.
        measured: Measured case or board temperature [°C] that takes the place of the ambient; None otherwise.
        evidence: Every number used.
        foster: Foster network of the part on its board, () if none is known.
        findings: What to note about the choice.
        words: The path in words, for the trail.
    """

    solid: Span
    air: Span
    evidence: tuple[Evidence, ...]
    sink: Span | None = None
    measured: Evidence | None = None
    foster: tuple[tuple[float, float], ...] = ()
    findings: tuple[Finding, ...] = ()
    words: str = "θJA"

    def theta(self, thin_air: float, watts: float, *, severe: bool = True) -> float:
        """K/W with the altitude multiplier `thin_air`; `watts` matters only for a natural-convection sink."""
        solid, air = (self.solid.high, self.air.high) if severe else (self.solid.nominal, self.air.nominal)
        if self.sink is None:
            return solid + thin_air * air
        sink = self.sink.high if severe else self.sink.nominal
        return solid + thin_air * air + natural_factor(sink * thin_air, watts)

    @property
    def is_linear(self) -> bool:
        """Whether the resistance is the same at any power."""
        return self.sink is None


def all_air(theta: Evidence, *more: Evidence, findings: tuple[Finding, ...] = (), words: str = "θJA") -> ThermalPath:
    """A path of which only θJA is known: altitude is applied to all of it, the safe side."""
    return ThermalPath(ZERO, theta.span, (theta, *more), findings=findings, words=words)
