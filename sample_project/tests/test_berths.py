from __future__ import annotations

from itertools import accumulate

import pytest
from harbour.berths import Stay, busiest_moment


def test_a_berth_is_free_at_the_minute_of_leaving() -> None:
    assert busiest_moment([(0, 60), (60, 90)]) == (0, 1)


def test_an_empty_quay() -> None:
    assert busiest_moment([]) == (0, 0)


@pytest.mark.growth_budget("n log n")
def test_the_busiest_moment_is_found(stays: list[Stay], metered) -> None:
    with metered:
        minute, ships = busiest_moment(stays)
    assert (minute, ships) == busiest_by_minute(stays)


def busiest_by_minute(stays: list[Stay]) -> tuple[int, int]:
    """The same answer, minute by minute."""
    change = [0] * (max(left for _, left in stays) + 1)
    for moored, left in stays:
        change[moored] += 1
        change[left] -= 1
    alongside = list(accumulate(change))
    most = max(alongside)
    return alongside.index(most), most
