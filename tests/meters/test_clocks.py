"""Clocks: the only module that reads one, and what it does where the CPU clock is coarse."""

from __future__ import annotations

import ast
from itertools import count
from pathlib import Path

import pytest

import pytest_growthbudget
from pytest_growthbudget.meters import clocks

PACKAGE = Path(pytest_growthbudget.__file__).parent


def test_no_other_module_reads_a_clock() -> None:
    guilty = []
    for path in PACKAGE.rglob("*.py"):
        if path.name == "clocks.py":
            continue
        for node in ast.walk(ast.parse(path.read_text())):
            plain = isinstance(node, ast.Import) and any(alias.name == "time" for alias in node.names)
            parts = {alias.name for alias in node.names} if isinstance(node, ast.ImportFrom) else set()
            if plain or (isinstance(node, ast.ImportFrom) and node.module == "time" and parts != {"sleep"}):
                guilty.append(path.relative_to(PACKAGE).as_posix())
    assert guilty == []


def test_the_tick_is_the_step_at_which_a_clock_advances() -> None:
    reads = count()
    assert clocks.tick_ns(lambda: next(reads) // 7 * 15_625_000) == 15_625_000


def test_a_coarse_cpu_clock_gives_way_to_elapsed_time(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(clocks, "tick_ns", lambda: 15_625_000)
    clocks.cpu_clock.cache_clear()
    try:
        assert clocks.cpu_clock() is clocks.wall_time_ns
    finally:
        clocks.cpu_clock.cache_clear()


@pytest.mark.parametrize("meter", [clocks.CpuTime(), clocks.WallTime()], ids=lambda meter: meter.name)
def test_a_reading_is_the_time_since_the_start(meter: clocks.CpuTime | clocks.WallTime) -> None:
    meter.start()
    sum(range(10_000))
    first = meter.stop()
    assert 0 < first <= meter.stop()
