"""What the fit says beyond the verdict: cost at other sizes, the nearest simple growth, where the cost bends away."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from functools import partial
from typing import Final

import numpy as np

from pytest_growthbudget.fitting.excess import (
    WALK_SHARES,
    Array,
    Lines,
    Mixture,
    Observations,
    fit_lines,
    observe,
    pruned,
    walk,
    whitened,
)
from pytest_growthbudget.fitting.judgement import ForecastRow, Interval

LogGrowth = Callable[[float], float]

#: Simple growths by name, as natural logs.
SIMPLE_GROWTHS: Final[tuple[tuple[str, LogGrowth], ...]] = (
    ("1", lambda n: 0.0),
    ("log n", lambda n: math.log(math.log(n))),
    ("sqrt n", lambda n: 0.5 * math.log(n)),
    ("n", lambda n: math.log(n)),
    ("n log n", lambda n: math.log(n) + math.log(math.log(n))),
    ("n^1.5", lambda n: 1.5 * math.log(n)),
    ("n^2", lambda n: 2 * math.log(n)),
    ("n^2 log n", lambda n: 2 * math.log(n) + math.log(math.log(n))),
    ("n^3", lambda n: 3 * math.log(n)),
    ("n^4", lambda n: 4 * math.log(n)),
)
MULTIPLES: Final = (2, 10, 100)
AHEAD: Final = math.log(1.25)
_STEEP: Final = 3.5
_GREATEST_LOG_COST: Final = math.log(1e21)
_WIDEST: Final = 1.0


def forecast(
    seen: Observations,
    log_growth: LogGrowth,
    *,
    exponential: bool,
    confidence: float,
    noise: float,
    at: Sequence[int] = (),
) -> tuple[ForecastRow, ...]:
    """Forecasts at the sizes `at`, or at a few beyond the largest.

    A size whose cost would be more than thirty thousand years in nanoseconds is left out.
    """
    levels = ((1 - confidence) / 2, 0.5, (1 + confidence) / 2)
    fitted, growth = seen, log_growth
    base = None if exponential else steep_base(seen)
    if base is not None:
        growth = partial(_steps, math.log(base))
        fitted, exponential = observe(seen.sizes, seen.costs, growth, exponential=True), True
    lines = fit_lines(fitted, noise)
    rows = []
    for size in at or forecast_sizes(int(seen.sizes[-1]), exponential=exponential):
        mixture = log_cost_at(fitted, lines, growth(size), growth(size) if exponential else math.log(size))
        low, middle, high = mixture.quantiles(levels)
        if middle > _GREATEST_LOG_COST:
            continue
        cost = Interval(estimate=_exp(middle), low=_exp(low), high=_exp(high))
        rows.append(ForecastRow(size=size, cost=cost, allowed=allowed_cost(seen, log_growth, size)))
    return tuple(rows)


def _steps(log_factor: float, size: float) -> float:
    return log_factor * size


def log_cost_at(seen: Observations, lines: Lines, allowed: float, regressor: float) -> Mixture:
    """The log of the cost expected at a size, given by its log growth and its regressor.

    The prediction of each line is that of universal kriging (Cressie 1993, "Statistics for Spatial Data", section
    3.4 [from memory]): the walk goes on from where the largest size left it, so the interval widens with the
    distance. The lines are averaged as for the excess. The white noise of a single reading is left out.
    """
    ahead = float(regressor - seen.regressor[-1])
    at = np.array([max(regressor, seen.regressor[0])])  # the walk starts at the smallest size
    one, tilt = lines.one, lines.tilt

    leading = lines.level + lines.slope * ahead + allowed
    offset = (seen.costs - lines.left)[:, :1]
    log_cost = np.logaddexp(leading, np.log(np.maximum(offset, 1e-300)))
    share = np.exp(leading - log_cost)

    covariance = WALK_SHARES[:, None] * walk(seen.regressor, at, seen.regressor)[:, 0]
    carried = whitened(seen.regressor, covariance)
    residual = lines.target - lines.level[..., None] * one - lines.slope[..., None] * tilt
    centre = log_cost + (residual * carried).sum(-1)

    unexplained = WALK_SHARES * walk(at, at, seen.regressor)[0, 0] - (carried * carried).sum(-1)
    a1 = share - (one * carried).sum(-1)
    a2 = share * ahead - (tilt * carried).sum(-1)
    s11, s12, s22 = (one * one).sum(-1), (one * tilt).sum(-1), (tilt * tilt).sum(-1)
    spread = (a1 * a1 * s22 - 2 * a1 * a2 * s12 + a2 * a2 * s11) / lines.det
    scale = np.sqrt(lines.rss / lines.freedom * np.maximum(unexplained + spread, 1e-12))
    return pruned(centre, scale, lines.weights(), lines.freedom)


def allowed_cost(seen: Observations, log_growth: LogGrowth, size: float) -> float:
    """The cost that the budget allows at a size, scaled to where the cost was lowest against it."""
    return _exp(_scale(seen) + log_growth(size))


def _scale(seen: Observations) -> float:
    return float(_smooth(seen.ahead).min())


def forecast_sizes(largest: int, *, exponential: bool) -> tuple[int, ...]:
    """Sizes beyond the largest, to two significant digits; a few steps further where each step multiplies the cost."""
    if exponential:
        return (largest + 5, largest + 10, largest + 20)
    return tuple(_two_digits(largest * multiple) for multiple in MULTIPLES)


def _two_digits(size: int) -> int:
    unit: int = 10 ** max(len(str(size)) - 2, 0)
    return round(size / unit) * unit


def local_exponents(sizes: Sequence[int], costs: Sequence[float]) -> tuple[float | None, ...]:
    """The exponent of the cost about each size: the slope between its neighbours, one-sided at the ends."""
    x, y = np.log(np.asarray(sizes, dtype=float)), np.log(np.asarray(costs, dtype=float))
    if len(x) < 2:
        return (None,) * len(x)
    before = np.maximum(np.arange(len(x)) - 1, 0)
    after = np.minimum(np.arange(len(x)) + 1, len(x) - 1)
    return tuple(((y[after] - y[before]) / (x[after] - x[before])).tolist())


def bends_at(seen: Observations) -> int | None:
    """The first size from which on the cost is more than a quarter above the lowest that it ever was, against growth.

    None where it never is, or not to the end.
    """
    ahead = _smooth(seen.ahead)
    above = ahead - ahead.min() > AHEAD
    above[: int(ahead.argmin()) + 1] = False
    if not above[-1]:
        return None
    first = len(above) - int(np.argmin(above[::-1]))
    return int(seen.sizes[first])


def _smooth(values: Array) -> Array:
    """The running median of three."""
    if len(values) < 3:
        return values
    inner = np.median(np.stack((values[:-2], values[1:-1], values[2:])), axis=0)
    return np.concatenate((values[:1], inner, values[-1:]))


def nearest_growth(seen: Observations, exponent: Interval) -> str | None:
    """The simple growth whose exponent over these sizes is nearest to the one measured; None where that is vague.

    Where the cost is so steep that a constant factor a step of n fits better than a power, it is named as that.
    """
    base = steep_base(seen)
    if base is not None:
        return f"{base:.2g}^n"
    if exponent.high - exponent.low > _WIDEST:
        return None
    if exponent.estimate > 4.25:
        return growth_text(exponent.estimate)
    known = [(name, growth) for name, growth in SIMPLE_GROWTHS if "log" not in name or seen.sizes[0] > math.e]

    def distance(growth: LogGrowth) -> float:
        values = np.array([growth(size) for size in seen.sizes.tolist()])
        return abs(_slope(np.log(seen.sizes), values) - exponent.estimate)

    return min(known, key=lambda each: distance(each[1]))[0]


def steep_base(seen: Observations) -> float | None:
    """The factor by which the cost grows with each step of n, where that fits better than a power of n.

    Only steep costs are looked at: a power below 3.5 over the sizes is never called exponential.
    """
    x, y = np.log(seen.sizes), np.log(seen.costs)
    if _slope(x, y) <= _STEEP or _misfit(seen.sizes, y) >= _misfit(x, y):
        return None
    return math.exp(min(_slope(seen.sizes, y), 50.0))


def _slope(regressor: Array, y: Array) -> float:
    return float(np.polyfit(regressor, y, 1)[0])


def _misfit(regressor: Array, y: Array) -> float:
    line = np.polyfit(regressor, y, 1)
    return float(((y - np.polyval(line, regressor)) ** 2).sum())


def growth_text(exponent: float) -> str:
    """An exponent as text: `n^1.97`; `n` or a constant only where it is that to two decimals."""
    rounded = round(exponent, 2)
    if rounded == 0:
        return "1"
    return "n" if rounded == 1 else f"n^{rounded:.2f}"


def _exp(value: float) -> float:
    return math.exp(min(max(value, -700.0), 700.0))
