"""The growth that the readings of a reference function tell."""

from __future__ import annotations

import math

import pytest

from pytest_growthbudget.measuring.yardstick import YardstickGrowth


def quadratic() -> YardstickGrowth:
    growth = YardstickGrowth()
    for size in (10, 20, 40, 80):
        growth.add(size, 3.0 * size**2)
    return growth


def test_the_typical_cost_is_the_median() -> None:
    growth = YardstickGrowth()
    assert [growth.add(10, cost) for cost in (5.0, 9.0, 6.0)] == [5.0, 7.0, 6.0]


@pytest.mark.parametrize("n", [10, 14.1, 33, 80, 160, 5000])
def test_it_goes_through_the_readings_and_on(n: float) -> None:
    assert quadratic().log_value({"n": n}) == pytest.approx(math.log(3) + 2 * math.log(n))


def test_few_readings() -> None:
    growth = YardstickGrowth()
    assert growth.log_value({"n": 10}) == 0.0
    growth.add(10, math.e)
    assert growth.log_value({"n": 1000}) == pytest.approx(1.0)
