from __future__ import annotations

import pytest
from harbour.convoys import Order, sailing_orders


def test_a_small_group_stays_together() -> None:
    assert sailing_orders([700, 950, 400]) == [Order(3, 950)]


def test_the_last_tenth_is_detached() -> None:
    assert sailing_orders([500] * 11 + [900]) == [
        Order(12, 900),
        Order(11, 500),
        Order(10, 500),
        Order(1, 500),
        Order(1, 900),
    ]


@pytest.mark.growth_budget("T(n) = T(9n/10) + T(n/10) + n")
def test_every_group_has_its_orders(draughts: list[int], problem_size: int) -> None:
    orders = sailing_orders(draughts)
    assert orders[0] == Order(problem_size, max(draughts))
    assert min(order.ships for order in orders) >= 1
