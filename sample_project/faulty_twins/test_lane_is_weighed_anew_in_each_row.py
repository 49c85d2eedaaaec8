"""Every lane is kept whole, and added up again in each row: rows² for a fixed number of columns."""

from __future__ import annotations

import pytest


def easiest_lane(table: list[list[int]]) -> int:
    lanes = [[weight] for weight in table[0]]
    for row in table[1:]:
        lanes = [[*min(lanes[max(column - 1, 0) : column + 2], key=sum), weight] for column, weight in enumerate(row)]
    return min(map(sum, lanes))


@pytest.mark.growth_budget("rows", vary={"rows": "row_count"})
def test_a_lane_is_found_through_a_long_hold(stowage_table: list[list[int]]) -> None:
    for row in stowage_table:
        row[7] = 0
    assert easiest_lane(stowage_table) == 0
