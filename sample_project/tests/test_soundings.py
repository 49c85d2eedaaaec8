from __future__ import annotations

import pytest
from harbour.soundings import Sounding, closest_pair


def test_one_sounding_has_no_pair() -> None:
    with pytest.raises(ValueError, match="needs two soundings"):
        closest_pair([(0.0, 0.0)])


def test_the_pair_may_lie_across_the_border_of_the_halves() -> None:
    chart = [(0.0, 0.0), (4.9, 8.0), (5.1, 8.0), (9.0, 0.0), (20.0, 3.0), (-9.0, 3.0)]
    assert closest_pair(chart) == ((4.9, 8.0), (5.1, 8.0))


@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n")
def test_the_closest_soundings_are_found(soundings: list[Sounding]) -> None:
    first, second = soundings[0], soundings[-1]
    assert closest_pair(soundings) == (first, second)


# On a meridian every sounding lies in the strip between the halves.
@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n")
def test_the_closest_soundings_are_found_on_a_meridian(transect: list[Sounding]) -> None:
    first, second = transect[0], transect[-1]
    assert closest_pair(transect) == (first, second)
