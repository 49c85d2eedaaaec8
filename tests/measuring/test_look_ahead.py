"""The look ahead: one much larger size, reached without more risk than it was allowed."""

from __future__ import annotations

import itertools
import math
from collections.abc import Generator
from typing import Any

import pytest

from pytest_growthbudget.measuring.campaign import MS, RISK_OF_PEEK
from pytest_growthbudget.measuring.guards import Exhausted
from pytest_growthbudget.measuring.readings import Climb, Ladder, Peek, Reading
from tests.measuring.bench import Bench, looks_ahead, peek


def test_the_look_ahead_goes_to_the_size_that_is_foreseen_to_cost_as_much_as_allowed() -> None:
    peeked = peek(Bench(lambda n: 100.0 * n))
    assert peeked is not None
    assert 20 * MS < peeked.reading.cost <= 61 * MS


def test_the_look_ahead_stays_under_the_footprint() -> None:
    peeked = peek(Bench(lambda n: 100.0 * n, held=lambda n: 300.0 * n))
    assert peeked is not None
    assert peeked.footprint <= 1 << 25


def test_the_look_ahead_sees_a_cost_that_soars_and_stops_there() -> None:
    bench = Bench(lambda n: 100.0 * n + 1e-6 * n**3)
    peeked = peek(bench)
    assert peeked is not None
    assert peeked.reading.cost > 5 * MS
    assert bench.time < 5e9


def test_the_look_ahead_goes_as_far_as_the_time_for_the_workload_allows() -> None:
    """A cheap body whose workload is dear to build: the size that would cost enough is out of reach."""

    def far(time: float) -> tuple[int, float]:
        bench = Bench(lambda n: 1e4 + n, build=lambda n: 2e3 * n, held=lambda n: 8.0 * n)
        peeked = peek(bench, Climb(5 * MS, float(1 << 20), at_least=9), time=time)
        assert peeked is not None
        return peeked.reading.size, bench.time

    (near, spent), (further, more) = far(20e9), far(60e9)
    assert 1.9 * 145_000 < near < further
    assert spent < 20e9
    assert more < 60e9


def test_no_look_ahead_past_the_largest_size() -> None:
    assert peek(Bench(lambda n: 100.0 * n), largest=60_000) is None


@pytest.mark.parametrize("power", [1.0, 2.0])
def test_a_far_look_ahead_goes_in_steps_that_each_risk_thirtyfold(power: float) -> None:
    bench = Bench(lambda n: 10.0 * n**power, held=lambda n: 1.0)
    peeked = bench.campaign(time=1e12).run(looks_ahead(cost=20_000 * MS))
    assert peeked is not None
    sizes = [size for size, _ in itertools.groupby(size for size, _ in bench.taken)]
    costs = [bench.cost(size) for size in sizes]
    assert costs[-1] == pytest.approx(20_000 * MS, rel=0.05)
    assert costs[-2] == pytest.approx(costs[-3] * RISK_OF_PEEK, rel=0.05)
    assert bench.taken[-3:] == [(sizes[-2], 1), (sizes[-1], 1), (sizes[-1], 1)]
    assert sizes[-2] > max(sizes[:-2])


def test_a_step_that_already_costs_half_of_what_was_allowed_is_the_last() -> None:
    bench = Bench(lambda n: 10.0 * n * (1 if n < 1e6 else 100), held=lambda n: 1.0)
    peeked = bench.campaign(time=1e12).run(looks_ahead(cost=20_000 * MS))
    assert peeked is not None
    assert 10_000 * MS < peeked.reading.cost < 20_000 * MS
    assert peeked.reading.size == max(size for size, _ in bench.taken)


def test_the_look_ahead_takes_the_smaller_of_two_calls() -> None:
    class Settling(Bench):
        def take(self, size: int, calls: int) -> Reading:
            again = bool(self.taken) and self.taken[-1][0] == size
            reading = super().take(size, calls)
            return reading if again else Reading(size=size, cost=1.5 * reading.cost, elapsed=reading.elapsed)

    peeked = peek(Settling(lambda n: 100.0 * n))
    assert peeked is not None
    assert peeked.reading.cost == 100.0 * peeked.reading.size
    assert peeked.reading.calls == 1


def test_the_look_ahead_must_go_far_beyond_the_sizes_it_was_asked_about() -> None:
    """Not beyond those that happen to have been climbed."""

    def reached(beyond: float, below: int) -> bool:
        def rule() -> Generator[Any, Any, bool]:
            ladder = yield Climb(5 * MS)
            peeked = yield Peek(last=len(ladder.sizes) - below, cost=12 * MS, footprint=math.inf, beyond=beyond)
            return peeked is not None

        return Bench(lambda n: 100.0 * n).campaign().run(rule())

    assert not reached(3.0, 0)
    assert reached(3.0, 2)


@pytest.mark.parametrize("ended", ["time", "runaway"])
def test_no_look_ahead_where_the_climb_was_cut_off(ended: str) -> None:
    dear = (lambda n: 1e5 * n) if ended == "time" else (lambda n: 0.0)
    bench = Bench(lambda n: 100.0 * n if ended == "time" or n < 1_000 else 1e15, build=dear, interrupt_after=1e9)
    before: list[int] = []
    campaign = bench.campaign(time=2e9)

    def rule() -> Generator[Any, Any, tuple[Ladder, object]]:
        ladder = yield Climb(5 * MS)
        before.append(len(bench.taken))
        campaign.extend(1e12)
        peeked = yield Peek(last=len(ladder.sizes), cost=60 * MS, footprint=math.inf, beyond=1.9)
        return ladder, peeked

    ladder, peeked = campaign.run(rule())
    assert ladder.ended == ended
    assert peeked is None
    assert len(bench.taken) == before[0]


def with_time_left(bench: Bench, left: float) -> object:
    campaign = bench.campaign(time=1e9)

    def rule() -> Generator[Any, Any, object]:
        ladder = yield Climb(5 * MS)
        campaign.extend(left - campaign.left)
        peeked: object = yield Peek(last=len(ladder.sizes), cost=60 * MS, footprint=math.inf, beyond=1.9)
        assert campaign.left >= 0
        return peeked

    return campaign.run(rule())


def test_no_look_ahead_that_does_not_fit_the_time() -> None:
    """Three calls at twice the largest size, which took 5 ms, take 30 ms."""
    assert with_time_left(Bench(lambda n: 100.0 * n), 20 * MS) is None
    assert with_time_left(Bench(lambda n: 100.0 * n), 35 * MS) is not None


def test_one_call_is_enough_where_it_took_most_of_the_time_left() -> None:
    bench = Bench(lambda n: 100.0 * n if n < 1e5 else 200 * MS)
    assert with_time_left(bench, 300 * MS) is not None
    sizes = [size for size, _ in bench.taken]
    assert sizes.count(max(sizes)) == 1


def test_a_look_ahead_that_runs_away_is_remembered() -> None:
    bench = Bench(lambda n: 100.0 * n if n < 1e5 else 1e15, interrupt_after=1e9)
    campaign = bench.campaign()
    assert campaign.run(looks_ahead()) is None
    assert campaign.ran_away == (bench.taken[-1][0], bench.allowed[-1])
    assert bench.taken[-1][0] >= 1e5


def test_a_workload_that_cannot_be_built_for_the_look_ahead_is_remembered() -> None:
    class Full(Bench):
        def take(self, size: int, calls: int) -> Reading:
            if size > 1e5:
                raise Exhausted
            return super().take(size, calls)

    campaign = Full(lambda n: 100.0 * n).campaign()
    assert campaign.run(looks_ahead()) is None
    assert campaign.ran_away is None
    assert campaign.exhausted is not None
    assert campaign.exhausted > 1e5


def test_no_look_ahead_from_two_sizes() -> None:
    assert peek(Bench(lambda n: 1e4 * n), smallest=100, largest=101) is None
