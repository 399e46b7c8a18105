"""What is wrong with valid rules: entries that others always hide, and entries that match nothing on given boards."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from analyzer.circuit import Circuit
from analyzer.recognise.by_rule import Index, fits, letters_of
from analyzer.recognise.identity import Identity, identities
from analyzer.recognise.pattern import match
from analyzer.rule import Pattern, Rule, Rulebook

_EXAMPLES = {
    "volts": "5",
    "decimal": "3.3",
    "dashed": "3-3",
    "letter": "3V3",
    "tenths": "33",
    "hundredths": "330",
}


def shadowed(rulebook: Rulebook, names: frozenset[str]) -> Iterator[str]:
    """Lines on rules of the named files whose parts all go to another rule.

    A pattern is tried with a name made from it; that the name goes elsewhere shows that the pattern never decides for
    names of that plain form.
    """
    index = Index(rulebook)
    for rule in rulebook.rules:
        if file_of(rule) not in names:
            continue
        takers = [_taker(rule, pattern, index) for pattern in rule.patterns]
        if all(takers):
            yield f"{rule.where}: never decides; {'; '.join(dict.fromkeys(taker for taker in takers if taker))}"


def file_of(rule: Rule) -> str:
    """Name of the file a rule stands in."""
    return rule.where.partition(" [")[0]


def _taker(rule: Rule, pattern: Pattern, index: Index) -> str:
    """Who takes a name made from this pattern, "" if the rule itself does."""
    text = example(rule, pattern)
    hits = index.hits(Identity("example", text, True))
    if not hits or (best := hits[0]).rule == rule:
        return ""
    return f"{text} goes to {best.rule.where}"


def example(rule: Rule, pattern: Pattern) -> str:
    """A name that the pattern is meant for."""
    code = ""
    if "{code}" in pattern.text:
        code = pattern.codes[0] if pattern.codes else next(iter(pattern.table), _EXAMPLES.get(pattern.decode, ""))
    maker = rule.makers[0] if rule.makers else "ZZQ"
    text = pattern.text.replace("{maker}", maker).replace("{code}", code)
    if rule.makers and not pattern.text.startswith("{maker}") and text.startswith("*"):
        text = maker + text
    return text.replace("*", "").replace("?", "A")


def unused(rulebook: Rulebook, names: frozenset[str], circuits: Iterable[Circuit]) -> Iterator[str]:
    """Lines on rules of the named files that no part of the boards gets, with parts the gate kept from them."""
    index = Index(rulebook)
    used: set[str] = set()
    kept: dict[str, list[str]] = {}
    for circuit in circuits:
        for component in circuit.components:
            for identity in identities(component):
                for hit in index.hits(identity):
                    if fits(component, hit.rule):
                        used.add(hit.rule.where)
                    else:
                        letter = letters_of(component)
                        why = "pins" if letter in hit.rule.letters else f"reference letter {letter}"
                        kept.setdefault(hit.rule.where, []).append(f"{component.ref} {identity.text} ({why})")
    for rule in rulebook.rules:
        if rule.where not in used and file_of(rule) in names:
            held = "; ".join(dict.fromkeys(kept.get(rule.where, ())))
            yield f"{rule.where}: matches no part of these boards" + (f"; the gate kept out {held}" if held else "")
    for load in rulebook.loads:
        texts = (one.text for circuit in circuits for part in circuit.components for one in identities(part))
        if load.where.partition(" [")[0] in names and not any(
            match(pattern, text) for text in texts for pattern in load.patterns
        ):
            yield f"{load.where}: matches no part of these boards"
