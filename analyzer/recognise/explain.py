"""Why a text matches a rule and others do not, for people who write rules."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace

from analyzer.part import Package
from analyzer.recognise.by_rule import Index, RuleHit
from analyzer.recognise.identity import Identity, pieces
from analyzer.recognise.package import read_package
from analyzer.recognise.pattern import core, match
from analyzer.rule import Pattern, Role, Rule, Rulebook, Topology
from analyzer.wording import show, show_span

MOST_NEAR = 6
"""How many rules that nearly match are listed."""


def explain(text: str, footprint: str, rulebook: Rulebook) -> list[str]:
    """Lines that say which rule a part of this name gets, how its code reads, what the gate asks, and near misses."""
    index = Index(rulebook)
    package = read_package(footprint, rulebook.packages) if footprint else None
    lines: list[str] = []
    for piece in pieces(text):
        hits = index.hits(Identity("text", piece, True))
        lines += _hits(piece, hits)
        if hits:
            lines += _gate(hits[0].rule)
            lines += _thermal(hits[0].rule, package)
        lines += _near(piece, index, {hit.rule.where for hit in hits})
    if package is not None:
        lines.append(_package(package, rulebook))
    return lines or ["an empty text matches nothing"]


def _hits(text: str, hits: list[RuleHit]) -> list[str]:
    if not hits:
        return [f"{text}: no rule matches"]
    best = hits[0]
    lines = [f"{text}: {best.rule.where} by pattern {best.pattern}"]
    if best.hit.volts is not None:
        pattern = next(one for one in best.rule.patterns if one.text == best.pattern and _is_hit(one, text, best))
        volts = show(best.hit.volts * best.rule.channels[0].sign, "V")
        lines.append(f"  code '{best.hit.code}' read as {pattern.decode}: {volts}")
    else:
        lines.append("  no voltage code: the output voltage comes from the rule, the divider or the settings")
    for other in hits[1:]:
        why = "equally well: a finding" if other.rank == best.rank else _beaten(best, other)
        lines.append(f"  {other.rule.where} matches too, {why}")
    return lines


def _is_hit(pattern: Pattern, text: str, hit: RuleHit) -> bool:
    return match(pattern, text, hit.rule.makers) == hit.hit


def _beaten(best: RuleHit, other: RuleHit) -> str:
    if best.rule.is_user and not other.rule.is_user:
        return "but your own rules come first"
    if best.rule.makers and not other.rule.makers:
        return "but a rule for a maker's letters comes first"
    return "but its pattern has fewer letters"


def _gate(rule: Rule) -> Iterator[str]:
    yield f"  gate: reference letter {', '.join(rule.letters)}"
    for channel in rule.channels:
        name = f"output {channel.name}: " if channel.name else ""
        yield f"  gate: {name}{channel.topology.value}, pins found for {needed_roles(channel.topology)}"
        for role, pins in channel.pins.items():
            yield f"    {role.value} pins by the rule: {', '.join(pins)}"


def needed_roles(topology: Topology) -> str:
    """Which pins the gate asks for."""
    match topology:
        case Topology.SHUNT | Topology.SERIES_DIODE | Topology.SERIES_TRANSISTOR:
            return "two terminals"
        case Topology.CONTROLLER:
            return Role.INPUT.value
        case Topology.BOOST:
            return f"({Role.INPUT.value} or {Role.SWITCH.value}) and ({Role.OUTPUT.value} or {Role.SWITCH.value})"
        case _:
            return f"{Role.INPUT.value} and ({Role.OUTPUT.value} or {Role.SWITCH.value})"


def _thermal(rule: Rule, package: Package | None) -> Iterator[str]:
    for figure in rule.thermal:
        if package is None or figure.package == package.family:
            theta = f"θJA {show_span(figure.theta_ja.span, 'K/W')}" if figure.theta_ja else "no θJA"
            board = f" on board {figure.board.value}" if figure.board else ", board not stated"
            doubt = "" if figure.verified else ", from memory"
            yield f"  {figure.package}: {theta}{board} ({figure.source}{doubt})"
    if package is not None and not any(figure.package == package.family for figure in rule.thermal):
        yield f"  the rule has no thermal data for {package.family or package.text}"


def _package(package: Package, rulebook: Rulebook) -> str:
    if package.family is None:
        return f"{package.text}: package not understood; a [[package]] entry can name it"
    rule = next(one for one in rulebook.packages if one.family == package.family)
    thetas = ", ".join(f"{board.value} {show_span(theta.span, 'K/W')}" for board, theta in rule.theta_ja.items())
    return f"{package.text}: package {package.family}; generic θJA {thetas or 'unknown'}"


def _near(text: str, index: Index, matched: set[str]) -> list[str]:
    """Rules whose number stands in the text, or nearly does, and what keeps them from matching."""
    found: dict[str, tuple[int, str]] = {}
    for rule in index.rulebook.rules:
        if rule.where in matched or rule.where in found:
            continue
        reasons = [(nearness, why) for one in rule.patterns for nearness, why in _miss(one, rule, text)]
        if reasons:
            nearness = max(near for near, _ in reasons)
            why = "; ".join(dict.fromkeys(why for near, why in reasons if near == nearness))
            found[rule.where] = (nearness, f"  not {rule.where}: {why}")
    ranked = sorted(found.values(), key=lambda one: (-one[0], one[1]))
    return [line for _, line in ranked[:MOST_NEAR]]


def _miss(pattern: Pattern, rule: Rule, text: str) -> Iterator[tuple[int, str]]:
    literal = core(pattern.text)
    if literal in text:
        nearness = 10 + len(literal)
        if rule.makers and match(pattern, text):
            yield nearness + 3, f"the rule is for {', '.join(rule.makers)} only"
        elif pattern.codes and (loose := match(replace(pattern, codes=()), text, rule.makers)):
            yield nearness + 2, f"code '{loose.code}' is not among {', '.join(pattern.codes)} ({pattern.decode})"
        elif len(re.sub(r"\D", "", literal)) >= 2:
            form = f" with a code in {pattern.decode}" if "{code}" in pattern.text else ""
            yield nearness, f"has {literal}, but the whole does not read as {pattern.text}{form}"
    elif len(literal) > 3 and (digits := _common_digits(literal, text)) >= 3:
        yield digits, f"its number is {literal}"


def _common_digits(literal: str, text: str) -> int:
    """How many leading digits two numbers share."""
    own, other = re.search(r"\d+", literal), re.search(r"\d+", text)
    if own is None or other is None:
        return 0
    shared = 0
    for a, b in zip(own[0], other[0], strict=False):
        if a != b:
            break
        shared += 1
    return shared
