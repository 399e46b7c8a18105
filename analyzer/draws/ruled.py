"""Currents that a load rule gives: supply currents by part number and supply pin."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from analyzer.circuit import Component, plain_name
from analyzer.draws.consumers import Consumer
from analyzer.findings import currents as kinds
from analyzer.findings.base import Finding
from analyzer.load import Draw
from analyzer.recognise.identity import identities
from analyzer.recognise.pattern import glob, match
from analyzer.rule import LoadRule, Rulebook


def ruled_draws(consumers: Iterable[Consumer], rulebook: Rulebook) -> tuple[list[Draw], list[Finding]]:
    """Draws of consumers that a load rule covers."""
    draws: list[Draw] = []
    findings: list[Finding] = []
    reported: set[str] = set()
    if not rulebook.loads:
        return draws, findings
    for consumer in consumers:
        rules = _fitting(consumer.component, rulebook.loads)
        if not rules:
            continue
        if len(rules) > 1 and consumer.component.key not in reported:
            reported.add(consumer.component.key)
            message = f"{consumer.component.ref}: {rules[0].where} is used, {rules[1].where} fits as well"
            findings.append(
                kinds.LOAD_RULES_CONFLICT.found(
                    consumer.component.ref, message, rules[0].where, key=consumer.component.key
                )
            )
        draws += _of(consumer, rules[0])
    return draws, findings


def _of(consumer: Consumer, rule: LoadRule) -> list[Draw]:
    """One draw for each supply of the rule that a pin of this consumer belongs to."""
    component = consumer.component
    draws = []
    for pattern, amps in rule.supplies:
        pins = [pin for pin in consumer.pins if glob(pattern.upper(), plain_name(pin.name).upper())]
        if pins:
            evidence = replace(amps, quantity=f"supply current of {component.ref} at {plain_name(pins[0].name)}")
            draws.append(Draw(component.ref, component.key, consumer.rail, evidence, "ruled"))
    return draws


def _fitting(component: Component, rules: Iterable[LoadRule]) -> list[LoadRule]:
    """The best rules for a part: by the best text that names it; user rules before shipped ones."""
    for identity in identities(component):
        found = [rule for rule in rules if any(match(pattern, identity.text) for pattern in rule.patterns)]
        if found:
            best = [rule for rule in found if rule.is_user] or found
            return sorted(best, key=lambda rule: (rule.name, rule.where))
    return []
