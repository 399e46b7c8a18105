"""Channels with figures, for testing loss models."""

from __future__ import annotations

from plain_figures import plain

from analyzer.circuit import Component, Place
from analyzer.evidence import Evidence, Grade
from analyzer.losses.base import LossModel
from analyzer.losses.dispatch import model_of
from analyzer.part import Channel, Package, Part
from analyzer.quantity import Span
from analyzer.rail import Outside, Wiring
from analyzer.rule import Curve, EfficiencyMap, Rule, Topology


def evidence(span: Span | float, unit: str = "1", quantity: str = "figure") -> Evidence:
    return Evidence(quantity, span if isinstance(span, Span) else Span.exact(span), unit, "test", Grade.RULED)


def curve(*points: tuple[float, Span | float]) -> Curve:
    spans = tuple((x, y if isinstance(y, Span) else Span.exact(y)) for x, y in points)
    return Curve(spans, "load", evidence(Span.hull(*(span for _, span in spans))))


def efficiency_map(*points: tuple[float, float, float]) -> EfficiencyMap:
    spans = tuple((load, vin, Span.exact(value)) for load, vin, value in points)
    return EfficiencyMap(spans, evidence(Span.hull(*(span for _, _, span in spans))))


def wiring(
    topology: Topology,
    figures: dict[str, Span | float],
    *,
    curves: dict[str, Curve] | None = None,
    mapped: EfficiencyMap | None = None,
    volts: float | None = None,
    vcontrol: Span | float | None = None,
    outside: tuple[Outside, ...] = (),
    inverts: bool = False,
) -> Wiring:
    """A wiring of one channel with these figures."""
    given = {key: evidence(value) for key, value in {**plain(topology, figures, curves, mapped), **figures}.items()}
    fixed = evidence(volts) if volts else None
    channel = Channel("", topology, 1, {}, fixed, figures=given, curves=curves or {}, efficiency_map=mapped)
    component = Component("/U1", "U1", "X", "", "", {}, "", "", (), Place("a"))
    rule = Rule("X", "test", True, (), (), (), ())
    part = Part(component, "rule", rule, "Value", "X", Package(None, ""), (channel,))
    return Wiring(
        part,
        channel,
        "in",
        "in",
        "out",
        "out",
        "out" if inverts else "GND",
        vcontrol=None if vcontrol is None else evidence(vcontrol),
        outside=outside,
    )


def model(topology: Topology, figures: dict[str, Span | float], **more: object) -> LossModel:
    return model_of(wiring(topology, figures, **more))  # type: ignore[arg-type]
