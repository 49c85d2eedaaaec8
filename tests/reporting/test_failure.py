"""The report of a judgement, whole."""

from __future__ import annotations

import textwrap
from typing import Any

import pytest

from pytest_growthbudget.fitting.judgement import ForecastRow, Interval, Judgement, SizeRow
from pytest_growthbudget.reporting.failure import describe, fails, first_line, sections
from pytest_growthbudget.reporting.summary import total_line
from pytest_growthbudget.reporting.wire import to_wire


def wire(**changed: Any) -> dict[str, Any]:
    values: dict[str, Any] = {
        "verdict": "exceeded",
        "reason": "over n = 100 to 800 the excess is at least 0.84, above the slack of 0.15",
        "excess": Interval(estimate=0.87, low=0.84, high=0.9),
        "exponent": Interval(estimate=1.97, low=1.94, high=2.0),
        "resolution": 0.21,
        "nearest": "n^2",
        "sizes": tuple(SizeRow(size=n, cost=10.0 * n * n, readings=9) for n in (100, 200, 400, 800)),
        "forecast": (
            ForecastRow(size=100_000, cost=Interval(estimate=1.0e11, low=0.9e11, high=1.1e11), allowed=2.5e8),
        ),
        "bends_at": 200,
        "confirmed": True,
        "stage": "A",
        "bound": "T(n) = 2 T(n/2) + n",
        "theta": "n log n",
        "theorem": "Master theorem, case 2",
        "allowed": (1e5, 2.3e5, 5.2e5, 1.16e6),
        "seconds": 0.25,
        "seed": 7,
    }
    policy = changed.pop("undecided", "warn")
    return to_wire(Judgement(**{**values, **changed}), undecided=policy)


def test_the_whole_report() -> None:
    assert describe(wire(notes=("a tracer was active.",))) == textwrap.dedent(
        """\
        growth budget exceeded: cpu_time grows as n^1.97 where n log n is allowed

          declared   T(n) = 2 T(n/2) + n
          derived    n log n (Master theorem, case 2)
          observed   n^1.97, 95 % interval 1.94 to 2.00, over n = 100 to 800
          excess     0.87 (0.84 to 0.90) over the budget, slack 0.15; this run could
                     tell an excess of 0.21
          since      n = 200
          confirmed  by a second, independent set of readings
          because    over n = 100 to 800 the excess is at least 0.84, above the slack of
                     0.15

                     n        cost  exponent  x allowed
                   100      100 us                    1  ####
                   200      400 us      2.00       1.74  ########
                   400      1.6 ms      2.00       3.08  #############
                   800      6.4 ms      2.00       5.52  ########################

          forecast, at sizes that were not run
                     n    expected                  interval  budget allows
               100,000    1.67 min       1.5 min to 1.83 min  250 ms

          nearest    n^2, the simple growth nearest to what was observed
          look at    a pass over the input inside a step that should not need one: a
                     search in a list, a slice or a copy, pop(0) or insert(0, ...), text
                     built up by +, a loop inside the loop
          note       a tracer was active.
          repeat     --growth-seed 7 (measured in 250 ms)"""
    )


@pytest.mark.parametrize(
    ("changed", "line"),
    [
        ({}, "growth budget exceeded: cpu_time grows as n^1.97 where n log n is allowed"),
        ({"verdict": "within"}, "growth budget kept: cpu_time grows as n^1.97 where n log n is allowed"),
        (
            {"verdict": "within", "theta": "1", "exponent": Interval(estimate=-0.001, low=-0.01, high=0.01)},
            "growth budget kept: cpu_time grows as n^0.00 where 1 is allowed",
        ),
        (
            {"variable": "V", "ray": "V alone, E = 100", "theta": "V + E"},
            "growth budget exceeded: cpu_time grows as V^1.97 where V + E is allowed (V alone, E = 100)",
        ),
        (
            {"exponent": None, "theta": "2^n", "excess": Interval(estimate=0.5, low=0.4, high=0.6)},
            "growth budget exceeded: cpu_time grows as (2^n)^1.50 where 2^n is allowed",
        ),
        (
            {"exponent": Interval(estimate=7.0, low=6.0, high=8.0), "nearest": "2^n"},
            "growth budget exceeded: cpu_time grows as 2^n where n log n is allowed",
        ),
        (
            {"ceiling": ForecastRow(size=10**6, cost=Interval(estimate=3e9, low=2e9, high=4e9), allowed=1e9)},
            "growth budget exceeded: cpu_time is foreseen at 3 s for n = 1,000,000 where 1 s is allowed",
        ),
        (
            {"verdict": "undecided", "reason": "the interval is too wide"},
            "growth budget undecided: cpu_time against n log n: the interval is too wide",
        ),
        (
            {"verdict": "unmeasured", "reason": "the body is too fast", "exponent": None, "excess": None},
            "growth budget unmeasured: cpu_time against n log n: the body is too fast",
        ),
    ],
)
def test_first_lines_stand_alone(changed: dict[str, Any], line: str) -> None:
    assert first_line(wire(**changed)) == line


@pytest.mark.parametrize(
    ("verdict", "policy", "failing"),
    [
        ("exceeded", "pass", True),
        ("within", "fail", False),
        ("undecided", "warn", False),
        ("undecided", "pass", False),
        ("undecided", "fail", True),
        ("unmeasured", "warn", False),
        ("unmeasured", "fail", True),
    ],
)
def test_which_verdicts_fail_the_test(verdict: str, policy: str, failing: bool) -> None:
    assert fails(wire(verdict=verdict, undecided=policy)) is failing


def test_every_line_fits_80_columns_and_is_ascii() -> None:
    text = describe(
        wire(
            yardstick=(1e5, 2e5, 3e5, 4e5),
            ray="V = E = n",
            rays=(("V alone, E = 100", "within"), ("E alone, V = 100", "within"), ("V = E = n", "exceeded")),
            reason="a long reason " * 12,
            sizes=tuple(SizeRow(size=10**9 * n, cost=1e13 * n, readings=9) for n in (1, 2, 4, 8)),
        )
    )
    body = text.split("\n\n", 1)[1]
    assert max(map(len, body.splitlines())) <= 80
    assert text.isascii()


def test_a_test_that_failed_says_at_which_size() -> None:
    assert sections([], "problem_size = 40") == [
        ("growth budget", "the test failed at problem_size = 40; no budget was judged")
    ]


def test_a_judgement_without_readings_is_short() -> None:
    text = describe(
        wire(
            verdict="unmeasured", reason="the body is too fast.", excess=None, exponent=None, resolution=None,
            nearest=None, sizes=(), forecast=(), bends_at=None, confirmed=None, allowed=(),
        )
    )  # fmt: skip
    assert text == textwrap.dedent(
        """\
        growth budget unmeasured: cpu_time against n log n: the body is too fast.

          declared   T(n) = 2 T(n/2) + n
          derived    n log n (Master theorem, case 2)

          repeat     --growth-seed 7 (measured in 250 ms)"""
    )


def test_the_total_line_counts_by_verdict() -> None:
    judged = [wire(), wire(verdict="within"), wire(verdict="within"), wire(verdict="undecided")]
    assert total_line(judged) == "4 growth budgets: 2 within, 1 exceeded, 1 undecided (measured in 1 s)"
    assert total_line(judged[:1]) == "1 growth budget: 1 exceeded (measured in 250 ms)"
