"""Well-known recursions, each beside a twin with one planted fault, and workloads for them."""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from tests.auditing.recursions.others import (
    closest_pair,
    closest_pair_whole_strip,
    fibonacci,
    fibonacci_cached,
    fibonacci_memo,
    hanoi,
    hanoi_thrice,
    search,
    search_both,
    search_by_slices,
)
from tests.auditing.recursions.products import karatsuba, karatsuba_four, strassen, strassen_eight
from tests.auditing.recursions.sorting import (
    insertion_merge_sort,
    merge_sort,
    merge_sort_by_pop,
    merge_sort_in_place,
    merge_sort_tenth,
    merge_sort_thrice,
    quickselect,
    quickselect_both,
    quicksort,
    quicksort_first,
    quicksort_uneven,
    select,
    select_by_first,
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Example:
    """`declared`: what is commonly said of `call`; `build(rng)` gives its arguments; `of` the function inside.

    `implies`: the growth of what the code does ("": it has no short name); `broken`: what does not agree with the
    declared terms.
    """

    name: str
    declared: str
    implies: str
    broken: tuple[str, ...] = ()
    call: Callable[..., Any]
    build: Callable[[random.Random], Sequence[Any]]
    size_of: Callable[..., float] | None = None
    of: str | None = None


def shuffled(n: int) -> Callable[[random.Random], Sequence[Any]]:
    return lambda rng: [rng.sample(range(n), n)]


def drawn(n: int) -> Callable[[random.Random], Sequence[Any]]:
    return lambda rng: [rng.sample(range(n), n), random.Random(rng.random())]


def ranked(n: int) -> Callable[[random.Random], Sequence[Any]]:
    return lambda rng: [rng.sample(range(n), n), rng.randrange(n), random.Random(rng.random())]


def factors(n: int) -> Callable[[random.Random], Sequence[Any]]:
    return lambda rng: [[rng.randrange(10) for _ in range(n)] for _ in range(2)]


def matrices(n: int) -> Callable[[random.Random], Sequence[Any]]:
    def build(rng: random.Random) -> Sequence[Any]:
        numbers = np.random.default_rng(rng.randrange(2**32))
        return [numbers.random((n, n)), numbers.random((n, n))]

    return build


def points(n: int) -> Callable[[random.Random], Sequence[Any]]:
    return lambda rng: [[(rng.random(), rng.random()) for _ in range(n)]]


def on_a_line(n: int) -> Callable[[random.Random], Sequence[Any]]:
    """Points straight above each other: the whole of each part lies in the strip."""
    return lambda rng: [[(0.0, rng.random()) for _ in range(n)]]


def sought(n: int) -> Callable[[random.Random], Sequence[Any]]:
    return lambda rng: [list(range(n)), rng.randrange(n), 0, n]


def towers(discs: int) -> Callable[[random.Random], Sequence[Any]]:
    return lambda rng: [discs, list(range(discs, 0, -1)), [], []]


def between(low: int, high: int) -> int:
    return high - low


#: These take long: work out of the lines' sight needs large inputs.
LARGE = ("merge sort, pops from the front", "Strassen, eight products")


SOUND = (
    Example(
        name="merge sort, lists",
        declared="T(n) = 2 T(n/2) + n",
        implies="n log n",
        call=merge_sort,
        build=shuffled(4096),
    ),
    Example(
        name="merge sort, in place",
        declared="T(n) = 2 T(n/2) + n",
        implies="n log n",
        call=merge_sort_in_place,
        build=lambda rng: [rng.sample(range(4096), 4096), 0, 4096],
        size_of=between,
    ),
    Example(
        name="quicksort, random pivot",
        declared="T(n) = 2 T(n/2) + n",
        implies="n log n",
        broken=("argument",),
        call=quicksort,
        build=drawn(4096),
    ),
    Example(name="quickselect", declared="T(n) = T(3n/4) + n", implies="n", call=quickselect, build=ranked(20000)),
    Example(
        name="median of medians",
        declared="T(n) = T(n/5) + T(7n/10) + n",
        implies="n",
        call=select,
        build=lambda rng: [rng.sample(range(20000), 20000), 10000],
    ),
    Example(name="Karatsuba", declared="T(n) = 3 T(n/2) + n", implies="n^log2(3)", call=karatsuba, build=factors(256)),
    Example(
        name="Strassen, numpy blocks",
        declared="T(n) = 7 T(n/2) + n^2",
        implies="n^log2(7)",
        call=strassen,
        build=matrices(256),
    ),
    Example(
        name="closest pair",
        declared="T(n) = 2 T(n/2) + n",
        implies="n log n",
        call=closest_pair,
        build=points(4096),
        of="solve",
    ),
    Example(
        name="binary search, index",
        declared="T(n) = T(n/2) + 1",
        implies="log n",
        call=search,
        build=sought(100000),
        size_of=between,
    ),
    Example(
        name="Fibonacci with a memo",
        declared="T(n) = T(n - 1) + 1",
        implies="n",
        call=fibonacci_memo,
        build=lambda rng: [300, {}],
    ),
    Example(
        name="Fibonacci, cached",
        declared="T(n) = T(n - 1) + 1",
        implies="n",
        call=fibonacci_cached,
        build=lambda rng: [200],
        of="number",
    ),
    Example(name="Hanoi", declared="T(n) = 2 T(n - 1) + 1", implies="2^n", call=hanoi, build=towers(13)),
)


FAULTY = (
    Example(
        name="merge sort, pops from the front",
        declared="T(n) = 2 T(n/2) + n",
        implies="",
        broken=("toll",),
        call=merge_sort_by_pop,
        build=shuffled(65536),
    ),
    Example(
        name="merge sort, splits off a tenth",
        declared="T(n) = 2 T(n/2) + n",
        implies="n log n",
        broken=("argument",),
        call=merge_sort_tenth,
        build=shuffled(4096),
    ),
    Example(
        name="merge sort, three halves",
        declared="T(n) = 2 T(n/2) + n",
        implies="n^log2(3)",
        broken=("subproblems", "overlap"),
        call=merge_sort_thrice,
        build=shuffled(512),
    ),
    Example(
        name="merge sort, inserts",
        declared="T(n) = 2 T(n/2) + n",
        implies="n^2",
        broken=("toll",),
        call=insertion_merge_sort,
        build=shuffled(1024),
    ),
    Example(
        name="quicksort, sorted input",
        declared="T(n) = 2 T(n/2) + n",
        implies="n^2",
        broken=("argument",),
        call=quicksort_first,
        build=lambda rng: [list(range(400))],
    ),
    Example(
        name="quicksort, 99/1 split",
        declared="T(n) = 2 T(n/2) + n",
        implies="n log n",
        broken=("argument",),
        call=quicksort_uneven,
        build=lambda rng: [rng.sample(range(4096), 4096), 0],
    ),
    Example(
        name="quickselect, both parts",
        declared="T(n) = T(3n/4) + n",
        implies="n log n",
        broken=("subproblems",),
        call=quickselect_both,
        build=ranked(4096),
    ),
    Example(
        name="median of medians, first pivot",
        declared="T(n) = T(n/5) + T(7n/10) + n",
        implies="",
        broken=("argument",),
        call=select_by_first,
        build=lambda rng: [rng.sample(range(4096), 4096), 2048],
    ),
    Example(
        name="Karatsuba, four products",
        declared="T(n) = 3 T(n/2) + n",
        implies="n^2",
        broken=("subproblems",),
        call=karatsuba_four,
        build=factors(128),
    ),
    Example(
        name="Strassen, eight products",
        declared="T(n) = 7 T(n/2) + n^2",
        implies="n^3",
        broken=("subproblems",),
        call=strassen_eight,
        build=matrices(256),
    ),
    Example(
        name="closest pair, whole strip",
        declared="T(n) = 2 T(n/2) + n",
        implies="n^2",
        broken=("toll",),
        call=closest_pair_whole_strip,
        build=on_a_line(384),
        of="solve",
    ),
    Example(
        name="binary search, slices",
        declared="T(n) = T(n/2) + 1",
        implies="",
        broken=("toll",),
        call=search_by_slices,
        build=lambda rng: [list(range(100000)), rng.randrange(100000)],
    ),
    Example(
        name="binary search, both halves",
        declared="T(n) = T(n/2) + 1",
        implies="n",
        broken=("subproblems",),
        call=search_both,
        build=sought(4096),
        size_of=between,
    ),
    Example(
        name="Fibonacci without a memo",
        declared="T(n) = T(n - 1) + 1",
        implies="((1 + sqrt(5))/2)^n",
        broken=("subproblems", "overlap"),
        call=fibonacci,
        build=lambda rng: [20],
    ),
    Example(
        name="Hanoi, three journeys",
        declared="T(n) = 2 T(n - 1) + 1",
        implies="3^n",
        broken=("subproblems",),
        call=hanoi_thrice,
        build=towers(9),
    ),
)
