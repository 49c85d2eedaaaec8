"""Constant, logarithmic and square-root bodies; most do it many times over, so that a clock can see them."""

from __future__ import annotations

import heapq
import itertools
import math
import random
from bisect import bisect_left
from collections import deque
from typing import Any

import numpy as np

from .entry import CONSTANT, LOGARITHM, ROOT, Shelf
from .inputs import Arguments, ascending, bulk, floats, integers, random_bytes, with_queries

shelf = Shelf()
MODULUS = 1_000_003


def table_and_keys(n: int, rng: random.Random) -> Arguments:
    keys = bulk(rng).integers(0, 1 << 40, n).tolist()
    return dict.fromkeys(keys, 1), [keys[rng.randrange(n)] for _ in range(300)]


@shelf.add(CONSTANT, table_and_keys, expected=lambda table, keys: len(keys), tags="cache hash", reusable=True)
def look_up_300_keys(table: dict[int, int], keys: list[int]) -> int:
    return sum(table[key] for key in keys)


@shelf.add(CONSTANT, floats, expected=list, tags="resize")
def append_and_pop_500(values: list[float]) -> list[float]:
    for step in range(500):
        values.append(step)
        values.pop()
    return values


def long_queue(n: int, rng: random.Random) -> Arguments:
    return (deque(bulk(rng).random(n).tolist()),)


@shelf.add(
    CONSTANT,
    long_queue,
    expected=lambda queue: [queue[(i + 400) % len(queue)] for i in range(3)],
    tags="deque",
)
def rotate_queue_by_400(queue: deque[float]) -> list[float]:
    for _ in range(400):
        queue.append(queue.popleft())
    return [queue[i] for i in range(3)]


@shelf.add(CONSTANT, floats, expected=lambda values: math.fsum(values[-256:]), reusable=True, smallest=256)
def sum_last_256(values: list[float]) -> float:
    total = 0.0
    for value in values[-256:]:
        total += value
    return total


@shelf.add(
    CONSTANT,
    random_bytes,
    expected=lambda data: 200 * (len(data) - len(data) // 2),
    tags="view",
    reusable=True,
)
def half_views(data: bytes) -> int:
    view = memoryview(data)
    half = len(data) // 2
    total = 0
    for _ in range(200):
        total += len(view[half:])
    return total


@shelf.add(CONSTANT, lambda n, rng: (n, [rng.randrange(3 * n) for _ in range(300)]), reusable=True)
def members_of_range(n: int, queries: list[int]) -> int:
    every_third = range(0, 3 * n, 3)
    return sum(query in every_third for query in queries)


@shelf.add(CONSTANT, ascending, expected=min, tags="tiny", reusable=True)
def peek_at_least(heap: list[float]) -> float:
    return heap[0]


@shelf.add(CONSTANT, floats, tags="early_exit random", reusable=True, smallest=512)
def first_above_half(values: list[float]) -> int:
    seen = 0
    for start in range(0, 512, 4):
        for value in itertools.islice(values, start, None):
            seen += 1
            if value > 0.5:
                break
    return seen


@shelf.add(
    CONSTANT,
    lambda n, rng: (bulk(rng).random(n),),
    expected=lambda a: 60 * len(a),
    tags="numpy view",
    reusable=True,
)
def reversed_array_views(array: Any) -> int:
    total = 0
    for _ in range(60):
        total += array[::-1].shape[0]
    return total


def answers_by_size(n: int, rng: random.Random) -> Arguments:
    return {i: i * i for i in range(n)}, [rng.randrange(n) for _ in range(200)]


@shelf.add(
    CONSTANT,
    answers_by_size,
    expected=lambda memo, asked: [i * i for i in asked],
    tags="memo cache",
    reusable=True,
)
def answered_from_memo(memo: dict[int, int], asked: list[int]) -> list[int]:
    answers = []
    for i in asked:
        if i not in memo:
            memo[i] = i * i
        answers.append(memo[i])
    return answers


@shelf.add(
    LOGARITHM,
    with_queries(ascending, 300),
    reusable=True,
    tags="cache",
    expected=lambda values, queries: np.searchsorted(values, queries).sum(),
)
def bisect_300_queries(values: list[float], queries: list[float]) -> int:
    return sum(bisect_left(values, query) for query in queries)


@shelf.add(
    LOGARITHM,
    with_queries(ascending, 60),
    growth="T(n) = T(n/2) + 1",
    reusable=True,
    tags="counted cache",
    expected=lambda values, queries: np.searchsorted(values, queries).tolist(),
)
def halve_by_hand(values: list[float], queries: list[float]) -> list[int]:
    places = []
    for query in queries:
        low, high = 0, len(values)
        while low < high:
            middle = (low + high) // 2
            if values[middle] < query:
                low = middle + 1
            else:
                high = middle
        places.append(low)
    return places


@shelf.add(LOGARITHM, ascending, tags="cache", smallest=400)
def replace_least_300(heap: list[float]) -> float:
    for step in range(300):
        heapq.heapreplace(heap, 2.0 + step)
    return heap[0]


@shelf.add(LOGARITHM, ascending, expected=min, tags="cache")
def push_and_pop_150(heap: list[float]) -> float:
    for step in range(150):
        heapq.heappush(heap, -float(step))
        heapq.heappop(heap)
    return heap[0]


def fenwick_tree(n: int, rng: random.Random) -> Arguments:
    return [0] * (n + 1), [rng.randrange(1, n + 1) for _ in range(40)]


@shelf.add(LOGARITHM, fenwick_tree, expected=lambda tree, places: len(places), tags="counted cache")
def add_in_fenwick_tree(tree: list[int], places: list[int]) -> int:
    for place in places:
        while place < len(tree):
            tree[place] += 1
            place += place & -place
    end, total = len(tree) - 1, 0
    while end:
        total += tree[end]
        end -= end & -end
    return total


@shelf.add(
    LOGARITHM,
    lambda n, rng: ([rng.randrange(2, MODULUS) for _ in range(30)], n),
    reusable=True,
    expected=lambda bases, n: [pow(base, n, MODULUS) for base in bases],
    largest=10**7,
    tags="counted",
)
def powers_by_squaring(bases: list[int], n: int) -> list[int]:
    powers = []
    for base in bases:
        power, left = 1, n
        while left:
            if left & 1:
                power = power * base % MODULUS
            base = base * base % MODULUS
            left >>= 1
        powers.append(power)
    return powers


def pairs_below(n: int, rng: random.Random) -> Arguments:
    return ([(n + 2 * rng.randrange(n), n + rng.randrange(n)) for _ in range(80)],)


@shelf.add(
    LOGARITHM,
    pairs_below,
    expected=lambda pairs: [math.gcd(*pair) for pair in pairs],
    reusable=True,
    largest=10**7,
    tags="counted random",
)
def euclid_80_pairs(pairs: list[tuple[int, int]]) -> list[int]:
    divisors = []
    for one, other in pairs:
        while other:
            one, other = other, one % other
        divisors.append(one)
    return divisors


def balanced_tree(n: int, rng: random.Random) -> Arguments:
    def grow(low: int, high: int) -> Any:
        if low >= high:
            return None
        middle = (low + high) // 2
        return (middle, grow(low, middle), grow(middle + 1, high))

    return grow(0, n), [rng.randrange(n) for _ in range(100)]


@shelf.add(
    LOGARITHM, balanced_tree, expected=lambda tree, keys: keys, reusable=True, tags="counted cache", largest=300_000
)
def descend_tree_100_times(tree: Any, keys: list[int]) -> list[int]:
    found = []
    for key in keys:
        node = tree
        while node[0] != key:
            node = node[1] if key < node[0] else node[2]
        found.append(node[0])
    return found


def sorted_array_and_queries(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return np.sort(draw.random(n)), draw.random(500)


@shelf.add(
    LOGARITHM,
    sorted_array_and_queries,
    tags="numpy cache",
    reusable=True,
    expected=lambda values, queries: [bisect_left(values.tolist(), query) for query in queries],
)
def search_sorted_array(values: Any, queries: Any) -> Any:
    return np.searchsorted(values, queries)


def prime_near(n: int, rng: random.Random) -> Arguments:
    m = n + rng.randrange(max(2, n // 50))
    while not all(pow(base, m - 1, m) == 1 for base in (2, 3, 5, 7, 11, 13)) or any(
        m % p == 0 for p in (3, 5, 7, 11, 13)
    ):
        m += 1
    return (m,)


@shelf.add(ROOT, prime_near, expected=lambda m: True, smallest=1000, largest=10**11, reusable=True)
def prime_by_trial_division(m: int) -> bool:
    divisor = 2
    while divisor * divisor <= m:
        if m % divisor == 0:
            return False
        divisor += 1
    return True


@shelf.add(
    ROOT,
    lambda n, rng: (n,),
    smallest=400,
    largest=10**11,
    reusable=True,
    expected=lambda n: sum(d for d in range(1, n + 1) if n % d == 0),
)
def sum_of_divisors(n: int) -> int:
    total = 0
    root = math.isqrt(n)
    for divisor in range(1, root + 1):
        if n % divisor == 0:
            total += divisor + n // divisor
    return total - root if root * root == n else total


def blocks_and_ranges(n: int, rng: random.Random) -> Arguments:
    values = bulk(rng).random(n).tolist()
    width = math.isqrt(n)
    sums = [sum(values[i : i + width]) for i in range(0, n, width)]
    return values, sums, width, [(rng.randrange(n // 4), rng.randrange(3 * n // 4, n)) for _ in range(10)]


@shelf.add(
    ROOT,
    blocks_and_ranges,
    smallest=64,
    reusable=True,
    tags="counted sawtooth",
    expected=lambda values, sums, width, ranges: [sum(values[a:b]) for a, b in ranges],
)
def range_sums_by_blocks(
    values: list[float], sums: list[float], width: int, ranges: list[tuple[int, int]]
) -> list[float]:
    totals = []
    for first, last in ranges:
        total, at = 0.0, first
        while at < last and at % width:
            total += values[at]
            at += 1
        while at + width <= last:
            total += sums[at // width]
            at += width
        while at < last:
            total += values[at]
            at += 1
        totals.append(total)
    return totals


@shelf.add(
    ROOT,
    with_queries(ascending, 10),
    smallest=64,
    reusable=True,
    expected=lambda values, queries: [bisect_left(values, query) for query in queries],
    tags="counted",
)
def jump_search_10_queries(values: list[float], queries: list[float]) -> list[int]:
    width = math.isqrt(len(values))
    places = []
    for query in queries:
        end = 0
        while end < len(values) and values[end] < query:
            end += width
        at = max(0, end - width)
        while at < len(values) and values[at] < query:
            at += 1
        places.append(at)
    return places


@shelf.add(
    ROOT,
    lambda n, rng: (n,),
    smallest=400,
    largest=10**11,
    reusable=True,
    expected=lambda n: (math.isqrt(8 * n + 1) - 1) // 2,
)
def row_of_triangle(n: int) -> int:
    row, left = 0, n
    while left > row:
        row += 1
        left -= row
    return row


@shelf.add(CONSTANT, integers, tags="large_constant", reusable=True)
def fixed_set_up(values: list[int]) -> int:
    total = 0
    for step in range(4000):
        total += step
    return total + values[0]
