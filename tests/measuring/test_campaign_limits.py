"""What a campaign spends and where it stops: time, memory, calls, and calls that do not come back."""

from __future__ import annotations

import itertools
import math
from collections.abc import Generator
from typing import Any

import pytest

from pytest_growthbudget.measuring.campaign import ENOUGH_COUNTED, MOST_COUNTED, MS, RISK_OF_PEEK
from pytest_growthbudget.measuring.guards import Exhausted
from pytest_growthbudget.measuring.readings import Climb, Ladder, Peek, Reading, Rounds, Series
from tests.measuring.bench import Bench, asks, climb, looks_ahead, peek, rounds

# ------------------------------------------------------------ how far a meter that is no clock climbs


def counted(bench: Bench, at_least: int = 0, **limits: Any) -> Ladder:
    limits = {"clock": False, "floor": 10.0, "dear": 30 * MS, **limits}
    (ladder,) = bench.campaign(**limits).run(asks(Climb(math.inf, at_least=at_least)))
    return ladder


def test_twenty_sizes_above_the_floor_are_enough_to_count() -> None:
    ladder = counted(Bench(float))
    assert sum(cost >= 10 for cost in ladder.costs) == ENOUGH_COUNTED
    assert ladder.costs[-1] > 10


def test_a_count_that_stays_below_the_floor_is_climbed_to_forty_sizes() -> None:
    assert len(counted(Bench(lambda n: 1.0)).sizes) == MOST_COUNTED


def test_a_count_is_climbed_until_a_reading_is_dear() -> None:
    ladder = counted(Bench(float, build=lambda n: 1e5 * n))
    assert 30 * MS <= 1e5 * ladder.sizes[-1] < 1.5 * 30 * MS


def test_as_many_sizes_as_asked_for_are_counted_however_dear() -> None:
    ladder = counted(Bench(float, build=lambda n: 40 * MS), at_least=15)
    assert len(ladder.sizes) == 15


def test_as_many_readable_sizes_as_asked_for_are_climbed_however_large() -> None:
    bench = Bench(lambda n: 100.0 * n, held=lambda n: 1e6 * n)
    (ladder,) = bench.campaign().run(asks(Climb(30 * MS, footprint=1.0, at_least=9)))
    assert sum(cost >= 5_000 for cost in ladder.costs) == 9


# ------------------------------------------------------------ sizes filled in


@pytest.mark.parametrize("clock", [True, False])
def test_a_narrow_range_of_sizes_is_filled_in(clock: bool) -> None:
    """Half octaves from 50 to 700 would be eight sizes."""
    (ladder,) = Bench(lambda n: 1e4 * n).campaign(smallest=50, largest=700, clock=clock).run(asks(Climb(1e9)))
    assert len(ladder.sizes) > 12
    assert ladder.sizes == tuple(sorted(set(ladder.sizes)))


def test_sizes_are_filled_in_once() -> None:
    first, again = Bench(lambda n: 5.0 * n**3).campaign().run(asks(Climb(5 * MS), Climb(5 * MS)))
    assert first == again


def test_nothing_is_called_after_a_call_that_ran_away() -> None:
    bench = Bench(lambda n: 1e4 * n if n < 60 else 1e15, interrupt_after=1e9)
    campaign = bench.campaign()
    (ladder,) = campaign.run(asks(Climb(5 * MS)))
    assert ladder.ended == "runaway"
    assert campaign.ran_away == (bench.taken[-1][0], bench.allowed[-1])
    assert bench.taken[-1][0] >= 60
    assert all(size < 60 for size, _ in bench.taken[:-1])


# ------------------------------------------------------------ time


def test_a_call_of_the_climb_may_take_half_of_what_is_left_and_one_of_the_rounds_all() -> None:
    bench = Bench(lambda n: 1e4 * n)
    left: list[float] = []
    campaign = bench.campaign(time=1e9)
    plain = campaign.allow

    def allow(time: float) -> None:
        left.append(campaign.left)
        plain(time)

    campaign.allow = allow
    campaign.run(asks(Climb(5 * MS), Rounds(0, 99, calls=1)))
    assert bench.allowed[:-1] == [each / 2 for each in left[:-1]]
    assert bench.allowed[-1] == math.inf


def test_time_spent_elsewhere_is_given_back() -> None:
    campaign = Bench(lambda n: 1e4 * n).campaign(time=1e9)

    def rule() -> Generator[Any, Any, float]:
        yield Climb(5 * MS)
        before = campaign.left
        campaign.extend(3e8)
        return campaign.left - before

    assert campaign.run(rule()) == 3e8


@pytest.mark.parametrize("limits", [{"fewest": 3}, {"fewest": 8}, {"clock": False, "once": 6, "dear": math.inf}])
def test_a_climb_that_time_ended_leaves_time_for_one_set_of_readings(limits: dict[str, Any]) -> None:
    bench = Bench(lambda n: 10.0 * n, build=lambda n: 1e5 * n)
    calls = limits.get("once") or limits["fewest"]
    ladder, series = bench.campaign(time=1e9, **limits).run(asks(Climb(math.inf), Rounds(0, 99, calls=calls)))
    assert ladder.ended == "time"
    assert series.complete
    assert bench.time <= 1e9


def test_a_body_that_takes_half_the_time_is_called_once_at_its_size() -> None:
    bench = Bench(lambda n: 4e8)
    ladder = climb(bench, time=1e9)
    assert len(ladder.sizes) == 1
    assert bench.time <= 1e9


# ------------------------------------------------------------ memory


def test_a_workload_that_cannot_be_built_ends_the_climb() -> None:
    class Full(Bench):
        def take(self, size: int, calls: int) -> Reading:
            if size > 1_000:
                raise Exhausted
            return super().take(size, calls)

    bench = Full(lambda n: 100.0 * n)
    campaign = bench.campaign()
    (ladder,) = campaign.run(asks(Climb(5 * MS)))
    assert ladder.ended == "memory"
    assert max(ladder.sizes) <= 1_000 < (campaign.exhausted or 0)
    assert campaign.ran_away is None


def test_a_workload_that_cannot_be_weighed_ends_the_climb_with_footprints_unknown() -> None:
    def held(n: int) -> float:
        raise Exhausted

    campaign = Bench(lambda n: 1e4 * n, held=held).campaign()
    (ladder,) = campaign.run(asks(Climb(5 * MS)))
    assert ladder.ended == "memory"
    assert campaign.exhausted == ladder.sizes[-1]
    assert set(ladder.footprints) == {0.0}


@pytest.mark.parametrize("power", [0.0, 1.0, 2.0])
def test_footprints_follow_a_power_of_the_size(power: float) -> None:
    weighed: list[int] = []

    def held(n: int) -> float:
        weighed.append(n)
        return 64.0 * n**power

    ladder = climb(Bench(lambda n: 100.0 * n, held=held))
    for size, known in zip(ladder.sizes, ladder.footprints, strict=True):
        assert known == pytest.approx(64.0 * max(size, weighed[0]) ** power)


def test_a_footprint_is_foreseen_to_grow_as_a_square_at_most() -> None:
    """A step between the two largest sizes that were weighed would else be foreseen for ever."""
    weighed: list[int] = []

    def held(n: int) -> float:
        weighed.append(n)
        return 1e3 if n < 1_000 else 1e3 * (n / 1_000) ** 4

    ladder = climb(Bench(lambda n: 100.0 * n, held=held), memory=math.inf)
    top = weighed[-1]
    assert ladder.footprints[-1] == pytest.approx(held(top) * (ladder.sizes[-1] / top) ** 2.1)


def test_dear_workloads_are_not_weighed() -> None:
    """Tracing slows building down; 80 ms would become most of a second."""
    weighed: list[int] = []

    def held(n: int) -> float:
        weighed.append(n)
        return 64.0 * n

    climb(Bench(lambda n: 1.0 * n, build=lambda n: 1e6 * n, held=held), floor=1.0)
    assert weighed[1:] != []
    assert all(1e6 * n <= 80 * MS for n in weighed[1:])


# ------------------------------------------------------------ calls and readings


def test_a_reading_of_a_repeatable_body_lasts_as_long_as_a_batch() -> None:
    bench = Bench(lambda n: 100.0 * n)
    ladder, series = bench.campaign(repeatable=True, batch=200_000.0).run(asks(Climb(5 * MS), Rounds(0, 99, calls=1)))
    for size, calls in bench.taken[-len(ladder.sizes) :]:
        assert calls == max(1, math.ceil(200_000 / (100 * size)))
    assert series.sizes == ladder.sizes
    assert ladder.readable == 0
    of_the_largest = [calls for size, calls in bench.taken if size == ladder.sizes[-1]]
    assert of_the_largest == [1, 1, 1]


def test_readings_are_limited_by_what_the_body_takes_and_by_what_its_fixtures_take() -> None:
    by_body = Bench(lambda n: 1e4 * n)
    (series,) = rounds(by_body, Rounds(0, 99), per_size=8 * MS, per_size_elapsed=math.inf, fewest=2, most=20)
    for size, costs in zip(series.sizes, series.costs, strict=True):
        assert len(costs) == min(max(int(8 * MS / (1e4 * size)), 2), 20)
    by_fixtures = Bench(lambda n: 6e3, build=lambda n: 1e5 * n)
    (series,) = rounds(by_fixtures, Rounds(0, 20), per_size=math.inf, per_size_elapsed=8 * MS, fewest=2, most=20)
    for size, costs in zip(series.sizes, series.costs, strict=True):
        assert len(costs) == min(max(int(8 * MS / (6e3 + 1e5 * size)), 2), 20)


def test_rounds_over_no_size_are_an_empty_series() -> None:
    (series,) = rounds(Bench(lambda n: 1e4 * n), Rounds(99, 120))
    assert series == Series(sizes=(), costs=(), complete=True)


# ------------------------------------------------------------ the look ahead


@pytest.mark.parametrize("power", [1.0, 2.0])
def test_a_far_look_ahead_goes_in_steps_that_each_risk_thirtyfold(power: float) -> None:
    bench = Bench(lambda n: 10.0 * n**power, held=lambda n: 1.0)
    peeked = bench.campaign(time=1e12).run(looks_ahead(cost=20_000 * MS))
    assert peeked is not None
    sizes = [size for size, _ in itertools.groupby(size for size, _ in bench.taken)]
    costs = [bench.cost(size) for size in sizes]
    assert costs[-1] == pytest.approx(20_000 * MS, rel=0.05)
    assert costs[-2] == pytest.approx(costs[-3] * RISK_OF_PEEK, rel=0.05)
    assert [size for size, _ in bench.taken[-3:]] == [sizes[-2], sizes[-1], sizes[-1]]


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

    def rule() -> Generator[Any, Any, tuple[Ladder, object]]:
        ladder = yield Climb(5 * MS)
        before.append(len(bench.taken))
        peeked = yield Peek(last=len(ladder.sizes), cost=60 * MS, footprint=math.inf, beyond=1.9)
        return ladder, peeked

    ladder, peeked = bench.campaign(time=2e9).run(rule())
    assert ladder.ended == ended
    assert peeked is None
    assert len(bench.taken) == before[0]


def test_no_look_ahead_that_does_not_fit_the_time() -> None:
    bench = Bench(lambda n: 100.0 * n)
    campaign = bench.campaign(time=1e9)

    def rule() -> Generator[Any, Any, object]:
        ladder = yield Climb(5 * MS)
        campaign.extend(150 * MS - campaign.left)
        peeked: object = yield Peek(last=len(ladder.sizes), cost=60 * MS, footprint=math.inf, beyond=1.9)
        return peeked

    assert campaign.run(rule()) is None


def test_a_look_ahead_that_runs_away_is_remembered() -> None:
    bench = Bench(lambda n: 100.0 * n if n < 1e5 else 1e15, interrupt_after=1e9)
    campaign = bench.campaign()
    assert campaign.run(looks_ahead()) is None
    assert campaign.ran_away == (bench.taken[-1][0], bench.allowed[-1])
    assert bench.taken[-1][0] >= 1e5


def test_no_look_ahead_from_two_sizes() -> None:
    assert peek(Bench(lambda n: 1e4 * n), smallest=100, largest=101) is None
