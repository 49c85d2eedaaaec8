"""Harbour dues."""

from __future__ import annotations

from collections.abc import Sequence

THREE_DAYS = 250
WEEK = 520


def least_dues(day_rates: Sequence[int]) -> int:
    """The least that a ship pays for its stay: single days, three days or a week at a time.

    `day_rates[i]` is the price of day i alone. A pass may run on after the ship has left.
    """
    least = [0]
    for day, rate in enumerate(day_rates, start=1):
        least.append(
            min(
                least[day - 1] + rate,
                least[max(day - 3, 0)] + THREE_DAYS,
                least[max(day - 7, 0)] + WEEK,
            )
        )
    return least[-1]
