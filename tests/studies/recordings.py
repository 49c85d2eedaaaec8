"""Recorded readings as a campaign would give them: answers a rule's requests from what was once read."""

from __future__ import annotations

import gzip
import json
import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Final

import numpy as np

from pytest_growthbudget.fitting.evidence import lower_quartile
from pytest_growthbudget.fitting.judgement import Finding
from pytest_growthbudget.fitting.rule import decide
from pytest_growthbudget.measuring.readings import (
    Answer,
    Climb,
    Ladder,
    MemoryCurve,
    Peek,
    Peeked,
    Promise,
    Reading,
    Request,
    Rounds,
    Series,
    converse,
)

DATA: Final = Path(__file__).parent.parent / "data"
SESSIONS: Final = ("quiet1", "quiet2", "loaded1")
KERNELS: Final = ("linked_list", "sum_shuffled_heap", "random_access", "dict_lookup_n")

Growth = Callable[[float], float]


def power(exponent: float) -> Growth:
    return lambda n: exponent * math.log(n)


def log2_of(n: float) -> float:
    return math.log2(max(n, 2.0))


#: Natural logs of the growths, by their names in the recordings.
GROWTHS: Final[Mapping[str, Growth]] = {
    "1": lambda n: 0.0,
    "log": lambda n: math.log(log2_of(n)),
    "sqrt": power(0.5),
    "n": power(1.0),
    "nlog": lambda n: math.log(n) + math.log(log2_of(n)),
    "n1.5": power(1.5),
    "n1.585": power(math.log2(3)),
    "n2": power(2.0),
    "n2.807": power(math.log2(7)),
    "n3": power(3.0),
}
#: Budgets that a function of a given growth breaks plainly, narrowly, and keeps with room to spare.
FAULTS: Final = {"n": ("log",), "n1.5": ("n",), "n2": ("n", "nlog"), "n3": ("n2",)}
NARROW: Final = {
    "n": ("sqrt",),
    "nlog": ("sqrt",),
    "n1.585": ("n",),
    "n2.807": ("n2",),
    "sqrt": ("log",),
    "n2": ("n1.5",),
    "log": ("1",),
}
LOOSE: Final = {
    "1": "log",
    "log": "sqrt",
    "sqrt": "n",
    "n": "nlog",
    "nlog": "n1.5",
    "n1.5": "n2",
    "n1.585": "n2",
    "n2": "n3",
    "n2.807": "n3",
}


@dataclass(frozen=True)
class Recording:
    """One function in one session: `sets[r][i]` are the readings of set r at `sizes[i]`, in nanoseconds."""

    session: str
    name: str
    growth: str
    sizes: tuple[int, ...]
    sets: tuple[tuple[tuple[int, ...], ...], ...]
    footprints: tuple[float, ...]


@dataclass(frozen=True)
class Trial:
    """A recording held to one budget. `kind`: "sound", "loose", "fault" or "narrow"."""

    recording: Recording
    kind: str
    budget: str
    curve: MemoryCurve

    @property
    def label(self) -> str:
        return f"{self.recording.session} {self.recording.name} against {self.budget}"


def load(session: str) -> dict[str, Recording]:
    """The recordings of one session by function."""
    with gzip.open(DATA / f"readings_{session}.json.gz", "rt", encoding="ascii") as file:
        raw: dict[str, Any] = json.load(file)
    touched = json.loads((DATA / "footprints.json").read_text(encoding="ascii"))
    return {
        name: Recording(
            session=session,
            name=name,
            growth=each["growth"],
            sizes=tuple(each["sizes"]),
            sets=tuple(tuple(tuple(read) for read in one) for one in each["sets"]),
            footprints=tuple(interpolate_footprint(touched[name], each["sizes"])),
        )
        for name, each in raw.items()
    }


def interpolate_footprint(known: Sequence[Sequence[float]], sizes: Sequence[int]) -> list[float]:
    """Log-log interpolation between the sizes where it was measured, continued by the last slope (at most 2.1)."""
    x = np.log([point[0] for point in known])
    y = np.log([max(point[1], 1.0) for point in known])
    at = np.log(np.asarray(sizes, dtype=float))
    out = np.interp(at, x, y)
    if len(x) > 1:
        slope = min(max((y[-1] - y[-2]) / max(x[-1] - x[-2], 1e-9), 0.0), 2.1)
        out = np.where(at > x[-1], y[-1] + slope * (at - x[-1]), out)
    return np.exp(out).tolist()


def memory_curve(kernels: Sequence[Recording]) -> MemoryCurve:
    """The memory curve that a session's own linear functions make."""
    grid = np.log(2.0) * np.arange(12, 31, 0.5)
    inflation, extra, cheapest = [], [], []
    for kernel in kernels:
        n = np.array(kernel.sizes, dtype=float)
        costs = np.array([lower_quartile(read) for read in kernel.sets[0]])
        kept = costs >= 5e3
        each = np.log(costs / n)[kept]
        smooth = [float(np.median(each[max(0, i - 1) : i + 2])) for i in range(len(each))]
        at = np.interp(grid, np.log(kernel.footprints)[kept], smooth)
        inflation.append(at - at[0])
        extra.append(np.exp(at) - np.exp(at[0]))
        cheapest.append(float(np.exp(min(smooth))))
    worst = np.maximum.accumulate(np.max(inflation, axis=0))
    most = np.maximum.accumulate(np.max(extra, axis=0))
    return MemoryCurve(
        log_bytes=tuple(grid.tolist()),
        log_inflation=tuple(worst.tolist()),
        extra=tuple(most.tolist()),
        resident=float(np.exp(np.interp(math.log(1.2), worst, grid))),
        cheapest=min(cheapest),
    )


def trials(session: str) -> Iterator[Trial]:
    """Every function against the budgets it keeps and breaks; no function is judged by a curve it helped to make."""
    recordings = load(session)
    for name, recording in recordings.items():
        if len(recording.sizes) < 5:
            continue
        curve = memory_curve([recordings[each] for each in KERNELS if each != name])
        budgets = [("sound", recording.growth)]
        if recording.growth in LOOSE:
            budgets.append(("loose", LOOSE[recording.growth]))
        budgets += [("fault", each) for each in FAULTS.get(recording.growth, ())]
        budgets += [("narrow", each) for each in NARROW.get(recording.growth, ())]
        for kind, budget in budgets:
            yield Trial(recording, kind, budget, curve)


@dataclass
class Replay:
    """Answers requests from a recording. `plan(cost)`: readings a size, None for all that were recorded.

    `keep`: the ladder ends after so many readable sizes, for lack of time. `climb_costs`: the ladder's costs are
    the smaller of two calls, not the lower quartile of the first set.
    """

    trial: Trial
    plan: Callable[[float], int] | None = None
    climb_costs: bool = False
    with_curve: bool = True
    keep: int | None = None
    nanoseconds: float = 0.0
    curve_asked: bool = False
    climbed: int = 0
    asked: list[Request] = field(default_factory=list)

    def __post_init__(self) -> None:
        recording = self.trial.recording
        if self.climb_costs:
            self.costs = [float(min(read[:2])) for read in recording.sets[1]]
        else:
            self.costs = [lower_quartile(read) for read in recording.sets[0]]

    def curve(self) -> MemoryCurve | None:
        self.curve_asked = True
        return self.trial.curve if self.with_curve else None

    def decide(self) -> Finding:
        """The finding on these readings."""
        return converse(decide(Promise(log_growth=GROWTHS[self.trial.budget], curve=self.curve)), self.answer)

    def answer(self, request: Request) -> Answer:
        self.asked.append(request)
        if isinstance(request, Climb):
            return self.climb(request)
        if isinstance(request, Rounds):
            return self.rounds(request)
        return self.peek(request)

    @property
    def readable(self) -> int:
        """The first size of at least 5 us; all sizes count for a body that stays below 100 us."""
        if max(self.costs) < 100e3:
            return 0
        return next(index for index, cost in enumerate(self.costs) if cost >= 5e3)

    def climb(self, request: Climb) -> Ladder:
        recording = self.trial.recording
        most = len(recording.sizes) if self.keep is None else min(self.readable + self.keep, len(recording.sizes))
        for index in range(self.climbed, most):
            enough = index - self.readable >= request.at_least
            if self.costs[index] > request.cost or (recording.footprints[index] > request.footprint and enough):
                break
            self.climbed = index + 1
        last = self.climbed
        return Ladder(
            sizes=recording.sizes[:last],
            costs=tuple(self.costs[:last]),
            footprints=recording.footprints[:last],
            ended="" if last < most else "largest" if self.keep is None else "time",
            readable=self.readable,
        )

    def rounds(self, request: Rounds) -> Series:
        recording = self.trial.recording
        costs = []
        for index in range(request.first, request.last):
            read = recording.sets[request.repeat][index]
            if self.plan is not None:
                read = read[: request.calls or self.plan(self.costs[index])]
            costs.append(tuple(float(each) for each in read))
        self.nanoseconds += sum(map(sum, costs))
        return Series(sizes=recording.sizes[request.first : request.last], costs=tuple(costs))

    def peek(self, request: Peek) -> Peeked | None:
        recording = self.trial.recording
        if self.keep is not None:
            return None
        fits = [
            cost <= request.cost and footprint <= request.footprint
            for cost, footprint in zip(self.costs, recording.footprints, strict=True)
        ]
        index = sum(fits) - 1
        if index < request.last or recording.sizes[index] < request.beyond * recording.sizes[request.last - 1]:
            return None
        two = recording.sets[0][index][:2]
        self.nanoseconds += sum(two)
        return Peeked(
            reading=Reading(size=recording.sizes[index], cost=float(min(two))),
            footprint=recording.footprints[index],
        )
