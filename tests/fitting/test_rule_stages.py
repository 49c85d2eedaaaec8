"""What each stage of the rule adds: dearer sizes, the last sizes alone, the look ahead, suspicion."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import pytest

from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.measuring.readings import Climb, Rounds
from tests.fitting.campaigns import BUDGETS, FLAT_CURVE, STEEP_CURVE, Formula


def growing(exponent: float) -> Callable[[float], float]:
    return lambda n: 100.0 * n**exponent


@pytest.mark.parametrize(
    ("exponent", "verdict", "stage"),
    [
        (1.0, "within", "A"),
        (1.04, "within", "B"),
        (1.08, "within", "C"),
        (1.15, "undecided", "C"),
        (1.25, "exceeded", "A"),
    ],
)
def test_the_surer_a_small_excess_the_more_is_read_before_it_is_believed(
    exponent: float, verdict: str, stage: str
) -> None:
    found = Formula(growing(exponent)).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == (verdict, stage)
    assert found.confirmed is (True if verdict == "exceeded" else None)
    if verdict == "undecided":
        assert found.reason == reasons.SUSPICIOUS


def test_where_no_dearer_sizes_are_left_only_a_sure_excess_is_suspicious() -> None:
    slight = Formula(growing(1.08), most=21).decide(BUDGETS["n"])
    assert (slight.verdict, slight.stage) == ("within", "B")
    surer = Formula(growing(1.13), most=21).decide(BUDGETS["n"])
    assert (surer.verdict, surer.stage, surer.reason) == ("undecided", "B", reasons.SUSPICIOUS)


def test_far_outside_the_caches_a_small_excess_is_no_ground_for_suspicion() -> None:
    found = Formula(growing(1.08), bytes_each=400.0, curve=STEEP_CURVE).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("within", "B")


def test_dear_sizes_are_read_three_times_and_no_dearer_than_160_ms() -> None:
    case = Formula(growing(1.13))
    found = case.decide(BUDGETS["n"])
    middle, dear = case.of(Rounds)[-2:]
    assert (middle.calls, dear.calls) == (0, 3)
    assert middle.last == dear.first
    assert found.sizes[-1].cost <= 160e6 < case.cost(case.sizes[dear.last])
    assert case.of(Climb)[-1] == Climb(160e6, 16 * 2.0**20)


def test_dear_sizes_are_no_larger_than_16_mib() -> None:
    """So wild a body that no stage can tell."""
    case = Formula(growing(1.0), bytes_each=30.0, noise=0.8)
    assert case.decide(BUDGETS["n"]).verdict == "undecided"
    dear = case.of(Rounds)[-1]
    assert dear.calls == 3
    assert 30 * case.sizes[dear.last - 1] <= 16 * 2**20 < 30 * case.sizes[dear.last]


def test_what_dear_sizes_show_must_show_in_a_second_set_of_them() -> None:
    """A body whose excess begins where calls take 15 ms."""

    def cost(n: float) -> float:
        return 60.0 * n**1.08 * max(1.0, n / 1e5)

    case = Formula(cost, bytes_each=0.5)
    found = case.decide(BUDGETS["n"])
    assert (found.verdict, found.stage, found.confirmed) == ("exceeded", "C", True)
    *_, middle, dear, middle_again, dear_again = case.of(Rounds)
    assert middle_again == replace(middle, repeat=1)
    assert dear_again == replace(dear, repeat=1)

    def sound(n: float) -> float:
        return 60.0 * n

    unconfirmed = Formula(cost, bytes_each=0.5, second=sound).decide(BUDGETS["n"])
    assert (unconfirmed.verdict, unconfirmed.reason) == ("undecided", reasons.UNCONFIRMED)


def bending(knee: float) -> Callable[[float], float]:
    """Linear up to a knee, n^1.5 beyond."""
    return lambda n: 100.0 * n * max(1.0, n / knee) ** 0.5


def test_an_excess_in_the_last_ten_sizes_alone_is_found_and_said_of_them() -> None:
    case = Formula(bending(2e4), bytes_each=1.0)
    found = case.decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("exceeded", "B")
    assert len(found.sizes) > 10
    assert found.excess is not None
    assert found.reason == (
        f"over n = {found.sizes[-10].size} to {found.sizes[-1].size} the excess is at least {found.excess.low:.2f}, "
        "above the slack of 0.15, and a second set of readings agrees"
    )


def test_stage_a_judges_no_sizes_alone() -> None:
    """Ten of its cheap sizes may be a single step; the same body is exceeded with those of stage B."""
    found = Formula(bending(3e3), bytes_each=1.0).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("exceeded", "B")


def test_outside_the_caches_the_last_sizes_are_not_judged_alone() -> None:
    """The edge of a cache among ten sizes tilts them all."""
    found = Formula(bending(2e4), bytes_each=24.0, curve=FLAT_CURVE).decide(BUDGETS["n"])
    assert found.verdict != "exceeded"


def test_the_budget_is_within_where_there_is_no_larger_size_to_look_at() -> None:
    found = Formula(growing(1.0), most=20).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("within", "A")


@pytest.mark.parametrize(("exponent", "stage"), [(1.36, "A"), (1.45, "B"), (1.6, "C")])
def test_the_look_ahead_tolerates_growth_up_to_the_limit(exponent: float, stage: str) -> None:
    """Linear as far as stage A reads; one much larger size may cost n^0.30 more than the last of those foretell."""

    def cost(n: float) -> float:
        return 100.0 * n * max(1.0, n / 3.7e4) ** (exponent - 1)

    found = Formula(cost, noise=0.001, bytes_each=1.0).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("within" if stage == "A" else "exceeded", stage)


def test_what_the_look_ahead_saw_is_not_forgotten_at_stage_b() -> None:
    """A square that begins where calls take 10 ms: all sizes up to 32 ms taken together would pass for a line."""

    def cost(n: float) -> float:
        return 100.0 * n * max(1.0, n / 1e5)

    found = Formula(cost, noise=0.001, bytes_each=1.0).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("exceeded", "C")


def scattered(n: float) -> float:
    """Linear work on 400 bytes each, several times slower outside the caches."""
    return n * (25 + (0 if n * 400 < 2**21 else 60 + 30 * min(math.log2(n * 400 / 2**21), 4)))


def test_the_look_ahead_allows_for_memory() -> None:
    found = Formula(scattered, bytes_each=400.0, curve=STEEP_CURVE).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("within", "A")
    assert found.excess is not None
    assert found.resolution == pytest.approx(0.15 + found.excess.estimate - found.excess.low)
    flat = Formula(scattered, bytes_each=400.0, curve=FLAT_CURVE).decide(BUDGETS["n"])
    assert (flat.verdict, flat.stage) == ("undecided", "B")


def test_the_look_ahead_allows_memory_no_more_than_it_adds() -> None:
    def cost(n: float) -> float:
        return scattered(n) * max(1.0, n / 5000) ** 0.3

    found = Formula(cost, bytes_each=400.0, curve=STEEP_CURVE).decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("undecided", "B")
    assert found.reason.startswith("over n = 200 to 72407 the excess lies between ")
    assert found.reason.endswith(" once memory is allowed for: neither surely above 0.15 nor surely below 0.30")
