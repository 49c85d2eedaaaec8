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


def answers(sizes: tuple[int, ...], workloads: Callable[[int], list[list[float]]], asked: list[Request]):  # type: ignore[no-untyped-def]
    def answer(request: Request) -> Answer:
        asked.append(request)
        if isinstance(request, Climb):
            first = tuple(float(cost) for cost in workloads(0)[0])
            return Ladder(sizes=sizes, costs=first, footprints=(0.0,) * len(sizes), ended="largest")
        assert isinstance(request, Rounds)
        by_size = zip(*workloads(request.repeat), strict=True)
        return Series(sizes=sizes, costs=tuple(tuple(map(float, costs)) for costs in by_size))

    return answer


def decided(sizes, workloads, growth, slack: float = 0.05) -> tuple[Finding, list[Request]]:  # type: ignore[no-untyped-def]
    asked: list[Request] = []
    answer = answers(tuple(sizes), workloads, asked)
    return converse(decide(Promise(log_growth=growth, slack=slack, deterministic=True)), answer), asked


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


def test_counts_that_fall_towards_their_budget_and_keep_to_it_are_not_exceeded() -> None:
    """KiB at the peak of numpy's distances between n points: small arrays take twice as much for each pair."""
    peak = {50: 119, 60: 170, 71: 207, 84: 238, 100: 283, 119: 349, 141: 468, 168: 663, 200: 939, 238: 1331}
    peak |= {283: 1874, 336: 2652, 400: 3748, 447: 4680, 500: 5857}
    found, _ = decided(peak, lambda repeat: [list(peak.values())], GROWTHS["n2"])
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
    assert found.verdict in ("within", "undecided")
    assert {row.readings for row in found.sizes} == {12}
