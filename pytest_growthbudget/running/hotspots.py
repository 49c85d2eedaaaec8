"""What to look at in an exceeded budget: the body is run at two sizes once more, line by line.

A hint, no evidence: it never changes a verdict and never fails a test. Where the trace function is taken, the body
fails under it, or it takes too long, there are no lines.
"""

from __future__ import annotations

import linecache
import os
from collections import Counter
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Final

from pytest_growthbudget.fitting.hotlines import Grown, LineRun, grown
from pytest_growthbudget.fitting.judgement import GrownLine, Judgement
from pytest_growthbudget.measuring.guards import Overrun, Watch
from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.line_times import LineTimes, Place, overhead_ns
from pytest_growthbudget.workloads.fixtures import shared_key
from pytest_growthbudget.workloads.rays import rays
from pytest_growthbudget.workloads.repeat import GrowthItem, Repeater

if TYPE_CHECKING:
    from pytest_growthbudget.plans import Plan

#: The largest cost, by unit, of a body that is run under the trace: it then takes some 0.3 s.
AFFORDABLE: Final = {"ns": 20e6, "steps": 150_000.0}
#: Nanoseconds of CPU time that the runs of one size, and all of them with their fixtures, may take.
ONE_SIZE: Final = 0.1e9
WHOLE: Final = 0.8e9
#: Seconds after which the body is interrupted, however little CPU time it had.
PATIENCE: Final = 3.0
MOST_RUNS: Final = 5
#: The smaller size is about this part of the larger one.
PART: Final = 4
SOURCE_WIDTH: Final = 60


def with_lines(item: GrowthItem, plan: Plan, judgement: Judgement, forget: Callable[[], None]) -> Judgement:
    """`judgement`, with the lines that grow fastest where its budget of time or steps is exceeded."""
    if judgement.verdict != "exceeded" or judgement.unit not in AFFORDABLE:
        return judgement
    began = clocks.wall_time_ns()
    try:
        lines = _lines(item, plan, judgement, forget)
    except (Exception, Overrun):  # the verdict is worth more than the hint
        lines = ()
    spent = (clocks.wall_time_ns() - began) / 1e9
    return replace(judgement, lines=lines, seconds=judgement.seconds + spent)


def pair(judgement: Judgement) -> list[tuple[int, int]]:
    """The pairs of rows of `judgement.sizes` that may be run, the dearest first."""
    rows = judgement.sizes
    pairs = []
    for top in range(len(rows) - 1, 0, -1):
        below = [row for row in range(top) if 2 * rows[row].size <= rows[top].size]
        if below and rows[top].cost <= AFFORDABLE[judgement.unit] and len(judgement.allowed) == len(rows):
            pairs.append((min(below, key=lambda row: abs(rows[row].size - rows[top].size / PART)), top))
    return pairs


def _lines(item: GrowthItem, plan: Plan, judgement: Judgement, forget: Callable[[], None]) -> tuple[GrownLine, ...]:
    every = rays(plan.vary, item.config.stash[shared_key].ordinary_size)
    ray = next(ray for ray in every if ray.name == judgement.ray)
    now = clocks.cpu_clock()
    deadline = now() + WHOLE
    watch = Watch(PATIENCE)
    repeater = Repeater(item, ray.assign, watch)
    rows, runs = judgement.sizes, {}

    def run(row: int) -> tuple[LineRun, float]:
        if row not in runs:
            runs[row] = _run(repeater, rows[row].size, deadline, forget)
        return runs[row]

    with watch.start():
        for low, high in pair(judgement):
            small, traced = run(low)
            if traced * max(rows[high].cost / rows[low].cost, 1.0) > deadline - now():
                continue
            large, _ = run(high)
            found = grown(
                small,
                large,
                cost=rows[high].cost / rows[low].cost,
                allowed=judgement.allowed[high] / judgement.allowed[low],
                overhead=overhead_ns(),
            )
            return tuple(_told(line, (small.size, large.size), item.config.rootpath) for line in found)
    return ()


def _run(repeater: Repeater, size: int, deadline: float, forget: Callable[[], None]) -> tuple[LineRun, float]:
    """Up to five calls at `size`: the mean of each line's executions and the least of its times; and the CPU time, in
    nanoseconds, of one call under the trace.

    Raises `Overrun` where the deadline passed in between.
    """
    now = clocks.cpu_clock()
    began = now()
    counts: Counter[Place] = Counter()
    times: dict[Place, float] = {}
    traced = 0.0
    done = 0
    while done < MOST_RUNS and (not done or now() - began < ONE_SIZE):
        meter = LineTimes(limit=deadline - now())
        try:
            traced += repeater.take(size, meter).cpu
        finally:
            meter.close()
        forget()
        if meter.cut or now() > deadline:
            raise Overrun
        done += 1
        counts.update(meter.counts)
        for place, time in meter.times.items():
            times[place] = min(times.get(place, float("inf")), time)
    mean = {place: count / done for place, count in counts.items()}
    return LineRun(size=size, counts=mean, times=times), traced / done


def _told(line: Grown, sizes: tuple[int, int], root: Path) -> GrownLine:
    file, number = line.place
    source = " ".join(linecache.getline(file, number).split())
    return GrownLine(
        file=_shown(file, root),
        line=number,
        source=source if len(source) <= SOURCE_WIDTH else source[: SOURCE_WIDTH - 3] + "...",
        kind=line.kind,
        sizes=sizes,
        before=line.before,
        after=line.after,
    )


def _shown(file: str, root: Path) -> str:
    """`file` from the project's root, as node ids have it; whole where it lies elsewhere."""
    try:
        shown = os.path.relpath(file, root)
    except ValueError:  # on another drive
        return file
    return file if shown.startswith("..") else shown.replace(os.sep, "/")
