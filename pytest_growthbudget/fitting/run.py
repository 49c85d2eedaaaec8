"""One run of the rule: what was asked of the campaign so far, and what it answered."""

from __future__ import annotations

from collections.abc import Generator, Sequence
from dataclasses import dataclass, field

from pytest_growthbudget.fitting.evidence import Evidence, assemble, gather
from pytest_growthbudget.fitting.excess import FEWEST_SIZES
from pytest_growthbudget.measuring.readings import (
    Answer,
    Climb,
    Ladder,
    MemoryCurve,
    Peek,
    Peeked,
    Promise,
    Request,
    Rounds,
    Series,
)


@dataclass(slots=True)
class Run:
    """Asks, remembers, and never asks twice. The only mutable object of the room; one lives in each `decide`."""

    promise: Promise
    noise: float
    ladder: Ladder = field(default_factory=lambda: Ladder(sizes=(), costs=(), footprints=()))
    out_of_time: bool = False
    _series: dict[Rounds, Series] = field(default_factory=dict)
    _curve: MemoryCurve | None = None
    _curve_known: bool = False

    def curve(self) -> MemoryCurve | None:
        """The memory curve of this machine, asked for once, when it is first needed."""
        if not self._curve_known:
            self._curve, self._curve_known = self.promise.curve(), True
        return self._curve

    @property
    def curve_consulted(self) -> bool:
        """Whether memory has been allowed for in this run."""
        return self._curve is not None

    def climb(self, request: Climb) -> Generator[Request, Answer, None]:
        """Climbs further, unless the ladder has an end."""
        if not self.ladder.ended:
            answer = yield request
            assert isinstance(answer, Ladder)
            self.ladder = answer

    def read(self, *requests: Rounds) -> Generator[Request, Answer, Evidence | None]:
        """Readings over ranges of the ladder, put together; None where there are none."""
        several: list[Series] = []
        for request in requests:
            if request not in self._series:
                answer = yield request
                assert isinstance(answer, Series)
                self._series[request] = answer
                self.out_of_time = self.out_of_time or not answer.complete
            several.append(self._series[request])
        return self.gathered(several)

    def gathered(self, several: Sequence[Series]) -> Evidence | None:
        """Series of this ladder as evidence.

        Counts that are zero at some sizes only are all taken one higher: logs need that, and the offset in the
        model takes it out again.
        """
        if self.promise.deterministic and any(self.ladder.costs):
            low = min((cost for series in several for read in series.costs for cost in read), default=1.0)
            if low <= 0:
                several = [_one_higher(series) for series in several]
        footprints = dict(zip(self.ladder.sizes, self.ladder.footprints, strict=True))
        return gather(self.promise, footprints, several, self.curve, self.noise)

    def joined(self, evidence: Evidence, peeked: Peeked) -> Evidence:
        """Evidence with one much larger size after it."""
        return assemble(
            self.promise,
            [*evidence.seen.sizes.astype(int).tolist(), peeked.reading.size],
            [*evidence.seen.costs.tolist(), peeked.reading.cost],
            [*evidence.footprints.tolist(), peeked.footprint],
            [*evidence.counts, peeked.reading.calls],
            self.curve,
            self.noise,
        )

    def peek(self, request: Peek) -> Generator[Request, Answer, Peeked | None]:
        """One look at a much larger size."""
        answer = yield request
        assert answer is None or isinstance(answer, Peeked)
        return answer

    def climbed(self, first: int) -> Evidence | None:
        """The climb's own readings, which are independent of the rounds: one a size, the smaller of two."""
        sizes, costs = self.ladder.sizes[first:], self.ladder.costs[first:]
        return self.gathered([Series(sizes=sizes, costs=tuple((cost,) for cost in costs))])

    @property
    def readable(self) -> int:
        """How many sizes of the ladder last long enough for the clock."""
        return len(self.ladder.sizes) - self.ladder.readable

    @property
    def ended(self) -> str:
        """What ended the readings: the time limit in the midst of them, or what ended the climb."""
        return "rounds" if self.out_of_time else self.ladder.ended

    def too_fast(self) -> bool:
        """Whether sizes are lacking because calls are too short, not because there were too few of them."""
        return self.readable < FEWEST_SIZES <= len(self.ladder.sizes) and self.ladder.ended in ("", "largest", "memory")

    def count(self, *, cost: float = float("inf"), footprint: float = float("inf")) -> int:
        """How many sizes of the ladder, from the smallest on, keep to a cost and a footprint."""
        ladder = zip(self.ladder.costs, self.ladder.footprints, strict=True)
        return sum(each <= cost and touched <= footprint for each, touched in ladder)


def _one_higher(series: Series) -> Series:
    costs = tuple(tuple(cost + 1 for cost in read) for read in series.costs)
    return Series(sizes=series.sizes, costs=costs, complete=series.complete)
