"""Components made from Debian's KiCad symbol libraries, for measuring recognition on them."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

from kiutils.utils.sexpr import parse_sexp

from analyzer.circuit import Component, Pin, Place

Node = list[Any]


def components(folder: Path) -> Iterator[tuple[str, str, Component]]:
    """(library, symbol name, component) for every symbol that is no power symbol, `extends` resolved."""
    for file in sorted(folder.glob("*.kicad_sym")):
        tree = parse_sexp(file.read_text(encoding="utf-8"))
        symbols = {node[1]: node for node in tree if isinstance(node, list) and node[0] == "symbol"}
        for name, node in symbols.items():
            base = symbols[parent] if (parent := _value(node, "extends")) else node
            if any(isinstance(item, list) and item[0] == "power" for item in base):
                continue
            yield file.stem, name, _component(file.stem, name, node, base)


def _component(library: str, name: str, node: Node, base: Node) -> Component:
    own, inherited = _properties(node), _properties(base)
    fields = {**inherited, **own}
    pins = tuple(Pin(number, pin, kind, f"N{number}") for number, pin, kind in sorted(set(_pins(base))))
    return Component(
        key=f"/{library}/{name}",
        ref=fields.get("Reference", "U").rstrip("0123456789?") + "1",
        value=name,
        lib_id=f"{library}:{name}",
        footprint=fields.get("Footprint", ""),
        fields={},
        description=fields.get("ki_description", ""),
        keywords=fields.get("ki_keywords", ""),
        pins=pins,
        place=Place(f"{library}.kicad_sym"),
    )


def _value(node: Node, key: str) -> Any:
    return next((item[1] for item in node if isinstance(item, list) and item[0] == key), None)


def _properties(node: Node) -> dict[str, str]:
    return {str(item[1]): str(item[2]) for item in node if isinstance(item, list) and item[0] == "property"}


def _pins(node: Node) -> Iterator[tuple[str, str, str]]:
    for item in node:
        if not isinstance(item, list):
            continue
        if item[0] == "symbol":
            yield from _pins(item)
        elif item[0] == "pin":
            hidden = "hide" in item
            name, number = str(_value(item, "name")), str(_value(item, "number"))
            kind = "passive" if hidden and item[1] == "passive" else str(item[1])
            yield number, "" if name == "~" else name, kind
