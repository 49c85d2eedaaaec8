"""The estimate of the excess: a mixture of Student-t distributions.

The model is cost = c + a · g(n) · n^δ with c ≥ 0, read in logs. For a fixed offset c,

    log((cost − c) / g(n)) = α + δ · log n + error,

where the error of log cost is white noise plus a random walk along log n: the walk stands for what drifts from
size to size (caches, allocators, resizes). Neither c nor the share of the walk is known, so the fit is repeated
over a grid of both and averaged by marginal likelihood. Each node of the grid is a generalised least squares line
(Aitken 1935); with a flat prior on α, δ and log σ its posterior of δ is a Student-t (Zellner 1971, "An
Introduction to Bayesian Inference in Econometrics", section 3.1) [from memory]. The averaged posterior is a
mixture of them. White noise plus a random walk is the local-level model of Harvey (1989, "Forecasting, Structural
Time Series Models and the Kalman Filter") [from memory].

A residual sum of squares is never taken to be below `noise` squared. That is a scaled inverse chi-square prior on
the variance with one degree of freedom, hence m − 1 degrees of freedom from m sizes and two coefficients.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtr, stdtrit

from pytest_growthbudget.fitting.judgement import Interval

Array = NDArray[np.float64]

CLOCK_NOISE: Final = 0.01
COUNTER_NOISE: Final = 3e-4
FEWEST_SIZES: Final = 5

WALK_SHARES: Final = np.array((0.0, 0.1, 0.3, 1.0, 3.0, 10.0, 100.0))
_OFFSETS: Final = 1 - np.geomspace(0.95, 0.004, 23)
_PRIOR_OF_NO_OFFSET: Final = 0.5
_NEGLIGIBLE: Final = 1e-4
_SMALL_STEP: Final = 1e-8
_MOST_STEPS: Final = 200
_GAMMA_STEP: Final = 1.05


@dataclass(frozen=True, slots=True, eq=False)
class Observations:
    """Costs by size, beside the growth that the budget allows. All arrays have shape (m,).

    `regressor` is log n (log g where the budget is exponential: δ is then a power of the growth itself).
    `gammas`: the local exponent of the growth at each size, against the same regressor.
    """

    sizes: Array
    costs: Array
    log_growth: Array
    regressor: Array
    gammas: Array

    def __len__(self) -> int:
        return len(self.sizes)

    @property
    def gamma(self) -> float:
        """The local exponent of the growth at the largest size."""
        return float(self.gammas[-1])

    @property
    def ahead(self) -> Array:
        """Log cost over the growth: a budget that is kept leaves it level."""
        return np.log(self.costs) - self.log_growth

    def window(self, first: int, last: int) -> Observations:
        """The same between two indices, `first` ≤ i < `last`."""
        cut = slice(first, last)
        return Observations(
            self.sizes[cut], self.costs[cut], self.log_growth[cut], self.regressor[cut], self.gammas[cut]
        )

    def divided_by(self, log_factor: Array) -> Observations:
        """The same with every cost divided by exp(log_factor), relative to the first size."""
        return replace(self, costs=self.costs / np.exp(log_factor - log_factor[0]))


def observe(
    sizes: Sequence[int] | Array,
    costs: Sequence[float] | Array,
    log_growth: Callable[[float], float],
    *,
    exponential: bool = False,
) -> Observations:
    """Puts costs beside the growth allowed. `sizes` ascending and distinct, `costs` positive, both shape (m,)."""
    n = np.asarray(sizes, dtype=float)
    allowed = np.array([log_growth(size) for size in n.tolist()], dtype=float)
    if exponential:
        gammas = np.ones(len(n))
    else:
        gammas = np.array([local_exponent(log_growth, size) for size in n.tolist()], dtype=float)
    return Observations(
        sizes=n,
        costs=np.asarray(costs, dtype=float),
        log_growth=allowed,
        regressor=allowed if exponential else np.log(n),
        gammas=gammas,
    )


def local_exponent(log_growth: Callable[[float], float], size: float) -> float:
    """d log g / d log n at one size, by a forward difference of five per cent."""
    return (log_growth(size * _GAMMA_STEP) - log_growth(size)) / float(np.log(_GAMMA_STEP))


@dataclass(frozen=True, slots=True, eq=False)
class Mixture:
    """A weighted mixture of Student-t distributions; arrays of shape (k,), weights summing to one."""

    centres: Array
    scales: Array
    weights: Array
    freedom: int

    def cdf(self, value: float) -> float:
        """The probability of at most `value`."""
        return float(self.weights @ stdtr(self.freedom, (value - self.centres) / self.scales))

    def quantiles(self, levels: Sequence[float]) -> tuple[float, ...]:
        """The values below which the given shares of the probability lie, by Newton's method between bounds."""
        wanted = np.asarray(levels, dtype=float)
        # A quantile of a mixture lies between the least and the greatest quantile of its parts.
        parts = self.centres + self.scales * stdtrit(self.freedom, wanted[:, None])
        low, high = parts.min(axis=1), parts.max(axis=1)
        at = (low + high) / 2
        for _ in range(_MOST_STEPS):
            away = (at[:, None] - self.centres) / self.scales
            surplus = stdtr(self.freedom, away) @ self.weights - wanted
            low, high = np.where(surplus < 0, at, low), np.where(surplus < 0, high, at)
            step = surplus / np.maximum(self._density(away), 1e-300)
            following = at - step
            outside = (following <= low) | (following >= high)
            following = np.where(outside, (low + high) / 2, following)
            moved, at = np.abs(following - at).max(), following
            if moved < _SMALL_STEP:
                break
        return tuple(at.tolist())

    def _density(self, away: Array) -> Array:
        half = (self.freedom + 1) / 2
        log_peak = math.lgamma(half) - math.lgamma(self.freedom / 2) - 0.5 * math.log(self.freedom * math.pi)
        each = math.exp(log_peak) * (1 + away * away / self.freedom) ** -half
        density: Array = each @ (self.weights / self.scales)
        return density

    def interval(self, confidence: float = 0.95) -> Interval:
        """The median with the central interval that holds `confidence` of the probability."""
        tail = (1 - confidence) / 2
        low, middle, high = self.quantiles((tail, 0.5, 1 - tail))
        return Interval(estimate=middle, low=low, high=high)


@dataclass(frozen=True, slots=True, eq=False)
class Excess:
    """What the readings say of the excess.

    `delta`: δ, with a constant offset averaged out. `at_top`: the excess of the whole cost's local exponent at the
    largest size, offset included. `hidden`: the excess at the largest size where, besides a constant, some
    multiple of the growth itself may be subtracted: what runs ahead of the budget behind work that keeps it.
    """

    delta: Mixture
    at_top: Mixture
    hidden: Mixture
    count: int


def fit_excess(seen: Observations, *, noise: float = CLOCK_NOISE) -> Excess:
    """The posterior of the excess. Needs at least `FEWEST_SIZES` sizes; about a millisecond.

    `noise`: the standard deviation of log cost below which residuals are not believed.
    """
    lines = fit_lines(seen, noise)
    gamma = seen.gamma
    weights, hidden_weights = lines.weights(), lines.weights(with_growth=True)
    share = lines.left[:, -1:] / seen.costs[-1]
    hidden_share = np.where(lines.kind == 2, share[:, 0], 1.0)[:, None]
    return Excess(
        delta=pruned(lines.slope, lines.error, weights, lines.freedom),
        at_top=pruned(share * (gamma + lines.slope) - gamma, share * lines.error, weights, lines.freedom),
        hidden=pruned(hidden_share * lines.slope, hidden_share * lines.error, hidden_weights, lines.freedom),
        count=len(seen),
    )


@dataclass(frozen=True, slots=True, eq=False)
class Lines:
    """One line fit for each subtraction (r rows) and each share of the walk (k columns).

    `level` is the line's height at the largest size. `left`, shape (r, m): the costs after the subtraction.
    `kind`, (r,): 0 where nothing is subtracted, 1 a constant, 2 a multiple of the growth. `one`, `tilt`, `target`,
    (r, k, m): whitened columns. `rss` includes the noise floor; `det` is that of the normal equations.
    """

    level: Array
    slope: Array
    rss: Array
    det: Array
    log_likelihood: Array
    left: Array
    kind: NDArray[np.intp]
    one: Array
    tilt: Array
    target: Array
    freedom: int

    @property
    def error(self) -> Array:
        """The scale of the slope's Student-t."""
        scale: Array = np.sqrt(self.rss / self.freedom * (self.one * self.one).sum(-1) / self.det)
        return scale

    def weights(self, *, with_growth: bool = False) -> Array:
        """Posterior weights, (r, k), with or without the rows that subtract a multiple of the growth."""
        return _normalised(self.log_likelihood + _log_priors(self.kind, with_growth=with_growth)[:, None])


def fit_lines(seen: Observations, noise: float = CLOCK_NOISE) -> Lines:
    """The generalised least squares line of each node of the grid."""
    whiten, log_det = _whitening(tuple(seen.regressor.tolist()))
    costs, log_growth = seen.costs, seen.log_growth
    # Only ratios of the growth matter; in logs, exponential budgets neither overflow nor vanish.
    multiple = np.exp(log_growth + seen.ahead.min())
    offsets = _OFFSETS[:, None]
    left = np.concatenate((costs[None], costs - offsets * costs.min(), costs - offsets * multiple))
    weight = left / costs
    line = seen.regressor - seen.regressor[-1]
    rows = np.stack((weight, weight * line, weight * (np.log(left) - log_growth)), axis=-1)
    one, tilt, y = np.moveaxis(np.matmul(whiten[None], rows[:, None]), -1, 0)
    s11, s12, s22 = (one * one).sum(-1), (one * tilt).sum(-1), (tilt * tilt).sum(-1)
    s1y, s2y, syy = (one * y).sum(-1), (tilt * y).sum(-1), (y * y).sum(-1)
    det = np.maximum(s11 * s22 - s12 * s12, 1e-300)
    slope = (s11 * s2y - s12 * s1y) / det
    level = (s22 * s1y - s12 * s2y) / det
    rss = np.maximum(syy - level * s1y - slope * s2y, 0) + noise * noise
    freedom = len(seen) - 1
    return Lines(
        level=level,
        slope=slope,
        rss=rss,
        det=det,
        log_likelihood=-0.5 * (log_det[None] + np.log(det) + freedom * np.log(rss)),
        left=left,
        kind=np.repeat(np.arange(3), (1, len(_OFFSETS), len(_OFFSETS))),
        one=one,
        tilt=tilt,
        target=y,
        freedom=freedom,
    )


def _log_priors(kind: NDArray[np.intp], *, with_growth: bool) -> Array:
    subtracted = len(_OFFSETS) * (2 if with_growth else 1)
    each = math.log((1 - _PRIOR_OF_NO_OFFSET) / subtracted)
    return np.choose(kind, (math.log(_PRIOR_OF_NO_OFFSET), each, each if with_growth else -math.inf))


@lru_cache(maxsize=32)
def _whitening(regressor: tuple[float, ...]) -> tuple[Array, Array]:
    """Inverse Cholesky factors, shape (k, m, m), and log determinants, (k,), of I + share · walk."""
    x = np.array(regressor)
    factors = np.linalg.cholesky(np.eye(len(x)) + WALK_SHARES[:, None, None] * walk(x, x, x))
    diagonals: Array = np.diagonal(factors, axis1=1, axis2=2)
    return np.linalg.inv(factors), 2 * np.log(diagonals).sum(axis=1)


def whitened(regressor: Array, columns: Array) -> Array:
    """Columns of shape (k, m), one for each share of the walk, whitened."""
    whiten, _ = _whitening(tuple(regressor.tolist()))
    whitened_columns: Array = np.matmul(whiten, columns[..., None])[..., 0]
    return whitened_columns


def walk(one: Array, other: Array, regressor: Array) -> Array:
    """The covariance of the random walk, in units of its variance over one median step of the sizes."""
    steps = np.diff(regressor)
    covariance: Array = np.minimum.outer(one - regressor[0], other - regressor[0]) / np.median(steps)
    return covariance


def _normalised(log_weights: Array) -> Array:
    weights: Array = np.exp(log_weights - log_weights.max())
    weights /= weights.sum()
    return weights


def pruned(centres: Array, scales: Array, weights: Array, freedom: int) -> Mixture:
    """The mixture without its negligible parts; weights of any shape, summing to one."""
    keep: Any = weights > _NEGLIGIBLE
    kept = weights[keep]
    return Mixture(centres[keep], scales[keep], kept / kept.sum(), freedom)
