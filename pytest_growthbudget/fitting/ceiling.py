"""Ceilings: the cost foreseen at a size that is never run must stay under one."""

from __future__ import annotations

from dataclasses import replace

from pytest_growthbudget.fitting.excess import CLOCK_NOISE, FEWEST_SIZES, observe
from pytest_growthbudget.fitting.forecast import forecast
from pytest_growthbudget.fitting.judgement import Finding, ForecastRow, Interval
from pytest_growthbudget.measuring.readings import Promise

#: A cost past all counting, in nanoseconds or bytes.
_BEYOND = 1e21


def under_ceiling(finding: Finding, promise: Promise, at: int, ceiling: float) -> tuple[Finding, ForecastRow | None]:
    """`finding`, unless the forecast at size `at` passes `ceiling`; and that forecast beside the ceiling.

    Exceeded where the forecast itself passes the ceiling; undecided where only its interval reaches over it. A
    finding that is exceeded or unmeasured already stays what it is.
    """
    rows = [row for row in finding.sizes if row.cost > 0]
    if finding.verdict not in ("within", "undecided") or len(rows) < FEWEST_SIZES:
        return finding, None
    seen = observe(
        [row.size for row in rows],
        [row.cost for row in rows],
        promise.log_growth,
        exponential=promise.exponential,
    )
    foreseen = forecast(
        seen,
        promise.log_growth,
        exponential=promise.exponential,
        confidence=promise.confidence,
        noise=CLOCK_NOISE,
        at=(at,),
    )
    cost = foreseen[0].cost if foreseen else Interval(estimate=_BEYOND, low=_BEYOND, high=_BEYOND)
    row = ForecastRow(size=at, cost=cost, allowed=ceiling)
    if cost.estimate > ceiling:
        reason = "the growth is kept, but the cost foreseen at the size named passes its ceiling"
        return replace(finding, verdict="exceeded", reason=reason), row
    if cost.high > ceiling and finding.verdict == "within":
        reason = "the growth is kept, but the interval of the cost foreseen reaches over its ceiling"
        return replace(finding, verdict="undecided", reason=reason), row
    return finding, row
