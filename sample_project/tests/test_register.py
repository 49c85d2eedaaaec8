from __future__ import annotations

from sqlite3 import Connection

import pytest
from harbour.register import Call, day_sheet, import_calls


def test_a_known_ship_is_not_entered_twice(register: Connection) -> None:
    import_calls(register, [Call("C1", "Vessel 1", 500), Call("C1", "Vessel 1", 600)])
    assert register.execute("SELECT count(*) FROM ships").fetchone() == (1,)
    assert day_sheet(register) == ["Vessel 1: 500 t", "Vessel 1: 600 t"]


@pytest.mark.growth_budget("n")
def test_all_calls_are_entered(register: Connection, calls: list[Call], metered) -> None:
    with metered:
        import_calls(register, calls)
    assert register.execute("SELECT count(*) FROM calls").fetchone() == (len(calls),)
    ships = {call.call_sign for call in calls}
    assert register.execute("SELECT count(*) FROM ships").fetchone() == (len(ships),)


@pytest.mark.growth_budget("1", meter="tally:queries")
def test_the_day_sheet_takes_one_query(filled_register: Connection, calls: list[Call], tally) -> None:
    filled_register.set_trace_callback(lambda _: tally.add("queries"))
    sheet = day_sheet(filled_register)
    assert sheet == [f"{call.ship}: {call.tonnes} t" for call in calls]
