"""The rule for deterministic meters: recorded counts of real functions, and formulas."""

from __future__ import annotations

import json
import math
from collections.abc import Callable

import pytest

from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.fitting.judgement import Finding
from pytest_growthbudget.fitting.rule import decide
from pytest_growthbudget.measuring.readings import Answer, Climb, Ladder, Promise, Request, Rounds, Series, converse
from tests.studies.recordings import DATA, GROWTHS

#: Executed lines and comparisons by size, three workloads each; the lower-order terms of these are still large.
COUNTED = json.loads((DATA / "counts.json").read_text(encoding="ascii"))
SIZES = tuple(int(100 * 2 ** (step / 2)) for step in range(12))


def answers(  # type: ignore[no-untyped-def]
    sizes: tuple[int, ...], workloads: Callable[[int], list[list[float]]], asked: list[Request], first: int | None
):
    """Answers by `workloads(repeat)`, each a list of counts by size; the first set has `first` sizes only."""

    def answer(request: Request) -> Answer:
        asked.append(request)
        if isinstance(request, Climb):
            climbed = tuple(float(cost) for cost in workloads(0)[0])
            return Ladder(sizes=sizes, costs=climbed, footprints=(0.0,) * len(sizes), ended="largest")
        assert isinstance(request, Rounds)
        by_size = tuple(tuple(map(float, costs)) for costs in zip(*workloads(request.repeat), strict=True))
        by_size = by_size if request.repeat else by_size[:first]
        return Series(sizes=sizes[: len(by_size)], costs=by_size, complete=len(by_size) == len(sizes))

    return answer


def decided(  # type: ignore[no-untyped-def]
    sizes, workloads, growth, slack: float = 0.05, confidence: float = 0.95, first: int | None = None
) -> tuple[Finding, list[Request]]:
    asked: list[Request] = []
    promise = Promise(log_growth=growth, slack=slack, confidence=confidence, deterministic=True)
    return converse(decide(promise), answers(tuple(sizes), workloads, asked, first)), asked


def counts_of(cost: Callable[[float], float]) -> Callable[[int], list[list[float]]]:
    return lambda repeat: [[round(cost(n)) for n in SIZES]]


def log_factor_less(growth: Callable[[float], float]) -> Callable[[float], float]:
    return lambda n: growth(n) - math.log(math.log(n))


def test_recorded_counts_within_their_own_growth() -> None:
    """No function is called exceeded, and nine in ten are within, against the growth it really has."""
    verdicts = [
        decided(each["sizes"], lambda repeat, each=each: each["costs"], GROWTHS[each["growth"]])[0].verdict
        for each in COUNTED.values()
    ]
    assert verdicts.count("exceeded") == 0
    assert verdicts.count("within") >= 0.9 * len(verdicts)


def test_recorded_counts_against_budgets_a_log_factor_too_tight() -> None:
    """What a clock cannot do: n log n told from n. The lines of `dijkstra` are linear, its heap being C code."""
    verdicts = {
        name: decided(
            each["sizes"],
            lambda repeat, each=each: each["costs"],
            log_factor_less(GROWTHS[each["growth"]]),
        )[0].verdict
        for name, each in COUNTED.items()
    }
    found = list(verdicts.values())
    assert found.count("exceeded") >= 0.8 * len(found)
    assert [name for name, verdict in verdicts.items() if verdict == "within"] == ["lines dijkstra"]


@pytest.mark.parametrize(
    ("cost", "budget", "verdict"),
    [
        (lambda n: 3, "1", "within"),
        (lambda n: n, "n", "within"),
        (lambda n: n * math.log2(n), "nlog", "within"),
        (lambda n: n * math.log2(n), "n", "exceeded"),
        (lambda n: n + 3, "1", "exceeded"),
        (lambda n: 3 * n + 20 * math.log2(n), "n", "within"),
        (lambda n: n * n / 10 + 40 * n, "n2", "within"),
    ],
)
def test_exact_counts(cost, budget: str, verdict: str) -> None:  # type: ignore[no-untyped-def]
    found, asked = decided(SIZES, counts_of(cost), GROWTHS[budget])
    assert found.verdict == verdict
    assert asked[0] == Climb(math.inf, at_least=12)
    assert found.confirmed is (True if verdict == "exceeded" else None)


@pytest.mark.parametrize("unit", [1, 1024])
def test_counts_that_fall_towards_their_budget_and_keep_to_it_are_not_exceeded(unit: int) -> None:
    """The peak of numpy's distances between n points, in KiB or bytes: small arrays take twice as much for a pair."""
    peak = {50: 119, 60: 170, 71: 207, 84: 238, 100: 283, 119: 349, 141: 468, 168: 663, 200: 939, 238: 1331}
    peak |= {283: 1874, 336: 2652, 400: 3748, 447: 4680, 500: 5857}
    found, _ = decided(peak, lambda repeat: [[unit * held for held in peak.values()]], GROWTHS["n2"])
    assert found.verdict != "exceeded"


def test_counts_that_fall_towards_their_budget_and_then_run_ahead_are_exceeded() -> None:
    found, _ = decided(SIZES, counts_of(lambda n: 3000 + n * math.log2(n)), GROWTHS["n"])
    assert found.verdict == "exceeded"


def test_counts_that_are_zero_at_some_sizes_are_still_judged() -> None:
    found, _ = decided(SIZES, lambda repeat: [[max(0, n - 300) for n in SIZES]], GROWTHS["1"])
    assert found.verdict == "exceeded"


def test_nothing_counted_is_unmeasured() -> None:
    found, _ = decided(SIZES, lambda repeat: [[0] * len(SIZES)], GROWTHS["n"])
    assert (found.verdict, found.reason) == ("unmeasured", reasons.NOTHING_COUNTED)


def test_other_workloads_must_agree() -> None:
    found, _ = decided(SIZES, lambda repeat: [[n**2 if repeat == 0 else n for n in SIZES]], GROWTHS["n"])
    assert (found.verdict, found.reason, found.confirmed) == ("undecided", reasons.UNCONFIRMED, False)


def test_too_few_sizes() -> None:
    found, _ = decided(SIZES[:4], lambda repeat: [list(SIZES[:4])], GROWTHS["n"])
    assert found.verdict == "unmeasured"
    assert found.reason.startswith("only 4 sizes could be read where 5 are needed")


def test_undecided_counts_are_read_again_and_put_together() -> None:
    """Six workloads decide where three do not."""
    wild = [0.8, 1.3, 1.0, 1.25, 0.75, 1.1, 1.0, 1.3, 0.8, 1.2, 0.9, 1.0]
    tame = [1.0] * 12

    def workloads(repeat: int) -> list[list[float]]:
        factors = [wild, wild[::-1], wild] if repeat == 0 else [tame] * 9
        return [[round(n * n * f) for n, f in zip(SIZES, some, strict=True)] for some in factors]

    found, asked = decided(SIZES, workloads, GROWTHS["n2"])
    assert [request.repeat for request in asked if isinstance(request, Rounds)] == [0, 1]
    assert (found.verdict, found.reason) == ("within", "over n = 100 to 4525 the excess is below the limit of 0.10")
    assert {row.readings for row in found.sizes} == {12}


def test_reasons_are_whole_sentences() -> None:
    """What is said of counts, by verdict."""
    within, _ = decided(SIZES, counts_of(lambda n: n), GROWTHS["n"])
    assert within.reason == "over n = 100 to 4525 the excess is below the limit of 0.10"
    exceeded, _ = decided(SIZES, counts_of(lambda n: n * n), GROWTHS["n"])
    assert exceeded.reason == (
        "over n = 100 to 4525 the excess is at least 1.00, above the slack of 0.05, and a second set of readings agrees"
    )
    wild = [0.5, 1.6, 1.0, 1.9, 0.6, 1.1, 1.0, 1.8, 0.5, 1.2, 0.9, 1.0]
    undecided, _ = decided(
        SIZES, lambda repeat: [[round(n * f) for n, f in zip(SIZES, wild, strict=True)]], GROWTHS["n"]
    )
    assert (undecided.verdict, undecided.confirmed) == ("undecided", None)
    assert undecided.reason == (
        "over n = 100 to 4525 the excess lies between -0.66 and 1.16: neither surely above 0.05 nor surely below 0.10"
    )
    assert [row.size for row in undecided.sizes] == list(SIZES)


def test_what_hides_behind_the_budgets_own_count_is_not_within() -> None:
    """A square behind a line: four fifths of the largest count are linear still."""
    found, _ = decided(SIZES, counts_of(lambda n: 100 * n + n * n / 200), GROWTHS["n"])
    assert found.verdict == "undecided"


def test_the_confidence_asked_for_holds_for_counts() -> None:
    wild = [0.9, 1.1, 1.0, 1.2, 0.9, 1.1, 1.0, 1.1, 0.9, 1.2, 0.9, 1.0]

    def width(confidence: float) -> float:
        counts = [[round(n * f) for n, f in zip(SIZES, wild, strict=True)]]
        found, _ = decided(SIZES, lambda repeat: counts, GROWTHS["n"], confidence=confidence)
        assert found.excess is not None
        return found.excess.high - found.excess.low

    assert width(0.99) > 1.2 * width(0.95)


def test_five_sizes_are_enough() -> None:
    found, _ = decided(SIZES[:5], lambda repeat: [[n * n for n in SIZES[:5]]], GROWTHS["n"])
    assert (found.verdict, found.confirmed) == ("exceeded", True)
    found, _ = decided(SIZES[:5], lambda repeat: [[n if repeat else n * n for n in SIZES[:5]]], GROWTHS["n"])
    assert (found.verdict, found.confirmed) == ("undecided", False)


def test_no_size_at_all() -> None:
    found, _ = decided((), lambda repeat: [[]], GROWTHS["n"])
    assert found.reason.startswith("no size could be read where 5 are needed")


def test_nothing_counted_is_told_from_too_few_sizes() -> None:
    five, _ = decided(SIZES[:5], lambda repeat: [[0] * 5], GROWTHS["n"])
    assert five.reason == reasons.NOTHING_COUNTED
    four, _ = decided(SIZES[:4], lambda repeat: [[0] * 4], GROWTHS["n"])
    assert four.reason.startswith("no size could be read where 5 are needed")


@pytest.mark.parametrize("read", [0, 4])
def test_where_time_left_no_second_set_the_climbs_own_counts_must_agree(read: int) -> None:
    def workloads(repeat: int) -> list[list[float]]:
        return [[n * n for n in SIZES][: read if repeat else None]]

    found, _ = decided(SIZES, workloads, GROWTHS["n"])
    assert (found.verdict, found.confirmed) == ("exceeded", True)


def test_where_time_left_no_first_set_it_is_unmeasured() -> None:
    def workloads(repeat: int) -> list[list[float]]:
        return [[n * n for n in SIZES]]

    for read, said in ((0, "no size"), (1, "only 1 size"), (3, "only 3 sizes")):
        found, _ = decided(SIZES, workloads, GROWTHS["n"], first=read)
        assert found.verdict == "unmeasured"
        assert found.reason == (
            f"{said} could be read where 5 are needed: the time limit ended the readings; raise `time_limit`"
        )
        assert len(found.sizes) == read


def test_sizes_with_a_count_of_zero_stay_in_the_report() -> None:
    """All counts are taken one higher, so that the first ones have a log."""
    found, _ = decided(SIZES, lambda repeat: [[max(0, n - 1500) for n in SIZES]], GROWTHS["1"])
    assert [(row.size, row.cost) for row in found.sizes] == [(n, max(0, n - 1500) + 1) for n in SIZES]
    ones, _ = decided(SIZES, lambda repeat: [[1] * len(SIZES)], GROWTHS["1"])
    assert {row.cost for row in ones.sizes} == {1}
