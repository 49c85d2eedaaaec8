"""The toll of made-up work, whose growth is known."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from pytest_growthbudget.auditing.toll import Work, excess_over, hidden_toll, is_flat, toll_of, work_by_size
from pytest_growthbudget.fitting.excess import CLOCK_NOISE, COUNTER_NOISE
from tests.auditing.made import made


def work(cost: Callable[[float], float], unit: str = "steps", largest: int = 12) -> Work:
    sizes = 2.0 ** np.arange(1, largest + 1)
    return Work(
        sizes=sizes,
        work=np.array([cost(n) for n in sizes.tolist()]),
        counts=np.ones(len(sizes)),
        unit=unit,
        noise=COUNTER_NOISE if unit == "steps" else CLOCK_NOISE,
    )


@pytest.mark.parametrize(
    ("cost", "exponent", "nearest"),
    [
        (lambda n: 5.0, 0, "1"),
        (lambda n: 14 + 5 * n, 1, "n"),
        (lambda n: 3 * n, 1, "n"),
        (lambda n: 20 + 4 * math.log2(n), 0.2, "log n"),
        (lambda n: 10 * math.sqrt(n), 0.5, "sqrt n"),
        (lambda n: 9 + 2 * n * math.log2(n), 1.15, "n log n"),
        (lambda n: 30 + n**1.5, 1.5, "n^1.5"),
        (lambda n: 30 + n + n**2 / 4, 2, "n^2"),
        (lambda n: 7 + n**3, 3, "n^3"),
    ],
)
def test_the_exponent_and_the_nearest_growth(cost: Callable[[float], float], exponent: float, nearest: str) -> None:
    toll = toll_of(work(cost))
    assert toll is not None
    assert toll.exponent.estimate == pytest.approx(exponent, abs=0.12)
    assert toll.exponent.low <= toll.exponent.estimate <= toll.exponent.high
    assert toll.nearest == nearest
    assert not toll.hidden


def test_an_exponential_toll_is_not_called_a_power() -> None:
    sizes = np.arange(1.0, 15.0)
    toll = toll_of(Work(sizes=sizes, work=3 + 2.0**sizes, counts=sizes, unit="steps", noise=COUNTER_NOISE))
    assert toll is not None
    assert toll.nearest == "2^n"


def test_work_that_falls_is_constant() -> None:
    toll = toll_of(work(lambda n: 20 + 30 / n))
    assert toll is not None
    assert toll.nearest == "1"


def test_too_few_sizes_tell_nothing() -> None:
    assert toll_of(work(lambda n: n, largest=4)) is None
    sizes = np.array([100.0, 101, 102, 103, 104, 105])
    assert toll_of(Work(sizes=sizes, work=sizes, counts=sizes, unit="steps", noise=COUNTER_NOISE)) is None


def test_the_excess_over_a_declared_toll() -> None:
    quadratic = excess_over(work(lambda n: 9 + n**2), math.log)
    assert quadratic is not None
    assert quadratic.low < 1 < quadratic.high + 0.02
    linear = excess_over(work(lambda n: 9 + 4 * n), math.log)
    assert linear is not None
    assert linear.low < 0.01
    assert linear.high > -0.01


def steps(n: float) -> float:
    return 12 + 3 * n


@pytest.mark.parametrize(
    ("time", "hidden"),
    [
        (lambda n: 3000 + 150 * steps(n), False),
        # What a cold call costs at the largest size, where there is but one.
        (lambda n: (3000 + 150 * steps(n)) * (1.6 if n == 4096 else 1), False),
        # A pass in C over the whole input in each turn: 8 bytes moved in a nanosecond or so.
        (lambda n: 3000 + 150 * steps(n) + 0.5 * n**2, True),
    ],
)
def test_work_hidden_in_c_is_time_that_outgrows_steps(time: Callable[[float], float], hidden: bool) -> None:
    found = hidden_toll(work(steps), work(time, "ns"))
    assert (found is not None) is hidden
    if found is not None:
        toll, top = found
        assert toll.hidden
        assert 1.3 < toll.exponent.estimate < 2.1
        assert top.sizes[-1] == 4096


def test_constant_steps_do_not_hide_the_cost_of_a_cold_call() -> None:
    flat = work(lambda n: 5.0)
    assert hidden_toll(flat, work(lambda n: 3000.0 + (4000 if n > 1000 else 0), "ns")) is None
    found = hidden_toll(flat, work(lambda n: 3000 + 10 * n, "ns"))
    assert found is not None
    assert found[0].nearest == "n"


def test_time_beyond_the_sizes_whose_steps_are_known_follows_the_steps() -> None:
    assert hidden_toll(work(steps, largest=8), work(lambda n: 3000 + 150 * steps(n), "ns", largest=16)) is None


def test_flat_time_is_told_from_time_that_grows() -> None:
    assert is_flat(work(lambda n: 3000 + 80 * math.log2(n), "ns"))
    assert not is_flat(work(lambda n: 3000 + 10 * n, "ns"))


def test_work_is_that_of_dividing_calls_by_size() -> None:
    calls = made(64, lambda n: [n // 2, n // 2] if n > 1 else [], toll=lambda n: n)
    found = work_by_size(calls, "steps")
    assert found.sizes.tolist() == [2, 4, 8, 16, 32, 64]
    assert found.work.tolist() == [1000 * n for n in found.sizes]
    assert found.counts.tolist() == [32, 16, 8, 4, 2, 1]


def test_many_sizes_are_put_together() -> None:
    calls = made(900, lambda n: [n - 1] if n else [], toll=lambda n: n)
    found = work_by_size(calls, "steps")
    assert 15 <= len(found) <= 24
    assert found.counts.sum() == 900
    assert found.work == pytest.approx(1000 * found.sizes)
    toll = toll_of(replace(found, noise=COUNTER_NOISE))
    assert toll is not None
    assert toll.exponent.estimate == pytest.approx(1, abs=0.02)
