"""The campaign: answers a decision rule's requests with readings, within the limits of the plan.

It knows a callable `take(size, calls) -> Reading`, not pytest, and no clock but the `now` it is given: with a
virtual clock a campaign is exact.
"""

from __future__ import annotations

import bisect
import math
import random
from collections.abc import Callable, Generator, Sequence
from dataclasses import dataclass, field

from pytest_growthbudget.measuring.guards import Exhausted, Overrun
from pytest_growthbudget.measuring.readings import (
    Answer,
    Climb,
    Ladder,
    Peek,
    Peeked,
    Reading,
    Request,
    Result,
    Rounds,
    Series,
    converse,
)
from pytest_growthbudget.workloads import sizes as sizing

MS = 1e6  # nanoseconds
#: A body whose cost hardly grows, on a workload that hardly does, would be climbed for ever.
MOST_CLIMBED = 44
#: A meter that is no clock needs no more sizes than this above its floor, nor more than this in all.
ENOUGH_COUNTED = 20
MOST_COUNTED = 40
#: At most this factor in cost is foreseen for one step of a look-ahead.
RISK_OF_PEEK = 30.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """What a campaign may spend, and how it reads. Times in nanoseconds, `memory` in bytes.

    `floor`: the smallest reading that the meter can be trusted with; for a meter that is no clock, the cost below
    which fixed parts drown the growing ones. `repeatable`: the body may be called many
    times in one reading. `clock`: the meter reads time, so dear calls are read less often; a deterministic meter
    is read once a size and climbs until a reading takes `dear` of wall time. `per_size`, `per_size_elapsed`: how
    long the readings of one size may take in one set, in the body and with its fixtures, as far as that leaves
    `fewest` readings; `most` is never passed.
    """

    time: float = 10_000 * MS
    memory: float = float(1 << 30)
    smallest: int | None = None
    largest: int | None = None
    exponential: bool = False
    repeatable: bool = False
    clock: bool = True
    floor: float = 5_000.0
    batch: float = 200_000.0
    dear: float = 30 * MS
    per_size: float = 4 * MS
    per_size_elapsed: float = 30 * MS
    fewest: int = 3
    most: int = 12
    once: int = 1


@dataclass(slots=True)
class _Rung:
    size: int
    cost: float
    elapsed: float
    calls: int


@dataclass(slots=True)
class Campaign:
    """One budget's measurement. `run` may be called once.

    `take(size, calls)` makes one reading; `footprint(size)` tells the bytes of workload and one call. Either may
    raise `Overrun` or `Exhausted`: the sizes below are then judged. `allow(time)` is told how long the calls that
    follow may take, each: while climbing half of what is left, so that what was read can be judged.
    """

    take: Callable[[int, int], Reading]
    footprint: Callable[[int], float]
    now: Callable[[], int]
    limits: Limits
    seed: str
    allow: Callable[[float], None] = lambda nanoseconds: None
    _rng: random.Random = field(init=False)
    _rungs: list[_Rung] = field(init=False, default_factory=list)
    _ideal: float = field(init=False, default=0.0)
    _step: float = field(init=False, default=sizing.STEP)
    _bytes: dict[int, float] = field(init=False, default_factory=dict)
    _ended: str = field(init=False, default="")
    _deadline: float = field(init=False, default=math.inf)
    _allowance: float = field(init=False, default=math.inf)
    _refined: bool = field(init=False, default=False)
    #: The size at which a call was stopped, and how long it had been allowed; None where none was.
    ran_away: tuple[int, float] | None = field(init=False, default=None)
    #: The size whose workload could not be built for want of memory.
    exhausted: int | None = field(init=False, default=None)

    def __post_init__(self) -> None:
        self._rng = random.Random(self.seed)

    # ------------------------------------------------------------ the conversation with the rule

    def run(self, rule: Generator[Request, Answer, Result]) -> Result:
        """Answer the requests of `rule` until it returns its finding."""
        self._deadline = self.now() + self.limits.time
        return converse(rule, self._answer)

    def _answer(self, request: Request) -> Answer:
        if isinstance(request, Climb):
            return self._climb(request)
        if isinstance(request, Rounds):
            return self._rounds(request)
        return self._peek(request)

    def extend(self, time: float) -> None:
        """Put the time limit off by `time` nanoseconds, which went into something else than this test."""
        self._deadline += time

    @property
    def left(self) -> float:
        """Nanoseconds until the time limit."""
        return self._deadline - self.now()

    # ------------------------------------------------------------ the climb

    def _climb(self, request: Climb) -> Ladder:
        while not self._ended and self._wants_more(request):
            self._step_up()
        if not self._refined:
            self._refine()
        return self._ladder()

    def _wants_more(self, request: Climb) -> bool:
        if not self._rungs:
            return True
        top = self._rungs[-1]
        if not self.limits.clock:
            counted = sum(rung.cost >= self.limits.floor for rung in self._rungs)
            cheap = top.elapsed < self.limits.dear and len(self._rungs) < MOST_COUNTED
            return (cheap and counted < ENOUGH_COUNTED) or len(self._rungs) < request.at_least
        if top.cost > request.cost or len(self._rungs) >= MOST_CLIMBED:
            return False
        enough = sum(rung.cost * rung.calls >= self.limits.floor for rung in self._rungs)
        return enough < request.at_least or self._bytes_at(top.size) <= request.footprint

    def _step_up(self) -> None:
        limits = self.limits
        if not self._rungs:
            self._ideal = sizing.first_size(limits.smallest, self._rng.random(), exponential=limits.exponential)
        else:
            self._ideal = sizing.next_size(
                self._ideal,
                [rung.size for rung in self._rungs],
                [rung.cost for rung in self._rungs],
                exponential=limits.exponential,
                step=self._step,
            )
        size = round(self._ideal)
        if limits.largest is not None and size >= limits.largest:
            size = limits.largest
            self._ended = "largest"
        if not self._affordable(size):
            return
        self._add(size)

    def _affordable(self, size: int) -> bool:
        if not self._rungs:
            return True
        top = self._rungs[-1]
        growth = self._trend(lambda rung: rung.elapsed)
        # Elapsed times of short readings are noisy, and so is their trend; a step of the climb has its own bound.
        predicted = top.elapsed * min((size / top.size) ** growth, sizing.RISK)
        # The climb must leave time for one set of readings at every size.
        one_round = predicted + sum(rung.elapsed for rung in self._rungs)
        rounds = self.limits.fewest if self.limits.clock else self.limits.once
        if (2 + rounds) * one_round > self.left:
            self._ended = "time"
            return False
        if self._bytes_at(size) > self.limits.memory:
            self._ended = "memory"
            return False
        return True

    def _trend(self, value: Callable[[_Rung], float]) -> float:
        """The local exponent at the top of the ladder, plus what it has lately risen by."""
        rungs = self._rungs[-5:]
        if len(rungs) < 3:
            return 2.0
        logs = [(math.log(rung.size), math.log(max(value(rung), 1.0))) for rung in rungs]
        slopes = [(b[1] - a[1]) / (b[0] - a[0]) for a, b in zip(logs, logs[2:], strict=False)]
        return max(slopes[-1] + max(slopes[-1] - slopes[0], 0.0), 0.0)

    def _add(self, size: int) -> None:
        """Take two calls at `size`, the cheaper of which counts, and put it on the ladder."""
        calls = self._calls_at(size)
        self._may_take(self.left / 2)
        try:
            if not self._rungs:
                self.take(size, calls)  # what the first call alone imports or caches is no growth
            readings = [self.take(size, calls)]
            if self.limits.repeatable and self._below_floor(readings[0]):
                calls = self._calls_for(readings[0].cost)
                readings = [self.take(size, calls)]
            if 2 * readings[0].elapsed < self.left:
                readings.append(self.take(size, calls))
        except (Overrun, Exhausted) as cause:
            self._cut_off(size, cause)
            return
        best = min(readings, key=lambda reading: reading.cost)
        rung = _Rung(size, best.cost, min(r.elapsed for r in readings), calls)
        bisect.insort(self._rungs, rung, key=lambda item: item.size)
        self._weigh(size)

    def _may_take(self, time: float) -> None:
        self._allowance = time
        self.allow(time)

    def _cut_off(self, size: int, cause: Overrun | Exhausted) -> None:
        """Climb no further: the call or the workload of `size` was too much."""
        if isinstance(cause, Exhausted):
            self._ended, self.exhausted = "memory", size
        else:
            self._ended, self.ran_away = "runaway", (size, self._allowance)

    def _below_floor(self, reading: Reading) -> bool:
        return self.limits.clock and reading.cost * reading.calls < self.limits.floor

    def _calls_for(self, cost: float) -> int:
        return math.ceil(self.limits.batch / max(cost, 1.0))

    def _calls_at(self, size: int) -> int:
        """Calls in one reading at `size`: as many as its nearest smaller neighbour needed, none of it where dear."""
        if not self.limits.repeatable or not self.limits.clock:
            return 1
        below = [rung for rung in self._rungs if rung.size <= size]
        if not below or below[-1].cost >= self.limits.batch:
            return 1
        return self._calls_for(below[-1].cost)

    def _refine(self) -> None:
        """Fill the ladder in where half octaves give fewer than 12 sizes up to a dear call."""
        self._refined = True
        if self._ended == "runaway":
            return
        usable = [rung for rung in self._rungs if rung.cost * rung.calls >= self.limits.floor]
        if len(usable) < 2:
            return
        growth = max(self._trend(lambda rung: rung.cost), 0.1)
        more = math.log(max(self.limits.dear / usable[-1].cost, 1.0)) / (growth * math.log(self._step))
        if len(usable) + (more if self.limits.clock and not self._ended else 0) >= 12:
            return
        self._step = math.sqrt(self._step)
        known = [rung.size for rung in usable]
        for size in sizing.between(known, len(known) - 1):
            if self.left < 4 * max(rung.elapsed for rung in self._rungs):
                return
            self._add(size)

    def _ladder(self) -> Ladder:
        rungs = self._rungs
        long = [rung.cost * rung.calls >= self.limits.floor for rung in rungs]
        # One long reading among short ones is noise.
        readable = next((i for i in range(len(rungs)) if all(long[i : i + 2])), len(rungs))
        return Ladder(
            sizes=tuple(rung.size for rung in rungs),
            costs=tuple(rung.cost for rung in rungs),
            footprints=tuple(self._bytes_at(rung.size) for rung in rungs),
            ended=self._ended,
            # A promise of a constant may stay below the floor of a count for ever.
            readable=readable if self.limits.clock or readable < len(rungs) else 0,
        )

    # ------------------------------------------------------------ footprints

    def _weigh(self, size: int) -> None:
        """Measure the footprint at `size` where the nearest known one is far below."""
        top = self._rungs[-1]
        if size != top.size or (self._bytes and size < 6 * max(self._bytes)):
            return
        if top.cost * top.calls < self.limits.floor and self._bytes:
            return
        # Tracing slows building down severalfold; what is that dear is extrapolated instead.
        if self._bytes and 5 * top.elapsed > min(self.left, 400 * MS):
            return
        try:
            self._bytes[size] = self.footprint(size)
        except (Overrun, Exhausted) as cause:
            self._cut_off(size, cause)

    def _bytes_at(self, size: int) -> float:
        """Footprint at `size`, log-log through those measured; beyond them at most as a square."""
        if not self._bytes:
            return 0.0
        known = sorted(self._bytes.items())
        if len(known) == 1:
            at, held = known[0]
            return held * max(size / at, 1.0)
        index = min(max(bisect.bisect_left([n for n, _ in known], size), 1), len(known) - 1)
        (n1, b1), (n2, b2) = known[index - 1], known[index]
        slope = math.log(b2 / b1) / math.log(n2 / n1)
        if size > n2:
            return float(b2 * (size / n2) ** min(max(slope, 0.0), 2.1))
        if size < n1:
            return b1
        return float(b1 * (size / n1) ** slope)

    # ------------------------------------------------------------ rounds

    def _rounds(self, request: Rounds) -> Series:
        self._may_take(math.inf)
        rungs = self._rungs[request.first : request.last]
        wanted = [self._readings_of(rung, request) for rung in rungs]
        costs: list[list[float]] = [[] for _ in rungs]
        complete = True
        for turn in range(max(wanted, default=0)):
            order = [index for index, count in enumerate(wanted) if turn < count]
            self._rng.shuffle(order)
            # A round that cannot be finished would leave the dear sizes, the telling ones, without readings.
            if turn and sum(rungs[i].elapsed for i in order) > self.left:
                complete = False
                break
            try:
                for index in order:
                    costs[index].append(self.take(rungs[index].size, self._calls_at(rungs[index].size)).cost)
            except (Overrun, Exhausted):
                complete = False
                break
        kept = [(rung.size, tuple(cost)) for rung, cost in zip(rungs, costs, strict=True) if cost]
        return Series(sizes=tuple(size for size, _ in kept), costs=tuple(cost for _, cost in kept), complete=complete)

    def _readings_of(self, rung: _Rung, request: Rounds) -> int:
        if request.calls:
            return request.calls
        limits = self.limits
        if not limits.clock:
            return limits.once
        affordable = min(
            limits.per_size / max(rung.cost * rung.calls, 1.0), limits.per_size_elapsed / max(rung.elapsed, 1.0)
        )
        return int(min(max(affordable, limits.fewest), limits.most))

    # ------------------------------------------------------------ look-ahead

    def _peek(self, request: Peek) -> Peeked | None:
        """Two calls at one much larger size, reached by steps that each risk no more than `RISK_OF_PEEK` in cost.

        Where time does not allow for that size, one as large as it allows.
        """
        if self._ended in ("time", "runaway"):
            return None
        least = request.beyond * self._rungs[request.last - 1].size
        points = [(rung.size, rung.cost) for rung in self._rungs]
        size = self._peek_size(request, points)
        at, elapsed = points[-1][0], max(self._rungs[-1].elapsed, 1.0)
        growth_of_all = max(self._trend(lambda rung: rung.elapsed), 1.0)
        seen: Reading | None = None
        while True:
            growth = max(math.log(points[-1][1] / points[-2][1]) / math.log(at / points[-2][0]), 0.5)
            size = min(size, int(at * max(self.left / (3 * elapsed), 0.0) ** (1 / growth_of_all)))
            if size <= at or size < least:
                break
            step = min(size, max(int(at * RISK_OF_PEEK ** (1 / growth)), at + 1))
            self._may_take(self.left / 2)
            try:
                seen = self.take(step, 1)
                if step >= size or seen.cost > request.cost / 2:
                    second = self.take(step, 1) if 2 * seen.elapsed < self.left else seen
                    seen = min(seen, second, key=lambda reading: reading.cost)
                    break
            except (Overrun, Exhausted) as cause:
                self._cut_off(step, cause)
                return None
            points.append((step, seen.cost))
            at, elapsed = step, max(seen.elapsed, 1.0)
        if seen is None or seen.size < least:
            return None
        return Peeked(reading=seen, footprint=self._bytes_at(seen.size))

    def _peek_size(self, request: Peek, points: Sequence[tuple[int, float]]) -> int:
        """The largest size that is foreseen to keep to what is asked for; 0 where nothing can be foreseen."""
        if len(points) < 3:
            return 0
        top_size, top_cost = points[-1]
        growth = max(self._trend(lambda rung: rung.cost), 0.3)
        size = top_size * (request.cost / max(top_cost, 1.0)) ** (1 / growth)
        if self.limits.largest is not None:
            size = min(size, self.limits.largest)
        limit = min(request.footprint, self.limits.memory)
        while size > top_size and self._bytes_at(int(size)) > limit:
            size /= 1.1
        return int(size)
