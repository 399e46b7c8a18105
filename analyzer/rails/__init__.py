"""Rails: which nets are one supply, what feeds it, at which voltage.

`find_rails` is the whole stage; its rooms: `links` joins nets, `wiring` traces channels to them, `passages` finds
discrete parts that pass current, `levels` solves voltages in order of dependence, `feedback` solves networks.
"""

from __future__ import annotations

from analyzer.circuit import Circuit
from analyzer.part import Part
from analyzer.rail import Rails
from analyzer.rule import Rulebook
from analyzer.settings import Settings


def find_rails(circuit: Circuit, parts: tuple[Part, ...], rulebook: Rulebook, settings: Settings) -> Rails:
    """Rails of a board, their voltages, and how its regulators and passages hang between them.

    Args:
        circuit: The board as read.
        parts: Recognised regulators and passages.
        rulebook: For the standard supplies.
        settings: Stated supplies, links, parts and tolerances.
    """
    from analyzer.rails.graph import find_rails as find

    return find(circuit, parts, rulebook, settings)
