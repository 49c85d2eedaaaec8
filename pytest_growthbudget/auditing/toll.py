"""The toll: how the own work of a call grows with its size.

Own work is averaged by size and fitted like the costs of a budget (`fitting.excess`): a power of n behind a constant,
with an interval that allows for what drifts from size to size. Against a declared toll the excess is fitted.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from pytest_growthbudget.auditing.calls import Calls, Floats
from pytest_growthbudget.auditing.pattern import octaves, roles
from pytest_growthbudget.fitting.excess import CLOCK_NOISE, COUNTER_NOISE, FEWEST_SIZES, fit_excess, observe
from pytest_growthbudget.fitting.forecast import SIMPLE_GROWTHS
from pytest_growthbudget.fitting.judgement import Interval

LogGrowth = Callable[[float], float]

_MATERIAL: Final = 2.0
_COLD_NS: Final = 10_000.0
_WIDE: Final = 8.0
_HIDDEN: Final = 0.2
_TOP_SIZES: Final = 6
_FLAT: Final = 0.03
_STEEP: Final = 4.5
_NEAR: Final = 0.6
_WHOLE_POWERS: Final = {"1": 0, "n": 1, "n^2": 2, "n^3": 3, "n^4": 4}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Work:
    """Own work by size; arrays of shape (k,), ascending. `unit` is "steps" or "ns"; `noise` that of its logarithm."""

    sizes: Floats
    work: Floats
    counts: Floats
    unit: str
    noise: float

    def __len__(self) -> int:
        return len(self.sizes)


@dataclass(frozen=True, slots=True, kw_only=True)
class Toll:
    """How own work grows: the exponent of n with its interval, and the nearest simple growth as text.

    `hidden`: whether this is the growth of time where steps show less. `from_size`: the least size fitted.
    """

    exponent: Interval
    nearest: str
    unit: str
    hidden: bool = False
    from_size: float = 0.0


def work_by_size(calls: Calls, unit: str) -> Work:
    """Own work of the dividing calls by size: the mean of steps, the lower quartile of nanoseconds.

    Where no call divides, that of all calls.
    """
    role = roles(calls)
    chosen = role.dividing if role.dividing.any() else calls.whole
    chosen = chosen & (calls.size > 0)
    size, own = calls.size[chosen], calls.own[chosen].astype(float)
    where = octaves(size)
    sizes, work, counts = [], [], []
    for one in np.unique(where):
        inside = where == one
        values = own[inside]
        sizes.append(float(size[inside].mean()))
        work.append(float(values.mean() if unit == "steps" else np.quantile(values, 0.25)))
        counts.append(float(inside.sum()))
    kept = np.array(work) > 0
    return Work(
        sizes=np.array(sizes)[kept],
        work=np.array(work)[kept],
        counts=np.array(counts)[kept],
        unit=unit,
        noise=COUNTER_NOISE if unit == "steps" else CLOCK_NOISE,
    )


def toll_of(work: Work, confidence: float = 0.95) -> Toll | None:
    """The growth of own work; None where there are too few sizes to tell."""
    excess = excess_over(work, lambda n: 0.0, confidence)
    if excess is None:
        return None
    return Toll(
        exponent=excess, nearest=_nearest(work, excess.estimate), unit=work.unit, from_size=float(work.sizes[0])
    )


def is_flat(time: Work) -> bool:
    """Whether time grows so little that it may be what single calls cost anyway, and no exponent can be told."""
    return bool(np.min(time.work[-2:]) < _MATERIAL * np.quantile(time.work, 0.25))


def hidden_toll(steps: Work, time: Work, confidence: float = 0.95) -> tuple[Toll, Work] | None:
    """The growth of time at the largest sizes, with these, where time a step clearly grows; None where it does not.

    Work inside C functions (slices, `in`, `pop(0)`, arrays) is part of a step, whatever it takes. Time a step also
    grows a little where calls are rare or leave the caches: so it must have doubled at the two largest sizes, by more
    than a cold call costs, and go on growing at the top.
    """
    growth = excess_over(steps, lambda n: 0.0)
    if growth is None or len(time) < FEWEST_SIZES or time.sizes[-1] < _WIDE * time.sizes[0]:
        return None
    known, told = np.log(steps.sizes), np.log(steps.work)
    exponent = growth.estimate

    def log_steps(n: float) -> float:
        beyond = max(math.log(n) - float(known[-1]), 0.0)
        return float(np.interp(math.log(n), known, told)) + exponent * beyond

    expected = np.exp([log_steps(n) for n in time.sizes])
    expected *= np.quantile(time.work / expected, 0.25)
    if np.any(time.work[-2:] < _MATERIAL * expected[-2:]) or time.work[-1] - expected[-1] < _COLD_NS:
        return None
    top = _top(time)
    excess = excess_over(top, log_steps, confidence)
    found = toll_of(top, confidence)
    if excess is None or found is None or excess.low < _HIDDEN:
        return None
    return replace(found, hidden=True), top


def _top(work: Work) -> Work:
    """The largest sizes: four octaves of them, but enough to fit."""
    count = max(int((work.sizes >= work.sizes[-1] / 16).sum()), _TOP_SIZES)
    return replace(work, sizes=work.sizes[-count:], work=work.work[-count:], counts=work.counts[-count:])


def excess_over(work: Work, log_growth: LogGrowth, confidence: float = 0.95) -> Interval | None:
    """The excess of own work over a declared toll; None where there are too few sizes to tell."""
    if len(work) < FEWEST_SIZES or work.sizes[-1] < 2 * work.sizes[0]:
        return None
    return fit_excess(observe(work.sizes, work.work, log_growth), noise=work.noise).delta.interval(confidence)


def _nearest(work: Work, exponent: float) -> str:
    """The simple growth nearest to own work: a whole power where one is consistent with it, else any."""
    base = _base(work) if exponent > _STEEP else 0.0
    if base:
        return f"{base:.2g}^n"
    if exponent <= _FLAT:
        return "1"
    fits: list[tuple[bool, float, str]] = []
    for name, log_growth in SIMPLE_GROWTHS:
        excess = excess_over(work, _from_two(log_growth))
        assert excess is not None
        # The offset of the model may make any power consistent with work that hardly grows: it must be near as well.
        near = abs(_WHOLE_POWERS.get(name, math.inf) - max(exponent, 0.0)) < _NEAR
        whole = near and excess.low <= 0 <= excess.high
        fits.append((not whole, abs(excess.estimate) + (0.05 if "log" in name else 0.0), name))
    return min(fits)[2]


def _base(work: Work) -> float:
    """The base c where c^n fits own work better than any power of n does; else 0."""
    half = len(work) // 2
    n, told = work.sizes[half:], np.log(work.work[half:])
    if len(n) < 3:
        return 0.0
    misfits = []
    for x in (n, np.log(n)):
        slope, level = np.polyfit(x, told, 1)
        misfits.append((float(np.abs(told - level - slope * x).max()), float(slope)))
    (straight, slope), (power, _) = misfits
    return math.exp(min(slope, 50.0)) if straight < power and slope > 0 else 0.0


def _from_two(log_growth: LogGrowth) -> LogGrowth:
    return lambda n: log_growth(max(n, 2.0))
