"""Workloads wider than a function: they are of the right size for whoever gets them, and do not pile up."""

from __future__ import annotations

import pytest

from tests.faults.runs import run


def test_wide_workloads_do_not_outlive_the_test_that_sized_them(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
torn_down = []

@pytest.fixture(scope="session")
def wide(problem_size):
    yield [0] * problem_size
    torn_down.append(problem_size)

@pytest.fixture(scope="module")
def wider(wide):
    return wide

@pytest.fixture(scope="module")
def asking(request):
    return request.getfixturevalue("wide")

def test_before(wider, asking):
    assert len(wider) == len(asking) == 100

@pytest.mark.growth_budget("n", meter="steps", largest=64)
@pytest.mark.parametrize("kind", ["a", "b"])
def test_budgeted(wide, wider, problem_size, kind):
    assert len(wide) == len(wider) == problem_size
    for number in wide: number

def test_after(wide, wider, asking):
    assert len(wide) == len(wider) == len(asking) == 100
    assert torn_down[0] == 100 and 100 not in torn_down[1:]
""",
        passed=4,
    )


def test_parametrized_module_fixtures_beside_module_workloads(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
up = []

@pytest.fixture(scope="module", params=["list", "tuple"])
def kind(request):
    up.append(request.param)
    yield {"list": list, "tuple": tuple}[request.param]
    up.remove(request.param)

@pytest.fixture(scope="module")
def wide(kind, problem_size):
    return kind(range(problem_size))

@pytest.mark.growth_budget("n", meter="steps", largest=64)
def test_walks(wide, kind):
    assert isinstance(wide, kind) and len(up) == 1
    for number in wide: number

def test_plain(wide, kind):
    assert isinstance(wide, kind) and len(wide) == 100 and len(up) == 1
""",
        passed=4,
    )


def test_a_session_does_not_grow_by_its_repetitions(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
closed = []

@pytest.fixture(scope="session")
def register():
    yield
    closed.append("register")

@pytest.fixture(scope="session")
def table(register, problem_size):
    yield
    closed.append("table")

@pytest.mark.growth_budget("n", meter="steps", largest=256)
def test_walks(numbers, workload_rng, register, table):
    for number in numbers: number

def test_afterwards(request):
    closed.clear()
    stack = request.session._setupstate.stack
    assert sum(len(finalizers) for finalizers, _ in stack.values()) < 12
    stack[request.session][0].insert(0, lambda: print("closed:", *closed))
""",
        passed=2,
    )
