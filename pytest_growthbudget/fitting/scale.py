"""The scale on which a cost and its budget are put side by side: growth says nothing about constant factors.

The budget is scaled to the cost where the cost was lowest against it, so that what exceeds the budget shows as a
multiple of the best that the same code did, and fixed costs at small sizes do not make the budget look generous.
"""

from __future__ import annotations

import math
import statistics
from collections.abc import Callable
from dataclasses import replace

from pytest_growthbudget.fitting.judgement import Finding

LogGrowth = Callable[[float], float]


def allowed(finding: Finding, log_growth: LogGrowth) -> tuple[float, ...]:
    """What the budget allows at each size of `finding`; () where nothing was read."""
    scale = _scale(finding, log_growth)
    return () if scale is None else tuple(_at(row.size, scale, log_growth) for row in finding.sizes)


def on_one_scale(finding: Finding, log_growth: LogGrowth) -> Finding:
    """`finding`, with what the budget allows at the sizes foreseen on the scale of `allowed`.

    A rule may have judged the last sizes alone, and scaled its forecast to those.
    """
    scale = _scale(finding, log_growth)
    if scale is None:
        return finding
    rows = tuple(replace(row, allowed=_at(row.size, scale, log_growth)) for row in finding.forecast)
    return replace(finding, forecast=rows)


def _scale(finding: Finding, log_growth: LogGrowth) -> float | None:
    ahead = [math.log(row.cost) - log_growth(row.size) for row in finding.sizes if row.cost > 0]
    if not ahead:
        return None
    middles = [statistics.median(ahead[max(i - 1, 0) : i + 2]) for i in range(len(ahead))]
    return min(middles)


def _at(size: int, scale: float, log_growth: LogGrowth) -> float:
    return math.exp(min(scale + log_growth(size), 700.0))
