"""n^2.807 and n^3, plain or hidden behind fast inner loops."""

from __future__ import annotations

import itertools
import math
import random
from typing import Any

import numpy as np

from .entry import CUBIC, SEVEN_HALVES, Shelf
from .inputs import Arguments, bulk, small_integers, square_lists, two_square_arrays, two_square_lists

shelf = Shelf()
SMALL = 3


@shelf.add(
    CUBIC,
    two_square_lists,
    expected=lambda a, b: (np.array(a) @ np.array(b)).tolist(),
    reusable=True,
    smallest=SMALL,
    tags="counted",
)
def product_by_three_loops(one: list[list[float]], other: list[list[float]]) -> list[list[float]]:
    n = len(one)
    product = [[0.0] * n for _ in range(n)]
    for i in range(n):
        for j in range(n):
            total = 0.0
            for k in range(n):
                total += one[i][k] * other[k][j]
            product[i][j] = total
    return product


def shortest_by_powers(lengths: list[list[float]]) -> list[list[float]]:
    reach = np.array(lengths)
    for _ in range(len(lengths).bit_length()):
        reach = np.minimum(reach, (reach[:, :, None] + reach[None, :, :]).min(axis=1))
    return [list(row) for row in reach.tolist()]


@shelf.add(CUBIC, square_lists, expected=shortest_by_powers, smallest=SMALL, tags="counted")
def shortest_ways_between_all(lengths: list[list[float]]) -> list[list[float]]:
    for middle_row in range(len(lengths)):
        beyond = lengths[middle_row]
        for row in lengths:
            first = row[middle_row]
            for end, rest in enumerate(beyond):
                if first + rest < row[end]:
                    row[end] = first + rest
    return lengths


@shelf.add(
    CUBIC,
    lambda n, rng: (bulk(rng).integers(1, 100, n + 1).tolist(),),
    tags="counted memo",
    reusable=True,
    smallest=SMALL,
    growth="n^3",
)
def cheapest_bracketing(sides: list[int]) -> int:
    n = len(sides) - 1
    cost = [[0] * n for _ in range(n)]
    for width in range(1, n):
        for low in range(n - width):
            high = low + width
            cost[low][high] = min(
                cost[low][cut] + cost[cut + 1][high] + sides[low] * sides[cut + 1] * sides[high + 1]
                for cut in range(low, high)
            )
    return cost[0][n - 1]


@shelf.add(
    CUBIC,
    small_integers,
    reusable=True,
    smallest=SMALL,
    tags="library",
    expected=lambda v: sum(v[i] + v[j] + v[k] == 0 for i in range(len(v)) for j in range(i) for k in range(j)),
)
def triples_that_cancel(values: list[int]) -> int:
    return sum(a + b + c == 0 for a, b, c in itertools.combinations(values, 3))


def equations(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    rows = draw.random((n, n)) + n * np.eye(n)
    return rows.tolist(), draw.random(n).tolist()


@shelf.add(
    CUBIC,
    equations,
    expected=lambda rows, right: np.linalg.solve(np.array(rows), np.array(right)).tolist(),
    smallest=SMALL,
    tags="counted",
)
def eliminate(rows: list[list[float]], right: list[float]) -> list[float]:
    n = len(rows)
    for pivot in range(n):
        row = rows[pivot]
        for lower in range(pivot + 1, n):
            below = rows[lower]
            factor = below[pivot] / row[pivot]
            for column in range(pivot, n):
                below[column] -= factor * row[column]
            right[lower] -= factor * right[pivot]
    solution = [0.0] * n
    for pivot in reversed(range(n)):
        known = sum(rows[pivot][column] * solution[column] for column in range(pivot + 1, n))
        solution[pivot] = (right[pivot] - known) / rows[pivot][pivot]
    return solution


def best_by_running(values: list[int]) -> int:
    best = current = 0
    for value in values:
        current = max(0, current + value)
        best = max(best, current)
    return best


@shelf.add(CUBIC, small_integers, expected=best_by_running, tags="builtin slices", reusable=True, smallest=SMALL)
def best_slice_by_all_sums(values: list[int]) -> int:
    return max(sum(values[low:high]) for low in range(len(values) + 1) for high in range(low, len(values) + 1))


def relation(n: int, rng: random.Random) -> Arguments:
    return ((bulk(rng).random((n, n)) < 2 / n).tolist(),)


def reachable_by_powers(pairs: list[list[bool]]) -> list[list[bool]]:
    reach = np.array(pairs)
    for _ in range(len(pairs).bit_length()):
        reach = reach | (reach @ reach)
    return [list(row) for row in reach.tolist()]


@shelf.add(CUBIC, relation, expected=reachable_by_powers, tags="counted early_exit bimodal", smallest=SMALL)
def close_relation(pairs: list[list[bool]]) -> list[list[bool]]:
    n = len(pairs)
    for middle in range(n):
        for row in pairs:
            for end in range(n):
                row[end] = row[end] or (row[middle] and pairs[middle][end])
    return pairs


@shelf.add(
    CUBIC,
    two_square_arrays,
    expected=lambda a, b: np.einsum("ij,jk->ik", a, b),
    tags="numpy hidden",
    reusable=True,
    smallest=16,
    largest=1200,
)
def product_of_arrays(one: Any, other: Any) -> Any:
    return one @ other


def array_equations(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.random((n, n)) + n * np.eye(n), draw.random(n)


@shelf.add(
    CUBIC,
    array_equations,
    expected=lambda rows, right: np.linalg.inv(rows) @ right,
    tags="numpy hidden",
    reusable=True,
    smallest=16,
    largest=1200,
)
def solve_array_equations(rows: Any, right: Any) -> Any:
    return np.linalg.solve(rows, right)


@shelf.add(
    CUBIC,
    lambda n, rng: (bulk(rng).random((n, n)),),
    expected=lambda a: np.array(shortest_by_powers(a.tolist())),
    tags="numpy hidden streaming",
    smallest=16,
    largest=800,
)
def shortest_ways_by_rows(lengths: Any) -> Any:
    for middle in range(len(lengths)):
        np.minimum(lengths, lengths[:, middle, None] + lengths[middle], out=lengths)
    return lengths


@shelf.add(
    SEVEN_HALVES,
    two_square_arrays,
    growth="T(n) = 7 T(n/2) + n^2",
    expected=lambda a, b: a @ b,
    tags="numpy sawtooth recursion",
    reusable=True,
    smallest=17,
    largest=1200,
)
def product_in_seven_parts(one: Any, other: Any) -> Any:
    n = len(one)
    if n <= 16:
        return one @ other
    if n % 2:
        one, other = np.pad(one, ((0, 1), (0, 1))), np.pad(other, ((0, 1), (0, 1)))
        return product_in_seven_parts(one, other)[:n, :n]
    half = n // 2
    a, b, c, d = one[:half, :half], one[:half, half:], one[half:, :half], one[half:, half:]
    e, f, g, h = other[:half, :half], other[:half, half:], other[half:, :half], other[half:, half:]
    p1, p2 = product_in_seven_parts(a, f - h), product_in_seven_parts(a + b, h)
    p3, p4 = product_in_seven_parts(c + d, e), product_in_seven_parts(d, g - e)
    p5, p6 = product_in_seven_parts(a + d, e + h), product_in_seven_parts(b - d, g + h)
    p7 = product_in_seven_parts(a - c, e + f)
    whole = np.empty((n, n))
    whole[:half, :half], whole[:half, half:] = p5 + p4 - p2 + p6, p1 + p2
    whole[half:, :half], whole[half:, half:] = p3 + p4, p1 + p5 - p3 - p7
    return whole


@shelf.add(
    SEVEN_HALVES,
    small_integers,
    growth="T(n) = 7 T(n/2) + n^2",
    tags="counted recursion steps",
    reusable=True,
    smallest=4,
)
def seven_halves_over_pairs(values: list[int]) -> int:
    """Work on all pairs, then seven calls on half of the values."""

    def part(piece: list[int]) -> int:
        count = 0
        for one in piece:
            for other in piece:
                if one > other:
                    count += 1
        half = len(piece) // 2
        return count + (sum(part(piece[i * half // 6 : i * half // 6 + half]) for i in range(7)) if half else 0)

    return part(values)


@shelf.add(
    CUBIC,
    lambda n, rng: (n,),
    expected=lambda n: sum(
        1
        for a in range(1, n + 1)
        for b in range(a, n + 1)
        if (c := math.isqrt(a * a + b * b)) <= n and c * c == a * a + b * b
    ),
    reusable=True,
    smallest=SMALL,
    tags="counted",
)
def right_triangles_by_trial(n: int) -> int:
    count = 0
    for a in range(1, n + 1):
        for b in range(a, n + 1):
            for c in range(b, n + 1):
                if a * a + b * b == c * c:
                    count += 1
    return count


def relation_as_bits(n: int, rng: random.Random) -> Arguments:
    return ([sum(1 << bit for bit in rng.sample(range(n), 2)) for _ in range(n)],)


def reachable_by_flood(rows: list[int]) -> list[int]:
    found = []
    for row in rows:
        reached, last = row, 0
        while reached != last:
            last = reached
            for there, further in enumerate(rows):
                if last >> there & 1:
                    reached |= further
        found.append(reached)
    return found


@shelf.add(
    CUBIC, relation_as_bits, expected=reachable_by_flood, dominates=False, tags="hidden fast bits", smallest=SMALL
)
def close_relation_in_bits(rows: list[int]) -> list[int]:
    """n² steps of plain Python, each of which joins two rows of n bits."""
    for middle in range(len(rows)):
        beyond, mark = rows[middle], 1 << middle
        for place, row in enumerate(rows):
            if row & mark:
                rows[place] = row | beyond
    return rows
