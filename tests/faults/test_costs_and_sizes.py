"""Costs that are none, and sizes that are ignored or taken."""

from __future__ import annotations

import pytest

from tests.faults.runs import run

METERS = """
    import pytest

    class Odd:
        unit = "points"
        deterministic = True

        def __init__(self, name, cost):
            self.name, self.cost = name, cost

        def start(self): ...
        def stop(self): return self.cost

    def pytest_growthbudget_meters(config):
        costs = {"negative": -3.0, "nothing": 0.0, "no_number": float("nan"), "endless": float("inf"), "text": "three"}
        return [Odd(name, cost) for name, cost in costs.items()]

    @pytest.fixture
    def numbers(problem_size):
        return list(range(problem_size))
"""


@pytest.mark.parametrize("meter", ["negative", "nothing", "no_number", "endless", "text"])
def test_costs_that_are_none(pytester: pytest.Pytester, meter: str) -> None:
    pytester.makeconftest(METERS)
    text = run(
        pytester,
        f"""
@pytest.mark.growth_budget("n", meter="{meter}", undecided="fail", largest=256)
def test_sum(numbers): ...
""",
        failed=1,
    )
    assert f"growth budget unmeasured: {meter} against n: " in text


def test_a_cost_that_does_not_depend_on_the_size_is_remarked_on(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
budget = pytest.mark.growth_budget("n", meter="steps", largest=4096)

@pytest.fixture
def forgetful(problem_size):
    return range(50)

@budget
def test_ignores_the_size(forgetful):
    for number in forgetful: number

@budget
def test_is_constant(numbers):
    for number in range(50): number

@budget
def test_is_linear(numbers):
    for number in numbers: number

@pytest.mark.growth_budget("1", meter="steps", largest=4096)
def test_is_meant_to_be_constant(numbers):
    for number in range(50): number
""",
        passed=4,
    )
    assert "4 growth budgets: 4 within" in text
    assert text.count("the cost hardly depends on the size") == 2
    ignoring = text.index("growth budgets ---")
    said = text[ignoring:]
    first, second, third = (
        said.index(name) for name in ("test_ignores_the_size", "test_is_constant", "test_is_linear")
    )
    assert "see whether the workload grows" in said[first:second]
    assert "The workload does grow" in said[second:third]


def test_a_size_that_the_user_has_a_fixture_for(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
seen = set()

@pytest.fixture(scope="session")
def problem_size():
    return 7

@pytest.mark.growth_budget("n", meter="steps", largest=64)
def test_budgeted(numbers):
    seen.add(len(numbers))
    for number in numbers: number

def test_plain(numbers):
    assert len(numbers) == 7 and len(seen) > 5
""",
        passed=2,
    )
