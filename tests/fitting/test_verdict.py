"""The predicates of the verdict, and the limits they use."""

from __future__ import annotations

import math
from dataclasses import asdict, replace

import numpy as np
import pytest

from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.fitting.evidence import Evidence, assemble
from pytest_growthbudget.fitting.judgement import Interval
from pytest_growthbudget.fitting.verdict import (
    Says,
    clock_limits,
    count_limits,
    exceeds,
    given_limits,
    is_cheap,
    is_exceeded,
    is_suspicious,
    is_within,
    rises_enough,
)
from pytest_growthbudget.measuring.readings import MemoryCurve, Promise

SIZES = [int(12 * 2 ** (step / 2)) for step in range(18)]
LIMITS = clock_limits()
STEEP = MemoryCurve(
    log_bytes=(math.log(2**16), math.log(2**20), math.log(2**24)),
    log_inflation=(0.0, math.log(1.2), math.log(10)),
    extra=(0.0, 3.0, 50.0),
    resident=2.0**20,
    cheapest=3.0,
)


def evidence(cost, exponent=1.0, *, sizes=SIZES, bytes_each=1.0, curve=None) -> Evidence:  # type: ignore[no-untyped-def]
    return assemble(
        Promise(log_growth=lambda n: exponent * math.log(n)),
        sizes,
        [cost(n) for n in sizes],
        [bytes_each * n for n in sizes],
        [5] * len(sizes),
        lambda: curve,
        0.01,
    )


def says(case: Evidence, curve: MemoryCurve | None = None) -> Says:
    return exceeds(case, LIMITS.exceeded, LIMITS, lambda: curve)


def unwanted() -> MemoryCurve:
    raise AssertionError("the memory curve was asked for without need")


def test_a_larger_slack_moves_every_limit_alike() -> None:
    usual, wide = asdict(clock_limits(0.15)), asdict(clock_limits(0.40))
    moved = {name: wide[name] - usual[name] for name in usual if name not in ("confidence", "exceeded_flat")}
    assert all(each == pytest.approx(0.25) for each in moved.values())
    assert wide["exceeded_flat"] == 0.40


def test_a_smaller_slack_leaves_the_suspicions() -> None:
    usual, narrow = clock_limits(0.15), clock_limits(0.05)
    assert narrow.exceeded == 0.05
    assert (narrow.suspect, narrow.suspect_later, narrow.resident) == (
        usual.suspect,
        usual.suspect_later,
        usual.resident,
    )


def test_a_fit_is_suspected_before_it_is_exceeded_and_the_more_surely_the_later() -> None:
    limits = clock_limits()
    assert 0 < limits.suspect < limits.resident <= limits.suspect_later < limits.suspect_last < limits.exceeded
    assert limits.exceeded < limits.exceeded_top < limits.within == limits.look_ahead < limits.within_hidden < 1


def test_the_bounds_are_those_of_the_central_interval() -> None:
    limits = clock_limits(confidence=0.9)
    assert (limits.lower, limits.upper) == (pytest.approx(0.05), pytest.approx(0.95))


def test_counts_and_given_costs_have_their_own_limits() -> None:
    assert count_limits(0.05).within == pytest.approx(0.10)
    assert count_limits(0.05).within_hidden == pytest.approx(0.10)
    assert (given_limits(0.05).within, given_limits(0.05).within_hidden) == (pytest.approx(0.10), pytest.approx(0.15))
    assert (given_limits(0.05).exceeded_flat, given_limits(0.15).exceeded_flat) == (0.05, 0.20)
    assert given_limits(0.15) == clock_limits(0.15)
    assert given_limits(0.0).within == 0.0


def test_an_excess_is_shown_and_none_is_not() -> None:
    square, line = evidence(lambda n: n**2), evidence(lambda n: n)
    assert is_exceeded(square.plain, square.plain, 1.0, 0.15, LIMITS)
    assert not is_within(square.plain, 1.0, LIMITS)
    assert is_within(line.plain, 1.0, LIMITS)
    assert not is_exceeded(line.plain, line.plain, 1.0, 0.15, LIMITS)


def test_an_excess_in_what_is_a_trifle_at_the_largest_size_is_not_shown() -> None:
    """A square that makes up a third of the cost: surely a square, but not what the body costs."""
    case = evidence(lambda n: 65e5 + 35e5 * (n / SIZES[-1]) ** 2)
    assert is_suspicious(case.plain, 1.0, 0.15, LIMITS)
    assert not is_exceeded(case.plain, case.plain, 1.0, 0.15, LIMITS)


def test_a_flat_budget_is_judged_at_the_largest_size() -> None:
    case = evidence(lambda n: 1e6 + 30 * n, 0.0)
    assert case.plain.delta.interval().estimate > 0.5
    assert is_within(case.plain, 0.0, LIMITS)
    assert not is_suspicious(case.plain, 0.0, 0.02, LIMITS)


def test_suspicion_is_a_lower_bound_above_the_limit() -> None:
    case = evidence(lambda n: n**1.1)
    assert is_suspicious(case.plain, 1.0, 0.05, LIMITS)
    assert not is_suspicious(case.plain, 1.0, 0.11, LIMITS)


def test_small_footprints_need_no_curve() -> None:
    assert exceeds(evidence(lambda n: n**2), 0.15, LIMITS, unwanted) is Says.YES
    assert exceeds(evidence(lambda n: n, bytes_each=1e6), 0.15, LIMITS, unwanted) is Says.NO


def test_memory_excuses_what_it_explains() -> None:
    """A linear body that slows down exactly as the curve says, by up to ten times; 90 ns an element at the start."""
    grid = np.exp(STEEP.log_bytes)

    def cost(n: float) -> float:
        held = 3e3 * n
        return 30 * n * math.exp(np.interp(math.log(held), np.log(grid), STEEP.log_inflation))

    case = evidence(cost, bytes_each=3e3, curve=STEEP)
    assert is_exceeded(case.plain, case.plain, 1.0, 0.15, LIMITS)
    assert says(case, STEEP) is Says.NO


def test_without_a_curve_nothing_large_is_exceeded() -> None:
    case = evidence(lambda n: 30 * n**1.4, bytes_each=3e3)
    assert says(case, None) is Says.NOT_WITHOUT_CURVE


def test_without_a_curve_small_sizes_or_a_hopeless_excess_suffice() -> None:
    sizes = [int(12 * 2 ** (step / 2)) for step in range(24)]
    assert says(evidence(lambda n: 30 * n**2.5, sizes=sizes, bytes_each=3e3), None) is Says.YES
    partly_small = evidence(lambda n: 30 * n**1.5, sizes=sizes, bytes_each=200.0)
    assert partly_small.footprint > 256 * 1024
    assert says(partly_small, None) is Says.YES


def test_unknown_footprints_are_like_no_curve() -> None:
    case = evidence(lambda n: 30 * n**1.4, bytes_each=0.0, curve=STEEP)
    assert case.allowed is None
    assert says(case, STEEP) is Says.NOT_WITHOUT_CURVE
    assert says(evidence(lambda n: 30 * n**2.5, bytes_each=0.0, curve=STEEP), STEEP) is Says.YES


def test_a_body_cheaper_than_the_kernels_is_judged_on_resident_sizes() -> None:
    """What it costs outside the caches no kernel can tell, what it costs inside them is its own."""

    def leaves_the_cache(n: float) -> float:
        return 0.5 * n * (1 if n < 1000 else (n / 1000) ** 0.8)

    def square(n: float) -> float:
        return 0.5 * n * (n / SIZES[0])

    case = evidence(leaves_the_cache, bytes_each=2.0**10, curve=STEEP)
    assert is_cheap(case, STEEP)
    assert says(case, STEEP) is Says.NO
    assert not is_cheap(case, replace(STEEP, cheapest=0.1))
    assert not is_cheap(evidence(leaves_the_cache, 0.5, bytes_each=2.0**10, curve=STEEP), STEEP)
    excess = evidence(square, bytes_each=2.0**10, curve=STEEP)
    assert is_cheap(excess, STEEP)
    assert says(excess, STEEP) is Says.YES


@pytest.mark.parametrize(("resident", "said"), [(6, Says.NO), (7, Says.YES)])
def test_seven_resident_sizes_of_a_cheap_body_suffice(resident: int, said: Says) -> None:
    curve = replace(STEEP, resident=1e4 * SIZES[resident - 1])
    assert says(evidence(lambda n: 0.1 * n**2, bytes_each=1e4, curve=curve), curve) is said


@pytest.mark.parametrize(("small", "said"), [(6, Says.NOT_WITHOUT_CURVE), (7, Says.YES)])
def test_without_a_curve_seven_small_sizes_suffice(small: int, said: Says) -> None:
    """They keep to 256 KiB, and have run ahead threefold."""
    each = 256 * 1024.0 / SIZES[small - 1]
    assert says(evidence(lambda n: 30 * n**1.6, bytes_each=each), None) is said


@pytest.mark.parametrize(
    ("steeper", "said"), [(0.55, Says.NOT_WITHOUT_CURVE), (0.75, Says.NOT_WITHOUT_CURVE), (1.0, Says.YES)]
)
def test_without_a_curve_the_excess_must_be_more_than_memory_was_ever_seen_to_make(steeper: float, said: Says) -> None:
    """Twentyfold over 17 half octaves is a slope of 0.51, and 0.76 where it comes as one step in the middle."""
    assert says(evidence(lambda n: 30 * n ** (1 + steeper), bytes_each=1e6), None) is said


def test_a_flat_budget_is_exceeded_by_what_the_cost_does_at_the_largest_size() -> None:
    slight, plain = evidence(lambda n: n**0.18, 0.0), evidence(lambda n: n**0.25, 0.0)
    assert not is_exceeded(slight.plain, slight.plain, 0.0, 0.15, LIMITS)
    assert is_exceeded(plain.plain, plain.plain, 0.0, 0.15, LIMITS)


@pytest.mark.parametrize("count", [5, 6, 7, 8])
def test_few_sizes_must_show_a_threefold_rise(count: int) -> None:
    """A single resize among five to eight sizes looks like a sure excess; a rise by three does not come from one."""
    few = SIZES[:count]
    middling = evidence(lambda n: n**1.25, sizes=few)
    assert is_exceeded(middling.plain, middling.plain, 1.0, 0.15, LIMITS)
    assert not rises_enough(middling.seen)
    assert says(middling) is Says.NO
    assert says(evidence(lambda n: n**2, sizes=few)) is (Says.YES if count > 4 else Says.NO)


def test_fewer_than_five_sizes_say_nothing() -> None:
    assert says(evidence(lambda n: n**4, sizes=SIZES[:4])) is Says.NO


def test_a_bound_of_next_to_nothing_is_said_without_a_sign() -> None:
    said = reasons.wide(evidence(lambda n: n), Interval(estimate=0.0, low=-0.004, high=0.3149), LIMITS)
    assert said == (
        "over n = 12 to 4344 the excess lies between 0.00 and 0.31: neither surely above 0.15 nor surely below 0.30"
    )
