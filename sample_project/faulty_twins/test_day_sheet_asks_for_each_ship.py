"""One query for the calls and one more for the ship of each: n + 1 where one is allowed."""

from __future__ import annotations

from sqlite3 import Connection

import pytest
from harbour.register import Call


def day_sheet(register: Connection) -> list[str]:
    sheet = []
    for call_sign, tonnes in register.execute("SELECT call_sign, tonnes FROM calls ORDER BY number"):
        (name,) = register.execute("SELECT name FROM ships WHERE call_sign = ?", (call_sign,)).fetchone()
        sheet.append(f"{name}: {tonnes} t")
    return sheet


@pytest.mark.growth_budget("1", meter="tally:queries")
def test_the_day_sheet_takes_one_query(filled_register: Connection, calls: list[Call], tally) -> None:
    filled_register.set_trace_callback(lambda _: tally.add("queries"))
    sheet = day_sheet(filled_register)
    assert sheet == [f"{call.ship}: {call.tonnes} t" for call in calls]
