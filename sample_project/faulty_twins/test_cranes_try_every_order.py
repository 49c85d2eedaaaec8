"""Every order of the lifts is tried, though the order does not matter: n! where 2^n is promised."""

from __future__ import annotations

from itertools import permutations

import pytest
from harbour import cranes


def shortest_shift(lifts: list[int]) -> int:
    shortest = sum(lifts)
    for order in permutations(lifts):
        first = second = 0
        for minutes in order:
            if first <= second:
                first += minutes
            else:
                second += minutes
        shortest = min(shortest, max(first, second))
    return shortest


@pytest.mark.growth_budget("T(n) = 2 T(n-1) + 1", largest=18)
def test_the_lifts_are_shared_out_in_the_best_way(lifts: list[int], metered) -> None:
    with metered:
        minutes = shortest_shift(lifts)
    assert minutes == cranes.shortest_shift(lifts)
