"""Findings of the draws stage: stated currents that cannot be used, loads that cannot be summed."""

from __future__ import annotations

from analyzer.findings.base import FindingKind, Weight

DRAW_NOT_UNDERSTOOD = FindingKind(
    "draw-not-understood",
    Weight.OPEN,
    "A field that states a load current holds a text that is no current or power.",
    "Write a current or power with its unit, such as 120 mA, 100/150 mA (typical/maximum) or 0.5 W.",
)
DRAW_NEGATIVE = FindingKind(
    "draw-negative",
    Weight.OPEN,
    "A stated load current is negative. What a part takes is stated without a sign, on negative rails too.",
    "State the size of the current.",
)
DRAW_FOR_UNKNOWN_PART = FindingKind(
    "draw-for-unknown-part",
    Weight.OPEN,
    "A current is stated for a part that this board does not have.",
    "Correct the reference, or remove the statement.",
)
DRAW_FOR_DOUBLED_REFERENCE = FindingKind(
    "draw-for-doubled-reference",
    Weight.OPEN,
    "A current is stated for a reference that more than one part has.",
    "Number the parts again, then state the current for each.",
)
DRAW_FOR_UNFITTED_PART = FindingKind(
    "draw-for-unfitted-part",
    Weight.NOTE,
    "A current is stated for a part that is not fitted. It is not counted.",
    "Nothing, if the part stays off the board; else mark it as fitted.",
)
DRAW_WITHOUT_RAIL = FindingKind(
    "draw-without-rail",
    Weight.OPEN,
    "A part is supplied from several rails, or from none that was found, and its stated current names none.",
    "State one current for each rail, as REF@RAIL in [draws] or in a field such as I_load@+3V3.",
)
DRAW_ON_UNKNOWN_RAIL = FindingKind(
    "draw-on-unknown-rail",
    Weight.OPEN,
    "A current is stated for a rail or net that this board does not have, or that is ground.",
    "Use the name of the rail or of one of its nets, as `heatledger rails` prints them.",
)
DRAW_OFF_ITS_RAIL = FindingKind(
    "draw-off-its-rail",
    Weight.NOTE,
    "A current is stated for a part on a rail that none of its pins is on. It is counted on that rail.",
    "Check the rail's name; the rails the part is on still wait for a current.",
)
DRAW_ON_REGULATOR = FindingKind(
    "draw-on-regulator",
    Weight.OPEN,
    "A load current is stated on a regulator or passage. What it takes follows from what hangs on its output.",
    "State the currents of the parts on its output, or one for the whole rail as @RAIL in [draws].",
)
DRAW_STATED_TWICE = FindingKind(
    "draw-stated-twice",
    Weight.NOTE,
    "Two different currents are stated for the same part on the same rail.",
    "Keep one of the two.",
)
DRAW_POWER_WITHOUT_VOLTAGE = FindingKind(
    "draw-power-without-voltage",
    Weight.OPEN,
    "A power is stated for a part on a rail whose voltage is not known, so its current is not known either.",
    "State a current, or the rail's voltage in [supplies].",
)
LOAD_RULES_CONFLICT = FindingKind(
    "load-rules-conflict",
    Weight.NOTE,
    "Two load rules of equal rank fit the same part; the first by name is used.",
    "Narrow one of the patterns, or state the part's current.",
)
CIRCULAR_LOAD = FindingKind(
    "circular-load",
    Weight.OPEN,
    "Regulators or passages feed each other in a circle, so none of these rails' loads can be summed.",
    "Mark the part that does not carry current in normal operation with share = 0 in its [parts] table.",
)
SUPPLY_PIN_UNFED = FindingKind(
    "supply-pin-unfed",
    Weight.NOTE,
    "A supply pin is on a named net that no rail reaches, so its current is on no rail's account.",
    "State what feeds the net, in [supplies] or [links], or draw the missing connection.",
)
POSSIBLE_LOADS = FindingKind(
    "possible-loads",
    Weight.NOTE,
    "Connectors, transistors or other parts without a supply pin are on a rail; whether current leaves through them "
    "the drawing does not say. They are counted as taking none.",
    "State what they take, as REF@RAIL in [draws]; 0 mA if nothing.",
)
LOAD_BELOW_MINIMUM = FindingKind(
    "load-below-minimum",
    Weight.NOTE,
    "The known load of a regulator can fall below the least load it needs to regulate.",
    "Add a bleeder resistor, or check the data sheet's condition for the minimum load.",
)
