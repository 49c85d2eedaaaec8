from __future__ import annotations

import pytest
from harbour.stowage import easiest_lane


def test_the_lane_may_go_aslant() -> None:
    assert easiest_lane([[1, 9, 9], [9, 2, 9], [9, 9, 3]]) == 6


@pytest.mark.parametrize("table", [[], [[]], [[1, 2], [3]]])
def test_an_empty_or_ragged_table_is_refused(table: list[list[int]]) -> None:
    with pytest.raises(ValueError, match="all of one length"):
        easiest_lane(table)


# The rows are varied; the columns stay as the fixture has them.
@pytest.mark.growth_budget("rows", vary={"rows": "row_count"})
def test_a_lane_is_found_through_a_long_hold(stowage_table: list[list[int]]) -> None:
    for row in stowage_table:
        row[7] = 0
    assert easiest_lane(stowage_table) == 0
