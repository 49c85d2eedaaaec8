# ruff: noqa: PERF401, UP033 - a line an item is what the steps count; the rest is as code is found
"""Closest pairs, searching and counting down, each beside a twin with one planted fault."""

from __future__ import annotations

import functools

Items = list[int]
Point = tuple[float, float]


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
