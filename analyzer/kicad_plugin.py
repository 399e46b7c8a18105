"""
@package
Thermal budget of every voltage regulator on the board, written as a workbook.
Uses the schematic beside the netlist, for the netlist leaves out parts that are excluded from the BOM.
An estimate, not a measurement: verify on hardware.

Command line:
python "pathToFile/kicad_plugin.py" "%I" "%O.xlsx"
"""

# KiCad starts this file with its own Python, which has none of our packages: only the standard library is
# used here, nothing of `analyzer` is imported, and the installed tool does the work in its own process.

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

TOOL_VARIABLE = "HEATLEDGER"
"""Environment variable that names the installed program where it is in none of the usual places."""

NOT_FOUND = "heatledger is not installed: run 'pipx install heatledger', or set HEATLEDGER to the program's path."
USAGE = 'usage: python kicad_plugin.py "%I" "%O.xlsx"'
FINDINGS = 5


def main(argv: list[str]) -> int:
    """Run the tool on the project of a netlist.

    Args:
        argv: The netlist (`%I`) and the workbook to write (`%O.xlsx`).

    Returns:
        0 when the workbook was written, whatever its verdicts: KiCad calls any other status a failed run.
        1 for wrong arguments or a missing tool, else the tool's own status.
    """
    if len(argv) != 2:
        print(USAGE, file=sys.stderr)
        return 1
    netlist, workbook = Path(argv[0]), Path(argv[1])
    command = find_tool()
    if command is None:
        print(NOT_FOUND, file=sys.stderr)
        return 1
    environment = {**os.environ, "NO_COLOR": "1", "PYTHONIOENCODING": "utf-8", "COLUMNS": "80"}
    # inside KiCad these point at KiCad's own Python and would break the tool's
    for variable in ("PYTHONHOME", "PYTHONPATH"):
        environment.pop(variable, None)
    # an argument list without a shell: the user's own paths cannot be read as commands
    done = subprocess.run(  # noqa: S603
        [*command, "audit", str(source_of(netlist)), "--workbook", str(workbook), "--brief"],
        env=environment,
        stdin=subprocess.DEVNULL,
        check=False,
    )
    return 0 if done.returncode == FINDINGS else done.returncode


def source_of(netlist: Path) -> Path:
    """The schematic beside the netlist if there is one, else the netlist."""
    schematic = netlist.with_suffix(".kicad_sch")
    return schematic if schematic.is_file() else netlist


def find_tool() -> list[str] | None:
    """The command that starts the installed tool, or None."""
    named = os.environ.get(TOOL_VARIABLE)
    if named:
        return [named] if Path(named).is_file() else None
    beside = Path(sys.executable).parent
    usual = (Path.home() / ".local" / "bin", Path("/usr/local/bin"), beside)
    path = os.pathsep.join([os.environ.get("PATH", os.defpath), *(str(folder) for folder in usual)])
    found = shutil.which("heatledger", path=path)
    return [found] if found else None


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
