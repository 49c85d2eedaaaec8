"""Each cell holds the whole lane that leads to it, and copies it: rows² for a fixed number of columns."""

from __future__ import annotations

import pytest


def easiest_lane(table: list[list[int]]) -> int:
    lanes = [[weight] for weight in table[0]]
    for row in table[1:]:
        lanes = [
            min(lanes[max(column - 1, 0) : column + 2], key=lambda lane: lane[-1])[:] for column in range(len(row))
        ]
        for lane, weight in zip(lanes, row, strict=True):
            lane.append(lane[-1] + weight)
    return min(lane[-1] for lane in lanes)


@pytest.mark.growth_budget("rows", vary={"rows": "row_count"})
def test_a_lane_is_found_through_a_long_hold(stowage_table: list[list[int]]) -> None:
    for row in stowage_table:
        row[7] = 0
    assert easiest_lane(stowage_table) == 0
