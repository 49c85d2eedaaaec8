"""The search in the strip does not stop at the best distance so far: n² as soon as the strip is full.

On a survey spread over the chart the strip is nearly empty, and the fault does not show. On a meridian it does.
"""

from __future__ import annotations

from itertools import combinations

import pytest
from harbour.soundings import Sounding


def closest_pair(soundings: list[Sounding]) -> tuple[Sounding, Sounding]:
    _, first, second = closest(sorted(soundings))
    return first, second


def closest(by_east: list[Sounding]) -> tuple[float, Sounding, Sounding]:
    if len(by_east) <= 3:
        return min(measured(a, b) for a, b in combinations(by_east, 2))
    middle = len(by_east) // 2
    best = min(closest(by_east[:middle]), closest(by_east[middle:]))
    border = by_east[middle][0]
    strip = [sounding for sounding in by_east if (sounding[0] - border) ** 2 < best[0]]
    return min([best, *(measured(a, b) for a, b in combinations(strip, 2))])


def measured(a: Sounding, b: Sounding) -> tuple[float, Sounding, Sounding]:
    return ((a[0] - b[0]) ** 2 + (a[1] - b[1]) ** 2, min(a, b), max(a, b))


@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n")
def test_the_closest_soundings_are_found_on_a_meridian(transect: list[Sounding]) -> None:
    first, second = transect[0], transect[-1]
    assert closest_pair(transect) == (first, second)
