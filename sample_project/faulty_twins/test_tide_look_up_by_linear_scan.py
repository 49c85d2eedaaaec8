"""The table is read from its first line at every look-up: n where halving takes log n."""

from __future__ import annotations

from math import cos, pi

import pytest
from harbour.tides import TideTable


def height_at(table: TideTable, minute: float) -> float:
    minutes, heights = table._minutes, table._heights
    after = 1
    while after < len(minutes) - 1 and minutes[after] <= minute:
        after += 1
    begin, end = minutes[after - 1], minutes[after]
    return (
        heights[after - 1]
        + (heights[after] - heights[after - 1]) * (1 - cos(pi * (minute - begin) / (end - begin))) / 2
    )


@pytest.mark.growth_budget("log n", largest=56_000)
def test_high_and_low_waters_are_looked_up(tide_table: TideTable, moments: list[float]) -> None:
    heights = [height_at(tide_table, minute) for minute in moments]
    assert min(heights) >= 0.5
    assert max(heights) <= 4.8
