from __future__ import annotations

import pytest
from harbour.tides import TideTable


def test_between_two_waters_the_height_is_half_way() -> None:
    table = TideTable([0, 360, 720], [4.0, 1.0, 4.5])
    assert table.height_at(180) == pytest.approx(2.5)
    assert table.height_at(720) == pytest.approx(4.5)


def test_a_minute_outside_the_table_is_refused() -> None:
    with pytest.raises(ValueError, match="outside the table"):
        TideTable([0, 360], [4.0, 1.0]).height_at(361)


# Two hundred look-ups a call: one alone is too quick to be read by a clock. Forty years are 56 000 tides.
@pytest.mark.growth_budget("log n", largest=56_000)
def test_high_and_low_waters_are_looked_up(tide_table: TideTable, moments: list[float]) -> None:
    heights = list(map(tide_table.height_at, moments))
    assert min(heights) >= 0.5
    assert max(heights) <= 4.8
