"""A campaign on a virtual clock: every reading charges the clock what the body costs, and nothing else moves it."""

from __future__ import annotations

import math
from collections.abc import Callable, Generator
from typing import Any

from pytest_growthbudget.measuring.campaign import MS, Campaign, Limits
from pytest_growthbudget.measuring.guards import Overrun
from pytest_growthbudget.measuring.readings import Climb, Ladder, Peek, Peeked, Reading, Rounds, Series


class Bench:
    """A body whose cost is `cost(n)` nanoseconds and whose workload takes `build(n)` more."""

    def __init__(
        self,
        cost: Callable[[int], float],
        build: Callable[[int], float] = lambda n: 0.0,
        held: Callable[[int], float] = lambda n: 100.0 * n,
        interrupt_after: float = math.inf,
    ) -> None:
        self.time = 0.0
        self.cost, self.build, self.held, self.interrupt_after = cost, build, held, interrupt_after
        self.taken: list[tuple[int, int]] = []
        self.allowed: list[float] = []

    def now(self) -> int:
        return int(self.time)

    def take(self, size: int, calls: int) -> Reading:
        self.taken.append((size, calls))
        cost = self.cost(size)
        if cost * calls > self.interrupt_after:
            self.time += self.interrupt_after
            raise Overrun
        elapsed = cost * calls + self.build(size)
        self.time += elapsed
        return Reading(size=size, cost=cost, calls=calls, wall=cost, elapsed=elapsed)

    def campaign(self, **limits: Any) -> Campaign:
        return Campaign(
            take=self.take,
            footprint=self.held,
            now=self.now,
            limits=Limits(**limits),
            seed="a test",
            allow=self.allowed.append,
        )


def asks(*requests: Any) -> Generator[Any, Any, list[Any]]:
    """A rule that makes `requests` and returns the answers."""
    answers: list[Any] = []
    for request in requests:
        answer = yield request
        answers.append(answer)
    return answers


def climb(bench: Bench, cost: float = 5 * MS, **limits: Any) -> Ladder:
    (ladder,) = bench.campaign(**limits).run(asks(Climb(cost)))
    return ladder


def rounds(bench: Bench, *requests: Rounds, cost: float = 5 * MS, **limits: Any) -> list[Series]:
    _, *series = bench.campaign(**limits).run(asks(Climb(cost), *requests))
    return series


def looks_ahead(
    climbed: Climb | None = None, cost: float = 60 * MS, footprint: float = float(1 << 25)
) -> Generator[Any, Any, Peeked | None]:
    """A rule that climbs, to 5 ms unless told otherwise, and looks ahead from there."""
    ladder = yield climbed or Climb(5 * MS)
    peeked: Peeked | None = yield Peek(last=len(ladder.sizes), cost=cost, footprint=footprint, beyond=1.9)
    return peeked


def peek(bench: Bench, climbed: Climb | None = None, **limits: Any) -> Peeked | None:
    return bench.campaign(**limits).run(looks_ahead(climbed))
