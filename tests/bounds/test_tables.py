"""The report of `explain`, to the letter; its table of uneven splits against T itself."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

import pytest

from pytest_growthbudget.bounds.budget import parse_budget
from pytest_growthbudget.bounds.exact import ONE
from pytest_growthbudget.bounds.growth import CONSTANT, Factor
from pytest_growthbudget.bounds.tables import evaluate, readable, report, split_table

REPORTS = sorted((Path(__file__).parent / "valid" / "reports").glob("*.txt"))


@pytest.mark.parametrize("path", REPORTS, ids=[path.stem for path in REPORTS])
def test_the_report_is_told_whole(path: Path) -> None:
    """Growth, derivation, what doubling costs, and what an uneven split costs."""
    expected = path.read_text("utf-8")
    lines = expected.splitlines()
    text = lines[0].removeprefix("input    ")
    assert report(parse_budget(text)) + "\n" == expected
    assert max(map(len, lines)) <= 80


def _t(calls: list[tuple[int, float]], toll: Callable[[float], float], n: float) -> float:
    """T(n) by its definition, with T(x) = 1 below 2."""
    return 1.0 if n < 2 - 1e-9 else toll(n) + sum(a * _t(calls, toll, b * n) for a, b in calls)


@pytest.mark.parametrize("n", [2.0, 3.0, 64.0, 1000.0])
def test_evaluation_is_that_of_the_recurrence(n: float) -> None:
    """Sizes that are reached by several ways are counted as often as they are called."""
    for calls in ([(2, 0.5)], [(1, 1 / 3), (1, 2 / 3)], [(2, 0.25), (3, 0.5), (1, 0.75)]):
        coefficients, factors = [float(a) for a, _ in calls], [b for _, b in calls]
        for toll, function in ((Factor(power=ONE), float), (CONSTANT, lambda x: 1.0), (Factor(log=ONE), math.log2)):
            found = evaluate(coefficients, factors, toll, n)
            assert found == pytest.approx(_t(calls, function, n), rel=1e-9)


def test_evaluation_of_too_many_sizes_is_given_up() -> None:
    assert evaluate([1.0] * 6, [0.99, 0.98, 0.97, 0.96, 0.95, 0.94], CONSTANT, 2.0**20) is None


@pytest.mark.parametrize(
    "text",
    [
        "T(n) = 2T(n/2) + n",
        "T(n) = T(n/2) + T(sqrt n) + n",
        "T(n) = T(n/3) + (1 + 1/n) T(2n/3) + n",
        "T(n) = T(n/3) + T(2n/3)",
        "T(n) = T(n/3) + T(2n/3) + 2^n",
        "T(n) = T(n/3)/3 + T(n/2)/3 + n",
        "T(n) = T(n/3)/3 + 2 T(n/2)/3 + n",
        "T(n) = T(n-1) + T(n-2)",
        "T(n) = T(n/3) + T(2n/3) + 0.5^n",
    ],
)
def test_there_is_no_table_where_nothing_is_uneven_or_counted(text: str) -> None:
    budget = parse_budget(text)
    assert budget.recurrence is not None
    assert split_table(budget.recurrence, budget) == []


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("n^log2(7) log n", "n^2.8074 (log n)"),
        ("V E^1.5 + 2^W", "E^1.5 V + 2^W"),
        ("n^(1/3)", "n^(1/3)"),
        ("T(n) = T(n-1) + T(n-2) + T(n-3)", "1.8393^n"),
        ("n^sqrt(2) + m^sqrt(3)", "n^1.4142 + m^1.7321"),
        ("1", "1"),
    ],
)
def test_irrational_exponents_are_rounded_for_reading(text: str, expected: str) -> None:
    assert readable(parse_budget(text).growth) == expected
