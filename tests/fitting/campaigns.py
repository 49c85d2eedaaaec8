"""A campaign that answers from a formula: exact, instant, and able to run out of time."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

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

HALF_OCTAVES = tuple(int(50 * 2 ** (step / 2)) for step in range(48))


@dataclass
class Formula:
    """Answers a rule's requests for a body of `cost(n)` nanoseconds.

    `noise`: standard deviation of log cost. `second`: the cost in the second set, where it differs; `climbing`: that
    of the climb's own calls. `most`: how many
    sizes the ladder may have before it ends for the reason `ended`. `rounds`: how many requests for rounds are
    answered before time runs out; the next is answered with `partial` readings a size, and those after with none.
    """

    cost: Callable[[float], float]
    bytes_each: float = 10.0
    sizes: tuple[int, ...] = HALF_OCTAVES
    noise: float = 0.01
    second: Callable[[float], float] | None = None
    climbing: Callable[[float], float] | None = None
    most: int = 48
    ended: str = "largest"
    rounds: int = 99
    partial: int = 0
    readable: int | None = None
    curve: MemoryCurve | None = None
    curve_asked: int = 0
    asked: list[Request] = field(default_factory=list)
    climbed: int = 0

    def __post_init__(self) -> None:
        self.draw = np.random.default_rng(5)

    def read(self, size: int, cost: Callable[[float], float]) -> float:
        return cost(size) * math.exp(self.draw.normal(0, self.noise)) if self.noise else float(cost(size))

    def ask_curve(self) -> MemoryCurve | None:
        self.curve_asked += 1
        return self.curve

    def answer(self, request: Request) -> Answer:
        self.asked.append(request)
        if isinstance(request, Climb):
            return self.climb(request)
        if isinstance(request, Rounds):
            return self.take(request)
        return self.look(request)

    def first(self) -> int:
        if self.readable is not None:
            return self.readable
        return next((i for i, size in enumerate(self.sizes) if self.cost(size) >= 5e3), len(self.sizes))

    def climb(self, request: Climb) -> Ladder:
        most = min(self.most, len(self.sizes))
        while self.climbed < most and self.wants_more(request):
            self.climbed += 1
        sizes = self.sizes[: self.climbed]
        return Ladder(
            sizes=sizes,
            costs=tuple(self.read(size, self.climbing or self.cost) for size in sizes),
            footprints=tuple(self.bytes_each * size for size in sizes),
            ended=self.ended if self.climbed == most else "",
            readable=min(self.first(), self.climbed),
        )

    def wants_more(self, request: Climb) -> bool:
        """As the campaign does it: the size that is too dear or too large is the last one climbed."""
        if not self.climbed:
            return True
        top = self.sizes[self.climbed - 1]
        if self.cost(top) > request.cost:
            return False
        return self.climbed - self.first() < request.at_least or self.bytes_each * top <= request.footprint

    def take(self, request: Rounds) -> Series:
        self.rounds -= 1
        calls = request.calls or 5
        if self.rounds < 0:
            calls = self.partial if self.rounds == -1 else 0
        sizes = self.sizes[request.first : request.last] if calls else ()
        cost = self.second if request.repeat and self.second else self.cost
        costs = tuple(tuple(self.read(size, cost) for _ in range(calls)) for size in sizes)
        return Series(sizes=sizes, costs=costs, complete=self.rounds >= 0)

    def look(self, request: Peek) -> Peeked | None:
        fits = [
            size
            for size in self.sizes[: self.most]
            if self.cost(size) <= request.cost and self.bytes_each * size <= request.footprint
        ]
        if not fits or fits[-1] < request.beyond * self.sizes[request.last - 1]:
            return None
        reading = Reading(size=fits[-1], cost=self.read(fits[-1], self.cost))
        return Peeked(reading=reading, footprint=self.bytes_each * fits[-1])

    def decide(self, log_growth: Callable[[float], float], **promise: Any) -> Finding:
        """The finding on this body held to a growth."""
        return converse(decide(Promise(log_growth=log_growth, curve=self.ask_curve, **promise)), self.answer)

    def of(self, kind: type) -> list[Any]:
        """The requests of one kind, in order."""
        return [request for request in self.asked if isinstance(request, kind)]


LINEAR: Callable[[float], float] = math.log
BUDGETS: Mapping[str, Callable[[float], float]] = {
    "1": lambda n: 0.0,
    "log n": lambda n: math.log(math.log(n)),
    "n": math.log,
    "n log n": lambda n: math.log(n) + math.log(math.log(n)),
    "n^2": lambda n: 2 * math.log(n),
}

FLAT_CURVE = MemoryCurve(
    log_bytes=(math.log(2**17), math.log(2**26)),
    log_inflation=(0.0, 0.01),
    extra=(0.0, 0.1),
    resident=2.0**26,
    cheapest=3.0,
)
STEEP_CURVE = MemoryCurve(
    log_bytes=tuple(math.log(2.0**power) for power in (17, 20, 22, 24, 26)),
    log_inflation=tuple(map(math.log, (1.0, 1.2, 3.0, 6.0, 8.0))),
    extra=(0.0, 5.0, 60.0, 150.0, 200.0),
    resident=2.0**20,
    cheapest=3.0,
)
