"""Exponential and factorial bodies; n is small."""

from __future__ import annotations

import itertools
import math
import random

import numpy as np

from .entry import DOUBLING, FACTORIAL, GOLDEN, Shelf
from .inputs import Arguments, bulk, the_size

shelf = Shelf()
FEW = 4


@shelf.add(
    GOLDEN,
    the_size,
    growth="T(n) = T(n-1) + T(n-2) + 1",
    tags="recursion",
    reusable=True,
    smallest=FEW,
    largest=60,
    expected=lambda n: round(((1 + math.sqrt(5)) / 2) ** n / math.sqrt(5)),
)
def fibonacci_by_itself(n: int) -> int:
    return n if n < 2 else fibonacci_by_itself(n - 1) + fibonacci_by_itself(n - 2)


@shelf.add(
    GOLDEN,
    the_size,
    growth="n 1.618^n",
    tags="recursion generator allocator",
    reusable=True,
    smallest=FEW,
    largest=60,
    expected=lambda n: [s for s in map("".join, itertools.product("-|", repeat=n)) if "||" not in s],
)
def masts_never_side_by_side(n: int) -> list[str]:
    def rows(length: int) -> list[str]:
        if length < 2:
            return ["-", "|"] if length else [""]
        return ["-" + row for row in rows(length - 1)] + ["|-" + row for row in rows(length - 2)]

    return rows(n)


@shelf.add(
    DOUBLING,
    the_size,
    growth="T(n) = 2 T(n-1) + 1",
    tags="recursion",
    reusable=True,
    smallest=FEW,
    largest=40,
    expected=lambda n: 2**n - 1,
)
def tower_moves(n: int) -> int:
    moves = 0

    def carry(discs: int, start: str, via: str, end: str) -> None:
        nonlocal moves
        if discs:
            carry(discs - 1, start, end, via)
            moves += 1
            carry(discs - 1, via, start, end)

    carry(n, "left", "middle", "right")
    return moves


def loads(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).integers(1, 1000, n).tolist(),)


def best_fill_by_sets(weights: list[int]) -> int:
    reachable = {0}
    for weight in weights:
        reachable |= {weight + load for load in reachable}
    return max(load for load in reachable if load <= sum(weights) // 2)


@shelf.add(
    DOUBLING,
    loads,
    expected=best_fill_by_sets,
    tags="library",
    growth="n 2^n",
    reusable=True,
    smallest=FEW,
    largest=40,
)
def best_fill_of_all_subsets(weights: list[int]) -> int:
    room = sum(weights) // 2
    best = 0
    for mask in itertools.product((0, 1), repeat=len(weights)):
        load = sum(itertools.compress(weights, mask))
        if best < load <= room:
            best = load
    return best


@shelf.add(
    DOUBLING,
    loads,
    expected=lambda weights: 2 ** len(weights),
    tags="allocator cache",
    reusable=True,
    smallest=FEW,
    largest=22,
)
def sums_of_all_subsets(weights: list[int]) -> int:
    sums = [0]
    for weight in weights:
        sums += [weight + load for load in sums]
    return len(sums)


@shelf.add(DOUBLING, the_size, expected=lambda n: 1 << (n - 1), reusable=True, smallest=FEW, largest=30)
def count_in_gray_code(n: int) -> int:
    code = last = 0
    for step in range(1, 1 << n):
        code = step ^ (step >> 1)
        last = code
    return last


def ways_between(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).random((n, n)).tolist(),)


def round_trip_by_table(lengths: list[list[float]]) -> float:
    n = len(lengths)
    best = {(1, 0): 0.0}
    for _ in range(n - 1):
        longer: dict[tuple[int, int], float] = {}
        for (mask, at), length in best.items():
            for there in range(1, n):
                if not mask & (1 << there):
                    key = (mask | (1 << there), there)
                    longer[key] = min(longer.get(key, math.inf), length + lengths[at][there])
        best = longer
    return min(length + lengths[at][0] for (_, at), length in best.items())


@shelf.add(
    FACTORIAL,
    ways_between,
    expected=round_trip_by_table,
    tags="library",
    reusable=True,
    smallest=FEW,
    largest=12,
)
def round_trip_by_all_orders(lengths: list[list[float]]) -> float:
    best = math.inf
    for order in itertools.permutations(range(1, len(lengths))):
        length, at = 0.0, 0
        for there in order:
            length += lengths[at][there]
            at = there
        best = min(best, length + lengths[at][0])
    return best


@shelf.add(
    FACTORIAL,
    ways_between,
    tags="recursion allocator",
    reusable=True,
    smallest=3,
    largest=11,
    expected=lambda rows: float(np.linalg.det(np.array(rows))),
)
def determinant_by_minors(rows: list[list[float]]) -> float:
    if len(rows) == 1:
        return rows[0][0]
    total = 0.0
    for place, factor in enumerate(rows[0]):
        minor = [row[:place] + row[place + 1 :] for row in rows[1:]]
        total += (-1) ** place * factor * determinant_by_minors(minor)
    return total


@shelf.add(
    FACTORIAL,
    the_size,
    expected=lambda n: sum(math.factorial(n) // math.factorial(k) for k in range(n + 1)),
    tags="recursion",
    reusable=True,
    smallest=3,
    largest=12,
)
def count_berthing_orders(n: int) -> int:
    def place(left: frozenset[int]) -> int:
        return 1 + sum(place(left - {ship}) for ship in left)

    return place(frozenset(range(n)))
