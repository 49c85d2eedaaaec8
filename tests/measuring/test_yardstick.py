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


def test_between_two_readings_it_is_interpolated_between_those_two() -> None:
    growth = YardstickGrowth()
    for size, cost in ((10, 1.0), (20, 4.0), (40, 5.0), (80, 50.0)):
        growth.add(size, cost)
    assert growth.log_value({"n": 15}) == pytest.approx(math.log(4) * math.log(1.5) / math.log(2))
    assert growth.log_value({"n": 30}) == pytest.approx(math.log(4) + math.log(5 / 4) * math.log(1.5) / math.log(2))
    assert growth.log_value({"n": 40}) == pytest.approx(math.log(5))
    assert growth.log_value({"n": 5}) == pytest.approx(-math.log(4)), "below the first, by the first two"


def test_beyond_the_last_reading_it_goes_on_as_over_the_last_octave() -> None:
    """Two readings close together would make noise a trend."""
    growth = YardstickGrowth()
    for size, cost in ((10, 7.0), (20, 9.0), (30, 12.0), (38, 99.0), (40, 18.0)):
        growth.add(size, cost)
    assert growth.log_value({"n": 80}) == pytest.approx(math.log(36))
    assert math.log(18) < growth.log_value({"n": 39}) < math.log(99)
    narrow = YardstickGrowth()
    for size, cost in ((30, 3.0), (36, 99.0), (40, 4.0)):
        narrow.add(size, cost)
    assert narrow.log_value({"n": 30 * (4 / 3) ** 2}) == pytest.approx(math.log(16 / 3)), "less than an octave: all"


def test_a_reading_of_nothing_still_has_a_log() -> None:
    growth = YardstickGrowth()
    assert growth.add(10, 0.0) > 0
    assert growth.add(20, 0.5) == 0.5
    assert growth.log_value({"n": 20}) == pytest.approx(math.log(0.5))
