"""The stowage table: what stands in each row and column of the hold."""

from __future__ import annotations

from collections.abc import Sequence


def easiest_lane(table: Sequence[Sequence[int]]) -> int:
    """The least weight to shift for a lane from the first row to the last.

    From each cell the lane goes on to one of the three that touch it in the next row, so the work is one step
    for each cell: rows × columns. Raises `ValueError` for an empty or ragged table.
    """
    if not table or not table[0] or any(len(row) != len(table[0]) for row in table):
        raise ValueError("the stowage table must have one or more rows, all of one length")
    least = list(table[0])
    for row in table[1:]:
        before = [least[0], *least[:-1]]
        after = [*least[1:], least[-1]]
        least = [weight + min(near) for weight, *near in zip(row, before, least, after, strict=True)]
    return min(least)
