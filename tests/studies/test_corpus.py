"""The corpus itself: its bodies run and answer rightly, and the budget language can read their growth."""

from __future__ import annotations

import math
import random
from collections.abc import Mapping, Sequence
from collections.abc import Set as AbstractSet
from typing import Any

import networkx  # type: ignore[import-untyped]
import numpy as np
import pytest

from tests.studies.corpus import CORPUS, Entry
from tests.studies.one_case import growth_of

every_entry = pytest.mark.parametrize("entry", CORPUS, ids=lambda entry: entry.name)


def agree(one: Any, other: Any) -> bool:
    """Whether two answers are the same but for the rounding of floats; sets and arrays compare as lists."""
    if isinstance(one, np.ndarray):
        return agree(one.tolist(), other)
    if isinstance(other, np.ndarray):
        return agree(one, other.tolist())
    if isinstance(one, AbstractSet) and not isinstance(other, AbstractSet):
        return agree(sorted(one), other)
    if isinstance(one, (float, np.floating)) or isinstance(other, (float, np.floating)):
        return math.isclose(one, other, rel_tol=1e-7, abs_tol=1e-9)
    if isinstance(one, networkx.Graph):
        return bool(networkx.utils.graphs_equal(one, other))
    if isinstance(one, complex):
        return bool(abs(one - complex(other)) <= 1e-7 * max(1.0, abs(one)))
    if isinstance(one, Mapping) and isinstance(other, Mapping):
        return one.keys() == other.keys() and all(agree(one[key], other[key]) for key in one)
    if isinstance(one, Sequence) and not isinstance(one, (str, bytes)):
        return (
            isinstance(other, Sequence)
            and len(one) == len(other)
            and all(agree(left, right) for left, right in zip(one, other, strict=True))
        )
    return bool(one == other)


def two_sizes(entry: Entry) -> tuple[int, int]:
    explosive = "^n" in entry.growth or "!" in entry.growth or "(n-2)" in entry.growth or "2 T(n-1)" in entry.growth
    return entry.smallest, entry.smallest + 4 if explosive else 3 * entry.smallest + 7


@every_entry
def test_answers_rightly_at_two_sizes(entry: Entry) -> None:
    for size in two_sizes(entry):
        given, kept = (entry.build(size, random.Random(f"{entry.name} {size}")) for _ in range(2))
        answer = entry.body(*given)
        if entry.expected is not None:
            assert agree(answer, entry.expected(*kept)), (size, answer)
        if entry.reusable:
            assert agree(list(given), list(kept)), size


@every_entry
def test_a_fresh_input_follows_from_its_seed_alone(entry: Entry) -> None:
    size = two_sizes(entry)[0]
    once, again = (entry.build(size, random.Random(7)) for _ in range(2))
    assert agree(list(once), list(again))


@every_entry
def test_growth_and_its_neighbours_are_in_order(entry: Entry) -> None:
    true, _ = growth_of(entry.growth)
    loose, _ = growth_of(entry.loose)
    assert loose(1000.0) - true(1000.0) > loose(100.0) - true(100.0)
    for text in entry.too_tight:
        tight, _ = growth_of(text)
        assert true(1000.0) - tight(1000.0) > true(100.0) - tight(100.0)


def test_names_are_unique_and_the_halves_are_balanced() -> None:
    names = [entry.name for entry in CORPUS]
    assert len(set(names)) == len(names) >= 130
    share = sum(entry.half == "hold" for entry in CORPUS) / len(CORPUS)
    assert 0.4 < share < 0.6


def test_the_corpus_spans_its_classes() -> None:
    covered = {entry.loose for entry in CORPUS}
    assert covered >= {"log n", "sqrt(n)", "n", "n log n", "n^1.5", "n^2", "n^3", "n^4", "2^n", "3^n", "n n!"}
    assert sum(not entry.dominates for entry in CORPUS) >= 5
