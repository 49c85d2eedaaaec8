"""What a campaign spends and where it stops: time, memory, calls, and calls that do not come back."""

from __future__ import annotations

import itertools
import math
from collections.abc import Generator
from typing import Any

import pytest

from pytest_growthbudget.measuring.campaign import ENOUGH_COUNTED, MOST_COUNTED, MS
from pytest_growthbudget.measuring.guards import Exhausted
from pytest_growthbudget.measuring.readings import Climb, Ladder, Peek, Reading, Rounds, Series
from tests.measuring.bench import Bench, asks, climb, rounds

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


def test_calls_that_are_repeated_are_readable_however_cheap() -> None:
    bench = Bench(lambda n: 80.0 + n, held=lambda n: 1e6 * n)
    (ladder,) = bench.campaign(repeatable=True).run(asks(Climb(30 * MS, footprint=1.0, at_least=9)))
    assert len(ladder.sizes) == 9


# ------------------------------------------------------------ sizes filled in


@pytest.mark.parametrize("clock", [True, False])
def test_a_narrow_range_of_sizes_is_filled_in(clock: bool) -> None:
    """Half octaves from 50 to 700 would be eight sizes."""
    (ladder,) = Bench(lambda n: 1e4 * n).campaign(smallest=50, largest=700, clock=clock).run(asks(Climb(1e9)))
    assert len(ladder.sizes) > 12
    assert ladder.sizes == tuple(sorted(set(ladder.sizes)))


def test_a_narrow_range_of_sizes_of_a_repeated_body_is_filled_in() -> None:
    assert len(climb(Bench(lambda n: 80.0 + n), smallest=50, largest=700, repeatable=True).sizes) > 12


def test_two_sizes_are_filled_in() -> None:
    assert climb(Bench(lambda n: 1e4 * n), smallest=100, largest=110).sizes == (100, 105, 110)


def test_sizes_are_filled_in_as_far_as_time_allows() -> None:
    bench = Bench(lambda n: 1e8)
    ladder = climb(bench, cost=1e9, time=2.2e9, smallest=50)
    assert ladder.ended == "time"
    assert bench.time <= 2.2e9


def test_sizes_are_filled_in_before_any_was_read() -> None:
    """A rule asks for rounds by place on the ladder: a later climb adds at the top alone, however few sizes it has."""
    campaign = Bench(lambda n: 100.0 * n).campaign(smallest=3000, largest=80_000)
    low, high = campaign.run(asks(Climb(5 * MS), Climb(30 * MS)))
    assert high.ended == "largest"
    assert high.sizes[: len(low.sizes)] == low.sizes


def test_a_climb_goes_on_in_the_steps_in_which_sizes_were_filled_in() -> None:
    low, high = Bench(lambda n: 5.0 * n**3).campaign().run(asks(Climb(5 * MS), Climb(300 * MS)))
    added = high.sizes[len(low.sizes) - 1 :]
    assert len(added) > 3
    assert all(b / a < 1.3 for a, b in itertools.pairwise(added))


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
    campaign.run(asks(Climb(5 * MS), Peek(8, 60 * MS, math.inf, 1.9), Rounds(0, 99, calls=1)))
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


@pytest.mark.parametrize("time", [0.3e9, 1e9, 2e9, 3e9, 5e9])
def test_time_is_left_even_where_each_size_costs_four_times_the_one_before(time: float) -> None:
    bench = Bench(lambda n: 1e4 * 4.0**n)
    ladder, series = bench.campaign(time=time, exponential=True).run(asks(Climb(math.inf), Rounds(0, 99, calls=3)))
    assert ladder.ended == "time"
    assert series.complete
    assert bench.time <= time


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


@pytest.mark.parametrize("repeatable", [False, True])
@pytest.mark.parametrize("power", [0.0, 1.0, 2.0])
def test_footprints_follow_a_power_of_the_size(power: float, repeatable: bool) -> None:
    weighed: list[int] = []

    def held(n: int) -> float:
        weighed.append(n)
        return 64.0 * n**power

    each = 0.1 if repeatable else 100.0
    ladder = climb(Bench(lambda n: each * n, held=held), repeatable=repeatable, largest=100_000)
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
    sizes = [size for size, _ in bench.taken]
    assert {sizes.count(size) for size in ladder.sizes[1:]} == {3}, "two in the climb, none of them for nothing"


def test_readings_are_limited_by_what_the_body_takes_and_by_what_its_fixtures_take() -> None:
    by_body = Bench(lambda n: 1e4 * n)
    (series,) = rounds(by_body, Rounds(0, 99), per_size=8 * MS, per_size_elapsed=math.inf, fewest=2, most=20)
    for size, costs in zip(series.sizes, series.costs, strict=True):
        assert len(costs) == min(max(int(8 * MS / (1e4 * size)), 2), 20)
    by_fixtures = Bench(lambda n: 6e3, build=lambda n: 1e5 * n)
    (series,) = rounds(by_fixtures, Rounds(0, 20), per_size=math.inf, per_size_elapsed=8 * MS, fewest=2, most=20)
    for size, costs in zip(series.sizes, series.costs, strict=True):
        assert len(costs) == min(max(int(8 * MS / (6e3 + 1e5 * size)), 2), 20)


def test_readings_of_a_repeated_body_are_limited_by_what_all_its_calls_take() -> None:
    repeated = Bench(lambda n: 80.0)
    (series,) = rounds(repeated, Rounds(0, 20), repeatable=True, largest=10_000, per_size=2 * MS, most=20)
    assert {len(costs) for costs in series.costs} == {10}


def test_rounds_over_no_size_are_an_empty_series() -> None:
    (series,) = rounds(Bench(lambda n: 1e4 * n), Rounds(99, 120))
    assert series == Series(sizes=(), costs=(), complete=True)
