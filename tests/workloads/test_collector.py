"""The garbage collector around the readings."""

from __future__ import annotations

import gc

from pytest_growthbudget.workloads.repeat import collector_off, collector_spared


def test_collecting_is_cheap_while_a_budget_is_held() -> None:
    """Whatever the session holds is out of the collector's sight, also where the interpreter froze objects itself."""
    held = [[] for _ in range(1000)]  # type: list[list[object]]
    with collector_spared():
        assert len(gc.get_objects()) < len(held)
    assert len(gc.get_objects()) > len(held)


def test_the_collector_is_off_during_a_reading_and_as_it_was_after() -> None:
    was = gc.isenabled()
    try:
        for enabled in (True, False):
            (gc.enable if enabled else gc.disable)()
            with collector_off():
                assert not gc.isenabled()
            assert gc.isenabled() is enabled
    finally:
        (gc.enable if was else gc.disable)()
