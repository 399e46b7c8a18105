"""One part's case: what is known of its operating points and surroundings, and the corners worked through.

Every combination of ends that can be worst is evaluated, the points inside that a topology names as well, and the
junction is iterated where the losses depend on it. Channels of one package are taken each at its own worst corner.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from analyzer.heat.path import ThermalPath
from analyzer.ledger import ChannelPoint, Corner
from analyzer.load import RailLoad
from analyzer.losses.base import End, Loss, LossModel, Point
from analyzer.quantity import Span
from analyzer.rail import Wiring

_Choose = Callable[[float], tuple["Chosen", ...]]
"""What a corner takes at a junction temperature [°C]."""

HOPELESS_CELSIUS = 1000.0
"""Above this no semiconductor is left; a search that gets here has no solution that matters."""

_PASSES = 200
_SEARCHES = 16
_AGREEMENT = 1e-9


@dataclass(frozen=True, slots=True)
class ChannelCase:
    """One channel: its loss model, the spans of input, output (magnitudes) and load, and where the load comes from."""

    wiring: Wiring
    model: LossModel
    vin: Span
    vout: Span
    load: Span
    rail: RailLoad | None = None
    share: float = 1.0

    @property
    def name(self) -> str:
        """Name of the channel."""
        return self.wiring.channel.name


@dataclass(frozen=True, slots=True)
class Case:
    """One part with its surroundings.

    Attributes:
        channels: Channels that supply something.
        path: Thermal path; None if there is none, then only losses can be worked out.
        ambient: Air around the part: ambient, enclosure rise and neighbours [°C].
        thin_air: Altitude multiplier, nominal and severe.
        limit: Junction limit [°C], None if unknown.
        tight_above: [°C], None if unknown.
    """

    channels: tuple[ChannelCase, ...]
    path: ThermalPath | None
    ambient: Span
    thin_air: tuple[float, float]
    limit: float | None = None
    tight_above: float | None = None

    def with_load_up_to(self, amps: float) -> Case:
        """The case with any load up to this on its first channel; a load the part itself sets stays."""
        first, *rest = self.channels
        return replace(self, channels=(replace(first, load=Span(0.0, amps, amps)), *rest))

    def with_ambient(self, ambient: Span) -> Case:
        """The case in other air."""
        return replace(self, ambient=ambient)


@dataclass(frozen=True, slots=True)
class Chosen:
    """The point of a channel that a corner takes, its losses, and which ends it took."""

    case: ChannelCase
    point: Point
    loss: Loss
    ends: str


@dataclass(frozen=True, slots=True)
class Worked:
    """A corner worked through; `runs_away` if the junction has no rest."""

    chosen: tuple[Chosen, ...]
    watts: float
    ambient: float
    theta: float | None
    junction: float | None
    runs_away: bool = False


def worst(case: Case) -> Worked:
    """The hottest corner.

    Raises:
        ValueError: If a figure's table does not cover a point.
    """
    return _settled(case, lambda junction: tuple(hottest_of(one, junction) for one in case.channels), severe=True)


def nominal(case: Case) -> Worked:
    """The nominal corner."""

    def choose(junction: float) -> tuple[Chosen, ...]:
        found = []
        for one in case.channels:
            point = Point(one.vin.nominal, one.vout.nominal, one.load.nominal, junction)
            found.append(Chosen(one, point, one.model.at(point, End.NOMINAL), "nominal"))
        return tuple(found)

    return _settled(case, choose, severe=False)


def _settled(case: Case, choose: _Choose, *, severe: bool) -> Worked:
    """Iterate the junction to its rest, from the ambient up."""
    ambient = case.ambient.high if severe else case.ambient.nominal
    thin_air = case.thin_air[1] if severe else case.thin_air[0]
    if case.path is None:
        chosen = choose(ambient)
        return Worked(chosen, sum(one.loss.watts for one in chosen), ambient, None, None)
    if case.path.measured is not None:
        # the measured spot takes the place of the air
        span = case.path.measured.span
        ambient = span.high if severe else span.nominal
    junction = ambient
    heats = any(one.model.heats for one in case.channels)
    chosen = choose(junction)
    for turn in range(_PASSES):
        if turn:
            try:
                chosen = choose(junction)
            except ValueError:
                # a figure that stops being one (efficiency below zero) on the way up has no rest
                break
        if junction > HOPELESS_CELSIUS:
            break
        watts = sum(one.loss.watts for one in chosen)
        theta = case.path.theta(thin_air, watts, severe=severe)
        found = ambient + theta * watts
        if not heats or abs(found - junction) <= _AGREEMENT * max(1.0, abs(found)):
            return Worked(chosen, watts, ambient, theta, found)
        if found > HOPELESS_CELSIUS:
            break
        junction = found
    return Worked(chosen, watts, ambient, theta, min(found, HOPELESS_CELSIUS), runs_away=True)


def hottest_of(one: ChannelCase, junction: float) -> Chosen:
    """The operating point of a channel that makes the most heat at this junction temperature [°C]."""
    best: tuple[Point, Loss] | None = None
    for point in _candidates(one, junction):
        loss = one.model.at(point, End.SEVERE)
        if best is None or loss.watts > best[1].watts:
            best = point, loss
    if best is None:
        raise ValueError("no operating point")
    if one.model.has_humps and not one.load.is_exact:
        best = _climbed(one, best)
    return Chosen(one, *best, _ends(one, best[0]))


def _climbed(one: ChannelCase, best: tuple[Point, Loss]) -> tuple[Point, Loss]:
    """The greatest heat between the knots of the load, at every input and output voltage that may be worst.

    A few points in each stretch tell from which voltages to climb.
    """
    points = list(_candidates(one, best[0].junction))
    loads = sorted({point.iout for point in points})
    volts = sorted({(point.vin, point.vout) for point in points})
    found = best
    for left, right in itertools.pairwise(loads):
        inside = [
            replace(best[0], vin=vin, vout=vout, iout=left + share * (right - left))
            for vin, vout in volts
            for share in (0.125, 0.375, 0.625, 0.875)
        ]
        start = max(inside, key=lambda point: one.model.at(point, End.SEVERE).watts)
        found = max(found, _between(one, start, left, right), key=lambda pair: pair[1].watts)
    return found


def _between(one: ChannelCase, at: Point, left: float, right: float) -> tuple[Point, Loss]:
    """Golden-section search: with η linear between two knots the heat has one maximum at most."""
    ratio = (math.sqrt(5.0) - 1.0) / 2.0

    def heat(load: float) -> tuple[Point, Loss]:
        point = replace(at, iout=load)
        return point, one.model.at(point, End.SEVERE)

    low, high = left, right
    for _ in range(_SEARCHES):
        a, b = high - ratio * (high - low), low + ratio * (high - low)
        if heat(a)[1].watts < heat(b)[1].watts:
            low = a
        else:
            high = b
    return heat((low + high) / 2)


def _candidates(one: ChannelCase, junction: float) -> Iterator[Point]:
    vin, vout, load = one.vin, one.vout, one.load
    vins = {vin.low, vin.high}
    vouts = {vout.low, vout.high}
    loads = {load.low, load.high, *(x for x in one.model.loads if load.low < x < load.high)}
    if not vin.is_exact:
        for b, c in itertools.product(sorted(vouts), sorted(loads)):
            vins.update(one.model.interior(vin.low, vin.high, b, c))
        table = one.wiring.channel.efficiency_map
        knots = {y for _, y, _ in table.points} if table else set()
        vins |= {edge for edge in vouts | knots if vin.low < edge < vin.high}
    if not vout.is_exact:
        for a, c in itertools.product(sorted(vins), sorted(loads)):
            vouts.update(one.model.interior_outputs(vout.low, vout.high, a, c))
    for a in sorted(vins):
        for b in sorted(vouts):
            for c in sorted(loads):
                yield Point(a, b, c, junction)


def _ends(one: ChannelCase, point: Point) -> str:
    words = []
    for name, span, value in (
        ("input", one.vin, point.vin),
        ("output", one.vout, point.vout),
        ("load", one.load, point.iout),
    ):
        if not span.is_exact:
            end = "high" if value == span.high else "low" if value == span.low else "inside"
            words.append(f"{name} {end}")
    return ", ".join(words)


def corner(worked: Worked, name: str, case: Case) -> Corner:
    """A worked corner as the ledger has it."""
    points = tuple(
        ChannelPoint(
            one.case.name,
            one.point.vin,
            one.point.vout,
            one.point.iout,
            one.loss.iin,
            one.loss.watts,
            one.loss.elsewhere,
            one.loss.formula(),
        )
        for one in worked.chosen
    )
    if name != "nominal":
        ends = [one.ends for one in worked.chosen if one.ends]
        air = [] if case.ambient.is_exact else ["ambient high"]
        name = ", ".join(dict.fromkeys([*ends, *air])) or "no span: one corner"
    return Corner(name, points, worked.watts, worked.ambient, worked.theta, worked.junction)
