"""Every stay is held against every other: n² where a sweep takes n log n."""

from __future__ import annotations

import pytest
from harbour import berths
from harbour.berths import Stay


def busiest_moment(stays: list[Stay]) -> tuple[int, int]:
    minute = most = 0
    for when, _ in sorted(stays):
        alongside = sum(1 for moored, left in stays if moored <= when < left)
        if alongside > most:
            minute, most = when, alongside
    return minute, most


@pytest.mark.growth_budget("n log n")
def test_the_busiest_moment_is_found(stays: list[Stay], metered) -> None:
    with metered:
        minute, ships = busiest_moment(stays)
    assert (minute, ships) == berths.busiest_moment(stays)
