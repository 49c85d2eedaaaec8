"""All pairs are measured: n²."""

from __future__ import annotations

from itertools import combinations

import pytest
from harbour.soundings import Sounding


def closest_pair(soundings: list[Sounding]) -> tuple[Sounding, Sounding]:
    pair = min(combinations(soundings, 2), key=lambda p: (p[0][0] - p[1][0]) ** 2 + (p[0][1] - p[1][1]) ** 2)
    return min(pair), max(pair)


@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n")
def test_the_closest_soundings_are_found(soundings: list[Sounding]) -> None:
    first, second = soundings[0], soundings[-1]
    assert closest_pair(soundings) == (first, second)
