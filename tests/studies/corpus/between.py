"""Between linear and quadratic: n^1.5 and n^1.585."""

from __future__ import annotations

import math
import random
from typing import Any

import numpy as np

from .entry import ROOT_CUBED, THREE_HALVES, Shelf
from .inputs import Arguments, bulk, floats, integers, the_size

shelf = Shelf()


def values_and_starts(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.random(n).tolist(), draw.integers(0, n, n).tolist()


@shelf.add(
    ROOT_CUBED,
    values_and_starts,
    reusable=True,
    expected=lambda v, starts: sum(math.fsum(v[s : s + math.isqrt(len(v))]) for s in starts),
)
def sums_of_root_long_slices(values: list[float], starts: list[int]) -> float:
    width = math.isqrt(len(values))
    total = 0.0
    for start in starts:
        total += sum(values[start : start + width])
    return total


@shelf.add(ROOT_CUBED, the_size, expected=lambda n: n * math.isqrt(n), reusable=True, tags="counted")
def nested_root_loop(n: int) -> int:
    count = 0
    for _ in range(n):
        for _ in range(math.isqrt(n)):
            count += 1
    return count


@shelf.add(ROOT_CUBED, the_size, expected=lambda n: sum(n // d for d in range(1, n + 1)), reusable=True, tags="counted")
def divisors_of_each_number(n: int) -> int:
    count = 0
    for number in range(1, n + 1):
        root = math.isqrt(number)
        for divisor in range(1, root + 1):
            if number % divisor == 0:
                count += 1 if divisor * divisor == number else 2
    return count


@shelf.add(ROOT_CUBED, integers, expected=lambda values: len(set(values)), reusable=True, tags="hash")
def set_with_too_few_buckets(values: list[int]) -> int:
    buckets: list[list[int]] = [[] for _ in range(math.isqrt(len(values)))]
    for value in values:
        bucket = buckets[value % len(buckets)]
        if value not in bucket:
            bucket.append(value)
    return sum(len(bucket) for bucket in buckets)


def matrix_of_n_cells(n: int, rng: random.Random) -> Arguments:
    side = math.isqrt(n)
    draw = bulk(rng)
    return draw.random((side, side)).tolist(), draw.random((side, side)).tolist()


@shelf.add(
    ROOT_CUBED,
    matrix_of_n_cells,
    expected=lambda a, b: (np.array(a) @ np.array(b)).tolist(),
    reusable=True,
    tags="counted",
)
def product_of_n_cells(one: list[list[float]], other: list[list[float]]) -> list[list[float]]:
    columns = list(zip(*other, strict=True))
    return [[sum([a * b for a, b in zip(row, column, strict=True)]) for column in columns] for row in one]


@shelf.add(ROOT_CUBED, floats, expected=lambda values: values, tags="hidden", reusable=True)
def copy_at_every_root_step(values: list[float]) -> list[float]:
    kept: list[float] = []
    step = math.isqrt(len(values))
    for place, value in enumerate(values):
        kept.append(value)
        if place % step == 0:
            kept = kept.copy()
    return kept


def two_digit_lists(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.integers(0, 10, n).tolist(), draw.integers(0, 10, n).tolist()


@shelf.add(
    THREE_HALVES,
    two_digit_lists,
    growth="T(n) = 3 T(n/2) + n",
    tags="counted sawtooth recursion allocator",
    reusable=True,
    expected=lambda one, other: [int(value) for value in np.convolve(one, other)],
)
def karatsuba_product(one: list[int], other: list[int]) -> list[int]:
    def product(a: list[int], b: list[int]) -> list[int]:
        size = len(a)
        if size <= 8:
            short = [0] * (2 * size - 1)
            for i, x in enumerate(a):
                for j, y in enumerate(b):
                    short[i + j] += x * y
            return short
        low = size // 2
        high = size - low
        low_part, high_part = product(a[:low], b[:low]), product(a[low:], b[low:])
        a_sum, b_sum = a[low:], b[low:]
        for i in range(low):
            a_sum[i] += a[i]
            b_sum[i] += b[i]
        middle = product(a_sum, b_sum)
        whole = [0] * (2 * size - 1)
        for i, x in enumerate(low_part):
            whole[i] += x
            middle[i] -= x
        for i, x in enumerate(high_part):
            whole[i + 2 * low] += x
            middle[i] -= x
        for i in range(2 * high - 1):
            whole[i + low] += middle[i]
        return whole

    return product(one, other)


def two_long_numbers(n: int, rng: random.Random) -> Arguments:
    return rng.getrandbits(8 * n) | 1, rng.getrandbits(8 * n) | 1


@shelf.add(
    THREE_HALVES,
    two_long_numbers,
    tags="sawtooth hidden",
    reusable=True,
    smallest=400,
    expected=lambda a, b: sum((a >> 64 * i & (1 << 64) - 1) * b << 64 * i for i in range(a.bit_length() // 64 + 1)),
)
def product_of_long_numbers(one: int, other: int) -> int:
    return one * other


@shelf.add(THREE_HALVES, floats, growth="T(n) = 3 T(n/2) + n", tags="counted recursion", reusable=True)
def visit_three_overlapping_halves(values: list[float]) -> float:
    def part(piece: list[float]) -> float:
        total = 0.0
        for value in piece:
            total += value
        half = len(piece) // 2
        if half:
            quarter = half // 2
            total += part(piece[:half]) + part(piece[quarter : quarter + half]) + part(piece[half : 2 * half])
        return total

    return part(values)


def odd_cells_by_rows(n: int) -> int:
    return sum(2 ** bin(row).count("1") for row in range(n))


@shelf.add(
    THREE_HALVES,
    the_size,
    expected=odd_cells_by_rows,
    tags="counted recursion steps",
    reusable=True,
    growth="T(n) = 3 T(n/2) + 1",
)
def odd_cells_of_triangle(n: int) -> int:
    """Odd binomial coefficients in the first n rows, cell by cell: twice the rows hold thrice the cells."""
    count = 0
    waiting = [(0, 1 << max(1, n - 1).bit_length())]
    while waiting:
        first_row, size = waiting.pop()
        if first_row >= n:
            continue
        if size == 1:
            count += 1
            continue
        half = size // 2
        waiting += [(first_row, half), (first_row + half, half), (first_row + half, half)]
    return count


def brute_force_or(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).random((math.isqrt(n), math.isqrt(n))).tolist(),)


@shelf.add(
    ROOT_CUBED,
    brute_force_or,
    tags="cache",
    reusable=True,
    expected=lambda rows: sum(math.fsum(max(a, b) for a, b in zip(x, y, strict=True)) for x in rows for y in rows),
)
def compare_all_rows(rows: list[list[float]]) -> float:
    total = 0.0
    for row in rows:
        for other in rows:
            total += sum(map(max, row, other))
    return total


@shelf.add(
    ROOT_CUBED,
    matrix_of_n_cells,
    expected=lambda a, b: np.array(a) @ np.array(b),
    tags="numpy hidden",
    reusable=True,
)
def array_product_of_n_cells(one: list[list[float]], other: list[list[float]]) -> Any:
    return np.array(one) @ np.array(other)
