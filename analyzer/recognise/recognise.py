"""Which parts of a circuit are regulators or passages: stated, by rule, or by their pins."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from analyzer.circuit import Circuit, Component
from analyzer.evidence import Evidence
from analyzer.findings import recognition as kinds
from analyzer.findings.base import Finding
from analyzer.part import Channel, Package, Part
from analyzer.recognise import by_pins, by_rule, words
from analyzer.recognise.by_rule import Choice, Index, RuleHit, letters_of
from analyzer.recognise.identity import Identity
from analyzer.recognise.package import read_package
from analyzer.recognise.pattern import Hit, core, match
from analyzer.rule import Rule, Rulebook
from analyzer.settings import PartStatement, Settings

NOTHING_STATED = PartStatement()

MOST_PINS = 8
"""A larger part that shares a regulator's number but not its pins is another kind of part."""


def recognise(circuit: Circuit, rulebook: Rulebook, settings: Settings) -> tuple[tuple[Part, ...], tuple[Finding, ...]]:
    """Every regulator and passage of a circuit, fitted or not, in the circuit's order, and what there is to report."""
    index = Index(rulebook)
    letters = by_pins.LETTERS.union(*(rule.letters for rule in rulebook.rules))
    parts: list[Part] = []
    findings: list[Finding] = []
    for component in circuit.components:
        stated = settings.parts.get(component.ref, NOTHING_STATED)
        if stated.is_regulator is False or len(component.pins) < 2:
            continue
        if stated is NOTHING_STATED and letters_of(component) not in letters:
            continue
        part, found = _recognise(component, circuit, index, stated)
        findings += found
        if part is not None:
            parts.append(_with_statement(part, stated))
    return tuple(parts), tuple(findings)


def _recognise(
    component: Component, circuit: Circuit, index: Index, stated: PartStatement
) -> tuple[Part | None, list[Finding]]:
    choice, findings, how = _choice(component, index, stated)
    where = str(component.place)
    if choice.conflict:
        findings.append(kinds.IDENTITY_CONFLICT.found(component.ref, choice.conflict, where, key=component.key))
    if choice.hit is not None:
        hit = choice.hit
        package = _package(component, index, stated)
        if choice.tie:
            message = f"rules {hit.rule.name} and {choice.tie} match {hit.identity.text} equally well"
            findings.append(kinds.RULES_TIE.found(component.ref, message, hit.rule.where, key=component.key))
        thermal = tuple(figure for figure in hit.rule.thermal if figure.package == package.family)
        code = f", code {hit.hit.code} = {hit.hit.volts:g} V" if hit.hit.volts is not None else ""
        why = f"{hit.identity.field} {hit.identity.text} matches {hit.pattern} of {hit.rule.where}{code}"
        channels = by_rule.channels_of(component, hit)
        identity = hit.identity
        part = Part(component, how, hit.rule, identity.field, identity.text, package, channels, thermal, why)
        return part, findings
    channels, why = by_pins.channels_of(component, circuit)
    if channels:
        name = component.value or component.lib_id.rpartition(":")[2]
        package = _package(component, index, stated)
        part = Part(component, "pins", None, "Value", name, package, channels, (), why)
        if part.topology.regulates and component.fitted:
            message = f"{name} looks like a {part.topology.value} regulator ({why}), but no rule knows it"
            findings.append(kinds.NO_RULE.found(component.ref, message, where, key=component.key))
        return part, findings
    if component.fitted and (missing := _pins_missing(component, index)):
        findings.append(kinds.RULE_PINS_MISSING.found(component.ref, missing, where, key=component.key))
    elif component.fitted and _sounds_like(component):
        message = f"{component.value}: '{component.description[:80]}', pins not understood"
        findings.append(kinds.SOUNDS_LIKE.found(component.ref, message, where, key=component.key))
    return None, findings


def _package(component: Component, index: Index, stated: PartStatement) -> Package:
    package = read_package(stated.package or component.footprint, index.rulebook.packages)
    if stated.package:
        return replace(package, family=package.family or stated.package, source="stated")
    return package


def _choice(component: Component, index: Index, stated: PartStatement) -> tuple[Choice, list[Finding], str]:
    if stated.rule is not None:
        rule = index.by_name.get(stated.rule)
        if rule is None:
            message = f"there is no rule '{stated.rule}'"
            finding = kinds.STATED_RULE_UNKNOWN.found(component.ref, message, str(component.place), key=component.key)
            return Choice(None), [finding], "stated"
        return Choice(_stated_hit(component, rule, stated)), [], "stated"
    if stated.identity is not None:
        named = replace(component, fields={"MPN": stated.identity}, value="", lib_id="")
        return by_rule.choose(named, index), [], "stated"
    return by_rule.choose(component, index), [], "rule"


def _stated_hit(component: Component, rule: Rule, stated: PartStatement) -> RuleHit:
    """The named rule, with whatever voltage code the part's own names hold for it."""
    text = (stated.identity or component.value or rule.name).upper()
    identity = Identity("settings", text, True)
    for pattern in rule.patterns:
        hit = match(pattern, text, rule.makers)
        if hit is not None:
            return RuleHit(rule, identity, hit, pattern.text)
    return RuleHit(rule, identity, Hit("", None, ""), core(rule.patterns[0].text))


def _pins_missing(component: Component, index: Index) -> str:
    """What a rule matches by name while the pins say nothing; "" for parts that plainly are something else."""
    if len(component.pins) > MOST_PINS or words.NOT_A_REGULATOR.search(component.description):
        return ""
    if words.SIGNAL_PART.search(component.description):
        return ""
    hit = by_rule.kept_out(component, index)
    if hit is None:
        return ""
    return f"{hit.identity.field} {hit.identity.text} matches {hit.rule.where}, but no input and output pins were found"


def _sounds_like(component: Component) -> bool:
    if component.ref[:1] not in ("U", "I", "V", "P"):
        return False
    text = component.description
    return bool(words.SOUNDS_LIKE.search(text)) and not words.NOT_A_REGULATOR.search(text)


def _with_statement(part: Part, stated: PartStatement) -> Part:
    """Figures stated for this very part replace the rule's."""
    if not stated.figures and stated.vout is None:
        return part
    return replace(
        part, channels=tuple(_stated_channel(channel, stated.figures, stated.vout) for channel in part.channels)
    )


def _stated_channel(channel: Channel, figures: Mapping[str, Evidence], vout: Evidence | None) -> Channel:
    kept = {key: curve for key, curve in channel.curves.items() if key not in figures}
    return replace(
        channel,
        figures={**channel.figures, **figures},
        curves=kept,
        efficiency_map=None if "efficiency" in figures else channel.efficiency_map,
        reference=figures.get("reference", channel.reference),
        volts=vout or channel.volts,
    )
