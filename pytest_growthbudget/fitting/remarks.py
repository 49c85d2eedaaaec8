"""What is to be said of a finding that its verdict alone does not say."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Final

from pytest_growthbudget.fitting.judgement import Finding

#: How every remark on a flat cost begins; a report picks it out by that.
FLAT: Final = "the cost hardly depends on the size"
#: Largest exponent, either way, and largest rise of a cost that counts as flat.
FLAT_EXPONENT: Final = 0.08
FLAT_RISE: Final = 1.4
#: From this rise on the memory of workload and call shows that the workload does grow.
GROWS: Final = 2.0
#: Sizes must span so much, and the budget allow so large an exponent, for a flat cost to be worth a remark.
FLAT_SPAN: Final = 8.0
PROMISED_EXPONENT: Final = 0.5


def flat_cost(finding: Finding, log_growth: Callable[[float], float], theta: str, variable: str = "n") -> str:
    """A remark where a budget that lets the cost grow is kept by one that does not; "" elsewhere.

    Either the work is constant, or a fixed part outweighs it, or the workload ignores the size it is asked for: in
    the last two cases the verdict says little.
    """
    rows = [row for row in finding.sizes if row.cost > 0]
    if finding.verdict != "within" or len(rows) < 5:
        return ""
    first, last = rows[0], rows[-1]
    span = math.log(last.size / first.size)
    if span < math.log(FLAT_SPAN) or log_growth(last.size) - log_growth(first.size) < PROMISED_EXPONENT * span:
        return ""
    costs = [row.cost for row in rows]
    slope = _slope([math.log(row.size) for row in rows], [math.log(cost) for cost in costs])
    if abs(slope) > FLAT_EXPONENT or max(costs) > FLAT_RISE * min(costs):
        return ""
    said = f"{FLAT}: it is much the same at {variable} = {first.size:,} and {last.size:,}, where {theta} is allowed"
    held = [row.footprint for row in rows if row.footprint > 0]
    if held and held[-1] >= GROWS * held[0]:
        return (
            f"{said}. The workload does grow: either the work is constant, and 1 can be promised, or a fixed part "
            "outweighs it; then leave that part out with `metered`, or raise `smallest`."
        )
    return (
        f"{said}. If the work is constant, promise 1; else see whether the workload grows, say by asserting its "
        "length in the test."
    )


def _slope(x: list[float], y: list[float]) -> float:
    """The least-squares slope of y over x."""
    mean_x, mean_y = math.fsum(x) / len(x), math.fsum(y) / len(y)
    across = math.fsum((a - mean_x) ** 2 for a in x)
    return math.fsum((a - mean_x) * (b - mean_y) for a, b in zip(x, y, strict=True)) / across


def after_runaway(finding: Finding, size: int, allowed: float, variable: str = "n") -> Finding:
    """`finding` where a call at `size` was stopped after `allowed` nanoseconds: a budget is not kept by that."""
    said = f"a call at {variable} = {size:,} did not come back within {allowed / 1e9:.3g} s and was stopped"
    if finding.verdict == "within":
        reason = f"the sizes read keep the budget, but {said}"
        return replace(finding, verdict="undecided", reason=reason)
    return replace(finding, reason=f"{finding.reason}; {said}")


def exhausted(size: int, variable: str = "n") -> str:
    """A remark where the workload of `size` could not be built for want of memory."""
    return f"there was not enough memory to build the workload of {variable} = {size:,}: only smaller ones were read."
