"""How the rule ends where time, the ladder or a runaway call ended it, and what it says of memory."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from pytest_growthbudget.measuring.readings import Rounds, Series
from tests.fitting.campaigns import BUDGETS, FLAT_CURVE, STEEP_CURVE, Formula


def linear(each: float) -> Callable[[float], float]:
    return lambda n: each * n


def test_a_call_that_ran_away_is_not_passed_over() -> None:
    """The sizes below keep the budget, but something happens at the next one."""
    found = Formula(linear(100.0), most=18, ended="runaway").decide(BUDGETS["n"])
    assert (found.verdict, found.stage) == ("undecided", "A")
    assert found.reason == (
        "up to n = 18101 the budget is kept, but a call at the next size did not come back within the time limit; "
        "raise `time_limit`, or look at what the body does there"
    )


def test_a_few_cheap_sizes_are_too_little_where_time_ended_the_climb() -> None:
    found = Formula(linear(200.0), most=8, ended="time", noise=0.0).decide(BUDGETS["n"])
    assert found.verdict == "undecided"
    assert found.reason == (
        "the time limit ended the readings before they could decide (the largest size reached is n = 565, where a "
        "call takes 113 us: too little to go by); raise `time_limit`"
    )


@pytest.mark.parametrize(
    "case",
    [
        pytest.param(Formula(linear(200.0), most=8, ended="largest"), id="the user chose the largest size"),
        pytest.param(Formula(linear(400.0), most=8, ended="time"), id="the last call takes over 200 us"),
        pytest.param(Formula(linear(10.0), most=18, ended="time"), id="the last size is 32 times the first"),
    ],
)
def test_enough_sizes_are_within_whatever_ended_the_climb(case: Formula) -> None:
    found = case.decide(BUDGETS["n"])
    assert found.verdict == "within"
    first, last = found.sizes[0].size, found.sizes[-1].size
    assert found.reason == f"over n = {first} to {last} the excess is below the limit of 0.30"


def test_five_sizes_are_enough() -> None:
    """No more are needed for a gross fault, nor for a sound body whose calls are long enough."""
    assert Formula(lambda n: 3.0 * n**3, most=5, ended="largest").decide(BUDGETS["n"]).verdict == "exceeded"
    assert Formula(linear(3e4), most=5, ended="largest", noise=0.001).decide(BUDGETS["n"]).verdict == "within"


# ------------------------------------------------------------ time that ran out


def cut(cost: Callable[[float], float], **more: object) -> Formula:
    """Time ran out in the first set, in which every size was read three times."""
    return Formula(cost, rounds=0, partial=3, **more)  # type: ignore[arg-type]


def test_without_a_second_set_only_an_overwhelming_excess_counts() -> None:
    """Twice the slack, surely: n^1.28 is not enough, though it has run ahead more than fourfold."""
    found = cut(lambda n: 2.34 * n**1.28).decide(BUDGETS["n"])
    assert found.verdict == "undecided"
    assert found.reason.startswith("the time limit ended the readings before they could decide (over n = 400 to ")
    assert cut(lambda n: 5.0 * n**1.45).decide(BUDGETS["n"]).verdict == "exceeded"


def test_without_a_second_set_a_rise_below_fourfold_does_not_count() -> None:
    assert cut(lambda n: 800.0 * n**1.4, most=9).decide(BUDGETS["n"]).verdict == "undecided"
    assert cut(lambda n: 800.0 * n**1.6, most=9).decide(BUDGETS["n"]).verdict == "exceeded"


def test_without_a_second_set_the_climb_must_agree() -> None:
    square, line = lambda n: 20.0 * n * n, linear(1000.0)
    assert cut(square, climbing=square).decide(BUDGETS["n"]).verdict == "exceeded"
    assert cut(square, climbing=line).decide(BUDGETS["n"]).verdict == "undecided"
    assert cut(line, climbing=square).decide(BUDGETS["n"]).verdict == "within"


def test_the_climb_is_asked_about_the_readable_sizes_only() -> None:
    """Below 5 us a clock reads its own cost: a floor there would hide the climb's growth."""
    case = cut(lambda n: 0.5 * n * n, climbing=lambda n: max(0.5 * n * n, 4e3) if n >= 100 else 1e6)
    assert case.decide(BUDGETS["n"]).verdict == "exceeded"


def test_time_that_ran_out_on_a_suspicious_body() -> None:
    found = cut(lambda n: 100.0 * n**1.08).decide(BUDGETS["n"])
    assert (found.verdict, found.bends_at) == ("undecided", None)


def test_time_that_ran_out_after_three_sizes() -> None:
    class Hurried(Formula):
        def take(self, request: Rounds) -> Series:
            series = super().take(request)
            return Series(sizes=series.sizes[:3], costs=series.costs[:3], complete=False)

    found = Hurried(linear(100.0)).decide(BUDGETS["n"])
    assert (found.verdict, len(found.sizes)) == ("unmeasured", 3)
    assert found.reason == (
        "only 3 sizes could be read where 5 are needed: the time limit ended the readings; raise `time_limit`"
    )


def test_nine_sizes_read_three_times_are_enough_when_time_ran_out() -> None:
    assert cut(linear(1000.0), most=9).decide(BUDGETS["n"]).verdict == "within"
    assert cut(linear(1000.0), most=8).decide(BUDGETS["n"]).verdict == "undecided"
    assert cut(linear(1000.0), most=5).decide(BUDGETS["n"]).verdict == "undecided"


# ------------------------------------------------------------ what is said of memory


def test_an_excess_beyond_memory_says_that_memory_was_allowed_for() -> None:
    case = Formula(lambda n: 20.0 * n * n, bytes_each=2e4, curve=FLAT_CURVE)
    found = case.decide(BUDGETS["n"])
    assert found.verdict == "exceeded"
    assert found.reason.endswith(
        ", once memory is allowed for, above the slack of 0.15, and a second set of readings agrees"
    )


def test_an_excess_on_a_small_footprint_says_nothing_of_memory() -> None:
    case = Formula(lambda n: 20.0 * n * n, curve=STEEP_CURVE)
    assert case.decide(BUDGETS["n"]).reason.endswith(", above the slack of 0.15, and a second set of readings agrees")
    assert case.curve_asked == 0


def test_an_excess_on_unknown_footprints_says_nothing_of_memory() -> None:
    found = Formula(lambda n: 20.0 * n**3, bytes_each=0.0, curve=STEEP_CURVE).decide(BUDGETS["n"])
    assert found.verdict == "exceeded"
    assert "memory" not in found.reason


def scattered(n: float) -> float:
    """Linear work on 400 bytes each, several times slower outside the caches."""
    return (25 + (0 if n * 400 < 2**20 else 30 * min(n * 400 / 2**20, 4))) * n


@pytest.mark.parametrize(
    ("cost", "bytes_each", "verdict"),
    [
        (lambda n: 20.0 * n**2.5, 2e4, "exceeded"),
        (scattered, 400.0, "within"),
        (lambda n: scattered(n) * max(1.0, n / 5000) ** 0.4, 400.0, "undecided"),
    ],
)
def test_the_resolution_is_the_coarser_for_an_allowance(
    cost: Callable[[float], float], bytes_each: float, verdict: str
) -> None:
    """Slack, half the interval, and the slope that memory may have made."""
    found = Formula(cost, bytes_each=bytes_each, curve=STEEP_CURVE).decide(BUDGETS["n"])
    assert found.verdict == verdict
    assert found.excess is not None
    assert found.resolution is not None
    assert found.resolution > 0.17 + found.excess.estimate - found.excess.low


def test_a_body_within_once_memory_is_allowed_for_says_so() -> None:
    found = Formula(scattered, bytes_each=400.0, curve=STEEP_CURVE).decide(BUDGETS["n"])
    assert found.reason.endswith("the excess, once memory is allowed for, is below the limit of 0.30")


def test_a_body_within_as_it_was_read_needs_no_allowance() -> None:
    found = Formula(lambda n: 100.0 * n, bytes_each=400.0, curve=STEEP_CURVE).decide(BUDGETS["n"])
    assert found.excess is not None
    assert found.resolution == pytest.approx(0.15 + found.excess.estimate - found.excess.low)


def test_the_confidence_asked_for_holds_in_every_stage() -> None:
    def width(confidence: float) -> float:
        found = Formula(linear(100.0)).decide(BUDGETS["n"], confidence=confidence)
        assert found.excess is not None
        return found.excess.high - found.excess.low

    assert width(0.99) > 1.2 * width(0.95)


def test_undecided_without_a_second_look_leaves_the_confirmation_open() -> None:
    case = Formula(lambda n: 100.0 * n, noise=0.8)
    found = case.decide(BUDGETS["n"])
    assert (found.verdict, found.confirmed) == ("undecided", None)
    assert all(rounds.repeat == 0 for rounds in case.of(Rounds))
