"""Depth soundings on the chart: the two that stand too close to print."""

from __future__ import annotations

from collections.abc import Sequence

Sounding = tuple[float, float]
"""Easting and northing, in metres."""

Pair = tuple[float, Sounding, Sounding]


def closest_pair(soundings: Sequence[Sounding]) -> tuple[Sounding, Sounding]:
    """The two soundings that are nearest to each other, by halves: T(n) = 2 T(n/2) + n.

    The lists are sorted once and then only split, so that no half is sorted again.
    Raises `ValueError` for fewer than two soundings.
    """
    if len(soundings) < 2:
        raise ValueError(f"a pair needs two soundings; there are {len(soundings)}")
    by_east = sorted(soundings)
    rank_by_north = sorted(range(len(by_east)), key=lambda rank: by_east[rank][1])
    _, first, second = _closest(by_east, 0, len(by_east), rank_by_north)
    return first, second


def _closest(by_east: list[Sounding], start: int, stop: int, by_north: list[int]) -> Pair:
    if stop - start <= 3:
        return min(_pair(by_east[i], by_east[j]) for i in range(start, stop) for j in range(i + 1, stop))
    middle = (start + stop) // 2
    best = min(
        _closest(by_east, start, middle, [rank for rank in by_north if rank < middle]),
        _closest(by_east, middle, stop, [rank for rank in by_north if rank >= middle]),
    )
    border = by_east[middle][0]
    strip = [by_east[rank] for rank in by_north if (by_east[rank][0] - border) ** 2 < best[0]]
    for i, lower in enumerate(strip):
        # Going north, no more than a few can be nearer than the best so far.
        for upper in strip[i + 1 : i + 8]:
            if (upper[1] - lower[1]) ** 2 >= best[0]:
                break
            best = min(best, _pair(lower, upper))
    return best


def _pair(a: Sounding, b: Sounding) -> Pair:
    return ((a[0] - b[0]) ** 2 + (a[1] - b[1]) ** 2, min(a, b), max(a, b))
