"""Ten ships are detached where it should be a tenth: T(n) = T(n - 10) + n, which is n²."""

from __future__ import annotations

import pytest
from harbour.convoys import Order


def sailing_orders(draughts: list[int]) -> list[Order]:
    orders = []
    group = draughts
    while group:
        orders.append(Order(len(group), max(group)))
        group = group[:-10]
    return orders


@pytest.mark.growth_budget("T(n) = T(9n/10) + T(n/10) + n")
def test_every_group_has_its_orders(draughts: list[int], problem_size: int) -> None:
    orders = sailing_orders(draughts)
    assert orders[0] == Order(problem_size, max(draughts))
    assert min(order.ships for order in orders) >= 1
