"""Mutation testing: every small change of a module that no test notices.

    python -m tests.studies.mutants pytest_growthbudget/bounds/growth.py --tests tests/bounds

The changes are those of mutmut. It cannot run them here: it names the tests of each mutant on pytest's command line
and collects them anew (ten seconds a mutant with these parametrized corpora), and leaves out functions with a
decorator. So the tests are collected once; each mutant is a fork in which the function's code is exchanged, and runs
the tests that reach the changed lines, shortest first, to the first failure. Left out are defaults of arguments, the
case of a string, which is changed as a whole too, and `strict=` in `zip`, which only checks.
"""

from __future__ import annotations

import argparse
import difflib
import functools
import gc
import importlib
import json
import os
import pickle
import random
import re
import resource
import signal
import sys
import textwrap
import time
from collections import Counter
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import CodeType, FunctionType
from typing import Any

import coverage
import libcst as cst
import pytest
from _pytest.runner import runtestprotocol
from libcst.metadata import MetadataWrapper, ParentNodeProvider, PositionProvider
from mutmut.mutation.file_mutation import create_mutations, deep_replace

CACHED = re.compile(r"^( *)@(?:lru_cache\(.*\)|property)$", re.MULTILINE)
STRICT = re.compile(r", (strict=\w+)?(?=\))")
MEMORY = 4 * 2**30
Covering = dict[tuple[str, int], list[tuple[float, str]]]


@dataclass(frozen=True)
class Mutant:
    """One changed function: `name` in its module; the lines of the change; the first line of its statement."""

    path: Path
    name: str
    lines: range
    statement: int
    before: str
    after: str

    def difference(self) -> str:
        """The lines that the change takes out and puts in."""
        lines = difflib.unified_diff(self.before.splitlines(), self.after.splitlines(), n=0, lineterm="")
        return "\n".join(f"    {line}" for line in list(lines)[2:] if not line.startswith("@@"))


def _idle(before: str, after: str) -> bool:
    """Whether the two differ in the case of letters or in a check alone."""
    short = [STRICT.sub("", text).lower() for text in (before, after)]
    return short[0] == short[1]


def mutants_of(path: Path) -> list[Mutant]:
    """All mutants of a module, cached functions and properties included."""
    text = CACHED.sub(r"\1# \g<0>", path.read_text("utf-8"))
    module, mutations, _, _ = create_mutations(str(path), text)
    about = MetadataWrapper(module, unsafe_skip_copy=True)
    lines, parents = about.resolve(PositionProvider), about.resolve(ParentNodeProvider)
    owners = {
        method: owner.name.value
        for owner in module.body
        if isinstance(owner, cst.ClassDef)
        for method in owner.body.body
    }
    out = []
    for change in mutations:
        function = change.contained_by_top_level_function
        if not isinstance(function, cst.FunctionDef):
            continue
        changed = deep_replace(function, change.original_node, change.mutated_node)
        if not function.params.deep_equals(cst.ensure_type(changed, cst.FunctionDef).params):
            continue
        name = function.name.value
        owner = owners.get(function)
        before, after = (cst.Module([node]).code.strip("\n") for node in (function, changed))
        if _idle(before, after):
            continue
        statement = change.original_node
        while not isinstance(statement, (cst.SimpleStatementLine, cst.BaseCompoundStatement)):
            statement = parents[statement]
        place = lines[change.original_node]
        reach = range(place.start.line, place.end.line + 1)
        full = f"{owner}.{name}" if owner else name
        out.append(Mutant(path, full, reach, lines[statement].start.line, before, after))
    return out


def function_of(mutant: Mutant) -> FunctionType:
    """The live function of a mutant, taken out of its cache, property or class method."""
    found: Any = importlib.import_module(".".join(mutant.path.with_suffix("").parts))
    for part in mutant.name.split("."):
        found = vars(found)[part]
    found = getattr(found, "fget", None) or getattr(found, "__func__", found)
    function = getattr(found, "__wrapped__", found)
    assert isinstance(function, FunctionType)
    return function


def changed_code(mutant: Mutant) -> CodeType:
    """The mutant's code, compiled as a method if it is one. Its lines are not those of the file."""
    function = cst.ensure_type(cst.parse_module(mutant.after).body[0], cst.FunctionDef)
    source = cst.Module([function.with_changes(decorators=[])]).code
    owner, _, name = mutant.name.rpartition(".")
    if owner:
        source = f"class {owner}:\n" + textwrap.indent(source, "    ")
    code = compile("from __future__ import annotations\n" + source, str(mutant.path), "exec")
    for step in filter(None, (owner, name)):
        code = next(c for c in code.co_consts if isinstance(c, CodeType) and c.co_name == step)
    return code


def caches(prefix: str) -> list[Callable[[], None]]:
    """What empties the caches of the modules below a package."""
    return [
        thing.cache_clear
        for name, module in list(sys.modules.items())
        if name.startswith(prefix)
        for thing in vars(module).values()
        if isinstance(thing, functools._lru_cache_wrapper)
    ]


class Study:
    """A plugin that takes the place of pytest's loop over the tests."""

    def __init__(self, mutants: Sequence[Mutant], sources: Sequence[Path], record: Path | None) -> None:
        self.mutants = mutants
        self.sources = sources
        self.record = record
        self.outcomes: list[tuple[Mutant, str]] = []

    def pytest_runtestloop(self, session: pytest.Session) -> bool:
        items = {item.nodeid: item for item in session.items}
        clear = caches("pytest_growthbudget")
        covering = _in_fork(lambda: _covered(list(items.values()), self.sources, clear))
        for empty in clear:
            empty()
        gc.freeze()
        for mutant in self.mutants:
            file = str(mutant.path.resolve())
            tests = {test for line in mutant.lines for test in covering.get((file, line), [])}
            # A line without code of its own, such as a constant in a tuple, is reached with its statement.
            tests = tests or set(covering.get((file, mutant.statement), []))
            outcome = _outcome(mutant, [(seconds, items[name]) for seconds, name in sorted(tests)])
            self.outcomes.append((mutant, outcome))
            if self.record is not None:
                with self.record.open("a", encoding="utf-8") as out:
                    out.write(json.dumps([mutant.name, mutant.difference(), outcome]) + "\n")
            if outcome in ("survived", "no test"):
                print(f"{outcome}: {mutant.path}:{mutant.lines.start} {mutant.name}\n{mutant.difference()}", flush=True)
        return True


def _passes(item: pytest.Item) -> bool:
    return not any(report.failed for report in runtestprotocol(item, log=False, nextitem=None))


def _passes_in_time(item: pytest.Item, seconds: float) -> bool:
    signal.setitimer(signal.ITIMER_VIRTUAL, 2 + 10 * seconds)
    return _passes(item)


def _covered(items: Sequence[pytest.Item], sources: Sequence[Path], clear: Sequence[Callable[[], None]]) -> Covering:
    """For each line the tests that reach it, with their seconds."""
    watch = coverage.Coverage(data_file=None, include=[str(path) for path in sources], config_file=False)
    spent: dict[str, float] = {}
    watch.start()
    for item in items:
        for empty in clear:
            empty()
        watch.switch_context(item.nodeid)
        began = time.perf_counter()
        if not _passes(item):
            raise SystemExit(f"fails without any mutant: {item.nodeid}")
        spent[item.nodeid] = time.perf_counter() - began
    watch.stop()
    data = watch.get_data()
    return {
        (path, line): [(spent[name], name) for name in names if name in spent]
        for path in data.measured_files()
        for line, names in data.contexts_by_lineno(path).items()
    }


def _in_fork(work: Callable[[], Covering]) -> Covering:
    """What a child found out, so that this process keeps clean."""
    end, start = os.pipe()
    child = os.fork()
    if not child:
        with os.fdopen(start, "wb") as out:
            try:
                pickle.dump(work(), out)
            except SystemExit as fault:
                print(fault, file=sys.stderr, flush=True)
        os._exit(0)
    os.close(start)
    with os.fdopen(end, "rb") as found:
        answer: Covering = pickle.load(found)
    os.waitpid(child, 0)
    return answer


def _outcome(mutant: Mutant, tests: Sequence[tuple[float, pytest.Item]]) -> str:
    if not tests:
        return "no test"
    function = function_of(mutant)
    sound, function.__code__ = function.__code__, changed_code(mutant)
    child = os.fork()
    if not child:
        killed = True
        try:
            os.dup2(os.open(os.devnull, os.O_WRONLY), 1)
            os.dup2(1, 2)
            resource.setrlimit(resource.RLIMIT_AS, (MEMORY, MEMORY))
            killed = any(not _passes_in_time(item, seconds) for seconds, item in tests)
        finally:
            os._exit(killed)
    _, status = os.waitpid(child, 0)
    function.__code__ = sound
    if os.WIFSIGNALED(status):
        return "timed out" if os.WTERMSIG(status) == signal.SIGVTALRM else "killed"
    return "killed" if os.WEXITSTATUS(status) else "survived"


def table(outcomes: Sequence[tuple[Mutant, str]]) -> Iterator[str]:
    """Counts by module."""
    counts: dict[Path, Counter[str]] = {}
    for mutant, outcome in outcomes:
        counts.setdefault(mutant.path, Counter())[outcome] += 1
    yield "| module | mutants | killed | timed out | survived | reached by no test |"
    yield "| --- | ---: | ---: | ---: | ---: | ---: |"
    for path, count in counts.items():
        cells = (count.total(), *(count[kind] for kind in ("killed", "timed out", "survived", "no test")))
        yield f"| `{path.stem}` | {' | '.join(map(str, cells))} |"


def main(given: Sequence[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.studies.mutants", description=__doc__.splitlines()[0])
    parser.add_argument("modules", nargs="+", type=Path, help="files of the package, from its root")
    parser.add_argument("--tests", nargs="+", required=True, help="files and folders of tests")
    parser.add_argument("--share", type=float, default=1.0, help="part of the mutants to draw, by a fixed seed")
    parser.add_argument("--function", default="", help="only functions whose name holds this")
    parser.add_argument("--record", type=Path, help="a file to add every outcome to, one JSON list a line")
    parser.add_argument("--again", type=Path, help="an earlier record: only what was not killed there")
    options = parser.parse_args(given)
    mutants = [m for path in options.modules for m in mutants_of(path) if options.function in m.name]
    mutants = [m for m in mutants if random.Random(f"{m.path} {m.after}").random() < options.share]
    if options.again:
        earlier = [json.loads(line) for line in options.again.read_text("utf-8").splitlines()]
        gone = {(name, difference) for name, difference, outcome in earlier if outcome in ("killed", "timed out")}
        mutants = [m for m in mutants if (m.name, m.difference()) not in gone]
    sys.path.insert(0, "")
    study = Study(mutants, options.modules, options.record)
    plain = ["-q", "--assert=plain", *(f"-pno:{name}" for name in ("xdist", "cov", "timeout", "cacheprovider"))]
    pytest.main([*plain, *options.tests], plugins=[study])
    print("\n".join(table(study.outcomes)))
    return 0


if __name__ == "__main__":
    sys.exit(main())
