"""Findings of recognition."""

from __future__ import annotations

from analyzer.findings.base import FindingKind, Weight

IDENTITY_CONFLICT = FindingKind(
    "identity-conflict",
    Weight.OPEN,
    "Two fields of a part name different parts or voltages, or one of them names a part that no rule knows: the "
    "figures used may belong to another part.",
    'Correct the fields, or name the part in the settings: [parts.REF] identity = "...".',
)
RULES_TIE = FindingKind(
    "rules-tie",
    Weight.OPEN,
    "Two rules of equal rank match the same part.",
    'Make one pattern more specific, or choose the rule in the settings: [parts.REF] rule = "...".',
)
NO_RULE = FindingKind(
    "no-rule",
    Weight.OPEN,
    "A part looks like a regulator by its pins, but no rule knows it.",
    "Write a rule for it: 'heatledger rules draft' makes one to fill in.",
)
SOUNDS_LIKE = FindingKind(
    "sounds-like-regulator",
    Weight.NOTE,
    "A part's description speaks of a regulator, but its pins were not understood.",
    "If it is one, write a rule that names its pins; else declare it: [parts.REF] is_regulator = false.",
)
STATED_RULE_UNKNOWN = FindingKind(
    "stated-rule-unknown",
    Weight.OPEN,
    "The settings name a rule that no rule file has.",
    "Correct the name; 'heatledger rules try' lists rules that match a part.",
)
RULE_PINS_MISSING = FindingKind(
    "rule-pins-missing",
    Weight.OPEN,
    "A rule matches a part by name, but its input and output pins were not found on the symbol.",
    "Name the pins in the rule: [rule.pins] input = [...], output = [...].",
)
