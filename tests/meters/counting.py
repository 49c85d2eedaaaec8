"""Bodies whose steps are counted, and the surroundings in which they are."""

from __future__ import annotations

import ast
import difflib
import fractions
import gc
import inspect
import io
import os
import statistics
import subprocess
import sys
import textwrap
import tokenize

import pytest

from pytest_growthbudget.meters import tracing
from pytest_growthbudget.meters.steps import Steps

MONITORING = sys.version_info >= (3, 12)


@pytest.fixture(autouse=True)
def no_tracer():
    """Run this file's readings as in a session without a tracer, also when the session has one."""
    if MONITORING:
        yield
        return
    held = sys.gettrace()
    sys.settrace(None)
    yield
    sys.settrace(held)


@pytest.fixture(autouse=True)
def no_collector():
    """As in a campaign: what other packages hang on the garbage collector must not be counted."""
    gc.collect()
    gc.disable()
    yield
    gc.enable()


def steps(body) -> int:
    meter = Steps()
    meter.start()
    body()
    count = meter.stop()
    assert type(count) is float
    assert count == int(count)
    return int(count) - 2  # this function's own lines between start and stop; the campaign's do not count


def unloaded(crates: int) -> int:
    left = 0
    for crate in range(crates):
        left += crate
    return left


SOURCE = inspect.getsource(difflib)


def differences():
    lines = SOURCE.splitlines()
    return list(difflib.unified_diff(lines[:200], lines[50:260]))


def tokens():
    return list(tokenize.generate_tokens(io.StringIO(SOURCE[:20000]).readline))


def folded_text():
    return textwrap.fill(SOURCE[:5000], 40)


def spread():
    return statistics.median(fractions.Fraction(i, 7) for i in range(60)), statistics.stdev(range(50))


def syntax_tree():
    return ast.unparse(ast.parse(inspect.getsource(tracing)))


def run_under_coverage(core: str) -> str:
    """Two readings in a process that coverage watches from within; what they give, and the lines that it missed."""
    program = textwrap.dedent(
        """
        import sys
        import coverage
        watch = coverage.Coverage(data_file=None, include=[{here!r}], messages=False)
        watch.start()
        import importlib.util
        spec = importlib.util.spec_from_file_location("measured", {here!r})
        measured = importlib.util.module_from_spec(spec)
        try:
            spec.loader.exec_module(measured)
            meter, counts = measured.Steps(), []
            for _ in range(2):
                meter.start()
                measured.unloaded(10)
                counts.append(meter.stop())
            first = measured.unloaded.__code__.co_firstlineno
            watch.stop()
            missed = watch.analysis2({here!r})[3]
            print(*counts, "missing", [line for line in missed if first <= line <= first + 4])
        except Exception as error:
            print(type(error).__name__, error)
        """
    ).format(here=__file__)
    done = subprocess.run(
        [sys.executable, "-c", program],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "COVERAGE_CORE": core, "PYTHONPATH": os.pathsep.join(sys.path)},
    )
    assert done.returncode == 0, done.stderr
    return done.stdout.strip()
