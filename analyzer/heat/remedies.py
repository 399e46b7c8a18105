"""What would help, each with its numbers. None is a promise: every figure holds with all else as it is."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace

from analyzer.heat.case import Case, ChannelCase, Worked, worst
from analyzer.heat.draft import Draft
from analyzer.heat.path.sink import needed_sink
from analyzer.heat.ratings import rated_current, rated_input
from analyzer.ledger import Remedy
from analyzer.quantity import ZERO, Span
from analyzer.rule import LINEARS, SWITCHERS, BoardClass, PackageRule
from analyzer.settings import Policy
from analyzer.wording import show

SINK_CONTACT = 1.0
"""θCS [K/W] of a TO-220 with compound (TI TPS758xx data sheet); 0.2 for TO-3, 1.5 to 2.5 if unknown."""

NO_HEAT = 1e-9
"""Heat [W] below which a part has none that any θ would matter to."""

SINKABLE = frozenset({"TO-220", "TO-3"})
E24 = tuple(
    float(step)
    for step in "1 1.1 1.2 1.3 1.5 1.6 1.8 2 2.2 2.4 2.7 3 3.3 3.6 3.9 4.3 4.7 5.1 5.6 6.2 6.8 7.5 8.2 9.1".split()
)
"""IEC 60063:2015 series E24."""


def remedies(
    draft: Draft,
    case: Case,
    hottest: Worked,
    greatest: float | None,
    packages: Mapping[str, PackageRule],
    board: BoardClass,
    policy: Policy,
) -> tuple[Remedy, ...]:
    """Remedies of a worked case: how far it may go as it is, and what would bring it inside where it is not."""
    if case.limit is None or case.path is None or hottest.junction is None or not case.channels:
        return ()
    found = [*_how_far(draft, case, hottest, greatest, policy)]
    if case.tight_above is not None and hottest.junction > case.tight_above:
        found += _what_helps(draft, case, hottest, packages, board)
    return tuple(found)


def _how_far(draft: Draft, case: Case, hottest: Worked, greatest: float | None, policy: Policy) -> Iterator[Remedy]:
    """Greatest load, ambient, θ and input: where the junction meets its limit, or a rating ends before it."""
    limit, junction = case.limit, hottest.junction
    if limit is None or junction is None:
        return
    if greatest is not None:
        rated = rated_current(case.channels[0], policy) if len(case.channels) == 1 else None
        text, amps = _ends(greatest, rated, "A", "rated current")
        yield Remedy("greatest load", text, {"amps": amps})
    known = "" if draft.is_complete else " (with the known currents alone)"
    if case.path is not None and case.path.measured is None:
        ambient = _greatest_ambient(case, hottest)
        if ambient is not None:
            text = f"the junction meets its limit at {show(ambient, '°C')} around the part{known}"
            yield Remedy("greatest ambient", text, {"celsius": ambient})
        if hottest.watts > NO_HEAT:
            theta = (limit - hottest.ambient) / hottest.watts
            text = f"{show(theta, 'K/W')} from junction to air or less keep the junction inside its limit{known}"
            words = text if theta > 0 else "no θ would do: the air alone is hotter than the limit"
            yield Remedy("θ needed", words, {"k_per_w": max(theta, 0.0)})
    volts = _greatest_input(case)
    if volts is not None:
        text, volts = _ends(volts, rated_input(case.channels[0], policy), "V", "input rating")
        yield Remedy("greatest input", f"{text}{known}", {"volts": volts})


def _ends(by_junction: float, rated: float | None, unit: str, rating: str) -> tuple[str, float]:
    """Where load or input end, in words and as the number: at the rating or at the junction's limit."""
    allowed = show(by_junction, unit)
    if rated is None:
        return f"up to {allowed}, where the junction meets its limit; no {rating} is known", by_junction
    if rated < by_junction:
        return f"up to {show(rated, unit)}, where the {rating} under the policy ends before the junction does", rated
    return f"up to {allowed}, where the junction meets its limit", by_junction


def _greatest_ambient(case: Case, hottest: Worked) -> float | None:
    """Air at which the junction just meets its limit; exact where the heat does not depend on the junction."""
    if case.limit is None or hottest.junction is None:
        return None
    if not any(one.model.heats for one in case.channels):
        return hottest.ambient + case.limit - hottest.junction
    low, high = -273.0, case.limit
    for _ in range(60):
        middle = (low + high) / 2
        try:
            found = worst(case.with_ambient(Span.exact(middle)))
        except ValueError:  # too hot for its figures
            high = middle
            continue
        if found.runs_away or found.junction is None or found.junction > case.limit:
            high = middle
        else:
            low = middle
    return low


def _greatest_input(case: Case) -> float | None:
    """Input voltage at which a linear part's junction just meets its limit: its heat is linear in it."""
    (one, *others) = case.channels
    if others or one.wiring.channel.topology not in LINEARS or case.limit is None:
        return None
    if case.path is None or not case.path.is_linear:
        return None
    high = one.vin.high

    def junction(vin: float) -> float | None:
        return worst(replace(case, channels=(replace(one, vin=Span.exact(vin)),))).junction

    here, there = junction(high), junction(high + 1.0)
    if here is None or there is None or there <= here:
        return None
    found = high + (case.limit - here) / (there - here)
    return found if found > one.vout.high else None


def _what_helps(
    draft: Draft, case: Case, hottest: Worked, packages: Mapping[str, PackageRule], board: BoardClass
) -> Iterator[Remedy]:
    (one, *others) = case.channels
    topology = one.wiring.channel.topology
    sink = _heat_sink(draft, case, hottest)
    if sink is not None:
        yield sink
    if topology in SWITCHERS and not others:
        yield from _efficiency(case, hottest)
    if topology in LINEARS and not others:
        resistor = series_resistor(case, one)
        if resistor is not None:
            yield resistor
        split = _split_drop(case, one)
        if split is not None:
            yield split
    larger = _larger_package(draft, case, hottest, packages, board)
    if larger is not None:
        yield larger


def _heat_sink(draft: Draft, case: Case, hottest: Worked) -> Remedy | None:
    figure = draft.part.thermal[0] if draft.part.thermal else None
    theta = figure.theta_jc_bottom if figure else None
    if theta is None or draft.part.package.family not in SINKABLE or case.limit is None or hottest.watts <= NO_HEAT:
        return None
    needed = needed_sink(case.limit, hottest.ambient, hottest.watts, theta.span.high, SINK_CONTACT)
    if needed <= 0:
        text = f"no heat sink is enough: θJC {show(theta.span.high, 'K/W')} alone is too much"
        return Remedy("heat sink", text, {"k_per_w": 0.0})
    text = (
        f"a heat sink of {show(needed, 'K/W')} or less at its own rise "
        f"(θJC {show(theta.span.high, 'K/W')}, contact {show(SINK_CONTACT, 'K/W')})"
    )
    return Remedy("heat sink", text, {"k_per_w": needed})


def _efficiency(case: Case, hottest: Worked) -> Iterator[Remedy]:
    if case.limit is None or hottest.theta is None:
        return
    allowed = (case.limit - hottest.ambient) / hottest.theta
    chosen = hottest.chosen[0]
    power = chosen.point.vout * chosen.point.iout
    if allowed > 0 and power > 0:
        outside = sum(watts for _, watts in chosen.loss.elsewhere)
        least = power / (power + allowed + outside)
        text = f"an efficiency of at least {least:.1%} would pass at this θ"
        yield Remedy("least efficiency", text, {"efficiency": least})


def series_resistor(case: Case, one: ChannelCase) -> Remedy | None:
    """A resistor before a linear part that shares the heat without breaking dropout at the lowest input.

    R = (Vin,min − Vout,max − Vdo) / Imax, rounded down to E24; its own heat is Imax² · R.
    """
    load = one.load.high
    dropout = one.wiring.channel.figures.get("dropout")
    room = one.vin.low - one.vout.high - (dropout.span.high if dropout else 0.0)
    if load <= 0 or room <= 0 or dropout is None:
        return None
    ohms = _round_down(room / load)
    if ohms is None:
        return None
    dropped = load * ohms
    eased = replace(one, vin=Span(one.vin.low - dropped, one.vin.nominal - dropped, one.vin.high - dropped))
    junction = worst(replace(case, channels=(eased,))).junction
    if junction is None:
        return None
    watts = load * load * ohms
    text = (
        f"{show(ohms, 'Ω')} before the input takes {show(watts, 'W')} at {show(load, 'A')}, keeps "
        f"{show(one.vin.low - dropped - one.vout.high, 'V')} at the lowest input and brings the junction to "
        f"{show(junction, '°C')}"
    )
    light = one.load.low * one.load.low * ohms
    numbers = {"ohms": ohms, "watts": watts, "watts_light": light, "celsius": junction}
    return Remedy("series resistor", text, numbers)


def _round_down(ohms: float) -> float | None:
    if not 1e-3 <= ohms <= 1e6:
        return None
    decade = 10.0
    while decade > ohms:
        decade /= 10.0
    while decade * 10 <= ohms:
        decade *= 10.0
    return max((step * decade for step in E24 if step * decade <= ohms * (1 + 1e-12)), default=None)


def _split_drop(case: Case, one: ChannelCase) -> Remedy | None:
    """Two linear stages in row, each like this one: best where both are equally hot, halfway between the voltages."""
    dropout = one.wiring.channel.figures.get("dropout")
    middle = (one.vin.high + one.vout.low) / 2
    if dropout is None or one.vin.low - middle < dropout.span.high or middle - one.vout.high < dropout.span.high:
        return None
    first = worst(replace(case, channels=(replace(one, vout=Span.exact(middle)),))).junction
    second = worst(replace(case, channels=(replace(one, vin=Span.exact(middle)),))).junction
    if first is None or second is None:
        return None
    text = (
        f"an intermediate rail of {show(middle, 'V')} between two such stages brings their junctions to "
        f"{show(first, '°C')} and {show(second, '°C')}"
    )
    return Remedy("intermediate rail", text, {"volts": middle, "celsius_first": first, "celsius_second": second})


def _larger_package(
    draft: Draft, case: Case, hottest: Worked, packages: Mapping[str, PackageRule], board: BoardClass
) -> Remedy | None:
    """The next better package of the generic table, same die and board presumed."""
    if case.path is None or hottest.theta is None or case.path.measured is not None:
        return None
    better = sorted(
        (theta.span.high, family)
        for family, rule in packages.items()
        if (theta := rule.theta_ja.get(board)) is not None
        and family != draft.part.package.family
        and theta.span.high * case.thin_air[1] < hottest.theta
    )
    if not better:
        return None
    generic, family = better[-1]
    path = replace(case.path, solid=ZERO, air=Span.exact(generic), sink=None)
    junction = worst(replace(case, path=path)).junction
    if junction is None:
        return None
    text = f"package {family} (generic {show(generic, 'K/W')}) would bring the junction to {show(junction, '°C')}"
    return Remedy("next package", text, {"k_per_w": generic, "celsius": junction})
