"""The estimator against other people's numerics: scipy.stats, statsmodels, a certified data set."""

from __future__ import annotations

import math

import numpy as np
import pytest
import scipy.optimize
import scipy.stats
import statsmodels.api as sm

from pytest_growthbudget.fitting.excess import (
    WALK_SHARES,
    Mixture,
    fit_excess,
    fit_lines,
    observe,
    walk,
)
from pytest_growthbudget.fitting.forecast import log_cost_at

SIZES = np.unique((15 * 2 ** (np.arange(14) / 2)).astype(int))
NOISE = 1e-9


def costs(seed: int) -> np.ndarray:  # type: ignore[type-arg]
    draw = np.random.default_rng(seed)
    error = draw.normal(0, 0.03, len(SIZES)) + np.cumsum(draw.normal(0, 0.02, len(SIZES)))
    return np.asarray(40.0 * SIZES**1.2 * np.exp(error) + 200.0)


@pytest.mark.parametrize("freedom", [4, 11, 24])
def test_quantiles_of_a_mixture_against_scipy_stats(freedom: int) -> None:
    """scipy.stats.t for the parts, scipy.optimize.brentq for the root."""
    draw = np.random.default_rng(freedom)
    centres, scales = draw.normal(0, 1, 30), draw.lognormal(-2, 1.5, 30)
    weights = draw.dirichlet(np.ones(30))
    mixture = Mixture(centres, scales, weights, freedom)
    levels = (0.005, 0.025, 0.5, 0.975, 0.995)
    for level, found in zip(levels, mixture.quantiles(levels), strict=True):

        def surplus(value: float, level: float = level) -> float:
            return float(weights @ scipy.stats.t.cdf((value - centres) / scales, freedom)) - level

        assert found == pytest.approx(scipy.optimize.brentq(surplus, -200, 200, xtol=1e-12), abs=1e-6)


@pytest.mark.parametrize("row", [0, 5, 23, 30])
@pytest.mark.parametrize("column", range(len(WALK_SHARES)))
def test_each_line_against_statsmodels_gls(row: int, column: int) -> None:
    """Slope, its standard error and the log determinant of each node; the covariance is written out here."""
    seen = observe(SIZES, costs(1), math.log)
    lines = fit_lines(seen, NOISE)
    x = np.log(SIZES)
    step = np.median(np.diff(x))
    covariance = np.array(
        [[(i == j) + WALK_SHARES[column] * (min(a, b) - x[0]) / step for j, b in enumerate(x)] for i, a in enumerate(x)]
    )
    left = lines.left[row]
    weight = left / seen.costs
    design = weight[:, None] * np.column_stack((np.ones_like(x), x - x[-1]))
    reference = sm.GLS(weight * (np.log(left) - x), design, sigma=covariance).fit()
    assert lines.slope[row, column] == pytest.approx(reference.params[1], rel=1e-7, abs=1e-9)
    assert lines.level[row, column] == pytest.approx(reference.params[0], rel=1e-7)
    # One degree of freedom more here: the prior on the variance counts as one reading.
    count = len(SIZES)
    assert lines.error[row, column] == pytest.approx(reference.bse[1] * math.sqrt((count - 2) / (count - 1)), rel=1e-6)
    _, log_det = np.linalg.slogdet(covariance)
    rss = lines.rss[row, column]
    expected = -0.5 * (log_det + math.log(lines.det[row, column]) + (count - 1) * math.log(rss))
    assert lines.log_likelihood[row, column] == pytest.approx(expected, rel=1e-9)


def test_a_straight_line_is_ordinary_least_squares_of_scipy() -> None:
    """Without offset and walk the node is scipy.stats.linregress of log cost on log n."""
    seen = observe(SIZES, costs(3), lambda n: 0.0)
    lines = fit_lines(seen, NOISE)
    reference = scipy.stats.linregress(np.log(SIZES), np.log(seen.costs))
    assert lines.slope[0, 0] == pytest.approx(reference.slope, rel=1e-9)
    count = len(SIZES)
    assert lines.error[0, 0] == pytest.approx(reference.stderr * math.sqrt((count - 2) / (count - 1)), rel=1e-6)


#: NIST StRD, linear regression, data set "Norris" [from memory; the certified values agree to nine digits below].
NORRIS_Y = (
    0.1, 338.8, 118.1, 888.0, 9.2, 228.1, 668.5, 998.5, 449.1, 778.9, 559.2, 0.3, 0.1, 778.1, 668.8, 339.3,
    448.9, 10.8, 557.7, 228.3, 998.0, 888.8, 119.6, 0.3, 0.6, 557.6, 339.3, 888.0, 998.5, 778.9, 10.2, 117.6,
    228.9, 668.4, 449.2, 0.2,
)  # fmt: skip
NORRIS_X = (
    0.2, 337.4, 118.2, 884.6, 10.1, 226.5, 666.3, 996.3, 448.6, 777.0, 558.2, 0.4, 0.6, 775.5, 666.9, 338.0,
    447.5, 11.6, 556.0, 228.1, 995.8, 887.6, 120.2, 0.3, 0.3, 556.8, 339.1, 887.2, 999.0, 779.0, 11.1, 118.3,
    229.2, 669.1, 448.9, 0.5,
)  # fmt: skip
NORRIS_SLOPE, NORRIS_SLOPE_ERROR = 1.00211681802045, 0.429796848199937e-03


def test_norris() -> None:
    """The line through Norris's data, as logs: sizes e^x, costs e^y, so that the slope is the exponent."""
    order = np.argsort(NORRIS_X, kind="stable")
    x, y = np.array(NORRIS_X)[order], np.array(NORRIS_Y)[order]
    scale = 100.0  # keeps the exponentials inside a float; slopes do not change
    seen = observe(np.exp(x / scale), np.exp(y / scale), lambda n: 0.0)
    lines = fit_lines(seen, NOISE)
    assert lines.slope[0, 0] == pytest.approx(NORRIS_SLOPE, rel=1e-9)
    assert lines.error[0, 0] * math.sqrt(35 / 34) == pytest.approx(NORRIS_SLOPE_ERROR, rel=1e-6)


def test_a_forecast_against_the_joint_normal_distribution() -> None:
    """The prediction of one line equals conditioning the joint distribution, written out, on the costs read."""
    seen = observe(SIZES, costs(5), math.log)
    lines = fit_lines(seen, NOISE)
    size = 10.0 * SIZES[-1]
    column = 3
    x = np.append(np.log(SIZES), math.log(size))
    covariance = walk(x, x, seen.regressor) * WALK_SHARES[column]
    known = covariance[:-1, :-1] + np.eye(len(SIZES))
    design = np.column_stack((np.ones_like(x), x - x[-2]))
    y = np.log(seen.costs)
    solve = np.linalg.inv(known)
    beta = np.linalg.solve(design[:-1].T @ solve @ design[:-1], design[:-1].T @ solve @ y)
    mean = design[-1] @ beta + covariance[-1, :-1] @ solve @ (y - design[:-1] @ beta)
    chosen = np.zeros_like(lines.log_likelihood) - 1e6
    chosen[0, column] = 0.0
    from dataclasses import replace

    mixture = log_cost_at(seen, replace(lines, log_likelihood=chosen), math.log(size), math.log(size))
    assert mixture.quantiles((0.5,))[0] == pytest.approx(mean, rel=1e-9)
    reduced = design[-1] - covariance[-1, :-1] @ solve @ design[:-1]
    spread = np.linalg.inv(design[:-1].T @ solve @ design[:-1])
    variance = covariance[-1, -1] - covariance[-1, :-1] @ solve @ covariance[:-1, -1] + reduced @ spread @ reduced
    rss = lines.rss[0, column] / lines.freedom
    assert mixture.scales[0] == pytest.approx(math.sqrt(rss * variance), rel=1e-6)


def test_the_whole_posterior_against_brute_force() -> None:
    """δ's median and bounds from a plain grid over δ, level by closed form, σ² by closed form, c and walk summed."""
    seen = observe(SIZES, costs(7), math.log)
    found = fit_excess(seen, noise=0.01).delta
    x = np.log(SIZES)
    step = np.median(np.diff(x))
    offsets = np.concatenate(([0.0], 1 - np.geomspace(0.95, 0.004, 23)))
    priors = np.concatenate(([0.5], np.full(23, 0.5 / 23)))
    grid = np.linspace(-1.5, 3.0, 9001)
    density = np.zeros_like(grid)
    for offset, prior in zip(offsets, priors, strict=True):
        left = seen.costs - offset * seen.costs.min()
        weight = left / seen.costs
        target = weight * (np.log(left) - x)
        for share in WALK_SHARES:
            covariance = np.eye(len(x)) + share * np.minimum.outer(x - x[0], x - x[0]) / step
            inverse = np.linalg.inv(covariance)
            _, log_det = np.linalg.slogdet(covariance)
            level_weight = weight @ inverse @ weight
            residual = target[:, None] - np.outer(weight * (x - x[-1]), grid)
            level = weight @ inverse @ residual / level_weight
            residual = residual - np.outer(weight, level)
            rss = np.einsum("ij,ij->j", residual, inverse @ residual) + 0.01**2
            # Integrating σ leaves rss^(-m/2): m readings, less one for the level, plus one for the prior.
            density += prior * np.exp(-0.5 * log_det - 0.5 * math.log(level_weight)) * rss ** (-0.5 * len(x))
    cumulated = np.cumsum(density) / density.sum()
    for level, value in zip((0.025, 0.5, 0.975), found.quantiles((0.025, 0.5, 0.975)), strict=True):
        assert value == pytest.approx(float(np.interp(level, cumulated, grid)), abs=2e-3)
