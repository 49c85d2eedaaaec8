"""Whether calls have the same arguments."""

from __future__ import annotations

from collections import deque
from typing import Any

import numpy as np
import pytest

from pytest_growthbudget.auditing.fingerprint import UNTOLD, Fingerprints


class Buoy:
    pass


class Sour:
    def __hash__(self) -> int:
        raise RuntimeError("no hash today")


@pytest.mark.parametrize(
    "build",
    [
        lambda: [3],
        lambda: ["harbour", 2.5, None],
        lambda: [[1, 2, 3], (4, 5)],
        lambda: [list(range(1000))],
        lambda: [[[1], [2, 3]]],
        lambda: [np.arange(12.0).reshape(3, 4)],
        lambda: [frozenset({1, 2})],
    ],
)
def test_equal_values_have_equal_keys(build: Any) -> None:
    told = Fingerprints()
    assert told.of(build()) == told.of(build()) != UNTOLD


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ([1, 2], [2, 1]),
        ([1], [1.0]),
        ([1], [True]),
        ([[1, 2]], [(1, 2)]),
        ([[1, 2, 3]], [[1, 2, 4]]),
        ([list(range(1000))], [list(range(1001))]),
        ([list(range(1000))], [list(range(1, 1001))]),
        ([np.zeros((2, 3))], [np.zeros((3, 2))]),
        ([np.zeros((64, 64))], [np.eye(64)]),
        ([[[1], [2]]], [[[1], [3]]]),
    ],
)
def test_different_values_have_different_keys(one: list[Any], other: list[Any]) -> None:
    told = Fingerprints()
    assert told.of(one) != told.of(other)


def test_objects_are_told_by_identity_and_held_so_that_none_takes_the_place_of_another() -> None:
    told = Fingerprints()
    # Without a hold on it each new object may well lie where the last one lay.
    assert len({told.of([Buoy()]) for _ in range(100)}) == 100
    assert len({told.of([{}]) for _ in range(100)}) == 100
    assert len({told.of([deque()]) for _ in range(100)}) == 100
    one = Buoy()
    assert told.of([one]) == told.of([one])


def test_what_cannot_be_told_has_no_key() -> None:
    assert Fingerprints().of([1, Sour()]) == UNTOLD


def test_no_more_than_so_many_objects_are_held(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("pytest_growthbudget.auditing.fingerprint._MOST_HELD", 3)
    told = Fingerprints()
    known = [Buoy() for _ in range(3)]
    assert all(told.of([buoy]) != UNTOLD for buoy in known)
    assert told.of([Buoy()]) == UNTOLD
    assert told.of([known[0]]) != UNTOLD
