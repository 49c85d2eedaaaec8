"""Patterns of made-up calls, whose splits are known."""

from __future__ import annotations

import math
import random
from dataclasses import replace

import numpy as np
import pytest

from pytest_growthbudget.auditing.pattern import Part, Pattern, pattern
from tests.auditing.made import Split, made, recorded


def found(size: int, split: Split) -> Pattern:
    seen = pattern(made(size, split))
    assert seen is not None
    return seen


def shape(part: Part) -> tuple[str, float, float, bool]:
    return part.kind, round(part.share, 2), round(part.value.mean, 2), part.fixed


def halves(n: int) -> list[int]:
    return [n // 2, n - n // 2] if n > 1 else []


@pytest.mark.parametrize("size", [1000, 1024, 777])
def test_halves(size: int) -> None:
    seen = found(size, halves)
    assert [shape(part) for part in seen.parts] == [("ratio", 1, 0.5, True)] * 2
    assert (seen.count.low, seen.count.high) == (2, 2)
    assert seen.partition
    assert seen.base.low == seen.base.high == 1
    assert seen.depth == math.ceil(math.log2(size)) + 1
    assert seen.largest == size


def test_a_hundredth_and_the_rest() -> None:
    seen = found(3000, lambda n: [n // 100, n - n // 100] if n > 1 and n // 100 else [n - 1, 1] if n > 1 else [])
    large, small = seen.parts
    assert shape(large) == ("ratio", 1, 0.99, True)
    assert small.kind in ("ratio", "constant")
    assert seen.partition


@pytest.mark.parametrize("by", [1, 2, 3])
def test_a_difference_is_told_from_a_ratio(by: int) -> None:
    seen = found(300, lambda n: [n - by] if n >= by else [])
    assert [shape(part) for part in seen.parts] == [("difference", 1, by, True)]


def test_few_sizes_tell_a_difference_too() -> None:
    seen = found(7, lambda n: [n - 1, n - 1] if n else [])
    assert [shape(part) for part in seen.parts] == [("difference", 1, 1, True)] * 2


def test_two_differences() -> None:
    seen = found(16, lambda n: [n - 1, n - 2] if n > 1 else [])
    assert [shape(part) for part in seen.parts] == [("difference", 1, 1, True), ("difference", 1, 2, True)]


def test_a_subproblem_of_constant_size_is_told_apart() -> None:
    seen = found(300, lambda n: [0, n - 1] if n > 0 else [])
    assert [shape(part) for part in seen.parts] == [("difference", 1, 1, True), ("constant", 1, 0, True)]


def test_a_root() -> None:
    calls = [made(size, lambda n: [math.isqrt(n)] if n > 2 else []) for size in (10**6, 10**9, 10**12, 10**15)]
    seen = pattern(calls[-1])
    assert seen is not None
    assert [shape(part) for part in seen.parts] == [("power", 1, 0.5, True)]


def test_random_splits_have_a_spread() -> None:
    rng = random.Random(5)

    def split(n: int) -> list[int]:
        if n < 2:
            return []
        cut = rng.randrange(n)
        return [cut, n - 1 - cut]

    seen = found(20000, split)
    large, small = seen.parts
    assert not large.fixed
    assert not small.fixed
    assert seen.partition
    # The larger part of a uniform cut is uniform between a half and the whole.
    assert large.value.mean == pytest.approx(0.75, abs=0.03)
    assert large.value.low == pytest.approx(0.525, abs=0.03)
    assert large.value.high == pytest.approx(0.975, abs=0.03)


def test_as_many_subproblems_as_the_size() -> None:
    seen = found(7, lambda n: [n - 1] * n)
    assert seen.count_power == 1
    assert seen.count_factor == pytest.approx(1)
    assert [shape(part)[::2] for part in seen.parts] == [("difference", 1)]


def test_children_answered_at_once_are_no_subproblems() -> None:
    """What a memo does: each call asks for two, and the second is known by then."""
    known: set[int] = set()

    def split(n: int) -> list[int]:
        if n < 2 or n in known:
            return []
        known.add(n)
        return [n - 1, n - 2]

    seen = found(300, split)
    assert [shape(part) for part in seen.parts] == [("difference", 1, 1, True)]
    assert seen.at_once == 297


def test_sizes_that_do_not_shrink_are_told() -> None:
    calls = made(10, lambda n: [n - 1] if n else [])
    seen = pattern(replace(calls, size=np.full(len(calls), 5.0)))
    assert seen is not None
    assert seen.growing == 1


def test_without_a_subproblem_there_is_no_pattern() -> None:
    assert pattern(made(5, lambda n: [])) is None


def test_open_calls_are_left_out() -> None:
    calls = made(64, halves)
    whole = calls.whole.copy()
    whole[:3] = False  # the root, and the first two below it
    seen = pattern(replace(calls, whole=whole))
    assert seen is not None
    assert seen.dividing == 60


def test_the_same_arguments_in_another_run_are_no_repetition() -> None:
    def halve(n: int) -> int:
        return 0 if n < 2 else halve(n // 2)

    seen = pattern(recorded(halve, *[(2**20,)] * 20))
    assert seen is not None
    assert seen.asked == seen.distinct > 100


def test_the_same_arguments_in_one_run_are_counted() -> None:
    def fibonacci(n: int) -> int:
        return n if n < 2 else fibonacci(n - 1) + fibonacci(n - 2)

    seen = pattern(recorded(fibonacci, (18,)))
    assert seen is not None
    assert seen.distinct == 18 - seen.from_size + 1
    assert seen.asked > 4 * seen.distinct
