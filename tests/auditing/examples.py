# ruff: noqa: PERF401, RUF005, UP033 - a line an item is what the steps count; the rest is as code is found
"""Textbook recursions, each beside a twin with one planted fault, and workloads for them."""

from __future__ import annotations

import functools
import random
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

Items = list[int]
Point = tuple[float, float]


# ------------------------------------------------------------------ sorting


def merge(left: Items, right: Items) -> Items:
    merged = []
    i = j = 0
    while i < len(left) and j < len(right):
        if left[i] <= right[j]:
            merged.append(left[i])
            i += 1
        else:
            merged.append(right[j])
            j += 1
    return merged + left[i:] + right[j:]


def merge_sort(items: Items) -> Items:
    if len(items) < 2:
        return items
    middle = len(items) // 2
    return merge(merge_sort(items[:middle]), merge_sort(items[middle:]))


def merge_by_pop(left: Items, right: Items) -> Items:
    merged = []
    while left and right:
        merged.append(left.pop(0) if left[0] <= right[0] else right.pop(0))
    return merged + left + right


def merge_sort_by_pop(items: Items) -> Items:
    if len(items) < 2:
        return items
    middle = len(items) // 2
    return merge_by_pop(merge_sort_by_pop(items[:middle]), merge_sort_by_pop(items[middle:]))


def merge_sort_in_place(items: Items, low: int, high: int) -> None:
    if high - low < 2:
        return
    middle = (low + high) // 2
    merge_sort_in_place(items, low, middle)
    merge_sort_in_place(items, middle, high)
    items[low:high] = merge(items[low:middle], items[middle:high])


def merge_sort_tenth(items: Items) -> Items:
    """Splits off a tenth."""
    if len(items) < 2:
        return items
    cut = max(1, len(items) // 10)
    return merge(merge_sort_tenth(items[:cut]), merge_sort_tenth(items[cut:]))


def merge_sort_thrice(items: Items) -> Items:
    """Sorts its left half twice."""
    if len(items) < 2:
        return items
    middle = len(items) // 2
    merge_sort_thrice(items[:middle])
    return merge(merge_sort_thrice(items[:middle]), merge_sort_thrice(items[middle:]))


def insertion_merge_sort(items: Items) -> Items:
    """Merges by inserting one by one, with a search from the front: a quadratic merge."""
    if len(items) < 2:
        return items
    middle = len(items) // 2
    left, right = insertion_merge_sort(items[:middle]), insertion_merge_sort(items[middle:])
    for value in right:
        place = 0
        while place < len(left) and left[place] <= value:
            place += 1
        left = left[:place] + [value] + left[place:]
    return left


def parted(items: Items, pivot: int) -> tuple[Items, Items]:
    below, above = [], []
    for item in items:
        if item < pivot:
            below.append(item)
        elif item > pivot:
            above.append(item)
    return below, above


def quicksort(items: Items, rng: random.Random) -> Items:
    if len(items) < 2:
        return items
    pivot = items[rng.randrange(len(items))]
    below, above = parted(items, pivot)
    return [*quicksort(below, rng), pivot, *quicksort(above, rng)]


def quicksort_first(items: Items) -> Items:
    """Takes the first item as the pivot."""
    if len(items) < 2:
        return items
    below, above = parted(items, items[0])
    return [*quicksort_first(below), items[0], *quicksort_first(above)]


def quicksort_uneven(items: Items, least: int) -> Items:
    """Cuts off a hundredth; the items are whole numbers from `least` on without a gap."""
    if len(items) < 2:
        return items
    pivot = least + len(items) // 100
    below, above = parted(items, pivot)
    return [*quicksort_uneven(below, least), pivot, *quicksort_uneven(above, pivot + 1)]


# ------------------------------------------------------------------ selection


def quickselect(items: Items, rank: int, rng: random.Random) -> int:
    pivot = items[rng.randrange(len(items))]
    below, above = parted(items, pivot)
    if rank < len(below):
        return quickselect(below, rank, rng)
    if rank == len(below):
        return pivot
    return quickselect(above, rank - len(below) - 1, rng)


def quickselect_both(items: Items, rank: int, rng: random.Random) -> int:
    """Looks into both parts, and uses one."""
    if len(items) < 2:
        return items[0] if items else -1
    pivot = items[rng.randrange(len(items))]
    below, above = parted(items, pivot)
    one = quickselect_both(below, min(rank, len(below) - 1), rng)
    other = quickselect_both(above, max(0, rank - len(below) - 1), rng)
    return one if rank < len(below) else pivot if rank == len(below) else other


def select(items: Items, rank: int) -> int:
    """Median of medians of five."""
    if len(items) <= 5:
        return sorted(items)[rank]
    medians = [sorted(items[i : i + 5])[len(items[i : i + 5]) // 2] for i in range(0, len(items), 5)]
    pivot = select(medians, len(medians) // 2)
    below, above = parted(items, pivot)
    if rank < len(below):
        return select(below, rank)
    if rank == len(below):
        return pivot
    return select(above, rank - len(below) - 1)


def select_by_first(items: Items, rank: int) -> int:
    """Finds the median of medians, then takes the least median as the pivot."""
    if len(items) <= 5:
        return sorted(items)[rank]
    medians = [sorted(items[i : i + 5])[len(items[i : i + 5]) // 2] for i in range(0, len(items), 5)]
    select_by_first(medians, len(medians) // 2)
    below, above = parted(items, min(medians))
    if rank < len(below):
        return select_by_first(below, rank)
    if rank == len(below):
        return min(medians)
    return select_by_first(above, rank - len(below) - 1)


# ------------------------------------------------------------------ products


def _sum(one: Items, other: Items) -> Items:
    total = []
    for place in range(max(len(one), len(other))):
        total.append((one[place] if place < len(one) else 0) + (other[place] if place < len(other) else 0))
    return total


def _gathered(low: Items, middle: Items, high: Items, half: int) -> Items:
    product = [0] * (2 * half + len(high))
    for place, value in enumerate(low):
        product[place] += value
    for place, value in enumerate(high):
        product[place + 2 * half] += value
    for place, value in enumerate(middle):
        product[place + half] += value
    return product


def karatsuba(one: Items, other: Items) -> Items:
    """The product of two polynomials of the same length, a power of two."""
    if len(one) == 1:
        return [one[0] * other[0]]
    half = len(one) // 2
    low = karatsuba(one[:half], other[:half])
    high = karatsuba(one[half:], other[half:])
    cross = karatsuba(_sum(one[:half], one[half:]), _sum(other[:half], other[half:]))
    middle = []
    for place, value in enumerate(cross):
        middle.append(value - low[place] - high[place])
    return _gathered(low, middle, high, half)


def karatsuba_four(one: Items, other: Items) -> Items:
    """Multiplies four halves."""
    if len(one) == 1:
        return [one[0] * other[0]]
    half = len(one) // 2
    low = karatsuba_four(one[:half], other[:half])
    high = karatsuba_four(one[half:], other[half:])
    middle = _sum(karatsuba_four(one[:half], other[half:]), karatsuba_four(one[half:], other[:half]))
    return _gathered(low, middle, high, half)


def strassen(a: Any, b: Any) -> Any:
    """Matrices whose side is a power of two; blocks of 8 are multiplied by numpy."""
    if len(a) <= 8:
        return a @ b
    h = len(a) // 2
    a11, a12, a21, a22 = a[:h, :h], a[:h, h:], a[h:, :h], a[h:, h:]
    b11, b12, b21, b22 = b[:h, :h], b[:h, h:], b[h:, :h], b[h:, h:]
    m1 = strassen(a11 + a22, b11 + b22)
    m2 = strassen(a21 + a22, b11)
    m3 = strassen(a11, b12 - b22)
    m4 = strassen(a22, b21 - b11)
    m5 = strassen(a11 + a12, b22)
    m6 = strassen(a21 - a11, b11 + b12)
    m7 = strassen(a12 - a22, b21 + b22)
    return np.block([[m1 + m4 - m5 + m7, m3 + m5], [m2 + m4, m1 - m2 + m3 + m6]])


def strassen_eight(a: Any, b: Any) -> Any:
    """The plain eight products."""
    if len(a) <= 8:
        return a @ b
    h = len(a) // 2
    a11, a12, a21, a22 = a[:h, :h], a[:h, h:], a[h:, :h], a[h:, h:]
    b11, b12, b21, b22 = b[:h, :h], b[:h, h:], b[h:, :h], b[h:, h:]
    return np.block(
        [
            [strassen_eight(a11, b11) + strassen_eight(a12, b21), strassen_eight(a11, b12) + strassen_eight(a12, b22)],
            [strassen_eight(a21, b11) + strassen_eight(a22, b21), strassen_eight(a21, b12) + strassen_eight(a22, b22)],
        ]
    )


# ------------------------------------------------------------------ geometry


def _apart(one: Point, other: Point) -> float:
    return (one[0] - other[0]) ** 2 + (one[1] - other[1]) ** 2


def _by_height(one: list[Point], other: list[Point]) -> list[Point]:
    merged = []
    i = j = 0
    while i < len(one) and j < len(other):
        if one[i][1] <= other[j][1]:
            merged.append(one[i])
            i += 1
        else:
            merged.append(other[j])
            j += 1
    return merged + one[i:] + other[j:]


def closest_pair(points: list[Point]) -> float:
    """The squared distance of the closest pair of at least two points."""

    def solve(part: list[Point]) -> tuple[float, list[Point]]:
        if len(part) <= 3:
            best = min((_apart(p, q) for i, p in enumerate(part) for q in part[:i]), default=float("inf"))
            return best, sorted(part, key=lambda p: p[1])
        middle = len(part) // 2
        line = part[middle][0]
        one, left = solve(part[:middle])
        other, right = solve(part[middle:])
        best, heights = min(one, other), _by_height(left, right)
        strip = []
        for point in heights:
            if (point[0] - line) ** 2 < best:
                strip.append(point)
        for place, point in enumerate(strip):
            for near in strip[place + 1 : place + 8]:
                best = min(best, _apart(point, near))
        return best, heights

    return solve(sorted(points))[0]


def closest_pair_whole_strip(points: list[Point]) -> float:
    """Compares every pair in the strip."""

    def solve(part: list[Point]) -> tuple[float, list[Point]]:
        if len(part) <= 3:
            best = min((_apart(p, q) for i, p in enumerate(part) for q in part[:i]), default=float("inf"))
            return best, sorted(part, key=lambda p: p[1])
        middle = len(part) // 2
        line = part[middle][0]
        one, left = solve(part[:middle])
        other, right = solve(part[middle:])
        best, heights = min(one, other), _by_height(left, right)
        strip = []
        for point in heights:
            if (point[0] - line) ** 2 < best:
                strip.append(point)
        for place, point in enumerate(strip):
            for near in strip[place + 1 :]:
                best = min(best, _apart(point, near))
        return best, heights

    return solve(sorted(points))[0]


# ------------------------------------------------------------------ searching


def search(items: Items, wanted: int, low: int, high: int) -> int:
    """The place of the first item that is not below `wanted`."""
    if low == high:
        return low
    middle = (low + high) // 2
    if items[middle] < wanted:
        return search(items, wanted, middle + 1, high)
    return search(items, wanted, low, middle)


def search_by_slices(items: Items, wanted: int) -> int:
    if not items:
        return 0
    middle = len(items) // 2
    if items[middle] < wanted:
        return middle + 1 + search_by_slices(items[middle + 1 :], wanted)
    return search_by_slices(items[:middle], wanted)


def search_both(items: Items, wanted: int, low: int, high: int) -> int:
    """Looks into both halves."""
    if high - low == 1:
        return low if items[low] == wanted else -1
    middle = (low + high) // 2
    return max(search_both(items, wanted, low, middle), search_both(items, wanted, middle, high))


# ------------------------------------------------------------------ counting down


def fibonacci(n: int) -> int:
    return n if n < 2 else fibonacci(n - 1) + fibonacci(n - 2)


def fibonacci_memo(n: int, known: dict[int, int]) -> int:
    if n < 2:
        return n
    if n in known:
        return known[n]
    known[n] = fibonacci_memo(n - 1, known) + fibonacci_memo(n - 2, known)
    return known[n]


def fibonacci_cached(n: int) -> int:
    @functools.lru_cache(maxsize=None)
    def number(k: int) -> int:
        return k if k < 2 else number(k - 1) + number(k - 2)

    return number(n)


def hanoi(discs: int, source: list[int], target: list[int], spare: list[int]) -> None:
    if discs:
        hanoi(discs - 1, source, spare, target)
        target.append(source.pop())
        hanoi(discs - 1, spare, target, source)


def hanoi_thrice(discs: int, source: list[int], target: list[int], spare: list[int]) -> None:
    """Moves the tower by way of a third journey."""
    if discs:
        hanoi_thrice(discs - 1, source, target, spare)
        hanoi_thrice(discs - 1, target, spare, source)
        target.append(source.pop())
        hanoi_thrice(discs - 1, spare, target, source)


# ------------------------------------------------------------------ the list


@dataclass(frozen=True, slots=True, kw_only=True)
class Example:
    """`declared`: what the textbook says of `call`; `build(rng)` gives its arguments; `of` the function inside.

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
