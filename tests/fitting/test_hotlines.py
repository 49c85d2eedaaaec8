"""Which lines are named, on made-up counts and times whose growth is known."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from pytest_growthbudget.fitting.hotlines import Grown, LineRun, Place, grown

Cost = Callable[[int], float]


def place(line: int) -> Place:
    return "catalogue.py", line


def at(size: int, lines: dict[int, tuple[Cost, Cost]], overhead: float) -> LineRun:
    """`lines`: executions, and nanoseconds each without the trace, by line number."""
    counts = {place(line): runs(size) for line, (runs, _) in lines.items()}
    times = {place(line): runs(size) * (each(size) + overhead) for line, (runs, each) in lines.items()}
    return LineRun(size=size, counts=counts, times=times)


def named(lines: dict[int, tuple[Cost, Cost]], allowed: Cost, overhead: float = 500.0) -> list[Grown]:
    def cost(n: int) -> float:
        return sum(runs(n) * each(n) for runs, each in lines.values())

    small, large = at(100, lines, overhead), at(400, lines, overhead)
    return grown(small, large, cost=cost(400) / cost(100), allowed=allowed(400) / allowed(100), overhead=overhead)


def constant(value: float) -> Cost:
    return lambda n: value


def test_lines_that_run_too_often() -> None:
    found = named(
        {
            1: (constant(1), constant(100)),
            2: (lambda n: n, constant(100)),
            3: (lambda n: n * n, constant(40)),
            4: (lambda n: n * n - n, constant(60)),
        },
        allowed=lambda n: n,
    )
    assert [(line.kind, line.place[1], line.before, line.after) for line in found] == [
        ("runs", 3, 10_000, 160_000),
        ("runs", 4, 9_900, 159_600),
    ]


def test_the_faster_growth_comes_first_whatever_its_count() -> None:
    found = named({2: (lambda n: 40 * n**2, constant(50)), 3: (lambda n: n**3 / 10, constant(50))}, allowed=lambda n: n)
    assert [line.place[1] for line in found] == [3, 2]


def test_at_most_three() -> None:
    found = named({line: (lambda n: n * n, constant(50)) for line in range(1, 9)}, allowed=lambda n: n)
    assert [line.place[1] for line in found] == [1, 2, 3]


def test_work_that_hides_in_calls() -> None:
    found = named(
        {
            2: (lambda n: n, constant(100)),
            3: (lambda n: n, lambda n: 20.0 * n),
            4: (lambda n: n, constant(80)),
        },
        allowed=lambda n: n,
    )
    assert [(line.kind, line.place[1]) for line in found] == [("takes", 3)]
    assert (found[0].before, found[0].after) == (pytest.approx(2000), pytest.approx(8000))


def test_many_executions_of_no_weight_do_not_hide_the_work_in_calls() -> None:
    found = named(
        {
            2: (lambda n: n**1.6 / 50, constant(50)),
            3: (lambda n: n, lambda n: 200.0 * n),
        },
        allowed=lambda n: n,
    )
    assert [(line.kind, line.place[1]) for line in found] == [("takes", 3)]


def test_of_lines_that_take_longer_the_one_that_took_most_comes_first() -> None:
    found = named(
        {
            2: (lambda n: n, lambda n: 20.0 * n),
            3: (lambda n: n, lambda n: 60.0 * n),
            4: (lambda n: n, lambda n: 40.0 * n),
        },
        allowed=lambda n: n,
    )
    assert [(line.kind, line.place[1]) for line in found] == [("takes", 3), ("takes", 4), ("takes", 2)]


def test_an_excess_too_small_for_two_runs_to_tell_is_not_named_however_far_apart_they_are() -> None:
    lines: dict[int, tuple[Cost, Cost]] = {2: (lambda n: n**1.08, constant(100)), 3: (lambda n: n, lambda n: n**0.08)}
    small, large = at(100, lines, 500.0), at(10_000, lines, 500.0)
    assert grown(small, large, cost=100**1.08, allowed=100.0, overhead=500.0) == []


def test_growth_that_the_budget_allows_is_not_named() -> None:
    assert named({2: (lambda n: n * n, constant(100))}, allowed=lambda n: n * n) == []
    assert named({2: (lambda n: n, lambda n: 30.0 * n)}, allowed=lambda n: n * n) == []


def test_lines_of_small_weight_are_passed_over() -> None:
    found = named({2: (lambda n: n**2, constant(100)), 3: (lambda n: n**2 / 50, constant(100))}, allowed=lambda n: n)
    assert [line.place[1] for line in found] == [2]


def test_a_line_that_ran_at_the_larger_size_only() -> None:
    small = LineRun(size=100, counts={place(1): 100.0}, times={place(1): 1e5})
    large = LineRun(size=400, counts={place(1): 400.0, place(2): 160_000.0}, times={place(1): 4e5, place(2): 1e8})
    found = grown(small, large, cost=300.0, allowed=4.0, overhead=500.0)
    assert [(line.place[1], line.before) for line in found] == [(2, 1.0)]


def test_nothing_ran() -> None:
    nothing = LineRun(size=100, counts={}, times={})
    assert grown(nothing, LineRun(size=400, counts={}, times={}), cost=16.0, allowed=4.0, overhead=500.0) == []
