"""Declared against observed, term by term."""

from __future__ import annotations

import random

import pytest

from pytest_growthbudget.auditing.compare import Check, checks, overlap, relation
from pytest_growthbudget.auditing.observed import Observed, observe_terms, observed
from pytest_growthbudget.auditing.pattern import pattern
from pytest_growthbudget.auditing.toll import Toll
from pytest_growthbudget.bounds.budget import parse_budget
from pytest_growthbudget.fitting.judgement import Interval
from tests.auditing.made import Split, made, recorded

LINEAR = Toll(exponent=Interval(estimate=1.0, low=0.98, high=1.02), nearest="n", unit="steps")
NONE = Interval(estimate=0.0, low=-0.02, high=0.02)
ONE = Interval(estimate=1.0, low=0.95, high=1.05)


def held(
    declared: str, size: int, split: Split, toll: Toll | None = LINEAR, excess: Interval | None = NONE
) -> tuple[Check, ...]:
    budget = parse_budget(declared)
    assert budget.recurrence is not None
    seen = pattern(made(size, split))
    assert seen is not None
    variable = budget.variables[0]
    return checks(budget.recurrence, seen, observed(observe_terms(seen, variable), "1", variable), toll, excess)


def told(found: tuple[Check, ...]) -> list[tuple[str, str, str, bool | None]]:
    return [(check.about, check.declared, check.found, check.agrees) for check in found if check.about != "toll"]


def halves(n: int) -> list[int]:
    return [n // 2, n - n // 2] if n > 1 else []


def test_halves_as_declared() -> None:
    assert held("T(n) = 2 T(n/2) + n", 1024, halves) == (
        Check(about="subproblems", declared="2", found="2", agrees=True),
        Check(about="argument", declared="n/2", found="n/2", agrees=True),
        Check(about="toll", declared="n", found="own work (steps) grows as n^1.00 (95 % 0.98 to 1.02)", agrees=True),
    )


@pytest.mark.parametrize(
    ("declared", "size", "split", "expected"),
    [
        (
            "T(n) = T(n/2) + 1",
            1024,
            halves,
            [("subproblems", "1", "2", False), ("argument", "n/2", "n/2", True)],
        ),
        (
            "T(n) = 3 T(n/2) + n",
            1024,
            halves,
            [("subproblems", "3", "2", True), ("argument", "n/2", "n/2", True)],
        ),
        (
            "T(n) = 2 T(n/2) + n",
            300,
            lambda n: [n - 1, 0] if n else [],
            [
                ("subproblems", "2", "1 that grows with n, beside 1 of a constant size", True),
                ("argument", "n/2", "n - 1", False),
            ],
        ),
        (
            "T(n) = 2 T(n/2) + n",
            3000,
            lambda n: [n // 10, n - n // 10] if n > 9 else [],
            [
                ("subproblems", "2", "2", True),
                ("argument", "n/2", "9n/10", False),
                ("argument", "n/2", "n/10", True),
            ],
        ),
        (
            "T(n) = T(n/5) + T(7n/10) + n",
            20000,
            lambda n: [n // 5, n // 2] if n > 9 else [],
            [
                ("subproblems", "2", "2", True),
                ("argument", "7n/10", "n/2", True),
                ("argument", "n/5", "n/5", True),
            ],
        ),
        (
            "T(m) = T(m - 1) + 1",
            15,
            lambda n: [n - 1, n - 2] if n > 1 else [],
            [("subproblems", "1", "2", False), ("argument", "m - 1", "m - 1", True)],
        ),
        (
            "T(n) = T(n - 2) + 1",
            300,
            lambda n: [n - 1] if n else [],
            [("subproblems", "1", "1", True), ("argument", "n - 2", "n - 1", False)],
        ),
        (
            "T(n) = T(n - 1) + 1",
            1024,
            lambda n: [n // 2] if n > 1 else [],
            [("subproblems", "1", "1", True), ("argument", "n - 1", "n/2", True)],
        ),
        (
            "T(n) = T(sqrt n) + 1",
            1024,
            lambda n: [n // 2] if n > 1 else [],
            [("subproblems", "1", "1", True), ("argument", "sqrt(n)", "n/2", False)],
        ),
        (
            "T(n) = 2 T(n - 1) + 1",
            7,
            lambda n: [n - 1] * n,
            [("subproblems", "2", "n T(n - 1)", False), ("argument", "n - 1", "n - 1", True)],
        ),
        (
            "T(n) = n T(n - 1) + 1",
            7,
            lambda n: [n - 1] * n,
            [("subproblems", "a number that grows", "n T(n - 1)", None), ("argument", "n - 1", "n - 1", True)],
        ),
    ],
)
def test_the_number_and_the_size_of_subproblems(
    declared: str, size: int, split: Split, expected: list[tuple[str, str, str, bool | None]]
) -> None:
    assert told(held(declared, size, split)) == expected


def test_a_random_split_is_told_with_its_spread() -> None:
    rng = random.Random(3)

    def split(n: int) -> list[int]:
        part = rng.randrange(n) if n > 1 else 0
        return [part, n - 1 - part] if n > 1 else []

    _, large, small, _ = held("T(n) = 2 T(n/2) + n", 20000, split)
    assert (large.agrees, small.agrees) == (False, True)
    assert large.found.startswith("0.7")
    assert large.found.endswith(" in 90 % of calls)")


@pytest.mark.parametrize(
    ("excess", "agrees"),
    [
        (NONE, True),
        (Interval(estimate=-1.0, low=-1.1, high=-0.9), True),
        (ONE, False),
        (Interval(estimate=0.3, low=-0.4, high=1.0), True),  # not told from the toll declared
        (Interval(estimate=0.1, low=0.09, high=0.11), True),  # a logarithm looks so
        (None, None),
    ],
)
def test_the_toll_is_judged_by_its_excess(excess: Interval | None, agrees: bool | None) -> None:
    assert held("T(n) = 2 T(n/2) + n", 64, halves, LINEAR, excess)[-1].agrees is agrees


@pytest.mark.parametrize(("estimate", "agrees"), [(0.35, True), (0.6, False)])
def test_time_is_given_what_memory_may_add(estimate: float, agrees: bool) -> None:
    hidden = Toll(exponent=ONE, nearest="n", unit="ns", hidden=True)
    excess = Interval(estimate=estimate, low=estimate - 0.1, high=estimate + 0.1)
    assert held("T(n) = 2 T(n/2) + n", 64, halves, hidden, excess)[-1].agrees is agrees
    assert held("T(n) = 2 T(n/2) + n", 64, halves, LINEAR, excess)[-1].agrees is False


def test_a_toll_of_nothing_means_a_constant_one() -> None:
    check = held("T(n) = 2 T(n/2)", 64, halves, LINEAR, ONE)[-1]
    assert (check.declared, check.agrees) == ("0", False)


def test_a_toll_that_could_not_be_told() -> None:
    check = held("T(n) = 2 T(n/2) + n", 64, halves, None, None)[-1]
    assert (check.found, check.agrees) == ("too few sizes to tell", None)


def test_hidden_work_is_named() -> None:
    hidden = Toll(exponent=ONE, nearest="n", unit="ns", hidden=True)
    check = held("T(n) = T(n/2) + 1", 64, lambda n: [n // 2] if n > 1 else [], hidden, ONE)[-1]
    assert check.found == "own work (time) grows as n^1.00 (95 % 0.95 to 1.05), which steps do not show"
    assert check.agrees is False


@pytest.mark.parametrize(
    ("found", "declared", "expected"),
    [
        ("T(n) = 2 T(n/2) + n^2", "n log n", "faster"),
        ("T(n) = T(n/2) + n", "n log n", "slower"),
        ("T(n) = T(n/3) + T(2n/3) + n", "T(n) = 2 T(n/2) + n", "same"),
    ],
)
def test_the_growth_implied_against_the_growth_declared(found: str, declared: str, expected: str) -> None:
    budget = parse_budget(found)
    seen = Observed(text=found, terms=(), toll="n", theta=budget.theta, theorem="", fault="", budget=budget)
    assert relation(seen, parse_budget(declared)) == expected


def test_an_unsolved_recurrence_has_no_relation() -> None:
    seen = Observed(text="?", terms=(), toll="n", theta="", theorem="", fault="not covered")
    assert relation(seen, parse_budget("n")) == ""


def fibonacci(n: int) -> int:
    return n if n < 2 else fibonacci(n - 1) + fibonacci(n - 2)


def moved(n: int) -> None:
    if n:
        moved(n - 1)
        moved(n - 1)


def test_overlap_is_told_of_calls_that_give_something_back() -> None:
    again = pattern(recorded(fibonacci, (18,)))
    assert again is not None
    check = overlap(again)
    assert check is not None
    assert check.agrees is False
    for_effect = pattern(recorded(moved, (10,)))
    assert for_effect is not None
    assert for_effect.asked > for_effect.distinct
    assert overlap(for_effect) is None


def test_distinct_subproblems_do_not_overlap() -> None:
    seen = pattern(made(1024, halves))
    assert seen is not None
    assert overlap(seen) is None
