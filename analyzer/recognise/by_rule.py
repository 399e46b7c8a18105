"""Recognition by rule: which rule a part's names match, and what the rule makes of it."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from analyzer.circuit import Component, plain_name
from analyzer.evidence import Evidence, Grade
from analyzer.part import Channel
from analyzer.quantity import Span
from analyzer.recognise import words
from analyzer.recognise.identity import Identity, identities, looks_like_part_number
from analyzer.recognise.pattern import Hit, core, match
from analyzer.recognise.roles import by_role
from analyzer.rule import PASSAGES, ChannelRule, Role, Rule, Rulebook, Topology

DEFAULT_TOLERANCE = 0.02
"""Accuracy of a fixed output where its rule gives none: ±2 %, common practice for fixed regulators over temperature."""

_DIFFERENTIAL = frozenset({"+IN", "-IN"})


@dataclass(frozen=True, slots=True)
class RuleHit:
    """A rule that matches one of a part's names."""

    rule: Rule
    identity: Identity
    hit: Hit
    pattern: str

    @property
    def rank(self) -> tuple[bool, bool, int]:
        """User rules beat shipped ones, named makers beat any maker, long patterns beat short ones."""
        return (self.rule.is_user, bool(self.rule.makers), len(core(self.pattern)))


@dataclass(frozen=True)
class Index:
    """The rulebook's patterns with their literal cores, looked through in one pass for each name."""

    rulebook: Rulebook

    @cached_property
    def _cores(self) -> tuple[tuple[str, int], ...]:
        rules = enumerate(self.rulebook.rules)
        return tuple((core(pattern.text), number) for number, rule in rules for pattern in rule.patterns)

    def candidates(self, text: str) -> Iterable[Rule]:
        """Rules with a pattern whose literal core stands in `text`, each once, in the order of the rulebook."""
        numbers = dict.fromkeys(number for literal, number in self._cores if literal in text)
        return (self.rulebook.rules[number] for number in numbers)

    def hits(self, identity: Identity) -> list[RuleHit]:
        """Every rule that matches one name, best first; of a rule only its first pattern that does."""
        found = []
        for rule in self.candidates(identity.text):
            for pattern in rule.patterns:
                hit = match(pattern, identity.text, rule.makers)
                if hit is not None:
                    found.append(RuleHit(rule, identity, hit, pattern.text))
                    break
        return sorted(found, key=lambda one: one.rank, reverse=True)

    @cached_property
    def by_name(self) -> Mapping[str, Rule]:
        """Rules by name; a user's rule hides a shipped one of the same name."""
        return {rule.name: rule for rule in reversed(self.rulebook.rules)}


@dataclass(frozen=True, slots=True)
class Choice:
    """Which rule a part has.

    Attributes:
        hit: The best match, None if there is none.
        conflict: What disagrees among the part's names, "" if nothing does.
        tie: Name of another rule of equal rank, "" if there is none.
    """

    hit: RuleHit | None
    conflict: str = ""
    tie: str = ""


def choose(component: Component, index: Index) -> Choice:
    """The rule for a part: the best match on its best name, with what its other names say against it."""
    names = list(identities(component))
    matched = [(name, hits) for name in names if (hits := _gated(component, index.hits(name)))]
    if not matched:
        return Choice(None)
    name, hits = matched[0]
    best = hits[0]
    rival = next((one for one in hits[1:] if one.rank == best.rank), None)
    tie = rival.rule.name if rival else ""
    if name.field == "symbol name" and (stranger := _stranger(names, best)):
        # the symbol was copied from another part: its figures are not this part's
        return Choice(None, f"{stranger.field} says {stranger.text}, the symbol is {name.text}")
    return Choice(best, _conflict(names, matched, best), tie)


def kept_out(component: Component, index: Index) -> RuleHit | None:
    """The best match by name whose input and output pins were not found, though the reference letter fits."""
    for identity in identities(component):
        for hit in index.hits(identity):
            if letters_of(component) in hit.rule.letters and not fits(component, hit.rule):
                return hit
    return None


def _gated(component: Component, hits: list[RuleHit]) -> list[RuleHit]:
    return [one for one in hits if fits(component, one.rule)]


def letters_of(component: Component) -> str:
    """The letters that a reference begins with, upper case."""
    found = re.match(r"[A-Za-z]*", component.ref)
    return found[0].upper() if found else ""


def fits(component: Component, rule: Rule) -> bool:
    """Whether reference letter and pins fit the rule, so that a transistor named like a regulator is none."""
    if letters_of(component) not in rule.letters or words.SIGNAL_PART.search(component.description):
        return False
    return all(_has_roles(component, channel) for channel in rule.channels)


def _has_roles(component: Component, channel: ChannelRule) -> bool:
    if channel.topology is Topology.SHUNT:
        return len(component.pins) >= 2
    if {plain_name(pin.name).upper() for pin in component.pins} >= _DIFFERENTIAL:
        # an amplifier's or receiver's pair of inputs
        return False
    roles = by_role(component.pins, channel.pins)
    if channel.topology is Topology.CONTROLLER:
        return Role.INPUT in roles
    if channel.topology in (Topology.SERIES_DIODE, Topology.SERIES_TRANSISTOR):
        return len(component.pins) >= 2
    has_output = Role.OUTPUT in roles or Role.SWITCH in roles
    has_input = Role.INPUT in roles or (channel.topology is Topology.BOOST and Role.SWITCH in roles)
    return has_input and has_output


def _stranger(names: Sequence[Identity], best: RuleHit) -> Identity | None:
    """A better name that looks like a part number of another part than the symbol's."""
    for name in names:
        if name.field == "symbol name":
            return None
        literal = core(best.pattern)
        if (
            (name.is_part_number or name.field == "Value")
            and looks_like_part_number(name.text)
            and literal not in name.text
        ):
            return name
    return None


def _conflict(names: Sequence[Identity], matched: list[tuple[Identity, list[RuleHit]]], best: RuleHit) -> str:
    for name, hits in matched[1:]:
        other = hits[0]
        both = best.hit.volts is not None and other.hit.volts is not None
        if name.field != "symbol name" and (other.rule != best.rule or (both and other.hit.volts != best.hit.volts)):
            return f"{best.identity.field} says {best.identity.text}, {name.field} says {name.text}"
    stranger = next((one for one in names if one.is_part_number), None)
    if stranger is not None and not best.identity.is_part_number and looks_like_part_number(stranger.text):
        literal = core(best.pattern)
        if literal not in stranger.text and not any(one.field == stranger.field for one, _ in matched):
            return f"{stranger.field} says {stranger.text}, {best.identity.field} says {best.identity.text}"
    return ""


def channels_of(component: Component, hit: RuleHit) -> tuple[Channel, ...]:
    """The part's channels as the rule has them, pins by role, a voltage code decoded."""
    return tuple(_channel(component, hit, channel) for channel in hit.rule.channels)


def _channel(component: Component, hit: RuleHit, rule: ChannelRule) -> Channel:
    volts = rule.volts
    if volts is None and hit.hit.volts is not None:
        volts = _decoded(hit, rule)
    return Channel(
        rule.name,
        rule.topology,
        rule.sign,
        by_role(component.pins, rule.pins),
        volts if rule.topology not in PASSAGES else None,
        rule.figures.get("reference"),
        rule.reference_across,
        rule.figures,
        rule.curves,
        rule.efficiency_map,
    )


def _decoded(hit: RuleHit, rule: ChannelRule) -> Evidence:
    tolerance = rule.figures.get("output_tolerance")
    fraction = tolerance.span.high if tolerance else DEFAULT_TOLERANCE
    span = Span.around((hit.hit.volts or 0.0) * rule.sign, fraction)
    grade = Grade.RULED if hit.rule.verified and tolerance else Grade.PRESUMED
    source = f"{hit.identity.field} {hit.identity.text}: code {hit.hit.code} by {hit.rule.where}"
    note = "" if tolerance else f"accuracy not given: ±{DEFAULT_TOLERANCE:.0%} presumed, common practice"
    return Evidence("output voltage", span, "V", source, grade, parents=(tolerance,) if tolerance else (), note=note)
