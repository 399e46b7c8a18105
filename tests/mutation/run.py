"""Mutation testing: python tests/mutation/run.py [--group NAME] [--sample 60] [--seed 1]

Each mutant is one small change of one module. Its tests run in a forked process in which the module is imported from
the changed tree; a failing test, or one that takes much longer than without the change, kills it. Survivors are printed
with file, line and change; RECORD.md says which of them are equivalent.
"""

from __future__ import annotations

import argparse
import ast
import copy
import importlib.abc
import importlib.machinery
import os
import random
import signal
import sys
import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import ModuleType

ROOT = Path(__file__).resolve().parent.parent.parent

GROUPS: dict[str, tuple[tuple[str, ...], tuple[str, ...]]] = {
    "grammar": (
        ("grammar.py", "quantity.py", "units.py", "component_value.py"),
        ("test_grammar.py", "test_component_value.py", "test_settings_file.py", "recognise/test_rule_files.py"),
    ),
    "verdicts": (
        (
            "gate.py",
            "findings/statements.py",
            "settings_unused.py",
            "ledger.py",
            "heat/limits.py",
            "heat/ratings.py",
            "heat/draft.py",
            "heat/budget.py",
        ),
        (
            "heat/test_no_false_clear.py",
            "heat/test_honest_worst_cases.py",
            "heat/test_verdicts_and_limits.py",
            "heat/test_several_outputs.py",
            "heat/test_silent_loads.py",
            "heat/test_neighbours_by_distance.py",
            "test_gate.py",
            "test_lost_statements.py",
            "outside/test_published_heat.py",
            "fixtures",
            "golden",
        ),
    ),
    "corners": (
        ("heat/case.py", "heat/pulses.py", "heat/headroom.py"),
        (
            "heat/test_no_false_clear.py",
            "heat/test_honest_worst_cases.py",
            "heat/test_rests_and_runaway.py",
            "heat/test_headroom.py",
            "heat/test_common_mistakes.py",
            "heat/test_verdicts_and_limits.py",
            "losses/test_points_worked_by_hand.py",
            "outside/test_published_heat.py",
            "fixtures",
            "golden",
        ),
    ),
    "physics": (
        ("losses/*.py", "heat/path/*.py", "heat/altitude.py", "heat/transient.py", "heat/coupling.py"),
        (
            "losses/test_points_worked_by_hand.py",
            "losses/test_loss_ranges.py",
            "losses/test_parts_of_models.py",
            "outside/test_published_losses.py",
            "outside/test_published_heat.py",
            "heat/test_common_mistakes.py",
            "heat/test_honest_worst_cases.py",
            "heat/test_verdicts_and_limits.py",
            "heat/test_rests_and_runaway.py",
            "heat/test_neighbours_by_distance.py",
            "heat/test_formula_ranges.py",
            "draws/test_tree_with_loss_models.py",
            "golden",
        ),
    ),
    "rails": (("rails/*.py",), ("rails", "golden")),
    "draws": (("draws/*.py", "load.py"), ("draws", "golden")),
}
"""Group → (modules below analyzer/, tests below tests/, the quickest first)."""


@dataclass(frozen=True)
class Mutant:
    """One change: the module, the line, what it is, and the changed tree."""

    module: Path
    line: int
    what: str
    tree: ast.Module


_COMPARISONS: dict[type[ast.cmpop], type[ast.cmpop]] = {
    ast.Lt: ast.LtE,
    ast.LtE: ast.Lt,
    ast.Gt: ast.GtE,
    ast.GtE: ast.Gt,
    ast.Eq: ast.NotEq,
    ast.NotEq: ast.Eq,
    ast.Is: ast.IsNot,
    ast.IsNot: ast.Is,
    ast.In: ast.NotIn,
    ast.NotIn: ast.In,
}
_ARITHMETIC: dict[type[ast.operator], type[ast.operator]] = {
    ast.Add: ast.Sub,
    ast.Sub: ast.Add,
    ast.Mult: ast.Div,
    ast.Div: ast.Mult,
    ast.BitOr: ast.BitAnd,
    ast.BitAnd: ast.BitOr,
}
_NAMES = {"min": "max", "max": "min", "any": "all", "all": "any"}


def changes(node: ast.AST) -> Iterator[tuple[str, ast.AST]]:
    """(what, changed copy) of one node."""
    if isinstance(node, ast.Compare) and len(node.ops) == 1 and type(node.ops[0]) in _COMPARISONS:
        other = _COMPARISONS[type(node.ops[0])]
        yield f"{type(node.ops[0]).__name__} → {other.__name__}", _with(node, ops=[other()])
    if isinstance(node, ast.BinOp) and type(node.op) in _ARITHMETIC and not _is_text(node):
        swapped = _ARITHMETIC[type(node.op)]
        yield f"{type(node.op).__name__} → {swapped.__name__}", _with(node, op=swapped())
    if isinstance(node, ast.BoolOp):
        op: ast.boolop = ast.Or() if isinstance(node.op, ast.And) else ast.And()
        yield f"{type(node.op).__name__} → {type(op).__name__}", _with(node, op=op)
        yield "first operand dropped", _with(node, values=node.values[1:] * (2 if len(node.values) == 2 else 1))
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.Not):
        yield "not dropped", node.operand
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        yield "minus dropped", node.operand
    if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id in _NAMES:
        yield f"{node.func.id} → {_NAMES[node.func.id]}", _with(node, func=ast.Name(_NAMES[node.func.id], ast.Load()))
    if isinstance(node, ast.Constant) and isinstance(node.value, bool):
        yield f"{node.value} → {not node.value}", ast.Constant(not node.value)
    elif isinstance(node, ast.Constant) and isinstance(node.value, (int, float)) and not 0 < abs(node.value) < 1e-5:
        # what is smaller is the tolerance of a search
        value = node.value + 1 if isinstance(node.value, int) else node.value * 1.1 if node.value else 1.0
        yield f"{node.value} → {value}", ast.Constant(value)
    if isinstance(node, ast.Return) and node.value is not None and not _is_none(node.value):
        yield "return None", ast.Return(ast.Constant(None))
    if isinstance(node, ast.Raise):
        yield "raise dropped", ast.Pass()
    if isinstance(node, (ast.Continue, ast.Break)):
        yield f"{type(node).__name__.lower()} dropped", ast.Pass()
    if isinstance(node, ast.If):
        yield "if True", _with(node, test=ast.Constant(True))
        yield "if False", _with(node, test=ast.Constant(False))
    if isinstance(node, ast.IfExp):
        yield "first branch always", node.body
        yield "second branch always", node.orelse


def _with(node: ast.AST, **fields: object) -> ast.AST:
    changed = copy.copy(node)
    for name, value in fields.items():
        setattr(changed, name, value)
    return changed


def _is_text(node: ast.BinOp) -> bool:
    sides = (node.left, node.right)
    return any(
        isinstance(s, ast.JoinedStr) or (isinstance(s, ast.Constant) and isinstance(s.value, str)) for s in sides
    )


def _is_none(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and node.value is None


def mutants(path: Path) -> Iterator[Mutant]:
    """All mutants of a module; annotations, messages and docstrings are left alone."""
    source = path.read_text(encoding="utf-8")
    count = sum(1 for _ in _sites(ast.parse(source)))
    for number in range(count):
        tree = ast.parse(source)
        parent, field, index, node, what, changed = next(site for n, site in enumerate(_sites(tree)) if n == number)
        for child in ast.walk(changed):
            ast.copy_location(child, node)
        if index is None:
            setattr(parent, field, changed)
        else:
            getattr(parent, field)[index] = changed
        yield Mutant(path, getattr(node, "lineno", 0), what, ast.fix_missing_locations(tree))


_SKIPPED = frozenset({"annotation", "returns", "decorator_list"})


def _sites(node: ast.AST) -> Iterator[tuple[ast.AST, str, int | None, ast.AST, str, ast.AST]]:
    for field, value in ast.iter_fields(node):
        if field in _SKIPPED or isinstance(node, ast.JoinedStr):
            continue
        children = list(enumerate(value)) if isinstance(value, list) else [(None, value)]
        for index, child in children:
            if isinstance(child, ast.AST):
                for what, changed in changes(child):
                    yield node, field, index, child, what, changed
                yield from _sites(child)


class Changed(importlib.abc.MetaPathFinder, importlib.abc.Loader):
    """Imports one module from a changed tree."""

    def __init__(self, name: str, tree: ast.Module, path: Path) -> None:
        self.name, self.tree, self.path = name, tree, path

    def find_spec(
        self, fullname: str, path: Sequence[str] | None = None, target: ModuleType | None = None
    ) -> importlib.machinery.ModuleSpec | None:
        if fullname != self.name:
            return None
        spec = importlib.machinery.ModuleSpec(fullname, self, origin=str(self.path))
        if self.path.name == "__init__.py":
            spec.submodule_search_locations = [str(self.path.parent)]
        return spec

    def exec_module(self, module: ModuleType) -> None:
        exec(compile(self.tree, str(self.path), "exec"), vars(module))


def dotted(path: Path) -> str:
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def run(tests: Sequence[str], mutant: Mutant | None, limit: float) -> tuple[bool, float]:
    """Whether the tests passed, and how long they took [s]; a run beyond the limit has failed."""
    started = time.monotonic()
    child = os.fork()
    if child == 0:
        os.setsid()
        quiet = os.open(os.devnull, os.O_WRONLY)
        os.dup2(quiet, 1)
        os.dup2(quiet, 2)
        if mutant is not None:
            sys.meta_path.insert(0, Changed(dotted(mutant.module), mutant.tree, mutant.module))
        import pytest

        options = ["-x", "-q", "-n0", "-p", "no:randomly", "-p", "no:cacheprovider", "--no-header", "--no-summary"]
        options += ["-W", "ignore::pytest.PytestAssertRewriteWarning"]
        os._exit(int(pytest.main([*options, *(str(ROOT / "tests" / test) for test in tests)])))
    while True:
        done, status = os.waitpid(child, os.WNOHANG)
        if done:
            return os.waitstatus_to_exitcode(status) == 0, time.monotonic() - started
        if time.monotonic() - started > limit:
            os.killpg(child, signal.SIGKILL)
            os.waitpid(child, 0)
            return False, limit
        time.sleep(0.02)


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.split("\n", 1)[0])
    parser.add_argument("--group", choices=sorted(GROUPS), help="only this group")
    parser.add_argument("--sample", type=int, default=60, help="mutants of each group, drawn at random; 0 takes all")
    parser.add_argument("--seed", type=int, default=1)
    arguments = parser.parse_args()
    os.chdir(ROOT)
    sys.path.insert(0, str(ROOT))
    # what every run needs, but nothing of the program itself
    for module in ("pytest", "hypothesis", "openpyxl", "xlsxwriter", "rich.console", "kiutils.utils.sexpr"):
        __import__(module)
    total = killed = 0
    for name in [arguments.group] if arguments.group else GROUPS:
        found, dead = _group(name, arguments.sample, arguments.seed)
        total, killed = total + found, killed + dead
    print(f"mutants tried={total} killed={killed} rate={killed / max(total, 1):.1%} seed={arguments.seed}")
    return 0


def _group(name: str, sample: int, seed: int) -> tuple[int, int]:
    patterns, tests = GROUPS[name]
    modules = sorted({path for pattern in patterns for path in (ROOT / "analyzer").glob(pattern)})
    found = [mutant for module in modules for mutant in mutants(module)]
    if sample:
        found = random.Random(f"{name} {seed}").sample(found, min(sample, len(found)))
    passed, clean = run(tests, None, 600.0)
    if not passed:
        raise SystemExit(f"{name}: the tests fail without any mutant")
    killed = 0
    for mutant in found:
        survives, _ = run(tests, mutant, 5 * clean + 5)
        killed += not survives
        if survives:
            print(f"  survives: {mutant.module.relative_to(ROOT)}:{mutant.line}: {mutant.what}", flush=True)
    print(
        f"{name}: {killed} of {len(found)} killed ({killed / max(len(found), 1):.1%}), clean run {clean:.1f} s",
        flush=True,
    )
    return len(found), killed


if __name__ == "__main__":
    raise SystemExit(main())
