"""Judging given costs: verdicts, shapes, and errors that say what to mend."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from pytest_growthbudget.bounds.budget import parse_budget
from pytest_growthbudget.bounds.language import BoundError
from pytest_growthbudget.fitting.judge import NO_MEMORY, ReadingsError, judge

SIZES = [int(100 * 2 ** (step / 2)) for step in range(14)]


def costs(exponent: float, readings: int = 1) -> np.ndarray:  # type: ignore[type-arg]
    noise = np.random.default_rng(2).normal(0, 0.01, (len(SIZES), readings))
    return np.asarray(SIZES, dtype=float)[:, None] ** exponent * np.exp(noise)


@pytest.mark.parametrize(
    ("exponent", "budget", "verdict"),
    [
        (1.0, "n", "within"),
        (2.0, "n", "exceeded"),
        (1.0, "n^2", "within"),
        (2.0, "n log n", "exceeded"),
        (1.22, "n", "undecided"),
        (1.0, "T(n) = 2 T(n/2) + n", "within"),
        (2.0, "T(n) = T(n/2) + 1", "exceeded"),
        (0.0, "1", "within"),
    ],
)
def test_three_verdicts(exponent: float, budget: str, verdict: str) -> None:
    given = costs(exponent)[:, 0]
    if verdict == "undecided":
        given = given * np.array([1.0, 1.6] * 7)
    found = judge(SIZES, given, budget)
    assert found.verdict == verdict
    assert found.bound == budget
    assert found.notes == (NO_MEMORY,)
    assert found.confirmed is None


def test_the_judgement_has_its_figures() -> None:
    found = judge(SIZES, costs(1.97)[:, 0], "n log n")
    assert found.theta == "n log n"
    assert found.exponent is not None
    assert found.excess is not None
    assert found.exponent.low < 1.97 < found.exponent.high
    assert found.excess.low < found.excess.estimate < found.excess.high
    assert found.nearest == "n^2"
    assert [row.size for row in found.sizes] == SIZES
    assert found.forecast[0].cost.estimate > found.forecast[0].allowed
    assert found.reason.startswith("over n = 100 to 9050 the excess is at least 0.")


def test_the_judgement_says_what_it_was_held_to() -> None:
    found = judge(SIZES, [3.0 * n for n in SIZES], "T(m) = 2 T(m/2) + m", slack=0.2, confidence=0.9)
    assert (found.bound, found.theta, found.variable) == ("T(m) = 2 T(m/2) + m", "m log m", "m")
    assert found.theorem == "Master theorem, case 2"
    assert found.steps[-1] == "T(m) = Θ(m log m)"
    assert (found.meter, found.unit) == ("the given cost", "")
    assert (found.slack, found.confidence) == (0.2, 0.9)
    ahead = [allows / row.cost for allows, row in zip(found.allowed, found.sizes, strict=True)]
    assert ahead == sorted(ahead)
    assert max(ahead) == pytest.approx(1, rel=0.1)
    assert judge(SIZES, [3.0] * len(SIZES), "1").variable == "n"


def test_reasons_are_whole_sentences() -> None:
    over = "over n = 100 to 9050 the excess"
    assert judge(SIZES, costs(1.0)[:, 0], "n").reason == f"{over} is below the limit of 0.30"
    assert judge(SIZES, [float(n) ** 2 for n in SIZES], "n").reason == (
        f"{over} is at least 1.00, above the slack of 0.15"
    )


def test_a_budget_that_was_parsed_before_is_judged_alike() -> None:
    given = costs(1.3)[:, 0]
    assert judge(SIZES, given, parse_budget("n log n")) == judge(SIZES, given, "n log n")


def test_five_sizes_without_any_slack_can_be_judged() -> None:
    assert judge(SIZES[:5], [float(n) ** 2 for n in SIZES[:5]], "n", slack=0.0).verdict == "exceeded"


def test_an_excess_of_an_exponential_budget_is_a_power_of_it() -> None:
    sizes = list(range(8, 24))
    found = judge(sizes, [3.0**n for n in sizes], "2^n")
    assert found.excess is not None
    assert found.excess.estimate == pytest.approx(math.log(3) / math.log(2) - 1, abs=0.01)


def test_shapes_are_alike() -> None:
    """(m,), (m, r), lists of unequal length, and sizes that come twice."""
    many = costs(1.0, 4)
    ragged = [list(row[: 1 + index % 4]) for index, row in enumerate(many)]
    twice = judge(SIZES * 2, np.concatenate((many[:, 0], many[:, 1])), "n")
    pairs = judge(SIZES, many[:, :2], "n")
    assert pairs.excess == twice.excess
    assert [row.readings for row in twice.sizes] == [2] * len(SIZES)
    assert judge(SIZES, many, "n").verdict == judge(SIZES, ragged, "n").verdict == "within"
    assert [row.readings for row in judge(SIZES, ragged, "n").sizes[:4]] == [1, 2, 3, 4]
    assert judge(np.array(SIZES), many.tolist(), "n").excess == judge(SIZES, many, "n").excess


def test_order_does_not_matter() -> None:
    given = costs(1.3)[:, 0]
    assert judge(SIZES[::-1], given[::-1], "n").excess == judge(SIZES, given, "n").excess


def test_slack_and_confidence_move_the_verdict() -> None:
    given = costs(1.25)[:, 0]
    assert judge(SIZES, given, "n").verdict == "exceeded"
    assert judge(SIZES, given, "n", slack=0.3).verdict == "within"
    wide, narrow = judge(SIZES, given, "n", confidence=0.99), judge(SIZES, given, "n", confidence=0.8)
    assert wide.excess is not None
    assert narrow.excess is not None
    assert wide.excess.low < narrow.excess.low


def test_exact_counts_with_a_small_slack_separate_a_log_factor() -> None:
    sizes = [int(200 * 2 ** (step / 2)) for step in range(13)]
    comparisons = [n * math.log2(n) for n in sizes]
    assert judge(sizes, comparisons, "n", slack=0.05).verdict == "exceeded"
    assert judge(sizes, comparisons, "n log n", slack=0.05).verdict == "within"


def test_an_exponential_budget() -> None:
    sizes = list(range(8, 24))
    assert judge(sizes, [2.0**n for n in sizes], "2^n").verdict == "within"
    assert judge(sizes, [3.0**n for n in sizes], "2^n").verdict == "exceeded"
    assert judge(sizes, [2.0**n for n in sizes], "n^2").nearest == "2^n"


FIVE = [1, 2, 3, 4, 5]


@pytest.mark.parametrize(
    ("sizes", "given", "options", "message"),
    [
        (FIVE, [1, 2, 3, 4], {}, "there are 5 sizes but costs for 4"),
        (FIVE[:3], [1, 2, 3], {}, "3 different sizes were given where at least 5 are needed"),
        ([1, 1, 1, 2, 2], FIVE, {}, "2 different sizes were given"),
        (FIVE, [1, 2, math.nan, 4, 5], {}, "a cost at n = 3 is nan; costs must be positive and finite."),
        (FIVE, [1, 2, math.inf, 4, 5], {}, "a cost at n = 3 is inf"),
        (FIVE, [1, 2, 0, 4, 5], {}, "a cost at n = 3 is 0.0"),
        (FIVE, [1, 2, -1, 4, 5], {}, "a cost at n = 3 is -1.0"),
        (FIVE, [1, 2, "x", 4, 5], {}, "a cost at n = 3 is 'x', which is not a number."),
        (FIVE, [1, 2, None, 4, 5], {}, "a cost at n = 3 is None, which is not a number."),
        (FIVE, [1, 2, True, 4, 5], {}, "a cost at n = 3 is True, which is not a number."),
        (FIVE, [[1], [2], [], [4], [5]], {}, "there is no cost at n = 3. Leave that size out."),
        ([0, 2, 3, 4, 5], FIVE, {}, "the size at position 0 is 0; a size is a whole number of at least 1."),
        ([1, 2, 3, 4, 5.5], FIVE, {}, "the size at position 4 is 5.5"),
        ([1, 2, 3, 4, math.nan], FIVE, {}, "the size at position 4 is nan"),
        ("12345", FIVE, {}, "sizes must be a list of numbers, not '12345'."),
        (7, FIVE, {}, "sizes must be a list of numbers, not 7."),
        (FIVE, 7, {}, "costs must be a list of numbers, not 7."),
        (np.ones((5, 1)), FIVE, {}, "sizes has 2 dimensions"),
        (FIVE, np.ones((5, 1, 1)), {}, "costs has 3 dimensions"),
        (["1", 2, 3, 4, 5], FIVE, {}, "the size at position 0 is '1', which is not a number."),
        (FIVE, FIVE, {"confidence": 0.0}, "confidence must lie between 0 and 1, not at 0.0."),
        (FIVE, FIVE, {"confidence": 1.0}, "confidence must lie between 0 and 1, not at 1.0."),
        (FIVE, FIVE, {"slack": -0.1}, "slack must be a number of at least 0, not -0.1."),
        (FIVE, FIVE, {"slack": math.nan}, "slack must be a number of at least 0, not nan."),
    ],
)
def test_faults_are_said_in_a_sentence(sizes: Any, given: Any, options: dict[str, float], message: str) -> None:
    with pytest.raises(ReadingsError) as caught:
        judge(sizes, given, "n", **options)
    assert str(caught.value).startswith(message)
    assert str(caught.value).endswith(".")


def test_several_variables_are_refused() -> None:
    with pytest.raises(ReadingsError) as caught:
        judge(FIVE, FIVE, "V + E")
    assert str(caught.value) == (
        "the budget 'V + E' has several variables (E, V), but there is one number a size. "
        "State the bound in one variable."
    )


def test_a_bad_bound_is_the_bounds_own_error() -> None:
    with pytest.raises(BoundError):
        judge(FIVE, FIVE, "n +* n")


def test_readings_error_is_a_value_error() -> None:
    assert issubclass(ReadingsError, ValueError)
