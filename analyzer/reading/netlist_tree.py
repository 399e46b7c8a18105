"""The tree that KiCad's XML netlists and `.net` files share, whichever way it is written."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import Any

from analyzer import limits
from analyzer.errors import Fault, InputError
from analyzer.reading.plain_text import decode
from analyzer.reading.sexpr import Node, parse, text


@dataclass(slots=True)
class Branch:
    """One element: its own text, its entries (attributes, or children that only hold a text), its branches."""

    tag: str
    text: str = ""
    entries: dict[str, str] = field(default_factory=dict)
    branches: dict[str, list[Branch]] = field(default_factory=dict)
    is_xml: bool = False

    def first(self, tag: str) -> Branch | None:
        """The first branch of that name."""
        found = self.branches.get(tag)
        return found[0] if found else None

    def all(self, tag: str) -> list[Branch]:
        """All branches of that name, in order."""
        return self.branches.get(tag, [])

    def text_of(self, tag: str) -> str:
        """The text of an attribute or child, "" if there is none."""
        found = self.entries.get(tag)
        if found is None:
            branch = self.first(tag)
            return branch.text if branch else ""
        return found


def read_tree(data: bytes, file: str) -> Branch:
    """Read a netlist, recognising its writing by its first character.

    Raises:
        InputError: If it is no netlist, or damaged.
    """
    source = decode(data, file)
    if source.lstrip().startswith("<"):
        return _from_xml(source, file)
    # KiCad 5 leaves words bare
    bare = re.match(r'\s*\(\s*export\s+\(\s*version\s+"', source) is None
    return _from_node(parse(data, file, "export", bare_words=bare))


def _from_xml(source: str, file: str) -> Branch:
    if "<!DOCTYPE" in source or "<!ENTITY" in source:
        remedy = "KiCad writes none; export the netlist again."
        raise InputError(Fault("the XML declares a document type, which is not read", file, remedy=remedy))
    from xml.etree import ElementTree

    try:
        root = ElementTree.fromstring(source)  # noqa: S314  declarations, and with them entities, are refused above
    except ElementTree.ParseError as error:
        line, column = error.position
        reason = str(error).partition(":")[0]
        raise InputError(Fault(f"the XML is damaged: {reason}", file, f"line {line}, column {column}")) from None
    except ValueError as error:
        raise InputError(Fault(f"the XML is damaged: {error}", file)) from None
    if root.tag != "export":
        raise InputError(Fault(f"this is XML of kind '{root.tag[:40]}', not a netlist", file))
    top = Branch("export", is_xml=True)
    level: list[tuple[Any, Branch]] = [(root, top)]
    for _ in range(limits.NESTING):
        below: list[tuple[Any, Branch]] = []
        for element, branch in level:
            branch.text = (element.text or "").strip() if len(element) else element.text or ""
            branch.entries = dict(element.attrib)
            for child in element:
                if isinstance(child.tag, str):
                    grown = Branch(child.tag)
                    branch.branches.setdefault(child.tag, []).append(grown)
                    below.append((child, grown))
        if not below:
            return top
        level = below
    raise InputError(Fault(f"nested deeper than {limits.NESTING} levels", file))


def _from_node(root: Node) -> Branch:
    top = Branch("export")
    level: list[tuple[Node, Branch]] = [(root, top)]
    while level:
        below: list[tuple[Node, Branch]] = []
        for node, branch in level:
            words: list[str] = []
            for child in node[1:]:
                if type(child) is not list:
                    words.append(text(child))
                elif child:
                    tag = text(child[0])
                    if len(child) == 2 and type(child[1]) is not list and tag not in branch.entries:
                        branch.entries[tag] = text(child[1])
                    else:
                        grown = Branch(tag)
                        branch.branches.setdefault(tag, []).append(grown)
                        below.append((child, grown))
            # several uuids of one part are separate words here, one blank-separated text in XML
            branch.text = " ".join(words)
        level = below
    return top
