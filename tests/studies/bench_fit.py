"""What one fit costs: `python -m tests.studies.bench_fit` prints milliseconds, the best of many calls."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Final

import numpy as np

from pytest_growthbudget.fitting.evidence import gather
from pytest_growthbudget.fitting.excess import CLOCK_NOISE, fit_excess, observe
from pytest_growthbudget.fitting.finding import conclude
from pytest_growthbudget.fitting.verdict import clock_limits
from pytest_growthbudget.measuring.readings import Promise, Series
from pytest_growthbudget.meters.clocks import wall_time_ns

COUNTS: Final = (9, 16, 25)


def best(call: Callable[[], object], times: int = 100) -> float:
    """The shortest of `times` calls, in milliseconds."""
    shortest = math.inf
    for _ in range(times):
        start = wall_time_ns()
        call()
        shortest = min(shortest, (wall_time_ns() - start) / 1e6)
    return shortest


def main() -> int:
    draw = np.random.default_rng(1)
    print("sizes   fit   fit and three intervals   whole finding   (ms)")
    for count in COUNTS:
        sizes = [round(12 * 2 ** (step / 2)) for step in range(count)]
        costs = [100.0 * n * math.exp(draw.normal(0, 0.03)) for n in sizes]
        seen = observe(sizes, costs, math.log)

        def judged(seen=seen) -> None:  # type: ignore[no-untyped-def]
            fit = fit_excess(seen)
            for mixture in (fit.delta, fit.at_top, fit.hidden):
                mixture.interval()

        promise, limits = Promise(log_growth=math.log), clock_limits()
        series = Series(sizes=tuple(sizes), costs=tuple((cost,) for cost in costs))

        def found(promise=promise, limits=limits, series=series) -> None:  # type: ignore[no-untyped-def]
            conclude("within", "", promise, limits, gather(promise, {}, [series], promise.curve, CLOCK_NOISE))

        print(f"{count:5d} {best(lambda seen=seen: fit_excess(seen)):6.2f} {best(judged):14.2f} {best(found):20.2f}")
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
