"""Bounds that are functions of the user's own."""

from __future__ import annotations

import math
from collections.abc import Callable
from fractions import Fraction
from typing import Any

import pytest

from pytest_growthbudget.bounds.callables import callable_budget
from pytest_growthbudget.bounds.language import BoundError


def quadratic(n: int) -> float:
    return n * n + 3


def test_the_growth_is_the_log_of_the_function() -> None:
    budget = callable_budget(quadratic)
    growth = budget.ray(("n",))
    assert budget.text == budget.theta == "quadratic(n)"
    assert growth.log_value({"n": 100}) == pytest.approx(math.log(10_003))
    assert not budget.exponential


def test_between_whole_numbers_it_is_interpolated() -> None:
    growth = callable_budget(quadratic).ray(("n",))
    assert growth.log_value({"n": 2.25}) == pytest.approx(0.75 * math.log(7) + 0.25 * math.log(12))


def test_whole_numbers_of_any_length_are_taken() -> None:
    budget = callable_budget(lambda n: 2**n)
    assert budget.exponential
    assert budget.ray(("n",)).log_value({"n": 5_000}) == pytest.approx(5_000 * math.log(2))


def test_sizes_below_one_count_as_one() -> None:
    growth = callable_budget(quadratic).ray(("n",))
    assert growth.log_value({"n": 0.25}) == growth.log_value({"n": 1}) == math.log(4)


class Doubled:
    def __call__(self, n: int) -> int:
        return 2 * n


@pytest.mark.parametrize(
    ("function", "text"),
    [
        (quadratic, "quadratic(n)"),
        (lambda n: n, "a function of n"),
        (Doubled(), "Doubled(n)"),
        (math.log2, "log2(n)"),
        (lambda n, k=2: n**k, "a function of n"),
    ],
)
def test_a_function_is_named_as_it_names_itself(function: Callable[[int], float], text: str) -> None:
    """Functions, lambdas, objects that can be called, and built-in functions."""
    budget = callable_budget(function)
    assert (budget.text, budget.theta) == (text, text)
    assert (budget.variables, budget.theorem, budget.steps) == (("n",), "", ())


@pytest.mark.parametrize(
    "function", [lambda n: 2 ** (n // 30), lambda n: 2 ** int(n**0.5), lambda n: n ** int(math.log2(n))]
)
def test_what_outruns_the_powers_is_exponential(function: Callable[[int], float]) -> None:
    assert callable_budget(function).exponential


def test_a_fall_within_rounding_is_no_fall() -> None:
    assert callable_budget(lambda n: 1 - 1e-11 * math.log(n)).text == "a function of n"
    with pytest.raises(BoundError, match="falls on the way to n = 8"):
        callable_budget(lambda n: 1 - 1e-6 * math.log(n))


@pytest.mark.parametrize(
    "function",
    [lambda n: n, lambda n: n * math.log(n), lambda n: n**3, lambda n: n**4, lambda n: n**9, lambda n: 7],
)
def test_powers_are_not_exponential(function: Callable[[int], float]) -> None:
    assert not callable_budget(function).exponential


def no_argument() -> float:
    return 1.0


def falling(n: int) -> float:
    return 1e9 / n


def negative(n: int) -> float:
    return 5.0 - n


def raising(n: int) -> float:
    raise RuntimeError("no")


def text(n: int) -> Any:
    return "n"


def endless(n: int) -> float:
    return math.inf


def undefined(n: int) -> float:
    return math.nan


def huge(n: int) -> Fraction:
    return Fraction(10) ** (100 * n)


def two_arguments(n: int, m: int) -> int:
    return n * m


def overflowing(n: int) -> float:
    return 2.0**n


@pytest.mark.parametrize(
    ("function", "message"),
    [
        (no_argument, "no_argument(n) must take one argument, the problem size"),
        (falling, "falling(n) falls on the way to n = 8; a bound must not fall as n grows"),
        (negative, "negative(n) gave -3.0 at n = 8; a positive number was expected"),
        (raising, "raising(n) raised RuntimeError at n = 4: no"),
        (text, "text(n) gave 'n' at n = 4; a positive number was expected"),
        (two_arguments, "two_arguments(n) must take one argument, the problem size"),
        (undefined, "undefined(n) gave nan at n = 4; a finite number was expected"),
        (huge, f"huge(n) gave {Fraction(10) ** 400!r} at n = 4; a finite number was expected"),
        (endless, "endless(n) gave inf at n = 4; a finite number was expected"),
        (overflowing, "overflowing(n) overflows at n = 1,024; compute it with whole numbers"),
    ],
)
def test_functions_that_are_no_bounds_are_refused(function: Callable[..., float], message: str) -> None:
    with pytest.raises(BoundError) as caught:
        callable_budget(function)
    assert caught.value.message == message
    assert caught.value.text == message.split(")")[0] + ")"
