"""Executions and times by line, with a clock that only the code under test advances: all figures are exact."""

from __future__ import annotations

import re
import sys
import sysconfig
import textwrap
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

import pytest_growthbudget
from pytest_growthbudget.meters.line_times import LineTimes, overhead_ns, own
from pytest_growthbudget.meters.protocol import Meter, MeterError

FILE = "harbour.py"


class Clock:
    """Stands still but for what `spend` adds."""

    def __init__(self) -> None:
        self.now = 0

    def __call__(self) -> int:
        return self.now

    def spend(self, amount: int) -> None:
        self.now += amount


def run(source: str, limit: float = float("inf")) -> tuple[LineTimes, dict[str, Any]]:
    """Call `body()` of the module `source`, in which `spend(t)` takes the time t and is not own code."""
    clock = Clock()
    meter = LineTimes(limit=limit, own=FILE.__eq__, clock=clock)
    module: dict[str, Any] = {"spend": clock.spend, "meter": meter}
    exec(compile(textwrap.dedent(source).lstrip(), FILE, "exec"), module)
    body: Callable[[], object] = module["body"]
    meter.start()
    try:
        body()
    finally:
        meter.stop()
    return meter, module


def by_line(values: dict[tuple[str, int], int]) -> dict[int, int]:
    return {line: value for (file, line), value in values.items() if file == FILE and value}


def test_executions_and_times() -> None:
    meter, _ = run(
        """
        def body():
            total = 0
            for i in range(4):
                spend(10 * i)
            spend(1)
        """
    )
    assert by_line(meter.counts) == {2: 1, 3: 5, 4: 4, 5: 1}
    assert by_line(meter.times) == {4: 60, 5: 1}


def test_the_time_of_a_callee_is_its_own_and_the_caller_goes_on_at_its_line() -> None:
    meter, _ = run(
        """
        def weigh():
            spend(100)
            return 7

        def body():
            spend(1); weigh(); spend(2)
            spend(4)
        """
    )
    assert by_line(meter.counts) == {2: 1, 3: 1, 6: 1, 7: 1}
    assert by_line(meter.times) == {2: 100, 6: 3, 7: 4}


def test_recursion_generators_and_errors_keep_the_place() -> None:
    meter, _ = run(
        """
        def down(n):
            if n: down(n - 1); spend(10)

        def feed():
            for i in range(3):
                spend(5)
                yield i

        def fail():
            spend(7)
            raise ValueError

        def body():
            down(3)
            for i in feed():
                spend(2)
            try:
                fail()
            except ValueError:
                spend(3)
            spend(1)
        """
    )
    assert by_line(meter.times) == {2: 30, 6: 15, 10: 7, 16: 6, 20: 3, 21: 1}
    assert by_line(meter.counts)[2] == 4
    assert by_line(meter.counts)[7] == 3


def test_a_loop_on_one_line_counts_its_turns() -> None:
    meter, _ = run(
        """
        def body():
            for i in range(50): spend(2)
        """
    )
    assert by_line(meter.times) == {2: 100}
    assert by_line(meter.counts)[2] >= 50


def test_a_reading_may_begin_inside_the_code() -> None:
    """As `with metered:` does."""
    meter, _ = run(
        """
        def body():
            meter.stop()
            spend(100)
            meter.start()
            spend(1)
            meter.stop()
            spend(100)
            meter.start()
        """
    )
    assert by_line(meter.times) == {5: 1}


def test_a_limit_ends_the_trace_and_not_the_body() -> None:
    meter, module = run(
        """
        done = []

        def body():
            for i in range(100):
                spend(10)
            done.append(True)
        """,
        limit=95,
    )
    assert meter.cut
    assert module["done"] == [True]
    assert sum(meter.times.values()) == 100
    assert sys.gettrace() is None


def test_the_trace_function_of_another_tool_is_left_alone() -> None:
    def other(frame: object, event: str, arg: object) -> None:
        return None

    sys.settrace(other)
    try:
        with pytest.raises(MeterError, match="taken"):
            LineTimes().start()
        assert sys.gettrace() is other
    finally:
        sys.settrace(None)


def test_a_body_that_takes_the_trace_function_is_found_out() -> None:
    with pytest.raises(MeterError, match="replaced the trace function"):
        run("def body():\n    import sys\n    sys.settrace(None)\n")


def test_a_reading_broken_off_can_be_closed() -> None:
    meter = LineTimes()
    meter.start()
    meter.close()
    assert sys.gettrace() is None


def test_it_is_a_meter() -> None:
    assert isinstance(LineTimes(), Meter)


def test_whose_code_is_the_users_own(tmp_path: Path) -> None:
    assert own(__file__)
    assert own(str(tmp_path / "catalogue.py"))
    assert not own(re.__file__)
    assert not own(str(Path(sysconfig.get_path("stdlib")) / "bisect.py"))
    assert not own(pytest.__file__)
    assert not own(str(tmp_path / "lib" / "site-packages" / "berths.py"))
    assert not own(str(Path(pytest_growthbudget.__file__).parent / "plugin.py"))
    assert not own("<string>")


def test_the_overhead_of_the_trace_is_some_time() -> None:
    assert overhead_ns() > 0
    assert sys.gettrace() is None
