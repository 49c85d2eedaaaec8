"""Quadratic bodies whose input or table has n² cells, and n² log n."""

from __future__ import annotations

import heapq
import itertools
import math
import random
from operator import itemgetter
from typing import Any

import numpy as np

from .entry import QUADRATIC, QUADRATIC_LOG, Shelf
from .inputs import (
    Arguments,
    bulk,
    floats,
    points,
    sparse_graph,
    square_array,
    square_lists,
    the_size,
)
from .ordered import relaxed_distances

shelf = Shelf()


def preferences(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    order = draw.permutation(n)
    return [order.tolist()] * n, [draw.permutation(n).argsort().tolist() for _ in range(n)]


@shelf.add(
    QUADRATIC,
    preferences,
    expected=lambda ships, berths: len(ships),
    tags="counted random cache",
    reusable=True,
    largest=2000,
)
def match_ships_to_berths(ships: list[list[int]], berths: list[list[int]]) -> int:
    """All ships want the same berths in the same order: the proposals are a fixed share of n²."""
    taken: dict[int, tuple[int, int]] = {}
    waiting = [(ship, 0) for ship in range(len(ships))]
    while waiting:
        ship, at = waiting.pop()
        berth = ships[ship][at]
        held = taken.get(berth)
        if held is None or berths[berth][ship] < berths[berth][held[0]]:
            taken[berth] = (ship, at)
            if held is not None:
                waiting.append((held[0], held[1] + 1))
        else:
            waiting.append((ship, at + 1))
    return len(taken)


@shelf.add(
    QUADRATIC,
    square_lists,
    expected=lambda rows: np.array(rows).T.tolist(),
    tags="counted cache allocator",
    reusable=True,
    largest=1500,
)
def transpose_rows(rows: list[list[float]]) -> list[list[float]]:
    return [[row[column] for row in rows] for column in range(len(rows))]


@shelf.add(
    QUADRATIC,
    square_array,
    expected=lambda a: float(sum(a[i, j] for i, j in itertools.product(range(len(a)), repeat=2))),
    tags="numpy streaming",
    reusable=True,
    largest=2500,
)
def sum_square_array(cells: Any) -> float:
    return float(cells.sum())


@shelf.add(
    QUADRATIC,
    lambda n, rng: (bulk(rng).random((n, 2)),),
    tags="numpy allocator cache",
    reusable=True,
    largest=2500,
    expected=lambda places: min(math.dist(a, b) for a, b in itertools.combinations(places.tolist(), 2)),
)
def nearest_by_all_differences(places: Any) -> float:
    differences = places[:, None, :] - places[None, :, :]
    squares = (differences * differences).sum(axis=-1)
    np.fill_diagonal(squares, np.inf)
    return float(np.sqrt(squares.min()))


@shelf.add(
    QUADRATIC,
    the_size,
    expected=lambda n: math.comb(n, n // 2) % 1_000_003,
    tags="counted memo hash",
    reusable=True,
    largest=2500,
)
def binomial_by_memo(n: int) -> int:
    memo = {(0, 0): 1}
    for row in range(1, n + 1):
        for column in range(row + 1):
            memo[row, column] = (memo.get((row - 1, column), 0) + memo.get((row - 1, column - 1), 0)) % 1_000_003
    return memo[n, n // 2]


@shelf.add(
    QUADRATIC_LOG,
    points,
    tags="builtin",
    reusable=True,
    largest=1000,
    expected=lambda places: [
        min(range(len(places)), key=lambda i: (math.dist(p, places[i]) == 0, math.dist(p, places[i]))) for p in places
    ],
)
def neighbours_by_sorting_distances(places: list[tuple[float, float]]) -> list[int]:
    nearest = []
    for place in places:
        order = sorted((math.dist(place, other), i) for i, other in enumerate(places))
        nearest.append(order[1][1])
    return nearest


@shelf.add(
    QUADRATIC_LOG,
    square_lists,
    expected=lambda rows: np.sort(rows, axis=1).tolist(),
    tags="builtin cache",
    reusable=True,
    largest=1000,
)
def sort_every_row(rows: list[list[float]]) -> list[list[float]]:
    return [sorted(row) for row in rows]


@shelf.add(
    QUADRATIC_LOG,
    sparse_graph(4),
    tags="library bimodal",
    reusable=True,
    largest=500,
    expected=lambda graph: len([1 for length in relaxed_distances(graph) if length < math.inf]),
)
def shortest_ways_from_everywhere(graph: list[list[tuple[int, float]]]) -> int:
    reached = []
    for start in range(len(graph)):
        reach = {start: 0.0}
        heap = [(0.0, start)]
        while heap:
            length, vertex = heapq.heappop(heap)
            if length > reach[vertex]:
                continue
            for other, weight in graph[vertex]:
                if length + weight < reach.get(other, math.inf):
                    reach[other] = length + weight
                    heapq.heappush(heap, (length + weight, other))
        reached.append(len(reach))
    return reached[0]


@shelf.add(
    QUADRATIC_LOG,
    floats,
    tags="builtin allocator",
    reusable=True,
    largest=1000,
    expected=lambda values: [a for _, a in sorted(((a + b, a) for a in values for b in values), key=itemgetter(0))][:3],
)
def sort_all_pair_sums(values: list[float]) -> list[float]:
    pairs = [(one + other, one) for one in values for other in values]
    pairs.sort(key=itemgetter(0))
    return [one for _, one in pairs[:3]]
