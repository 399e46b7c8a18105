"""`heatledger nets PATH`: the netlist as read, as text or JSON."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from analyzer.circuit import Circuit

SCHEMA = "heatledger/nets-1"

EXAMPLES = """examples:
  heatledger nets board.kicad_pro
  heatledger nets board.kicad_sch --json nets.json

exit status: 0 read completely, 5 read with parts of the drawing missing"""

_INCOMPLETE = 3


def options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's arguments."""
    parser.epilog = EXAMPLES
    add = parser.add_argument
    add("path", type=Path, metavar="PATH", help="project, root sheet, folder with one project, or netlist")
    add("--json", type=Path, metavar="FILE", help="write JSON to FILE ('-' prints it) instead of text")
    add("--variant", metavar="NAME", help="design variant to read")
    add("--settings", type=Path, metavar="FILE", help="settings instead of heatledger.toml beside the project")
    add("--allow-outside", action="store_true", help="read sheets that lie outside the project folder")


def run(arguments: argparse.Namespace) -> int:
    """Print or write the netlist.

    Returns:
        0, or 3 if the drawing could not be read completely.
    """
    from analyzer.audit import settings_beside
    from analyzer.reading import read
    from analyzer.settings_file import load_settings

    settings = load_settings(arguments.settings or settings_beside(arguments.path))
    circuit = read(arguments.path, settings=settings, variant=arguments.variant, allow_outside=arguments.allow_outside)
    if arguments.json is None:
        for line in as_lines(circuit):
            print(line)
    else:
        _write_json(circuit, arguments.json, arguments.path)
    return 0 if circuit.complete else _INCOMPLETE


def as_document(circuit: Circuit) -> dict[str, Any]:
    """The netlist in the machine-readable contract."""
    reference = {component.key: component.ref for component in circuit.components}
    return {
        "schema": SCHEMA,
        "board": circuit.board,
        "complete": circuit.complete,
        "nets": [{"name": net.name, "pins": [[reference[key], pin] for key, pin in net.pins]} for net in circuit.nets],
        "parts": [
            {
                "ref": part.ref,
                "value": part.value,
                "lib_id": part.lib_id,
                "footprint": part.footprint,
                "fitted": part.fitted,
                "in_bom": part.in_bom,
                "on_board": part.on_board,
                "sheet": part.place.sheet,
                "fields": dict(part.fields),
            }
            for part in circuit.components
        ],
        "notices": [
            {
                "name": finding.name,
                "subject": finding.subject,
                "message": finding.message,
                "remedy": finding.remedy,
                "where": finding.where,
            }
            for finding in circuit.findings
        ],
    }


def as_lines(circuit: Circuit) -> list[str]:
    """The netlist as text: a line a net, then what the reader had to report."""
    reference = {component.key: component.ref for component in circuit.components}
    lines = [
        visible(f"{net.name}: {' '.join(f'{reference[key]}.{pin}' for key, pin in net.pins)}") for net in circuit.nets
    ]
    for finding in circuit.findings:
        at = f" [{finding.where}]" if finding.where else ""
        lines.append(visible(f"{finding.name}: {finding.message}{at}. {finding.remedy}"))
    unfitted = sum(not part.fitted for part in circuit.components)
    state = "" if circuit.complete else "; INCOMPLETE: parts of the drawing could not be read"
    lines.append(
        visible(
            f"{circuit.board}: {len(circuit.nets)} nets, {len(circuit.components)} parts ({unfitted} not fitted){state}"
        )
    )
    return lines


def visible(text: str) -> str:
    """A text from a file, its control characters shown instead of obeyed by the terminal."""
    if text.isprintable():
        return text
    return "".join(char if char.isprintable() else char.encode("unicode_escape").decode("ascii") for char in text)


def _write_json(circuit: Circuit, target: Path, source: Path) -> None:
    import json

    text = json.dumps(as_document(circuit), ensure_ascii=False, indent=1) + "\n"
    if str(target) == "-":
        sys.stdout.write(text)
        return
    from analyzer.output.atomic import refuse_inputs, write_text

    folder = source if source.is_dir() else source.parent
    refuse_inputs([target], [source, *(folder / file.path for file in circuit.inputs)])
    write_text(target, text)
