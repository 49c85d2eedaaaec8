"""A question before each row, on a column without an index: the database reads the whole table, n times."""

from __future__ import annotations

from sqlite3 import Connection

import pytest
from harbour.register import Call


def import_calls(register: Connection, calls: list[Call]) -> None:
    with register:
        for call in calls:
            seen = register.execute("SELECT 1 FROM calls WHERE call_sign = ? LIMIT 1", (call.call_sign,)).fetchone()
            if seen is None:
                register.execute("INSERT INTO ships (call_sign, name) VALUES (?, ?)", (call.call_sign, call.ship))
            register.execute("INSERT INTO calls (call_sign, tonnes) VALUES (?, ?)", (call.call_sign, call.tonnes))


@pytest.mark.growth_budget("n")
def test_all_calls_are_entered(register: Connection, calls: list[Call], metered) -> None:
    with metered:
        import_calls(register, calls)
    assert register.execute("SELECT count(*) FROM calls").fetchone() == (len(calls),)
    ships = {call.call_sign for call in calls}
    assert register.execute("SELECT count(*) FROM ships").fetchone() == (len(ships),)
