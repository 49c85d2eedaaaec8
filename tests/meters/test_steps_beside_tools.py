"""Steps beside tools that hold the hooks of the interpreter: by tracing, and by monitoring."""

from __future__ import annotations

import contextlib
import inspect
import sys
import threading

import pytest

from pytest_growthbudget.meters import tracing
from pytest_growthbudget.meters.protocol import MeterError
from pytest_growthbudget.meters.steps import Steps, count_lines
from tests.meters.counting import (
    MONITORING,
    differences,
    folded_text,
    no_collector,
    no_tracer,
    run_under_coverage,
    spread,
    steps,
    syntax_tree,
    tokens,
    unloaded,
)

__all__ = ["no_collector", "no_tracer"]


@pytest.mark.skipif(MONITORING, reason="tracing is what Python 3.10 and 3.11 count by")
class TestTracing:
    def test_a_tracer_that_is_there_already_is_not_pushed_out(self):
        def debugger(frame, event, arg):
            return None

        sys.settrace(debugger)
        try:
            with pytest.raises(MeterError) as caught:
                Steps().start()
            assert sys.gettrace() is debugger
        finally:
            sys.settrace(None)
        assert caught.value.args[0] == (
            "the meter 'steps' needs sys.settrace on this version of Python, and "
            f"{__name__}.{debugger.__qualname__} holds it. Run this test without coverage or a debugger, use Python "
            "3.12 or later, where both can count at once, or choose another meter."
        )

    def test_a_body_that_takes_the_tracer_away_is_told(self):
        meter = Steps()
        meter.start()
        sys.settrace(None)
        with pytest.raises(MeterError, match="the body replaced the trace function while the meter 'steps'"):
            meter.stop()
        assert steps(lambda: unloaded(10)) == 26

    def test_the_trace_functions_of_waiting_frames_and_new_threads_come_back(self):
        def other(frame, event, arg):
            return None

        frame = sys._getframe()
        frame.f_trace = other
        threading.settrace(other)
        try:
            steps(lambda: unloaded(10))
            assert frame.f_trace is other
            assert threading.gettrace() is other
        finally:
            threading.settrace(None)
            frame.f_trace = None

    def test_coverages_tracer_is_refused_by_name(self):
        found = run_under_coverage("ctrace")
        assert found.startswith("MeterError the meter 'steps' needs sys.settrace on this version of Python, and ")
        assert "coverage" in found.split(" holds it.")[0].lower() or "CTracer" in found


@pytest.mark.skipif(not MONITORING, reason="sys.monitoring is new in Python 3.12")
class TestMonitoring:
    def test_tool_ids_are_given_back(self):
        before = [sys.monitoring.get_tool(tool) for tool in range(6)]
        steps(lambda: unloaded(10))
        assert [sys.monitoring.get_tool(tool) for tool in range(6)] == before

    def test_other_ids_serve_where_the_first_are_taken(self):
        with taken(3, 4):
            assert steps(lambda: unloaded(10)) == 26

    def test_taken_ids_are_named(self):
        free = [tool for tool in range(6) if sys.monitoring.get_tool(tool) is None and tool not in (0, 1)]
        with taken(0, *free), pytest.raises(MeterError) as caught:
            Steps().start()
        message = caught.value.args[0]
        assert message.startswith(
            "the meter 'steps' needs two tool ids of sys.monitoring, and too few are free: taken are 0 (other tool), "
        )
        assert message.endswith(". Run without one of these tools, or choose another meter.")

    def test_one_free_id_is_not_enough_and_is_not_kept(self):
        free = [tool for tool in range(6) if sys.monitoring.get_tool(tool) is None and tool not in (0, 1)]
        with taken(*free), pytest.raises(MeterError):
            Steps().start()
        assert sys.monitoring.get_tool(0) is None

    def test_coverage_by_tracing_and_by_monitoring_both_go_on(self):
        for core in ("ctrace", "sysmon"):
            assert run_under_coverage(core) == "26.0 26.0 missing []"

    @pytest.mark.parametrize("work", [differences, tokens, folded_text, spread, syntax_tree], ids=lambda f: f.__name__)
    def test_line_by_line_counts_are_those_of_the_interpreters_own_tracer(self, work):
        """Two ways to count, one oracle for the other: sys.settrace on the same interpreter, line by line."""
        if sys.gettrace() is not None:
            pytest.skip("this session has a tracer, so there is no other to compare with")
        work()
        traced = tracing.LineWatch()
        traced.begin()
        work()
        expected = traced.end()
        here = {(__file__, line) for line in range(*own_lines(self))}
        assert {place: n for place, n in expected.items() if place not in here} == count_lines(work)

    def test_another_tool_goes_on_hearing_its_events(self):
        heard = []
        tool = next(t for t in (5, 2) if sys.monitoring.get_tool(t) is None)
        events = sys.monitoring.events

        def hear(code, offset):
            heard.append(code.co_name)

        with taken(tool):
            sys.monitoring.register_callback(tool, events.PY_START, hear)
            sys.monitoring.set_local_events(tool, unloaded.__code__, events.PY_START)
            try:
                count = steps(lambda: unloaded(10))
                unloaded(1)
            finally:
                sys.monitoring.set_local_events(tool, unloaded.__code__, 0)
                sys.monitoring.register_callback(tool, events.PY_START, None)
        assert heard == ["unloaded", "unloaded"]
        assert count == 26


def own_lines(test: object) -> tuple[int, int]:
    """First line of the class of `test`, and the end of this file: the lines of a test that reads in its own frame."""
    return inspect.getsourcelines(type(test))[1], 10**6


@contextlib.contextmanager
def taken(*tools):
    for tool in tools:
        sys.monitoring.use_tool_id(tool, "other tool")
    try:
        yield
    finally:
        for tool in tools:
            sys.monitoring.free_tool_id(tool)


class Alarm(BaseException):
    """Comes at any moment, as the time limit of a body does."""


@pytest.mark.parametrize("call", range(1, 60))
def test_an_alarm_in_the_midst_of_a_start_or_stop_leaves_no_hook_behind(call: int) -> None:
    """An exception at the n-th C call or line of the two: whatever had been taken is given back by `close`."""
    meter, left = Steps(), call

    def alarm(frame, event, arg):
        nonlocal left
        if frame.f_code.co_filename.endswith(("monitoring.py", "tracing.py")) and event == "c_call":
            left -= 1
            if left == 0:
                raise Alarm

    before = hooks()
    sys.setprofile(alarm)
    try:
        meter.start()
        meter.stop()
    except Alarm:
        pass
    finally:
        sys.setprofile(None)
    meter.close()
    assert hooks() == before
    assert steps(lambda: unloaded(10)) == 26
    assert hooks() == before


def hooks() -> object:
    if MONITORING:
        return [sys.monitoring.get_tool(tool) for tool in range(6) if tool != sys.monitoring.PROFILER_ID]
    return sys.gettrace(), threading.gettrace()
