"""Readings, and the requests by which a decision rule asks for them. Frozen, without pytest and without numpy.

A decision rule is a generator (`fitting.rule.decide`): it yields requests, is sent what they ask for, and returns
a `Finding`. The campaign answers the requests on a live test; the tests answer them from recorded readings.
"""

from __future__ import annotations

from collections.abc import Callable, Generator
from dataclasses import dataclass, field
from typing import TypeVar

Result = TypeVar("Result")


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """One metered observation at one problem size.

    `cost` is the cost of one call of the body, in the meter's unit (nanoseconds for clocks), already divided by
    `calls`, the number of calls made in the reading. `elapsed` is the wall time of the whole reading in
    nanoseconds, workload and teardown included; `wall` is the wall time inside the body, per call.
    """

    size: int
    cost: float
    calls: int = 1
    wall: float = 0.0
    elapsed: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Ladder:
    """The sizes worth measuring, ascending, as the climb found them.

    `costs[i]`: the smaller of the two calls made at `sizes[i]`. `footprints[i]`: bytes held by the workload and
    one call, interpolated in log-log between the sizes where it was measured; 0.0 where unknown.
    `ended`: why the climb went no higher: "" (it stopped where it was asked to), "largest", "time", "memory"
    or "runaway". `readable`: index of the first size whose readings are long enough for the clock.
    """

    sizes: tuple[int, ...]
    costs: tuple[float, ...]
    footprints: tuple[float, ...]
    ended: str = ""
    readable: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Series:
    """The readings of one set of rounds: `costs[i]` are those at `sizes[i]` (at least one each)."""

    sizes: tuple[int, ...]
    costs: tuple[tuple[float, ...], ...]
    complete: bool = True


@dataclass(frozen=True, slots=True)
class Climb:
    """Asks for a `Ladder` that goes on until a call costs more than `cost` or its footprint exceeds `footprint`.

    Sizes already climbed stay; the answer is the whole ladder. `at_least` sizes are climbed whatever they hold,
    as far as `cost` allows.
    """

    cost: float
    footprint: float = float("inf")
    at_least: int = 0


@dataclass(frozen=True, slots=True)
class Rounds:
    """Asks for a `Series` over the ladder's sizes `first` ≤ i < `last`; `repeat` 0 and 1 are independent sets.

    `calls` fixes the readings a size; 0 leaves it to the plan (fewer readings of dear calls).
    """

    first: int
    last: int
    repeat: int = 0
    calls: int = 0


@dataclass(frozen=True, slots=True)
class Peek:
    """Asks for one `Reading` (the smaller of two) at one much larger size, or None where there is none.

    The size is the largest whose predicted cost is at most `cost` and footprint at most `footprint`; it is at
    least `beyond` times the largest size of ladder index `last` - 1. The reading's footprint is sent with it.
    """

    last: int
    cost: float
    footprint: float
    beyond: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Peeked:
    """The answer to `Peek`."""

    reading: Reading
    footprint: float


Request = Climb | Rounds | Peek
Answer = Ladder | Series | Peeked | None


def converse(rule: Generator[Request, Answer, Result], answer: Callable[[Request], Answer]) -> Result:
    """Answers the requests of `rule` until it returns its finding."""
    try:
        request = next(rule)
        while True:
            request = rule.send(answer(request))
    except StopIteration as stop:
        result: Result = stop.value
        return result


@dataclass(frozen=True, slots=True, kw_only=True)
class MemoryCurve:
    """What the memory hierarchy of this machine adds to linear code, by bytes touched.

    Shapes (k,): `log_bytes` ascending natural logs; `log_inflation` the log of the cost per element against the
    smallest footprint, largest over the kernels, non-decreasing; `extra` the added nanoseconds per element.
    `resident`: bytes up to which the inflation stays under 1.2. `cheapest`: nanoseconds per element of the
    cheapest kernel.
    """

    log_bytes: tuple[float, ...]
    log_inflation: tuple[float, ...]
    extra: tuple[float, ...]
    resident: float
    cheapest: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Promise:
    """What a rule needs to know of a budget: no more than numbers.

    `log_growth(n)`: natural log of the growth at size n. `exponential`: the budget grows faster than any power of
    n (sizes then step by one and the regressor is log g itself).
    """

    log_growth: Callable[[float], float]
    exponential: bool = False
    slack: float = 0.15
    confidence: float = 0.95
    deterministic: bool = False
    curve: Callable[[], MemoryCurve | None] = field(default=lambda: None)
