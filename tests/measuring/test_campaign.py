"""The campaign on a virtual clock: every reading charges the clock what the body costs, and nothing else moves it."""

from __future__ import annotations

import itertools
import math
from collections.abc import Generator
from typing import Any

import pytest

from pytest_growthbudget.measuring.campaign import MOST_CLIMBED, MS
from pytest_growthbudget.measuring.readings import Climb, Rounds, Series
from tests.measuring.bench import Bench, asks, climb, rounds


def test_the_climb_steps_by_half_octaves_from_a_start_that_is_no_power_of_two() -> None:
    ladder = climb(Bench(lambda n: 100.0 * n))
    ratios = [b / a for a, b in zip(ladder.sizes, ladder.sizes[1:], strict=False)]
    assert 4 <= ladder.sizes[0] <= 6
    assert all(1.15 < ratio < 1.7 for ratio in ratios)
    assert all(abs(ratio - math.sqrt(2)) < 0.02 for ratio in ratios[10:])
    assert not any(size & (size - 1) == 0 for size in ladder.sizes[4:])


def test_the_climb_ends_with_the_first_size_that_costs_more_than_asked() -> None:
    ladder = climb(Bench(lambda n: 100.0 * n))
    assert ladder.costs[-1] > 5 * MS >= ladder.costs[-2]
    assert ladder.ended == ""
    assert ladder.costs == tuple(100.0 * n for n in ladder.sizes)


def test_the_first_readable_size_is_the_first_that_costs_the_floor() -> None:
    ladder = climb(Bench(lambda n: 100.0 * n))
    assert ladder.costs[ladder.readable] >= 5_000 > ladder.costs[ladder.readable - 1]


def test_a_later_climb_goes_on_where_the_first_stopped() -> None:
    low, high = Bench(lambda n: 100.0 * n).campaign().run(asks(Climb(5 * MS), Climb(30 * MS)))
    assert high.sizes[: len(low.sizes)] == low.sizes
    assert high.costs[-1] > 30 * MS >= high.costs[-2]


def test_a_body_whose_cost_does_not_grow_is_not_climbed_for_ever() -> None:
    ladder = climb(Bench(lambda n: 6_000.0, held=lambda n: 500.0))
    assert len(ladder.sizes) == MOST_CLIMBED


def test_quarter_octaves_where_half_octaves_give_too_few_sizes() -> None:
    ladder = climb(Bench(lambda n: 5.0 * n**3))
    usable = ladder.sizes[ladder.readable :]
    ratios = [b / a for a, b in itertools.pairwise(usable)]
    assert max(ratios) < 1.3


@pytest.mark.parametrize("base", [1.05, 1.5, 2.0, 4.0, 8.0])
def test_a_body_that_is_secretly_exponential_does_not_hang_the_climb(base: float) -> None:
    bench = Bench(lambda n: 1_000.0 * min(base, 1e9) ** min(n, 600 / math.log(base)))
    ladder = climb(bench, cost=30 * MS)
    rise = [b / a for a, b in zip(ladder.costs, ladder.costs[1:], strict=False)]
    assert max(rise[1:], default=0.0) <= max(8.01, base * 1.01)
    assert bench.time < 10e9


def test_a_call_that_overruns_ends_the_climb_and_keeps_the_sizes_below() -> None:
    def cliff(n: int) -> float:
        return 100.0 * n if n < 1_000 else 1e15

    ladder = climb(Bench(cliff, interrupt_after=2e9))
    assert ladder.ended == "runaway"
    assert max(ladder.sizes) < 1_000


def test_the_climb_stops_where_the_next_size_would_not_fit_the_time() -> None:
    bench = Bench(lambda n: 10.0 * n, build=lambda n: 1e5 * n)
    ladder = climb(bench, time=1e9)
    assert ladder.ended == "time"
    assert bench.time <= 1e9


def test_the_climb_stops_below_the_memory_ceiling() -> None:
    bench = Bench(lambda n: 1.0 * n, held=lambda n: 1000.0 * n)
    ladder = climb(bench, memory=2.0**20)
    assert ladder.ended == "memory"
    assert 1000 * ladder.sizes[-1] <= 2.0**20


def test_largest_and_smallest_are_kept() -> None:
    ladder = climb(Bench(lambda n: 100.0 * n), smallest=50, largest=700)
    assert (ladder.sizes[0], ladder.sizes[-1], ladder.ended) == (50, 700, "largest")


def test_an_exponential_budget_steps_by_one() -> None:
    ladder = climb(Bench(lambda n: 100.0 * 2.0**n), exponential=True)
    assert ladder.sizes == tuple(range(ladder.sizes[0], ladder.sizes[-1] + 1))
    assert ladder.sizes[0] in (1, 2)


def test_footprints_are_measured_at_a_few_sizes_and_interpolated() -> None:
    weighed: list[int] = []

    def held(n: int) -> float:
        weighed.append(n)
        return 64.0 * n

    ladder = climb(Bench(lambda n: 100.0 * n, held=held))
    assert 2 <= len(weighed) <= 6
    for size, held_bytes in zip(ladder.sizes, ladder.footprints, strict=True):
        if size >= weighed[0]:
            assert held_bytes == pytest.approx(64.0 * size, rel=1e-9)


def test_fast_bodies_are_called_many_times_in_one_reading_where_the_workload_allows() -> None:
    bench = Bench(lambda n: 80.0 + 10 * math.log2(n))
    ladder = climb(bench, repeatable=True, largest=100_000)
    assert ladder.readable == 0
    assert all(calls >= 50 for _, calls in bench.taken[3:])


def test_fast_bodies_are_not_repeated_where_the_workload_may_have_changed() -> None:
    bench = Bench(lambda n: 80.0 + 10 * math.log2(n))
    ladder = climb(bench, largest=100_000)
    assert ladder.readable == len(ladder.sizes)
    assert {calls for _, calls in bench.taken} == {1}


def test_cheap_sizes_are_read_more_often_than_dear_ones() -> None:
    (series,) = rounds(Bench(lambda n: 100.0 * n), Rounds(0, 99), per_size=8 * MS, fewest=5, most=25)
    counts = [len(costs) for costs in series.costs]
    assert counts[0] == 25
    assert counts[-1] == 5
    assert counts == sorted(counts, reverse=True)
    assert series.complete


def test_each_round_visits_every_size_once_in_shuffled_order() -> None:
    bench = Bench(lambda n: 1e4 * n)
    ladder, _ = bench.campaign().run(asks(Climb(5 * MS), Rounds(0, 99, calls=3)))
    m = len(ladder.sizes)
    read = [size for size, _ in bench.taken[-3 * m :]]
    passes = [read[i * m : (i + 1) * m] for i in range(3)]
    assert all(sorted(one) == list(ladder.sizes) for one in passes)
    assert any(one != sorted(one) for one in passes)


def test_the_same_seed_reads_the_same_sizes_in_the_same_order() -> None:
    first, second = Bench(lambda n: 1e4 * n), Bench(lambda n: 1e4 * n)
    for bench in (first, second):
        rounds(bench, Rounds(0, 99, calls=3))
    assert first.taken == second.taken


def test_rounds_stop_at_the_time_limit_and_keep_what_was_read() -> None:
    bench = Bench(lambda n: 100.0 * n, build=lambda n: 2e4 * n)
    (series,) = rounds(bench, Rounds(0, 99, calls=60), time=1e9, cost=1 * MS)
    assert not series.complete
    assert all(len(costs) >= 1 for costs in series.costs)
    assert bench.time <= 1e9


def test_an_overrun_in_the_rounds_keeps_what_was_read() -> None:
    bench = Bench(lambda n: 1e4 * n)
    campaign = bench.campaign()

    def rule() -> Generator[Any, Any, Series]:
        yield Climb(5 * MS)
        bench.interrupt_after = 4 * MS
        series: Series = yield Rounds(0, 99)
        return series

    series = campaign.run(rule())
    assert not series.complete
    assert all(costs for costs in series.costs)


def test_a_deterministic_meter_is_read_once_and_climbs_by_the_time_a_reading_takes() -> None:
    bench = Bench(lambda n: float(n), build=lambda n: 1e3 * n)
    ladder, series = bench.campaign(clock=False, dear=30 * MS, floor=10.0).run(
        asks(Climb(math.inf, at_least=12), Rounds(0, 99))
    )
    assert len(ladder.sizes) >= 12
    assert ladder.costs[ladder.readable - 1] < 10.0 <= ladder.costs[ladder.readable]
    assert {len(costs) for costs in series.costs} == {1}
    taken = [size for size, _ in bench.taken[: -len(ladder.sizes)]]
    assert [taken.count(size) for size in ladder.sizes[:4]] == [3, 2, 2, 2], "the very first call only warms up"


def test_a_count_that_stays_below_the_floor_is_readable_all_the_same() -> None:
    ladder = climb(Bench(lambda n: 1.0, build=lambda n: 1e3 * n), clock=False, floor=10.0)
    assert ladder.readable == 0
