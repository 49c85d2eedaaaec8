"""The recurrence as text: rounded as far as it was seen, and readable as a budget."""

from __future__ import annotations

import random
from fractions import Fraction

import pytest

from pytest_growthbudget.auditing.observed import observe_terms, observed
from pytest_growthbudget.auditing.pattern import pattern
from pytest_growthbudget.bounds.budget import parse_budget
from tests.auditing.made import Split, made


def text(size: int, split: Split, toll: str = "n") -> str:
    seen = pattern(made(size, split))
    assert seen is not None
    return observed(observe_terms(seen), toll).text


def cut(n: int, numerator: int, denominator: int) -> list[int]:
    part = n * numerator // denominator
    return [part, n - part] if 0 < part < n else []


@pytest.mark.parametrize(
    ("size", "split", "expected"),
    [
        (1024, lambda n: cut(n, 1, 2), "T(n) = 2 T(n/2) + n"),
        (105, lambda n: cut(n, 1, 2), "T(n) = 2 T(n/2) + n"),
        (2187, lambda n: [n // 3] * 3 if n > 2 else [], "T(n) = 3 T(n/3) + n"),
        (3000, lambda n: cut(n, 1, 10), "T(n) = T(9n/10) + T(n/10) + n"),
        (20000, lambda n: cut(n, 1, 100), "T(n) = T(99n/100) + T(n/100) + n"),
        (20000, lambda n: [n // 5, 7 * n // 10] if n > 9 else [], "T(n) = T(7n/10) + T(n/5) + n"),
        (500, lambda n: [n - 1] if n else [], "T(n) = T(n - 1) + n"),
        (15, lambda n: [n - 1, n - 2] if n > 1 else [], "T(n) = T(n - 1) + T(n - 2) + n"),
        (8, lambda n: [n - 1] * 3 if n else [], "T(n) = 3 T(n - 1) + n"),
        (7, lambda n: [n - 1] * n, "T(n) = n T(n - 1) + n"),
        (10**15, lambda n: [round(n**0.5)] if n > 2 else [], "T(n) = T(sqrt(n)) + n"),
        (400, lambda n: [n - 1, 0] if n else [], "T(n) = T(n - 1) + n"),
    ],
)
def test_the_text_of_known_splits(size: int, split: Split, expected: str) -> None:
    assert text(size, split) == expected


def test_ratios_of_a_partition_add_up_to_one() -> None:
    """Else rounding alone would turn n log n into n or into a power."""
    rng = random.Random(2)

    def split(n: int) -> list[int]:
        if n < 2:
            return []
        part = rng.randrange(n)
        return [part, n - 1 - part]

    seen = pattern(made(5000, split))
    assert seen is not None
    terms = observe_terms(seen)
    assert sum(term.value for term in terms) == 1
    assert observed(terms, "n").theta == "n log n"


@pytest.mark.parametrize(
    ("size", "split", "toll", "theta"),
    [
        (1024, lambda n: cut(n, 1, 2), "n", "n log n"),
        (1024, lambda n: cut(n, 1, 2), "n^2", "n^2"),
        (15, lambda n: [n - 1, n - 1] if n else [], "1", "2^n"),
        (1024, lambda n: [n // 2] if n > 1 else [], "1", "log n"),
    ],
)
def test_what_it_implies_and_that_it_can_be_pasted(size: int, split: Split, toll: str, theta: str) -> None:
    seen = pattern(made(size, split))
    assert seen is not None
    found = observed(observe_terms(seen), toll)
    assert found.theta == theta == parse_budget(found.text).theta
    assert found.fault == ""


def test_another_variable() -> None:
    seen = pattern(made(2000, lambda n: cut(n, 1, 3)))
    assert seen is not None
    found = observed(observe_terms(seen, "rows"), "rows", "rows")
    assert found.text == "T(rows) = T(2rows/3) + T(rows/3) + rows"
    assert found.theta == "rows log rows"


def test_without_a_term_it_is_a_bound() -> None:
    found = observed((), "n^2")
    assert (found.text, found.theta, found.theorem) == ("n^2", "n^2", "")


def test_a_recurrence_that_no_theorem_covers_is_told_with_the_reason() -> None:
    seen = pattern(made(40, lambda n: [n - 1, n // 2] if n > 1 else []))
    assert seen is not None
    found = observed(observe_terms(seen), "1")
    assert found.text == "T(n) = T(n - 1) + T(n/2) + 1"
    assert found.theta == ""
    assert found.fault.startswith("calls of n - k beside calls of n/b")


def test_a_count_that_varies_is_a_mean() -> None:
    rng = random.Random(4)
    seen = pattern(made(4096, lambda n: [n // 2] * rng.choice((1, 2)) if n > 1 else []))
    assert seen is not None
    (term,) = observe_terms(seen)
    assert term.value == Fraction(1, 2)
    assert float(term.count) == pytest.approx(1.5, abs=0.2)
