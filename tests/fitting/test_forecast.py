"""What the fit says beyond the verdict."""

from __future__ import annotations

import math

import numpy as np
import pytest

from pytest_growthbudget.fitting.evidence import gather
from pytest_growthbudget.fitting.excess import CLOCK_NOISE, Observations, fit_excess, observe
from pytest_growthbudget.fitting.finding import measured_exponent
from pytest_growthbudget.fitting.forecast import (
    allowed_cost,
    bends_at,
    forecast,
    forecast_sizes,
    growth_text,
    local_exponents,
    nearest_growth,
    steep_base,
)
from pytest_growthbudget.fitting.judgement import ForecastRow, Interval
from pytest_growthbudget.measuring.readings import Promise, Series
from tests.fitting.campaigns import BUDGETS

SIZES = np.unique((20 * 2 ** (np.arange(16) / 2)).astype(int))


def seen(cost, budget="n", *, sizes=SIZES, noise=0.0) -> Observations:  # type: ignore[no-untyped-def]
    draw = np.random.default_rng(3)
    costs = [cost(float(n)) * math.exp(draw.normal(0, noise)) for n in sizes]
    return observe(sizes, costs, BUDGETS[budget])


def rows(case: Observations, budget: str = "n") -> tuple[ForecastRow, ...]:
    return forecast(case, BUDGETS[budget], exponential=False, confidence=0.95, noise=CLOCK_NOISE)


def exponent_of(case: Observations) -> Interval:
    bare = observe(case.sizes, case.costs, lambda n: 0.0)
    return fit_excess(bare).delta.interval()


@pytest.mark.parametrize(
    "cost",
    [lambda n: 7.0 * n, lambda n: 3.0 * n * n, lambda n: 5e4 + 3.0 * n * n, lambda n: 9.0 * n**1.5, lambda n: 400.0],
)
def test_the_interval_holds_the_cost_to_come(cost) -> None:  # type: ignore[no-untyped-def]
    for row in rows(seen(cost)):
        assert row.cost.low < cost(row.size) < row.cost.high


def test_the_interval_covers_noisy_costs() -> None:
    """At ten times the largest size at least 90 % of the 95 % intervals hold the truth, over 100 draws."""
    held = 0
    for seed in range(100):
        noise = np.random.default_rng(seed).normal(0, 0.04, len(SIZES))
        case = observe(SIZES, 5.0 * SIZES**1.3 * np.exp(noise), BUDGETS["n"])
        row = rows(case)[1]
        held += row.cost.low <= 5.0 * row.size**1.3 <= row.cost.high
    assert held >= 90


def test_sizes_within_and_below_those_read_can_be_asked_for() -> None:
    case = seen(lambda n: 7.0 * n, noise=0.03)
    asked = forecast(case, BUDGETS["n"], exponential=False, confidence=0.95, noise=CLOCK_NOISE, at=(5, 100, 3000))
    assert [row.size for row in asked] == [5, 100, 3000]
    for row in asked:
        assert row.cost.low < row.cost.high
        assert row.cost.estimate == pytest.approx(7.0 * row.size, rel=0.2)


def test_the_interval_widens_with_the_distance() -> None:
    widths = [row.cost.high / row.cost.low for row in rows(seen(lambda n: 7.0 * n, noise=0.05))]
    assert widths == sorted(widths)
    assert len(widths) == 3


def test_what_the_budget_allows_is_scaled_from_the_smaller_sizes() -> None:
    case = seen(lambda n: 7.0 * n + (n / 1000) ** 4)
    assert allowed_cost(case, BUDGETS["n"], 1e6) == pytest.approx(7e6, rel=0.01)


def test_a_forecast_beyond_all_sense_is_left_out() -> None:
    case = seen(lambda n: n**9.0)
    assert all(row.cost.estimate < 1e21 for row in rows(case))


def test_sizes_are_round_or_a_few_steps_on() -> None:
    assert forecast_sizes(1234, exponential=False) == (2500, 12000, 120000)
    assert forecast_sizes(7, exponential=False) == (14, 70, 700)
    assert forecast_sizes(24, exponential=True) == (29, 34, 44)


@pytest.mark.parametrize(
    ("cost", "name"),
    [
        (lambda n: 300.0 + 0.001 * n, "1"),
        (lambda n: 50.0 * math.log(n), "log n"),
        (lambda n: 9.0 * math.sqrt(n), "sqrt n"),
        (lambda n: 9.0 * n, "n"),
        (lambda n: 9.0 * n * math.log(n), "n log n"),
        (lambda n: 9.0 * n**1.5, "n^1.5"),
        (lambda n: 9.0 * n**1.97, "n^2"),
        (lambda n: 9.0 * n**2 * math.log(n), "n^2 log n"),
        (lambda n: 9.0 * n**3, "n^3"),
    ],
)
def test_the_nearest_simple_growth(cost, name: str) -> None:  # type: ignore[no-untyped-def]
    case = seen(cost, noise=0.003)
    flat = name in ("1", "log n")
    bare = observe(case.sizes, case.costs, lambda n: 0.0)
    fit = fit_excess(bare)
    exponent = (fit.at_top if flat else fit.delta).interval()
    if name == "log n":  # its own exponent over the sizes, not that at the largest
        exponent = Interval(estimate=0.24, low=0.2, high=0.3)
    assert nearest_growth(case, exponent) == name


def test_an_exponential_cost_is_named_by_its_factor() -> None:
    n = np.arange(10, 26)
    case = observe(n, 1.6**n, BUDGETS["n"])
    assert steep_base(case) == pytest.approx(1.6)
    assert nearest_growth(case, exponent_of(case)) == "1.6^n"
    assert steep_base(seen(lambda size: size**6.0)) is None


def test_a_vague_exponent_has_no_nearest_growth() -> None:
    assert nearest_growth(seen(lambda n: n), Interval(estimate=1.0, low=0.2, high=1.9)) is None


@pytest.mark.parametrize(
    ("exponent", "text"), [(1.968, "n^1.97"), (1.0, "n"), (0.001, "1"), (-0.2, "n^-0.20"), (2.0, "n^2.00")]
)
def test_an_exponent_as_text(exponent: float, text: str) -> None:
    assert growth_text(exponent) == text


def test_where_the_cost_bends_away() -> None:
    """Linear to n = 300, square beyond: ahead by a quarter once n is 375."""
    case = seen(lambda n: 50.0 * n * max(1.0, n / 300.0))
    bend = bends_at(case)
    assert bend is not None
    assert 300 < bend < 600
    assert bends_at(seen(lambda n: 50.0 * n)) is None


def test_a_bump_that_comes_down_again_is_no_bend() -> None:
    case = seen(lambda n: 50.0 * n * (1.5 if 300 < n < 900 else 1.0))
    assert bends_at(case) is None


def test_local_exponents_are_slopes_between_neighbours() -> None:
    assert local_exponents([10, 20, 40, 80], [1, 4, 16, 64]) == pytest.approx((2, 2, 2, 2))
    assert local_exponents([10, 100, 1000], [1, 1, 100]) == pytest.approx((0, 1, 2))
    assert local_exponents([10], [1.0]) == (None,)


def test_the_measured_exponent_is_the_excess_over_a_constant() -> None:
    sizes = SIZES.tolist()
    series = Series(sizes=tuple(sizes), costs=tuple((n**1.5,) for n in sizes))
    case = gather(Promise(log_growth=BUDGETS["n"]), {}, [series], lambda: None, CLOCK_NOISE)
    assert case is not None
    found = measured_exponent(case, 0.95)
    assert found.estimate == pytest.approx(1.5, abs=0.02)
