from __future__ import annotations

import pytest
from harbour.cranes import shortest_shift


@pytest.mark.parametrize(("lifts", "minutes"), [([], 0), ([30], 30), ([10, 20, 30], 30), ([7, 7, 7], 14)])
def test_small_shifts(lifts: list[int], minutes: int) -> None:
    assert shortest_shift(lifts) == minutes


# No shift has more lifts than `largest`.
@pytest.mark.growth_budget("T(n) = 2 T(n-1) + 1", largest=18)
def test_the_lifts_are_shared_out_in_the_best_way(lifts: list[int], metered) -> None:
    with metered:
        minutes = shortest_shift(lifts)
    assert minutes == least_half(lifts)


def least_half(lifts: list[int]) -> int:
    """The same answer by sums: bit k is set when some of the lifts take k minutes together."""
    sums = 1
    for minutes in lifts:
        sums |= sums << minutes
    return min(k for k in range(-(-sum(lifts) // 2), sum(lifts) + 1) if sums >> k & 1)
