"""Limits of every input: what is larger is refused with a clear message instead of eating time and memory.

The figures are far above anything real: the largest public boards known to us stay below a tenth of them.
"""

from __future__ import annotations

SHEET_BYTES = 64 * 1024 * 1024
"""Size of one schematic file [bytes]."""
PROJECT_BYTES = 256 * 1024 * 1024
"""Size of all files of one project that are read in full [bytes]."""
PROJECT_FILE_BYTES = 16 * 1024 * 1024
"""Size of a project file (`.kicad_pro`) [bytes]."""
NETLIST_BYTES = 64 * 1024 * 1024
"""Size of one netlist, XML or `.net` [bytes]."""
BOARD_HEAD_BYTES = 256 * 1024
"""How much of a board file is read to find its layers [bytes]."""
NESTING = 64
"""Nesting of parentheses in a KiCad file; KiCad itself stays below 30."""
SHEET_INSTANCES = 2_000
"""Sheet instances of one project; a sheet used twice counts twice."""
SHEET_DEPTH = 64
"""Levels of the sheet hierarchy."""
SYMBOL_INSTANCES = 200_000
"""Placed symbols of one project over all sheet instances."""
PINS = 2_000_000
"""Pins of all placed symbols together."""
BUS_MEMBERS = 4_096
"""Members of one bus."""
STACKED_PADS = 4_096
"""Pads of one pin in stacked notation such as [1-8]."""
VARIABLE_DEPTH = 16
"""Nesting of text variables."""
TEXT_LENGTH = 65_536
"""Length of one text after its variables are put in [characters]."""
NETLIST_PARTS = 200_000
"""Parts in one netlist."""
NETLIST_NODES = 2_000_000
"""Pins on the nets of one netlist."""
TABLE_BYTES = 16 * 1024 * 1024
"""Size of one parts table [bytes]."""
TABLE_ROWS = 50_000
"""Rows of one parts table."""
RULE_FILES = 100
"""Rule files of one run, besides the shipped ones."""
RULES = 20_000
"""Rules of one run."""
WORKBOOK_ENTRIES = 1_000
"""Parts inside one workbook's archive."""
WORKBOOK_UNPACKED = 64 * 1024 * 1024
"""Size of one workbook unpacked [bytes]."""
WORKBOOK_RATIO = 100
"""Compression ratio of one workbook above which it is taken for a bomb."""
SETTINGS_BYTES = 1024 * 1024
"""Size of one settings, policy or rule file [bytes]."""
QUANTITY_LENGTH = 120
"""Length of one quantity's text, as "80..150 mA" [characters]."""
VALUE_LENGTH = 200
"""How much of a component's value text is read [characters]."""
PATTERN_LENGTH = 80
"""Length of one pattern of a rule [characters]."""
NAME_LENGTH = 200
"""Length of a part's name that patterns are tried on [characters]; longer ones match none."""
