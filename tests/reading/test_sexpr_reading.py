"""The S-expression reader against a tokenizer of the tests' own, on random text."""

from __future__ import annotations

import gc
import re
import subprocess
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from analyzer.errors import InputError
from analyzer.reading.plain_text import decode
from analyzer.reading.sexpr import every, first, flag, no_collector, parse, text, word

TOKEN = re.compile(r'\s*(?:([()])|"((?:[^"\\]|\\.)*)"|([^\s()"]+))', re.DOTALL)
MEANING = {"n": "\n", "t": "\t", "r": "\r", "a": "\a", "b": "\b", "f": "\f", "v": "\v"}


def undone(escaped: str) -> str:
    return re.sub(r"\\(.)", lambda m: MEANING.get(m[1], m[1]), escaped, flags=re.DOTALL)


def slow_parse(source: str) -> list[object]:
    """The obvious way: one token after another."""
    stack: list[list[object]] = [[]]
    for bracket, string, bare in TOKEN.findall(source):
        if bracket == "(":
            stack.append([])
        elif bracket == ")":
            done = stack.pop()
            stack[-1].append(done)
        elif bare:
            stack[-1].append(undone(bare))  # KiCad's bare words hold no backslash; ours are treated as strings are
        else:
            stack[-1].append(undone(string))
    ((root,),) = stack
    assert isinstance(root, list)
    return root


def meant(node: object) -> object:
    return [meant(child) for child in node] if isinstance(node, list) else text(node)


def quoted(value: str) -> str:
    escaped = value.replace("\\", "\\\\").replace('"', '\\"').replace("\n", "\\n").replace("\t", "\\t")
    return f'"{escaped}"'


strings = st.text(st.sampled_from('ab "\\()\n\t{}^µ;'), max_size=8)
trees = st.recursive(
    strings.map(quoted) | st.sampled_from(["word", "x-1", "1.27", "-5", "yes"]),
    lambda inner: st.lists(inner, min_size=1, max_size=4).map(lambda items: f"(k {' '.join(items)})"),
    max_leaves=25,
)


@given(st.lists(trees, max_size=5), st.sampled_from([" ", "\n", "\t", "\n  "]))
def test_reads_what_was_written(items: list[str], blank: str) -> None:
    source = f"(kicad_sch{blank}{blank.join(items)}{blank})"
    assert meant(parse(source.encode(), "f", "kicad_sch")) == slow_parse(source)


@given(strings, strings)
def test_neighbouring_strings_stay_apart(one: str, other: str) -> None:
    source = f"(kicad_sch (a {quoted(one)}) (b {quoted(other)}))"
    tree = parse(source.encode(), "f", "kicad_sch")
    assert (word(tree, "a"), word(tree, "b")) == (one, other)


@given(st.text(st.sampled_from('(()) "\\ax\n'), max_size=30))
def test_any_text_is_read_like_the_slow_way_or_refused(rest: str) -> None:
    source = f"(kicad_sch {rest}"
    try:
        tree = parse(source.encode(), "f", "kicad_sch")
    except InputError as error:
        refusal = str(error)
    else:
        refusal = ""
        assert meant(tree) == slow_parse(source)
    assert refusal == "" or refusal.startswith("f: ")


@given(st.binary(max_size=60))
def test_any_bytes_are_text_or_a_clear_error(data: bytes) -> None:
    try:
        decode(data, "f")
    except InputError as error:
        faults = error.faults
    else:
        faults = ()
    assert len(faults) <= 1


@given(st.lists(st.text(st.sampled_from("ab019.-+/^~*'\\"), min_size=1, max_size=6), min_size=1, max_size=6))
def test_bare_words_of_old_netlists_stay_as_written(words: list[str]) -> None:
    source = f"(export (version D) (x {' '.join(words)}))"
    tree = parse(source.encode(), "f", "export", bare_words=True)
    assert [text(atom) for atom in (first(tree, "x") or [])[1:]] == words


@pytest.mark.parametrize(
    ("node", "expected"),
    [
        (["pin", "hide"], True),
        (["pin", ["hide"]], True),
        (["pin", ["hide", "yes"]], True),
        (["pin", ["hide", "no"]], False),
        (["pin"], False),
        (["pin", "hidden"], False),
    ],
)
def test_flag_in_all_its_spellings(node: list[object], expected: bool) -> None:
    assert flag(node, "hide") is expected
    assert flag(["pin"], "hide", default=True) is True


@pytest.mark.parametrize("rest", ["))(", ") ) (", "))((a)", ") (b)", ")x", ')"x"', "))"])
def test_text_after_the_root_is_never_dropped(rest: str) -> None:
    with pytest.raises(InputError):
        parse(f"(kicad_sch {rest}".encode(), "f", "kicad_sch")


def test_views() -> None:
    tree = parse(b'(kicad_sch (a "1") (b) (a 2.50) ())', "f", "kicad_sch")
    assert [word(tree, "a"), word(tree, "b", "none"), word(tree, "c")] == ["1", "none", ""]
    assert [text(node[1]) for node in every(tree, "a")] == ["1", "2.5"]
    assert first(tree, "z") is None
    assert text([]) == ""


def test_collector_is_left_as_it_was() -> None:
    assert gc.isenabled()
    with no_collector():
        assert not gc.isenabled()
        with no_collector():
            pass
        assert not gc.isenabled()
    assert gc.isenabled()


def test_only_the_parser_of_kiutils_is_imported() -> None:
    code = "import analyzer.reading.entry, kiutils.utils.sexpr, sys; print([m for m in sys.modules if 'kiutils' in m])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "['kiutils', 'kiutils.utils', 'kiutils.utils.sexpr']"
