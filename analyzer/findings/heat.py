"""Findings of the thermal budget. The verdict of an entry is the heaviest of them."""

from __future__ import annotations

from analyzer.findings.base import FindingKind, Weight

JUNCTION_OVER_RATING = FindingKind(
    "junction-over-rating",
    Weight.OVER,
    "At the worst corner the junction is hotter than the data sheet allows.",
    "Lower the load, the input voltage or θJA; the Remedies list gives the numbers.",
)
JUNCTION_OVER_POLICY = FindingKind(
    "junction-over-policy",
    Weight.OVER,
    "At the worst corner the junction keeps the data sheet's limit but exceeds the margin policy's.",
    "Lower the load, the input voltage or θJA, or choose another policy on purpose.",
)
JUNCTION_TIGHT = FindingKind(
    "junction-tight",
    Weight.TIGHT,
    "At the worst corner the junction is inside its limit but not by the required margin.",
    "Gain margin as listed under Remedies, or measure the board.",
)
BUDGET_OPEN = FindingKind(
    "budget-open",
    Weight.OPEN,
    "The budget cannot be closed, for something that it needs is missing.",
    "Supply what is listed as missing.",
)
RUNAWAY = FindingKind(
    "thermal-runaway",
    Weight.OVER,
    "The part gets worse as it heats, and there is no temperature at which it comes to rest.",
    "Lower θJA or the load until a rest exists.",
)
DROPOUT_LOST = FindingKind(
    "dropout-lost",
    Weight.OVER,
    "At the lowest input and the highest output voltage less is left than the part needs to regulate.",
    "Raise the input voltage, or take a part with less dropout.",
)
DROPOUT_DOUBTFUL = FindingKind(
    "dropout-doubtful",
    Weight.TIGHT,
    "By voltages that are only presumed, the part may lose regulation at its lowest input.",
    "State the supply's real voltage span in the settings.",
)
INPUT_ABOVE_OUTPUT = FindingKind(
    "input-above-output",
    Weight.OVER,
    "A part that only steps up gets more input than its output: the output follows the input.",
    "Limit the input voltage, or take a part that steps both ways.",
)
INPUT_OVER_RATING = FindingKind(
    "input-over-rating",
    Weight.OVER,
    "The highest input voltage exceeds the part's rating.",
    "Limit the input voltage, or take a part with a higher rating.",
)
INPUT_DOUBTFUL = FindingKind(
    "input-rating-doubtful",
    Weight.TIGHT,
    "The nominal input is inside the part's rating; only the tolerance presumed for it reaches beyond.",
    "State the supply's real voltage span in the settings.",
)
INPUT_OVER_POLICY = FindingKind(
    "input-over-policy",
    Weight.TIGHT,
    "The highest input voltage is inside the rating but above the fraction of it that the margin policy allows.",
    "Limit the input voltage, or take a part with a higher rating.",
)
CURRENT_OVER_RATING = FindingKind(
    "current-over-rating",
    Weight.OVER,
    "The greatest load exceeds the part's rated output current.",
    "Lower the load, or take a larger part.",
)
CURRENT_OVER_POLICY = FindingKind(
    "current-over-policy",
    Weight.TIGHT,
    "The greatest load is inside the rating but above the fraction of it that the margin policy allows.",
    "Lower the load, or take a larger part.",
)
POWER_OVER_RATING = FindingKind(
    "power-over-rating",
    Weight.OVER,
    "The part makes more heat than its package's power limit.",
    "Lower the load or the input voltage, or take a larger package.",
)
CLASS_CORRECTED = FindingKind(
    "board-class-corrected",
    Weight.NOTE,
    "θJA was measured on a better class of board than the design's and was raised by the published ratio.",
    "Supply a θJA for the design's class of board, or state the board's class.",
)
THETA_GENERIC = FindingKind(
    "theta-generic",
    Weight.NOTE,
    "θJA comes from the generic table of package families, which is good to ±40 % only.",
    "Supply the data sheet's θJA in a rule.",
)
THETA_ESTIMATED = FindingKind(
    "theta-estimated",
    Weight.NOTE,
    "No θJA is known; θ is estimated from θJC and the copper stated at the pad, raised by what such estimates miss.",
    "Supply the data sheet's θJA in a rule, or measure the board.",
)
ALTITUDE_UNCHECKED = FindingKind(
    "altitude-unchecked",
    Weight.NOTE,
    "Above 5 km the altitude correction has not been checked against anything.",
    "Verify on hardware in a low-pressure chamber.",
)
SHORT_CIRCUIT = FindingKind(
    "short-circuit-heat",
    Weight.NOTE,
    "What the part would dissipate into a shorted output, by its current limit; apart from the budget.",
    "Make sure that a short is detected or survived; thermal shutdown is no protection to rely on.",
)
HEAT_OUTSIDE = FindingKind(
    "heat-outside",
    Weight.NOTE,
    "Part of the loss is in other parts than the regulator.",
    "Check those parts by themselves.",
)
PULSE_AS_DC = FindingKind(
    "pulse-as-steady",
    Weight.NOTE,
    "A pulsed load was budgeted without a transient thermal impedance.",
    "Supply a Foster network in the part's rule.",
)
POLICY_UNVERIFIED = FindingKind(
    "policy-unverified",
    Weight.NOTE,
    "The margin policy's figures have not been checked against the standard.",
    "Check them, then mark the policy as verified.",
)
ABSOLUTE_LIMIT = FindingKind(
    "absolute-limit-used",
    Weight.NOTE,
    "Only the absolute maximum junction temperature is known; it is no operating limit.",
    "Supply the recommended operating limit.",
)
NOT_RATED = FindingKind(
    "rating-not-checked",
    Weight.NOTE,
    "A rating of the part is not known, so its input voltage or load was compared with nothing.",
    "Supply input_max and output_current_max in the part's rule.",
)
LIMIT_RAISED = FindingKind(
    "limit-raised",
    Weight.TIGHT,
    "The junction limit stated in the settings is above the one the rule gives for the part.",
    "State a limit that the data sheet allows, or correct the rule.",
)
MINIMUM_LOAD = FindingKind(
    "minimum-load",
    Weight.NOTE,
    "The least load may be below what the part needs to regulate.",
    "Add a bleeder, or check the divider's own current.",
)
OUT_OF_TABLE = FindingKind(
    "figure-out-of-table",
    Weight.OPEN,
    "An operating point lies outside the table that a rule gives; published tables are not extrapolated.",
    "Extend the table from the data sheet.",
)
NEIGHBOUR_HEAT = FindingKind(
    "neighbour-heat",
    Weight.NOTE,
    "A warm neighbour at a stated distance; the kelvin told are a published estimate for one copper plane and are not "
    "in the budget.",
    "Measure the coupling, or state it as theta in [[coupling]] to have it counted.",
)
