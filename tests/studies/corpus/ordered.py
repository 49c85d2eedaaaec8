"""n log n: sorting, heaps, transforms; n log log n beside them."""

from __future__ import annotations

import bisect
import heapq
import itertools
import math
import random
import sqlite3
import statistics
from contextlib import closing
from typing import Any

import numpy as np

from .entry import LINEAR, LOGLINEAR, Shelf
from .inputs import (
    Arguments,
    array,
    ascending,
    bulk,
    floats,
    integers,
    number_words,
    points,
    prose,
    sparse_graph,
    the_size,
    two_float_lists,
)

shelf = Shelf()


@shelf.add(LOGLINEAR, floats, expected=lambda values: np.sort(values).tolist(), tags="builtin", reusable=True)
def sort_floats(values: list[float]) -> list[float]:
    return sorted(values)


@shelf.add(
    LOGLINEAR,
    number_words,
    expected=lambda words: sorted(words, reverse=True)[::-1],
    tags="builtin strings cache",
    reusable=True,
)
def sort_words(words: list[str]) -> list[str]:
    return sorted(words)


@shelf.add(LOGLINEAR, floats, expected=sorted, tags="library cache", reusable=True)
def sort_through_heap(values: list[float]) -> list[float]:
    heap: list[float] = []
    for value in values:
        heapq.heappush(heap, value)
    return [heapq.heappop(heap) for _ in range(len(heap))]


def sorted_and_queries(n: int, rng: random.Random) -> Arguments:
    return ascending(n, rng) + floats(n, rng)


@shelf.add(
    LOGLINEAR,
    sorted_and_queries,
    expected=lambda v, q: int(np.searchsorted(v, q).sum()),
    tags="library cache",
    reusable=True,
)
def bisect_n_queries(values: list[float], queries: list[float]) -> int:
    return sum(bisect.bisect_left(values, query) for query in queries)


@shelf.add(LOGLINEAR, array, expected=lambda values: sorted(values.tolist()), tags="numpy", reusable=True)
def sort_array(values: Any) -> Any:
    return np.sort(values)


@shelf.add(
    LOGLINEAR,
    array,
    expected=lambda v: sorted(range(len(v)), key=v.tolist().__getitem__),
    tags="numpy",
    reusable=True,
)
def stable_order_of_array(values: Any) -> Any:
    return np.argsort(values, kind="stable")


@shelf.add(
    LOGLINEAR,
    lambda n, rng: (bulk(rng).integers(0, n, n),),
    expected=lambda v: sorted(set(v.tolist())),
    tags="numpy",
    reusable=True,
)
def distinct_in_array(values: Any) -> Any:
    return np.unique(values)


@shelf.add(
    LOGLINEAR,
    array,
    tags="numpy steps",
    reusable=True,
    smallest=64,
    expected=lambda v: [np.exp(-2j * np.pi * k * np.arange(len(v)) / len(v)) @ v for k in range(len(v))],
)
def fourier_of_any_length(values: Any) -> Any:
    return np.fft.fft(values)


def array_of_prime_length(n: int, rng: random.Random) -> Arguments:
    length = n | 1
    while any(length % d == 0 for d in range(3, math.isqrt(length) + 1, 2)):
        length += 2
    return (bulk(rng).random(length),)


@shelf.add(
    LOGLINEAR,
    array_of_prime_length,
    tags="numpy steps prime",
    reusable=True,
    smallest=64,
    expected=lambda v: [np.exp(-2j * np.pi * k * np.arange(len(v)) / len(v)) @ v for k in range(len(v))],
)
def fourier_of_prime_length(values: Any) -> Any:
    return np.fft.fft(values)


def relaxed_distances(graph: list[list[tuple[int, float]]]) -> list[float]:
    reach = [math.inf] * len(graph)
    reach[0] = 0.0
    changed = True
    while changed:
        changed = False
        for vertex, edges in enumerate(graph):
            for other, weight in edges:
                if reach[vertex] + weight < reach[other]:
                    reach[other] = reach[vertex] + weight
                    changed = True
    return reach


@shelf.add(
    LOGLINEAR,
    sparse_graph(6),
    expected=relaxed_distances,
    tags="bimodal cache library",
    reusable=True,
    largest=200_000,
)
def shortest_ways_by_heap(graph: list[list[tuple[int, float]]]) -> list[float]:
    reach = [math.inf] * len(graph)
    reach[0] = 0.0
    heap = [(0.0, 0)]
    while heap:
        length, vertex = heapq.heappop(heap)
        if length > reach[vertex]:
            continue
        for other, weight in graph[vertex]:
            longer = length + weight
            if longer < reach[other]:
                reach[other] = longer
                heapq.heappush(heap, (longer, other))
    return reach


def rising_by_table(values: list[int]) -> int:
    best: list[int] = []
    for i, value in enumerate(values):
        best.append(1 + max((best[j] for j in range(i) if values[j] < value), default=0))
    return max(best)


@shelf.add(LOGLINEAR, integers, expected=rising_by_table, tags="library", reusable=True)
def longest_rising(values: list[int]) -> int:
    ends: list[int] = []
    for value in values:
        place = bisect.bisect_left(ends, value)
        ends[place : place + 1] = [value]
    return len(ends)


@shelf.add(
    LOGLINEAR,
    two_float_lists,
    tags="builtin",
    reusable=True,
    expected=lambda starts, spans: max(sum(s <= t < s + d for s, d in zip(starts, spans, strict=True)) for t in starts),
)
def berths_needed(starts: list[float], spans: list[float]) -> int:
    events = sorted(
        [(start, 1) for start in starts] + [(start + span, -1) for start, span in zip(starts, spans, strict=True)]
    )
    return max(itertools.accumulate(change for _, change in events))


@shelf.add(LOGLINEAR, points, tags="builtin", reusable=True, largest=200_000)
def convex_hull(places: list[tuple[float, float]]) -> int:
    def chain(ordered: list[tuple[float, float]]) -> int:
        kept: list[tuple[float, float]] = []
        for x, y in ordered:
            while len(kept) > 1 and (kept[-1][0] - kept[-2][0]) * (y - kept[-2][1]) <= (kept[-1][1] - kept[-2][1]) * (
                x - kept[-2][0]
            ):
                kept.pop()
            kept.append((x, y))
        return len(kept)

    ordered = sorted(places)
    return chain(ordered) + chain(ordered[::-1]) - 2


@shelf.add(LOGLINEAR, floats, tags="library allocator", reusable=True)
def code_tree_cost(weights: list[float]) -> float:
    heap = list(weights)
    heapq.heapify(heap)
    cost = 0.0
    while len(heap) > 1:
        joined = heapq.heappop(heap) + heapq.heappop(heap)
        cost += joined
        heapq.heappush(heap, joined)
    return cost


@shelf.add(LOGLINEAR, integers, expected=sorted, tags="library large_constant", reusable=True, largest=200_000)
def order_in_sqlite(values: list[int]) -> list[int]:
    with closing(sqlite3.connect(":memory:")) as database:
        database.execute("create table cargo (tons integer)")
        database.executemany("insert into cargo values (?)", zip(values, strict=True))
        return [tons for (tons,) in database.execute("select tons from cargo order by tons")]


@shelf.add(LOGLINEAR, floats, expected=lambda values: float(np.median(values)), tags="library", reusable=True)
def median_by_sorting(values: list[float]) -> float:
    return statistics.median(values)


@shelf.add(
    LOGLINEAR,
    the_size,
    expected=lambda n: sum(n // i for i in range(1, n + 1)),
    tags="counted steps",
    reusable=True,
    largest=300_000,
)
def count_all_multiples(n: int) -> int:
    count = 0
    for step in range(1, n + 1):
        for _ in range(step, n + 1, step):
            count += 1
    return count


@shelf.add(
    LINEAR,
    the_size,
    growth="n log log n",
    smallest=32,
    tags="fast cache",
    reusable=True,
    largest=10_000_000,
    expected=lambda n: sum(all(m % d for d in range(2, m)) for m in range(2, n + 1)),
)
def primes_by_sieve(n: int) -> int:
    prime = bytearray([1]) * (n + 1)
    prime[0:2] = b"\0\0"
    for divisor in range(2, math.isqrt(n) + 1):
        if prime[divisor]:
            prime[divisor * divisor :: divisor] = bytes(len(range(divisor * divisor, n + 1, divisor)))
    return sum(prime)


@shelf.add(
    LOGLINEAR,
    prose,
    expected=lambda text: sorted(text.split(), key=lambda w: (-len(w), w)),
    tags="builtin strings allocator",
    reusable=True,
)
def words_by_length(text: str) -> list[str]:
    return sorted(text.split(), key=lambda word: (-len(word), word))
