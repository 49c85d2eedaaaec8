"""The stages of the rule, on campaigns that answer from formulas."""

from __future__ import annotations

import math
from dataclasses import asdict

import pytest

from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.measuring.readings import Climb, Peek, Rounds
from tests.fitting.campaigns import BUDGETS, FLAT_CURVE, STEEP_CURVE, Formula

KEPT = [
    ("1", lambda n: 5e4),
    ("log n", lambda n: 5e4 * math.log(n)),
    ("n", lambda n: 100.0 * n),
    ("n", lambda n: 3e5 + 100.0 * n),
    ("n log n", lambda n: 100.0 * n),
    ("n log n", lambda n: 30.0 * n * math.log(n)),
    ("n^2", lambda n: 20.0 * n * n),
    ("n^2", lambda n: 100.0 * n),
]
BROKEN = [
    ("1", lambda n: 300.0 * n),
    ("log n", lambda n: 300.0 * n),
    ("n", lambda n: 20.0 * n * n),
    ("n", lambda n: 3e5 + 20.0 * n * n),
    ("n log n", lambda n: 20.0 * n * n),
    ("n", lambda n: 50.0 * n**1.5),
    ("n^2", lambda n: 2.0 * n**3),
]


@pytest.mark.parametrize(("budget", "cost"), KEPT)
def test_a_kept_budget_is_within_at_stage_a(budget, cost) -> None:  # type: ignore[no-untyped-def]
    case = Formula(cost)
    found = case.decide(BUDGETS[budget])
    assert (found.verdict, found.stage, found.confirmed) == ("within", "A", None)
    assert case.curve_asked == 0
    assert max(climb.cost for climb in case.of(Climb)) <= 32e6
    assert [rounds.repeat for rounds in case.of(Rounds)] == [0]


@pytest.mark.parametrize(("budget", "cost"), BROKEN)
def test_a_broken_budget_is_exceeded_after_a_second_set(budget, cost) -> None:  # type: ignore[no-untyped-def]
    case = Formula(cost)
    found = case.decide(BUDGETS[budget])
    assert (found.verdict, found.stage, found.confirmed) == ("exceeded", "A", True)
    assert [rounds.repeat for rounds in case.of(Rounds)] == [0, 1]
    assert found.excess is not None
    assert found.excess.low > 0.15
    assert found.bends_at is not None
    assert "a second set of readings agrees" in found.reason


def test_what_a_second_set_does_not_show_is_not_exceeded() -> None:
    case = Formula(lambda n: 20.0 * n * n, second=lambda n: 1000.0 * n)
    found = case.decide(BUDGETS["n"])
    assert (found.verdict, found.reason, found.confirmed) == ("undecided", reasons.UNCONFIRMED, False)


def test_nothing_is_read_twice() -> None:
    case = Formula(lambda n: 20.0 * n * n, second=lambda n: 1000.0 * n, most=26)
    case.decide(BUDGETS["n"])
    rounds = case.of(Rounds)
    assert len(rounds) == len(set(rounds))


def test_the_climb_is_no_higher_than_the_stage_needs() -> None:
    case = Formula(lambda n: 100.0 * n)
    case.decide(BUDGETS["n"])
    assert case.of(Climb) == [Climb(5e6, 2.0**20, 9)]
    assert 100.0 * case.sizes[case.climbed - 2] <= 5e6


def test_a_large_footprint_asks_for_the_curve_once() -> None:
    case = Formula(lambda n: 20.0 * n * n, bytes_each=2e4, curve=FLAT_CURVE)
    assert case.decide(BUDGETS["n"]).verdict == "exceeded"
    assert case.curve_asked == 1


def test_without_a_curve_a_large_footprint_leaves_it_undecided() -> None:
    case = Formula(lambda n: 500.0 * n**1.4, bytes_each=2e4)
    found = case.decide(BUDGETS["n"])
    assert (found.verdict, found.reason) == ("undecided", reasons.NO_CURVE)
    exceeded = Formula(lambda n: 500.0 * n**1.4, bytes_each=2e4, curve=FLAT_CURVE).decide(BUDGETS["n"])
    assert exceeded.verdict == "exceeded"


def test_memory_is_allowed_for() -> None:
    """Linear work over scattered objects, which slows down sixfold outside the caches, is within."""

    def cost(n: float) -> float:
        extra = 0 if n * 400 < 2**20 else 30 * min(math.log2(n * 400 / 2**20), 4)
        return (25 + extra) * n

    case = Formula(cost, bytes_each=400.0, curve=STEEP_CURVE)
    found = case.decide(BUDGETS["n"])
    assert found.verdict == "within"


def test_a_jump_ahead_of_the_sizes_read_is_looked_into() -> None:
    """A square that starts beyond stage A is found by the look ahead, not passed over."""

    def cost(n: float) -> float:
        return 100.0 * n + (0.0 if n < 4e4 else 100.0 * 4e4 * ((n / 4e4) ** 2.5 - 1))

    case = Formula(cost, bytes_each=1.0)
    found = case.decide(BUDGETS["n"])
    assert case.of(Peek)
    assert found.stage in ("B", "C")
    assert found.verdict != "within"


@pytest.mark.parametrize("share", [0.12, 0.2])
def test_a_square_that_comes_up_behind_linear_work_is_followed(share: float) -> None:
    """At the top of stage A it is the smaller part by far; the look ahead tolerates it, and dearer sizes accuse."""

    def cost(n: float) -> float:
        return 1000.0 * (n + share * n * n / 5000)

    case = Formula(cost, bytes_each=1.0)
    found = case.decide(BUDGETS["n"])
    assert case.of(Peek)
    assert found.verdict == "exceeded"
    assert found.stage in ("B", "C")
    assert found.confirmed


def test_a_step_up_ahead_that_comes_to_nothing_does_not_cost_the_verdict() -> None:
    """A jump such as memory makes is looked into where it is tolerated, and what was read before still counts."""

    def cost(n: float) -> float:
        return 1000.0 * n * (1.0 if n < 2e4 else 1.55)

    case = Formula(cost, bytes_each=1.0)
    found = case.decide(BUDGETS["n"])
    assert len(case.of(Rounds)) > 1
    assert found.verdict == "within"
    assert found.stage == "A"


def test_what_is_tolerated_ahead_is_not_followed_past_the_caches() -> None:
    """There a tolerated excess is the memory's more often than not, and a sound body would be accused of it."""
    edge = 131_072

    def cost(n: float) -> float:
        return 10.0 * n * (max(n, edge) / edge) ** 0.3

    case = Formula(cost, bytes_each=8.0, curve=FLAT_CURVE)
    found = case.decide(BUDGETS["n"])
    assert case.of(Peek)
    assert all(case.bytes_each * case.sizes[request.last - 1] <= 2**20 for request in case.of(Rounds))
    assert found.verdict == "within"


def test_a_larger_slack_tolerates_more() -> None:
    def cost(n: float) -> float:
        return 50.0 * n**1.4

    assert Formula(cost).decide(BUDGETS["n"]).verdict == "exceeded"
    assert Formula(cost).decide(BUDGETS["n"], slack=0.5).verdict == "within"


def test_exponential_budgets() -> None:
    sizes = tuple(range(8, 40))

    def held(base: float, budget: float) -> str:
        case = Formula(lambda n: 60.0 * base**n, sizes=sizes, bytes_each=100.0)
        found = case.decide(lambda n: n * math.log(budget), exponential=True)
        assert found.exponent is found.nearest is None
        assert found.forecast[0].size == found.sizes[-1].size + 5
        return found.verdict

    assert Formula(lambda n: 60.0 * 3.0**n, sizes=sizes).decide(
        lambda n: n * math.log(2), exponential=True
    ).excess.estimate == pytest.approx(math.log(3) / math.log(2) - 1, abs=0.01)
    assert held(2.0, 2.0) == "within"
    assert held(1.6, 2.0) == "within"
    assert held(2.0, 1.5) == "exceeded"


def test_the_excess_over_a_flat_budget_is_said_of_the_largest_size() -> None:
    """A line that makes up a thirtieth of the cost: its own exponent is one, that of the whole cost next to nothing."""
    found = Formula(lambda n: 1e6 + n, most=30).decide(BUDGETS["1"])
    assert found.verdict == "within"
    assert found.excess is not None
    assert found.exponent is not None
    assert found.excess.high < 0.1
    assert found.exponent.high < 0.1


def test_an_exponential_body_is_named_and_foretold_as_one() -> None:
    case = Formula(lambda n: 60.0 * 2.0**n, sizes=tuple(range(8, 40)))
    found = case.decide(BUDGETS["n^2"])
    assert (found.verdict, found.nearest) == ("exceeded", "2^n")
    first = found.forecast[0]
    assert first.cost.low < 60.0 * 2.0**first.size < first.cost.high


@pytest.mark.parametrize(
    ("ended", "mend"),
    [
        ("largest", "raise `largest` or lower `smallest`"),
        ("time", "raise `time_limit` or lower `smallest`"),
        ("memory", "let the workload hold less"),
        ("runaway", "look at that call first"),
    ],
)
def test_too_few_sizes_are_unmeasured_with_the_way_to_mend_it(ended: str, mend: str) -> None:
    case = Formula(lambda n: 1e5 * n * n, most=4, ended=ended)
    found = case.decide(BUDGETS["n"])
    assert found.verdict == "unmeasured"
    assert found.stage == "A"
    assert found.reason.startswith("only 4 sizes could be read where 5 are needed: ")
    assert mend in found.reason
    assert case.of(Rounds) == []


def test_a_body_that_is_dear_from_the_start_is_climbed_as_far_as_time_allows() -> None:
    """Half a second at the smallest size: nine sizes are read all the same."""
    case = Formula(lambda n: 1e7 * n)
    assert case.decide(BUDGETS["n"]).verdict == "within"
    assert case.climbed == 9
    assert Formula(lambda n: 2e5 * n * n).decide(BUDGETS["n"]).verdict == "exceeded"


def test_a_body_too_fast_for_the_clock_is_told_so() -> None:
    for ended in ("", "largest", "memory"):
        case = Formula(lambda n: 300.0, most=5, readable=1, ended=ended)
        found = case.decide(BUDGETS["1"])
        assert (found.verdict, found.reason) == ("unmeasured", reasons.TOO_FAST)
    few = Formula(lambda n: 300.0, most=4, readable=1, ended="largest").decide(BUDGETS["1"])
    assert few.reason.startswith("only 3 sizes could be read where 5 are needed")


def test_no_size_at_all() -> None:
    found = Formula(lambda n: 1e5, most=0, ended="time").decide(BUDGETS["n"])
    assert found.verdict == "unmeasured"
    assert found.reason.startswith("no size could be read")


@pytest.mark.parametrize("most", [6, 7, 8])
def test_few_sizes_of_a_gross_fault_are_enough(most: int) -> None:
    """A cubic body under a linear budget, whose climb the time limit ended."""
    case = Formula(lambda n: 3.0 * n**3, most=most, ended="time")
    assert case.decide(BUDGETS["n"]).verdict == "exceeded"


@pytest.mark.parametrize("most", [5, 6, 7, 8])
def test_few_sizes_of_a_sound_body_are_never_exceeded(most: int) -> None:
    """One doubling step between two halves of so few sizes is a resize, not growth."""
    step = Formula(lambda n: 1e4 * n * (1.6 if n > 140 else 1.0), most=most, ended="time")
    assert step.decide(BUDGETS["n"]).verdict != "exceeded"


def test_time_that_ran_out_leaves_a_gross_fault_exceeded() -> None:
    """The second set was not read; the climb's own calls agree."""
    case = Formula(lambda n: 20.0 * n * n, rounds=0, partial=3)
    found = case.decide(BUDGETS["n"])
    assert (found.verdict, found.confirmed) == ("exceeded", None)
    assert "the first calls at each size agree" in found.reason


def test_time_that_ran_out_before_the_second_set() -> None:
    case = Formula(lambda n: 20.0 * n * n, rounds=1)
    assert case.decide(BUDGETS["n"]).verdict == "exceeded"
    slight = Formula(lambda n: 50.0 * n**1.25, rounds=1)
    found = slight.decide(BUDGETS["n"])
    assert found.verdict == "undecided"
    assert "raise `time_limit`" in found.reason


def test_time_that_ran_out_on_a_sound_body() -> None:
    assert Formula(lambda n: 100.0 * n, rounds=0, partial=3).decide(BUDGETS["n"]).verdict == "within"
    found = Formula(lambda n: 100.0 * n, rounds=0, partial=1).decide(BUDGETS["n"])
    assert found.verdict == "undecided"
    assert "raise `time_limit`" in found.reason


@pytest.mark.parametrize("most", [5, 48])
def test_time_that_ran_out_before_any_round(most: int) -> None:
    found = Formula(lambda n: 100.0 * n, rounds=0, most=most).decide(BUDGETS["n"])
    assert (found.verdict, found.sizes) == ("unmeasured", ())
    assert found.reason == (
        "no size could be read where 5 are needed: the time limit ended the readings; raise `time_limit`"
    )


def test_unknown_footprints_are_no_obstacle_to_within() -> None:
    case = Formula(lambda n: 100.0 * n, bytes_each=0.0)
    assert case.decide(BUDGETS["n"]).verdict == "within"
    assert Formula(lambda n: 100.0 * n * n, bytes_each=0.0).decide(BUDGETS["n"]).verdict != "within"


def test_a_finding_carries_what_a_report_needs() -> None:
    found = Formula(lambda n: 20.0 * n * n).decide(BUDGETS["n"])
    assert found.exponent is not None
    assert found.excess is not None
    assert found.exponent.estimate == pytest.approx(2, abs=0.05)
    assert found.nearest == "n^2"
    assert found.resolution == pytest.approx(0.15 + found.excess.estimate - found.excess.low)
    assert [row.size for row in found.sizes] == sorted(row.size for row in found.sizes)
    assert all(type(row.size) is int and type(row.cost) is float for row in found.sizes)
    assert all(row.cost.low < 20.0 * row.size**2 < row.cost.high for row in found.forecast[:1])
    assert found.forecast[-1].allowed < found.forecast[-1].cost.low


@pytest.mark.parametrize(
    "case",
    [
        Formula(lambda n: 20.0 * n * n),
        Formula(lambda n: 100.0 * n),
        Formula(lambda n: 20.0 * n * n, bytes_each=2e4, curve=STEEP_CURVE),
        Formula(lambda n: 500.0 * n**1.4, bytes_each=2e4, curve=STEEP_CURVE),
        Formula(lambda n: 60.0 * 2.0**n, sizes=tuple(range(8, 40))),
    ],
)
def test_findings_are_made_of_plain_numbers(case: Formula) -> None:
    """A numpy scalar in a report turns a failing parallel run green."""

    def leaves(value: object) -> list[object]:
        if isinstance(value, dict):
            return [leaf for each in value.values() for leaf in leaves(each)]
        if isinstance(value, tuple):
            return [leaf for each in value for leaf in leaves(each)]
        return [value]

    found = leaves(asdict(case.decide(BUDGETS["n"])))
    assert {type(leaf) for leaf in found} <= {int, float, str, bool, type(None)}
    assert all(math.isfinite(leaf) for leaf in found if isinstance(leaf, float))
