"""What a finding says beside its verdict: the resolution, and the cost's own exponent."""

from __future__ import annotations

import math

import pytest

from pytest_growthbudget.fitting.evidence import Evidence, assemble
from pytest_growthbudget.fitting.excess import CLOCK_NOISE, COUNTER_NOISE
from pytest_growthbudget.fitting.finding import measured_exponent, resolution, shown_excess
from pytest_growthbudget.fitting.verdict import clock_limits
from pytest_growthbudget.measuring.readings import Promise
from tests.fitting.campaigns import BUDGETS, STEEP_CURVE, Formula

SIZES = [int(1000 * 2 ** (step / 2)) for step in range(14)]


def evidence(costs: list[float], noise: float = CLOCK_NOISE) -> Evidence:
    footprints = [200.0 * n for n in SIZES]
    promise = Promise(log_growth=math.log)
    return assemble(promise, SIZES, costs, footprints, [3] * len(SIZES), lambda: STEEP_CURVE, noise)


def test_the_resolution_is_slack_and_half_the_interval_and_the_slope_of_the_allowance() -> None:
    case, limits = evidence([100.0 * n for n in SIZES]), clock_limits()
    excess = shown_excess(case.plain, 1.0, 0.95)
    told = limits.exceeded + excess.estimate - excess.low
    assert resolution(case, excess, limits, memory=False) == pytest.approx(told)
    assert case.allowed is not None
    steepness = (case.allowed[-1] - case.allowed[0]) / math.log(SIZES[-1] / SIZES[0])
    assert 0 < case.allowed[0] < case.allowed[1]
    assert case.allowed[-2] < case.allowed[-1]
    assert resolution(case, excess, limits, memory=True) == pytest.approx(told + steepness)


def test_the_exponent_is_that_of_what_grows_beside_a_constant() -> None:
    found = Formula(lambda n: 3e6 + 20.0 * n * n).decide(BUDGETS["n"])
    assert found.exponent is not None
    assert found.exponent.estimate == pytest.approx(2, abs=0.1)


def test_the_exponent_of_exact_counts_is_the_surer() -> None:
    squares = [float(n) ** 2 for n in SIZES]
    exact, read = (measured_exponent(evidence(squares, noise), 0.95) for noise in (COUNTER_NOISE, CLOCK_NOISE))
    assert exact.high - exact.low < 0.5 * (read.high - read.low)
