"""What a budget allows, on the scale of the cost."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from pytest_growthbudget.fitting.judgement import Finding, ForecastRow, Interval, SizeRow
from pytest_growthbudget.fitting.scale import allowed, on_one_scale


def finding(costs: dict[int, float]) -> Finding:
    row = ForecastRow(size=1000, cost=Interval(estimate=1e6, low=1e5, high=1e7), allowed=7.0)
    rows = tuple(SizeRow(size=size, cost=cost, readings=3) for size, cost in costs.items())
    return Finding(verdict="exceeded", reason="", sizes=rows, forecast=(row,))


def test_the_budget_is_scaled_to_where_the_cost_was_lowest_against_it() -> None:
    """Not to fixed costs at the smallest sizes, nor to a single low reading: to the least median of neighbours."""
    case = finding({10: 90.0, 20: 100.0, 40: 120.0, 80: 240.0, 160: 16.0, 320: 1600.0, 640: 3200.0})
    assert allowed(case, math.log) == pytest.approx([30, 60, 120, 240, 480, 960, 1920])


def test_the_scale_reaches_to_both_ends() -> None:
    falling = finding({10: 90.0, 20: 120.0, 40: 160.0, 80: 160.0})
    assert 20 <= allowed(falling, math.log)[0] < 40
    rising = finding({10: 20.0, 20: 80.0, 40: 200.0, 80: 480.0})
    assert 20 <= allowed(rising, math.log)[0] < 40


def test_costs_below_one_and_of_nothing() -> None:
    case = finding({10: 0.0, 20: 0.2, 40: 0.4, 80: 0.8})
    assert allowed(case, math.log) == pytest.approx([0.1, 0.2, 0.4, 0.8])


def test_what_is_foreseen_is_held_to_the_same_scale() -> None:
    case = finding({10: 20.0, 20: 40.0, 40: 80.0})
    assert on_one_scale(case, math.log).forecast[0].allowed == pytest.approx(2000)
    assert on_one_scale(case, lambda n: n).forecast[0].allowed == math.exp(700.0), "no float is larger than e^709"


def test_nothing_read_allows_nothing() -> None:
    for case in (replace(finding({}), forecast=()), finding({10: 0.0})):
        assert allowed(case, math.log) == ()
        assert on_one_scale(case, math.log) == case
