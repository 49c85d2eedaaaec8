"""Which lines the growth comes from, by their executions and times at two sizes.

A line is named where it grows faster than the budget allows and bears a share of the cost. If executions explain the
growth, the lines that run too often are named; else it hides in what single executions call (functions in C, installed
packages), and the lines that take longer each time are.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Final, Literal

Place = tuple[str, int]

#: Lines with fewer executions, or less time, than this share of the most are passed over.
SHARE: Final = 0.1
#: An excess below this is within what two single runs can tell.
LEAST: Final = 0.1
#: A line explains the growth where its own excess is at least this part of the whole cost's.
PART: Final = 0.5
#: Nanoseconds below which one execution of a line cannot be timed under a trace.
SHORTEST: Final = 50.0
#: Shares of the time that the lines that run too often must bear together to be the explanation.
BURDEN: Final = 0.2
#: Exponents that differ by less are one growth.
ALIKE: Final = 0.15
AT_MOST: Final = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class LineRun:
    """One call of the body at `size`: executions by line, and nanoseconds by line."""

    size: int
    counts: Mapping[Place, float]
    times: Mapping[Place, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Grown:
    """A line that outgrows the budget between two sizes.

    `kind`: it "runs" more often, or "takes" longer each time. `before`, `after`: executions, or nanoseconds each.
    """

    place: Place
    kind: Literal["runs", "takes"]
    before: float
    after: float


def grown(small: LineRun, large: LineRun, *, cost: float, allowed: float, overhead: float) -> list[Grown]:
    """At most three lines, those that grow fastest first; none where none stands out.

    `cost`, `allowed`: the cost at the larger size over that at the smaller, as read without a trace, and as the budget
    allows. `overhead`: nanoseconds that the trace adds to one execution.
    """
    step = math.log(large.size / small.size)
    needed = max(LEAST, PART * (math.log(cost) - math.log(allowed)) / step)

    def excess(ratio: float) -> float:
        return (math.log(ratio) - math.log(allowed)) / step

    small_times = {place: _net(small, place, overhead) for place in large.counts}
    large_times = {place: _net(large, place, overhead) for place in large.counts}
    often = _by_count(small, large, lambda ratio: excess(ratio) > needed)
    burden = sum(large_times[line.place] + overhead * line.after for line in often)
    if burden >= BURDEN * sum(large.times.values()):
        return often[:AT_MOST]
    most = max(large_times.values(), default=0.0)
    long = []
    for place, time in large_times.items():
        runs = max(small.counts.get(place, 0.0), 1.0)
        before = max(small_times[place] / runs, SHORTEST)
        after = max(time / large.counts[place], SHORTEST)
        ratio = (after * large.counts[place]) / (before * runs)
        if time >= SHARE * most and excess(ratio) > needed and math.log(after / before) / step > LEAST:
            long.append(Grown(place=place, kind="takes", before=before, after=after))
    long.sort(key=lambda line: -large_times[line.place])
    return (long or often)[:AT_MOST]


def _by_count(small: LineRun, large: LineRun, outgrows: Callable[[float], bool]) -> list[Grown]:
    most = max(large.counts.values(), default=0.0)
    found = [
        Grown(place=place, kind="runs", before=max(small.counts.get(place, 0.0), 1.0), after=count)
        for place, count in large.counts.items()
        if count >= SHARE * most and outgrows(count / max(small.counts.get(place, 0.0), 1.0))
    ]
    # The lines of one loop grow alike: the more often run, and then the upper, comes first.
    lead = max((_growth(small, large, line) for line in found), default=0.0)
    behind = {line.place: lead - _growth(small, large, line) for line in found}
    found.sort(key=lambda line: (max(behind[line.place] - ALIKE, 0.0), -line.after, line.place))
    return found


def _growth(small: LineRun, large: LineRun, line: Grown) -> float:
    return math.log(line.after / line.before) / math.log(large.size / small.size)


def _net(run: LineRun, place: Place, overhead: float) -> float:
    return max(run.times.get(place, 0.0) - overhead * run.counts.get(place, 0.0), 0.0)
