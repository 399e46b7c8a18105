"""Findings of the reader: what in the drawing could not be read, or does not mean what it seems to."""

from __future__ import annotations

from analyzer.findings.base import FindingKind, Weight

SHEET_MISSING = FindingKind(
    "sheet-missing",
    Weight.OPEN,
    "A sheet's file does not exist, so what is drawn on it is unknown and nothing on the board can be called clear.",
    "Restore the file, or correct the file name in the sheet's properties.",
)
SHEET_UNREADABLE = FindingKind(
    "sheet-unreadable",
    Weight.OPEN,
    "A sheet's file exists but could not be read, so what is drawn on it is unknown.",
    "Repair or restore the file; the message says what is wrong with it.",
)
SHEET_CYCLE = FindingKind(
    "sheet-cycle",
    Weight.OPEN,
    "A sheet contains itself, directly or through others. The drawing is cut where it would begin again.",
    "Remove the inner sheet symbol.",
)
SHEET_OUTSIDE = FindingKind(
    "sheet-outside",
    Weight.OPEN,
    "A sheet's file lies outside the project folder and was not opened.",
    "Move it into the project, or allow it with --allow-outside.",
)
SHEET_NAME_TWICE = FindingKind(
    "sheet-name-twice",
    Weight.NOTE,
    "Two sheets on one parent have the same name: KiCad takes their equally named local nets for one and shorts them.",
    "Give the sheets different names.",
)
SHEET_PIN_LOOSE = FindingKind(
    "sheet-pin-loose",
    Weight.NOTE,
    "A sheet pin has no hierarchical label of that name on its sheet, or the label has no pin, or a pin occurs twice.",
    "Add the missing label or pin, or remove the superfluous one.",
)
LIMIT_REACHED = FindingKind(
    "limit-reached",
    Weight.OPEN,
    "The drawing is larger than the reader's limits; the rest was not read.",
    "Check the drawing for an accidental multiplication; real boards stay far below the limits.",
)
BAD_ITEM = FindingKind(
    "item-unreadable",
    Weight.OPEN,
    "An item of the drawing lacks something it needs (position, number, name) or holds an impossible value. "
    "It was left out.",
    "Delete and draw the item again, or restore the file.",
)
NEWER_FORMAT = FindingKind(
    "format-newer",
    Weight.NOTE,
    "The file was written by a newer KiCad than this reader knows. Unknown parts of it were ignored.",
    "Compare `heatledger nets` with KiCad's own netlist, or update heatledger.",
)
NO_SYMBOL = FindingKind(
    "symbol-missing",
    Weight.OPEN,
    "The file lacks the library symbol of a part, so its pins are unknown.",
    "In KiCad, update the symbols from the library and save.",
)
LIBRARY_TWICE = FindingKind(
    "library-symbol-twice",
    Weight.OPEN,
    "A file holds two different library symbols of one name, so it is unknown which pins a part has.",
    "In KiCad, update the symbols from the library and save.",
)
NO_UNIT = FindingKind(
    "unit-unknown",
    Weight.OPEN,
    "A part uses a unit or body style its library symbol does not have, so its pins are unknown.",
    "In KiCad, update the symbol from the library or choose an existing unit.",
)
REFERENCE_TWICE = FindingKind(
    "reference-twice",
    Weight.OPEN,
    "Several symbols that are not units of one part share a reference. They are kept as separate parts.",
    "Annotate the schematic again.",
)
NOT_ANNOTATED = FindingKind(
    "not-annotated",
    Weight.NOTE,
    "A part has no number in its reference. It is kept as a part of its own.",
    "Annotate the schematic.",
)
UNIT_NOT_PLACED = FindingKind(
    "unit-not-placed",
    Weight.NOTE,
    "A unit of a part is not placed on any sheet, so its pins are on no net.",
    "Place the unit, at least the one with the power pins.",
)
PAD_ON_TWO_NETS = FindingKind(
    "pad-on-two-nets",
    Weight.OPEN,
    "One pad is drawn on two nets. KiCad's netlist shows only one of them; here the pad counts on both.",
    "Wire all drawings of the pad to the same net.",
)
PIN_BESIDE_WIRE = FindingKind(
    "pin-beside-wire",
    Weight.NOTE,
    "A pin lies on the middle of a wire without a junction, or a wire ends a hair's breadth beside it: not connected.",
    "Move the pin or the wire end onto each other, or add a junction.",
)
LABEL_LOOSE = FindingKind(
    "label-loose",
    Weight.NOTE,
    "A label touches neither a wire nor a pin, so it names nothing.",
    "Move the label onto its wire.",
)
POWER_NAME_DIFFERS = FindingKind(
    "power-name-differs",
    Weight.NOTE,
    "A power symbol shows one name but, in files of KiCad 6 and 7, connects by its hidden pin's name, which differs.",
    "In KiCad, update the power symbol from the library, or check that the pin's name is the net meant.",
)
HIDDEN_POWER_PIN = FindingKind(
    "hidden-power-pin",
    Weight.NOTE,
    "An invisible power pin connects a part to the net of the pin's name, and joins it to what the pin is wired to.",
    "Check that the nets joined this way are meant to be one.",
)
BUS_UNKNOWN = FindingKind(
    "bus-not-understood",
    Weight.OPEN,
    "A bus label names an alias that is not defined, refers to itself, or has too many members.",
    "Define the alias in the project, or restore the .kicad_pro the schematic was saved with.",
)
VARIABLE_CYCLE = FindingKind(
    "variable-cycle",
    Weight.NOTE,
    "Text variables refer to each other in a circle, or nest too deeply; the text is left as written.",
    "Correct the text variables of the project.",
)
PROJECT_UNREADABLE = FindingKind(
    "project-unreadable",
    Weight.OPEN,
    "The .kicad_pro, or an entry of it, could not be used: bus aliases, text variables, variants and further top-level "
    "sheets may be unknown.",
    "Restore the project file, or open and save the project in KiCad.",
)
PROJECT_MISSING = FindingKind(
    "project-missing",
    Weight.NOTE,
    "There is no .kicad_pro beside the schematic; bus aliases and text variables kept there are unknown.",
    "Give the project file along with the schematic.",
)
OPEN_IN_EDITOR = FindingKind(
    "open-in-editor",
    Weight.NOTE,
    "KiCad has the project open, or left an autosave behind. The saved state was read.",
    "Save in KiCad and run again.",
)
NETLIST_ONLY = FindingKind(
    "netlist-only",
    Weight.NOTE,
    "The input is a netlist without its schematic. Such a file leaves things out; the message says which.",
    "Give the .kicad_sch where there is one.",
)
SCHEMATIC_PREFERRED = FindingKind(
    "schematic-preferred",
    Weight.NOTE,
    "A netlist was given and the schematic it was made from lies beside it: the schematic was read instead.",
    "Nothing to do; move the netlist elsewhere to have it read by itself.",
)
POWER_PIN_LOOSE = FindingKind(
    "power-pin-unconnected",
    Weight.NOTE,
    "A power input pin is connected to nothing and carries no no-connect mark.",
    "Wire the pin, or mark it as not connected.",
)
SEVERAL_NAMES = FindingKind(
    "net-with-several-names",
    Weight.NOTE,
    "A net bears several names that hold on all sheets (power symbols, global labels): what is drawn under them is "
    "one net here. Where such a net also passes through sheet pins, KiCad's own netlist may keep parts of it apart.",
    "Keep one name, or join the two nets through a net tie.",
)
TABLE_CELL = FindingKind(
    "table-cell",
    Weight.OPEN,
    "A cell of a parts table cannot be read, so its row lacks that figure.",
    "Write a number with its unit, or a unit in the column's head.",
)
