"""The rest of the stay is priced anew on every path to it: exponential where n is allowed."""

from __future__ import annotations

import pytest
from harbour.dues import THREE_DAYS, WEEK


def least_dues(day_rates: list[int]) -> int:
    if not day_rates:
        return 0
    return min(
        day_rates[0] + least_dues(day_rates[1:]),
        THREE_DAYS + least_dues(day_rates[3:]),
        WEEK + least_dues(day_rates[7:]),
    )


@pytest.mark.growth_budget("n", largest=4000)
def test_the_least_dues_lie_between_the_bounds(day_rates: list[int]) -> None:
    dues = least_dues(day_rates)
    assert dues <= sum(day_rates)
    assert dues <= WEEK * -(-len(day_rates) // 7)
    assert dues >= len(day_rates) * min(60, WEEK / 7)
