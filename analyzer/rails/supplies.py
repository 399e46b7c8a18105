"""Voltages from outside the board: stated supplies, standard supplies by setting or name, and names themselves."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from fnmatch import fnmatchcase

from analyzer.evidence import Evidence, Grade
from analyzer.quantity import Span
from analyzer.rails.names import base_name, is_signal_name, named_volts
from analyzer.rule import Rulebook, SupplyRule
from analyzer.settings import Settings

NAME_TOLERANCE = 0.05
"""Spread taken around a voltage of which only the name is known (common practice)."""


def matches_net(key: str, nets: Iterable[str]) -> bool:
    """Whether a name written in the settings means one of these nets: its full name, or its name without sheet path."""
    return any(key in (net, base_name(net)) for net in nets)


def stated_supply(nets: Iterable[str], settings: Settings, rulebook: Rulebook) -> Evidence | None:
    """Voltage that the settings state for one of these nets, directly or by naming a standard supply."""
    nets = tuple(nets)
    for key in sorted(settings.supplies):
        if matches_net(key, nets):
            return settings.supplies[key]
    for key in sorted(settings.supply_names):
        if matches_net(key, nets):
            rule = next((rule for rule in rulebook.supplies if rule.name == settings.supply_names[key]), None)
            if rule is not None:
                return replace(rule.volts, note=_note(f"chosen in the settings for '{key}'", rule.volts.note))
    return None


def unused_supplies(settings: Settings, rulebook: Rulebook, nets: Iterable[str]) -> tuple[tuple[str, str], ...]:
    """(name, why) of stated supplies that apply to nothing."""
    known = {name for net in nets for name in (net, base_name(net))}
    names = {rule.name for rule in rulebook.supplies}
    keys = sorted({*settings.supplies, *settings.supply_names})
    found = [(key, "no net has this name") for key in keys if key not in known]
    found += [
        (key, f"there is no standard supply '{settings.supply_names[key]}'")
        for key in sorted(settings.supply_names)
        if settings.supply_names[key] not in names
    ]
    return tuple(found)


def supply_by_name(name: str, rulebook: Rulebook, is_usb: bool) -> Evidence | None:
    """Voltage of the standard supply that a net or connector pin name suggests, graded presumed.

    Args:
        name: Name of the net or pin.
        rulebook: The standard supplies.
        is_usb: Whether the net can be a USB port's: motor drives call their bus VBUS, too.
    """
    if is_signal_name(name):
        return None
    rule = _rule_for(base_name(name).upper(), rulebook.supplies)
    if rule is None or (rule.name.startswith("usb") and not is_usb):
        return None
    return replace(
        rule.volts, grade=Grade.PRESUMED, note=_note(f"suggested by the name {base_name(name)}", rule.volts.note)
    )


def _rule_for(name: str, rules: tuple[SupplyRule, ...]) -> SupplyRule | None:
    return next((rule for rule in rules if any(fnmatchcase(name, pattern.upper()) for pattern in rule.nets)), None)


def volts_by_name(net: str) -> Evidence | None:
    """Voltage by a net's name alone, ±5 %, graded presumed."""
    named = named_volts(net)
    if named is None:
        return None
    return Evidence(
        "rail voltage",
        Span.around(named.volts, NAME_TOLERANCE),
        "V",
        f"net name {base_name(net)}",
        Grade.PRESUMED,
        note="by its name only, ±5 % presumed",
    )


def _note(*pieces: str) -> str:
    return "; ".join(piece for piece in pieces if piece)
