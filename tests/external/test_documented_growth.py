"""Measured growth against documented growth: operations of the interpreter, its library and numpy.

Each operation runs as a real budgeted test in an inner pytest session, once with the growth that its documentation
gives and once, where there is one, with a budget a class too tight.

- The documented growth must never be reported as exceeded. It need not come out within: some of these bodies are
  bound by memory, and honestly undecided.
- A budget that is too tight must never come out within, and most must come out exceeded. A clock cannot tell
  n log n from n, so a sort is held to the tighter budget by its comparisons alone.
"""

from __future__ import annotations

import random
from collections.abc import Callable
from typing import Any

import pytest

import pytest_growthbudget.fitting.rule
import pytest_growthbudget.running.trial  # noqa: F401 - what is imported here need not be imported by each inner run
from tests.external.operations import OPERATIONS, TOO_TIGHT, Operation

INNER = """
import pytest

@pytest.mark.growth_budget(
    {bound!r}, meter={meter!r}, smallest={smallest!r}, largest={largest!r}, undecided="pass", time_limit=6
)
def test_budget(workload, body):
    body(workload)
"""


class Bench:
    """A plugin for the inner session: gives it the workload and the body, and keeps what was judged."""

    def __init__(self, operation: Operation) -> None:
        self._operation = operation
        self.judged: list[dict[str, Any]] = []
        self.failed = ""

    @pytest.fixture(scope="session")
    def body(self) -> Callable[[Any], object]:
        return self._operation.body

    def pytest_runtest_logreport(self, report: pytest.TestReport) -> None:
        self.judged.extend(getattr(report, "growth_judgements", ()))
        if report.failed and not getattr(report, "growth_judgements", ()):
            self.failed = report.longreprtext


class FreshBench(Bench):
    @pytest.fixture
    def workload(self, problem_size: int, workload_rng: random.Random) -> Any:
        return self._operation.build(problem_size, workload_rng)


class CountingBench(Bench):
    @pytest.fixture
    def workload(self, problem_size: int, workload_rng: random.Random, tally: Any) -> Any:
        return tally.keys(self._operation.build(problem_size, workload_rng))


def bench_for(operation: Operation) -> Bench:
    kind = CountingBench if operation.counted else FreshBench
    return kind(operation)


_judged: dict[tuple[str, str], dict[str, Any]] = {}


def judged(pytester: pytest.Pytester, operation: Operation, bound: str) -> dict[str, Any]:
    """The judgement of one operation under one budget; made once in a process."""
    key = operation.name, bound
    if key not in _judged:
        inner = INNER.format(bound=bound, meter=operation.meter, smallest=operation.smallest, largest=operation.largest)
        path = pytester.makepyfile(test_inner=inner)
        bench = bench_for(operation)
        pytester.inline_run(path, "-p", "no:cacheprovider", "-p", "no:randomly", plugins=[bench])
        assert not bench.failed, bench.failed
        (_judged[key],) = bench.judged
    return _judged[key]


def cases(operations: list[Operation]) -> list[Any]:
    """Those read by a clock take some seconds each; counts are quick."""
    return [pytest.param(o, id=o.name, marks=[] if o.counted else [pytest.mark.slow]) for o in operations]


@pytest.mark.parametrize("operation", cases(OPERATIONS))
def test_documented_growth_is_never_exceeded(pytester: pytest.Pytester, operation: Operation) -> None:
    judgement = judged(pytester, operation, operation.growth)
    assert judgement["verdict"] in ("within", "undecided"), (operation.source, judgement)


@pytest.mark.parametrize("operation", cases(TOO_TIGHT))
def test_a_class_too_tight_is_never_within(pytester: pytest.Pytester, operation: Operation) -> None:
    judgement = judged(pytester, operation, operation.tight)
    assert judgement["verdict"] in ("exceeded", "undecided"), (operation.source, judgement)


@pytest.mark.slow
def test_most_budgets_a_class_too_tight_are_exceeded(pytester: pytest.Pytester) -> None:
    verdicts = {o.name: judged(pytester, o, o.tight)["verdict"] for o in TOO_TIGHT}
    missed = [name for name, verdict in verdicts.items() if verdict != "exceeded"]
    assert 3 * len(missed) < len(verdicts), missed
