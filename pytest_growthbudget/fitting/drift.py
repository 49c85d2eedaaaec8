"""What two runs say of one body, made comparable: exponents over the sizes they share, costs at one size."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Final

import numpy as np
from scipy.special import stdtrit

from pytest_growthbudget.fitting.excess import CLOCK_NOISE, COUNTER_NOISE, FEWEST_SIZES, fit_excess, observe
from pytest_growthbudget.fitting.judgement import Interval

#: Sizes within this factor of the one asked for tell its cost.
_NEAR: Final = 3.0
#: A cost read by a clock differs this much, as a standard deviation of its log, from run to run on one quiet
#: machine (`tests/studies/drift_rates.py`), whatever the readings of one run say.
_RUN_TO_RUN: Final = 0.05


def exponent_over(
    sizes: Sequence[float], costs: Sequence[float], *, confidence: float, counted: bool, flat: bool
) -> Interval | None:
    """The exponent of the cost; None from fewer than `FEWEST_SIZES` sizes with a positive cost.

    `sizes` ascending, with `costs` of the same shape (m,). `counted`: the meter has no noise. `flat`: the cost
    hardly grows, so that the exponent of the whole cost at the largest size is meant, not that of its growing part.
    """
    pairs = [(size, cost) for size, cost in zip(sizes, costs, strict=True) if size > 0 and cost > 0]
    if len(pairs) < FEWEST_SIZES:
        return None
    read = np.array(pairs, dtype=float)
    seen = observe(read[:, 0], read[:, 1], lambda n: 0.0)
    fit = fit_excess(seen, noise=COUNTER_NOISE if counted else CLOCK_NOISE)
    return (fit.at_top if flat else fit.delta).interval(confidence)


def cost_at(
    sizes: Sequence[float], costs: Sequence[float], size: float, *, confidence: float, counted: bool
) -> Interval | None:
    """The cost at one size among those read, by a least squares line in logs through the sizes near it.

    The interval is that of the line's mean response (a Student-t), widened for clocks by what one run differs from
    the next. None where fewer than three sizes are near.
    """
    near = [(n, cost) for n, cost in zip(sizes, costs, strict=True) if cost > 0 and size / _NEAR <= n <= size * _NEAR]
    if len(near) < 3:
        return None
    x = np.log([n / size for n, _ in near])
    y = np.log([cost for _, cost in near])
    centre, spread = x.mean(), ((x - x.mean()) ** 2).sum()
    if spread == 0:
        return None
    slope = ((x - centre) * y).sum() / spread
    level = y.mean() - slope * centre
    floor = COUNTER_NOISE if counted else CLOCK_NOISE
    freedom = len(near) - 2
    variance = max(((y - level - slope * x) ** 2).sum() / freedom, floor * floor)
    error = variance * (1 / len(near) + centre * centre / spread)
    if not counted:
        error += _RUN_TO_RUN**2
    half = float(stdtrit(freedom, (1 + confidence) / 2)) * math.sqrt(error)
    return Interval(estimate=_exp(level), low=_exp(level - half), high=_exp(level + half))


def _exp(value: float) -> float:
    return math.exp(min(max(float(value), -700.0), 700.0))
