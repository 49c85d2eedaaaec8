from __future__ import annotations

import pytest
from harbour.dues import WEEK, least_dues


def test_a_short_stay_is_paid_by_the_day() -> None:
    assert least_dues([90, 80]) == 170


def test_dear_days_are_paid_by_the_week() -> None:
    assert least_dues([200] * 14) == 2 * WEEK


@pytest.mark.growth_budget("n")
def test_the_least_dues_lie_between_the_bounds(day_rates: list[int]) -> None:
    dues = least_dues(day_rates)
    assert dues <= sum(day_rates)
    assert dues <= WEEK * -(-len(day_rates) // 7)
    # No day is cheaper than 60, and no pass cheaper than a seventh of a week a day.
    assert dues >= len(day_rates) * min(60, WEEK / 7)
