"""Findings about rails, their feeds and their voltages."""

from __future__ import annotations

from analyzer.findings.base import FindingKind, Weight

CIRCULAR_FEED = FindingKind(
    "circular-feed",
    Weight.OPEN,
    "Following feeds upstream leads back to the same rail, so its current cannot be added up.",
    "Say which part does not conduct in operation: `[links]` for a link, `is_regulator = false` for a part.",
)
RAIL_WITHOUT_FEED = FindingKind(
    "rail-without-feed",
    Weight.NOTE,
    "A rail with consumers has nothing on the board that feeds it; its voltage is known by name only, or not at all.",
    "State the voltage in `[supplies]`, or check the wiring.",
)
PARALLEL_REGULATORS = FindingKind(
    "parallel-regulators",
    Weight.NOTE,
    "Several regulators feed one rail directly; without a statement each is budgeted for the whole load.",
    "State `share` for each of them in `[parts]` if they share the load.",
)
SHARES_INCOMPLETE = FindingKind(
    "shares-incomplete",
    Weight.OPEN,
    "The stated shares of a rail's feeds add up to less than its load, so part of its current is in nobody's budget.",
    "Let the `share` of the parts that feed the rail add up to 1.",
)
OPPOSITE_FEEDS = FindingKind(
    "opposite-feeds",
    Weight.OPEN,
    "Feeds of opposite sign reach one rail.",
    "Check the wiring and the signs of the rules.",
)
NAME_DISAGREES = FindingKind(
    "name-disagrees",
    Weight.NOTE,
    "The voltage in a rail's name lies outside the voltage found by better evidence.",
    "Check divider and part number; the better evidence is used.",
)
NAMES_CONFLICT = FindingKind(
    "names-conflict",
    Weight.NOTE,
    "Nets that are joined by links carry different voltages in their names.",
    "State the voltage in `[supplies]`, or say in `[links]` which link is open.",
)
NAME_NOT_TRUSTED = FindingKind(
    "name-not-trusted",
    Weight.OPEN,
    "The voltage in the name of a regulator's input is too low for the regulator's own output.",
    "State the input voltage in `[supplies]`.",
)
DIVIDER_AGAINST_NAME = FindingKind(
    "divider-against-name",
    Weight.NOTE,
    "A feedback divider sets a voltage that the rail's name contradicts.",
    "Check the resistors and the reference voltage; the divider is used.",
)
SAME_DIVIDER = FindingKind(
    "same-divider",
    Weight.NOTE,
    "Regulators with equal dividers feed rails whose names state different voltages.",
    "Check the resistor values: they look copied.",
)
UNUSUAL_RESISTANCE = FindingKind(
    "unusual-resistance",
    Weight.NOTE,
    "A feedback resistor's value is in none of the series E24, E96 and E192 of IEC 60063.",
    "Check the value text.",
)
ADJUSTABLE_OUTPUT = FindingKind(
    "adjustable-output",
    Weight.NOTE,
    "Something besides fixed resistors sets a regulator's output, so its voltage is a span.",
    "State the range really used as `vout` of the part in `[parts]`.",
)
FEED_VOLTS_UNKNOWN = FindingKind(
    "feed-voltage-unknown",
    Weight.NOTE,
    "One of several feeds of a rail has no known voltage.",
    "State it in `[supplies]`.",
)
CHOKE_UNPAIRED = FindingKind(
    "choke-unpaired",
    Weight.NOTE,
    "The windings of a choke cannot be told apart, so it joins nothing.",
    "State it in `[links]`, or use a symbol that names its windings.",
)
SUPPLY_WITHOUT_NET = FindingKind(
    "supply-without-net",
    Weight.OPEN,
    "A supply in the settings names a net or a standard supply that does not exist.",
    "Correct the name in `[supplies]`.",
)
LINK_WITHOUT_PART = FindingKind(
    "link-without-part",
    Weight.OPEN,
    "The settings say whether a part joins its nets, but no part has that reference.",
    "Correct the reference in `[links]`.",
)
BYPASSED = FindingKind(
    "bypassed",
    Weight.NOTE,
    "A part's input and output are on one rail: something conducting lies across it.",
    "Mark what is not fitted, or say so in `[links]`.",
)
