"""Sailing orders for a convoy."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Order:
    """A group sails together: how many ships, and the deepest draught among them, in centimetres."""

    ships: int
    draught: int


def sailing_orders(draughts: list[int]) -> list[Order]:
    """Orders for the convoy and its parts, largest group first in each branch.

    A group of more than ten detaches its last tenth, and both parts are given orders of their own:
    T(n) = T(9n/10) + T(n/10) + n.
    """
    if not draughts:
        return []
    orders = [Order(len(draughts), max(draughts))]
    if len(draughts) > 10:
        cut = len(draughts) - len(draughts) // 10
        orders += sailing_orders(draughts[:cut])
        orders += sailing_orders(draughts[cut:])
    return orders
