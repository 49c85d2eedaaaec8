"""Bodies that divide their input and call themselves: n log n, even and uneven splits, n log² n."""

from __future__ import annotations

import heapq
import itertools
import math
import random

from .entry import LOGLINEAR, Shelf
from .inputs import (
    floats,
    points,
)

shelf = Shelf()


@shelf.add(
    LOGLINEAR,
    floats,
    growth="T(n) = 2 T(n/2) + n",
    expected=sorted,
    tags="counted recursion allocator",
    reusable=True,
)
def merge_sort(values: list[float]) -> list[float]:
    if len(values) < 2:
        return values
    middle = len(values) // 2
    one, other = merge_sort(values[:middle]), merge_sort(values[middle:])
    merged = []
    i = j = 0
    while i < len(one) and j < len(other):
        if one[i] <= other[j]:
            merged.append(one[i])
            i += 1
        else:
            merged.append(other[j])
            j += 1
    return merged + one[i:] + other[j:]


@shelf.add(LOGLINEAR, floats, expected=sorted, tags="counted recursion random allocator", reusable=True)
def quick_sort_with_random_pivot(values: list[float]) -> list[float]:
    if len(values) < 2:
        return values
    pivot = random.choice(values)
    below = [value for value in values if value < pivot]
    above = [value for value in values if value > pivot]
    same = [value for value in values if value == pivot]
    return quick_sort_with_random_pivot(below) + same + quick_sort_with_random_pivot(above)


@shelf.add(
    LOGLINEAR,
    floats,
    growth="T(n) = T(0.99 n) + T(0.01 n) + n",
    tags="counted uneven recursion",
    reusable=True,
    largest=100_000,
)
def split_99_to_1(values: list[float]) -> float:
    waiting = [(0, len(values))]
    total = 0.0
    while waiting:
        low, high = waiting.pop()
        for value in values[low:high]:
            total += value
        if high - low > 1:
            cut = low + max(1, (high - low) // 100)
            waiting += [(low, cut), (cut, high)]
    return total


@shelf.add(LOGLINEAR, floats, growth="T(n) = T(n/3) + T(2n/3) + n", tags="uneven recursion", reusable=True)
def split_one_to_two(values: list[float]) -> float:
    def part(low: int, high: int) -> float:
        if high - low < 2:
            return values[low] if low < high else 0.0
        third = low + max(1, (high - low) // 3)
        return sum(values[low:high]) * 1e-9 + part(low, third) + part(third, high)

    return part(0, len(values))


def nearest_by_brute_force(places: list[tuple[float, float]]) -> float:
    return min(math.dist(a, b) for a, b in itertools.combinations(places, 2))


@shelf.add(
    LOGLINEAR,
    points,
    growth="T(n) = 2 T(n/2) + n",
    expected=nearest_by_brute_force,
    tags="counted recursion allocator",
    reusable=True,
    largest=100_000,
)
def nearest_pair(places: list[tuple[float, float]]) -> float:
    ordered = sorted(places)

    def part(low: int, high: int) -> tuple[float, list[tuple[float, float]]]:
        if high - low <= 3:
            few = ordered[low:high]
            near = min((math.dist(a, b) for a, b in itertools.combinations(few, 2)), default=math.inf)
            return near, sorted(few, key=lambda place: place[1])
        middle = (low + high) // 2
        line = ordered[middle][0]
        left_near, left = part(low, middle)
        right_near, right = part(middle, high)
        near = min(left_near, right_near)
        merged = list(heapq.merge(left, right, key=lambda place: place[1]))
        strip = [place for place in merged if abs(place[0] - line) < near]
        for i, place in enumerate(strip):
            for other in strip[i + 1 : i + 7]:
                near = min(near, math.dist(place, other))
        return near, merged

    return part(0, len(ordered))[0]


def inversions_by_pairs(values: list[float]) -> int:
    return sum(a > b for a, b in itertools.combinations(values, 2))


@shelf.add(
    LOGLINEAR,
    floats,
    growth="T(n) = 2 T(n/2) + n",
    expected=inversions_by_pairs,
    tags="counted recursion",
    reusable=True,
)
def count_inversions(values: list[float]) -> int:
    def part(piece: list[float]) -> tuple[int, list[float]]:
        if len(piece) < 2:
            return 0, piece
        middle = len(piece) // 2
        left_count, left = part(piece[:middle])
        right_count, right = part(piece[middle:])
        count, i, merged = left_count + right_count, 0, []
        for value in right:
            while i < len(left) and left[i] <= value:
                merged.append(left[i])
                i += 1
            count += len(left) - i
            merged.append(value)
        return count, merged + left[i:]

    return part(values)[0]


@shelf.add(
    LOGLINEAR,
    points,
    growth="T(n) = 2 T(n/2) + n log n",
    expected=len,
    tags="recursion allocator",
    reusable=True,
    largest=100_000,
)
def split_plane_by_sorting(places: list[tuple[float, float]]) -> int:
    def part(piece: list[tuple[float, float]], axis: int) -> int:
        if len(piece) < 2:
            return len(piece)
        ordered = sorted(piece, key=lambda place: place[axis])
        middle = len(ordered) // 2
        return part(ordered[:middle], 1 - axis) + part(ordered[middle:], 1 - axis)

    return part(places, 0)
