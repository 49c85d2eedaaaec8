"""Recorded calls: parents, sizes and own work, exactly; and what may happen while they are recorded."""

from __future__ import annotations

import contextlib
import gc
import sys
import threading
from collections.abc import Iterator
from itertools import pairwise

import pytest

from pytest_growthbudget.auditing.audit import run
from pytest_growthbudget.auditing.calls import Calls
from pytest_growthbudget.meters.protocol import MeterError
from tests.auditing.made import meter_of, recorded, sizes_of_children

MONITORING = sys.version_info >= (3, 12)


def halve(n: int) -> None:
    if n > 1:
        halve(n // 2)
        halve(n - n // 2)


def test_parents_sizes_and_depth() -> None:
    calls = recorded(halve, (5,))
    assert calls.size.tolist() == [5, 2, 1, 1, 3, 1, 2, 1, 1]
    assert calls.parent.tolist() == [-1, 0, 1, 1, 0, 4, 4, 6, 6]
    assert calls.whole.all()
    (run,) = calls.runs
    assert (run.size, run.calls, run.depth) == (5, 9, 4)
    assert not calls.returned


def test_several_runs_add_up_and_are_told_apart() -> None:
    calls = recorded(halve, (2,), (4,))
    assert calls.size.tolist() == [2, 1, 1, 4, 2, 1, 1, 2, 1, 1]
    assert [(run.size, run.calls, run.depth) for run in calls.runs] == [(2, 3, 2), (4, 7, 3)]


def counted(n: int) -> int:
    done = 0
    for _ in range(n):
        done += 1
    if n:
        counted(n - 1)
    return done


def test_own_work_is_two_steps_a_turn_and_leaves_the_children_out() -> None:
    own = recorded(counted, (50,)).own.tolist()
    rises = {one - other for one, other in pairwise(own[:-1])}
    assert rises == {2}


def helped(n: int) -> int:
    return 0 if n == 0 else turned(n) + helped(n - 1)


def turned(n: int) -> int:
    done = 0
    for _ in range(n):
        done += 1
    return done


def test_the_work_of_helpers_is_the_callers_own() -> None:
    own = recorded(helped, (50,)).own.tolist()
    rises = {one - other for one, other in pairwise(own[:-1])}
    assert rises == {2}


def by_way_of(n: int) -> None:
    if n:
        on_behalf(n)


def on_behalf(n: int) -> None:
    by_way_of(n - 1)


def test_the_parent_is_the_nearest_call_of_the_same_function() -> None:
    calls = recorded(by_way_of, (3,))
    assert calls.size.tolist() == [3, 2, 1, 0]
    assert calls.parent.tolist() == [-1, 0, 1, 2]


class Fleet:
    def split(self, ships: list[int]) -> int:
        if len(ships) < 2:
            return len(ships)
        half = len(ships) // 2
        return self.split(ships[:half]) + self.split(ships[half:])


def test_methods() -> None:
    calls = recorded(Fleet.split, ([1, 2, 3],), call=Fleet().split)
    assert list(sizes_of_children(calls)) == [(3, [1, 2]), (1, []), (2, [1, 1]), (1, []), (1, [])]
    assert calls.returned


class Grounded(Exception):
    pass


def probing(n: int) -> None:
    """Ends by an exception at 3 and from 0 down, which its caller catches."""
    if n == 3 or n <= 0:
        raise Grounded
    for less in (1, 2):
        with contextlib.suppress(Grounded):
            probing(n - less)


def test_calls_that_end_by_an_exception_are_closed() -> None:
    calls = recorded(probing, (4,))
    assert calls.size.tolist() == [4, 3, 2, 1, 0, -1, 0]
    assert calls.parent.tolist() == [-1, 0, 0, 2, 3, 3, 2]
    assert calls.whole.all()


def test_a_body_that_raises_leaves_no_hook_behind() -> None:
    def fails(n: int) -> None:
        if n == 0:
            raise Grounded
        fails(n - 1)

    meter = meter_of(fails)
    with pytest.raises(Grounded):
        run(meter, lambda: fails(5))
    assert sys.gettrace() is None
    assert sys.getprofile() is None
    calls = meter.ledger.calls()
    assert calls.size.tolist() == [5, 4, 3, 2, 1, 0]
    assert calls.whole.all()


def in_order(items: list[int]) -> Iterator[int]:
    if items:
        half = len(items) // 2
        yield from in_order(items[:half])
        yield items[half]
        yield from in_order(items[half + 1 :])


@pytest.mark.parametrize("gauge", ["steps", "time"])
def test_generators_keep_their_place_while_they_wait(gauge: str) -> None:
    calls = recorded(in_order, ([1, 2, 3],), call=lambda items: list(in_order(items)), gauge=gauge)  # type: ignore[arg-type]
    assert list(sizes_of_children(calls)) == [(3, [1, 1]), (1, [0, 0]), (0, []), (0, []), (1, [0, 0]), (0, []), (0, [])]
    assert (calls.own > 0).all()


def test_time_is_read_where_steps_are_not_wanted() -> None:
    calls = recorded(counted, (300,), gauge="time")
    # 2.5 times the turns take at least half as much longer, whatever the machine does to a single call.
    assert sorted(calls.own[:100])[25] > 1.5 * sorted(calls.own[200:])[25]


def test_other_threads_are_left_out() -> None:
    def body(n: int) -> None:
        thread = threading.Thread(target=halve, args=(64,))
        thread.start()
        thread.join()
        halve(n)

    assert len(recorded(halve, (4,), call=body)) == 7


def test_recording_stops_at_the_limit_and_the_run_goes_on() -> None:
    ended = []

    def body(n: int) -> None:
        halve(n)
        ended.append(n)

    calls = recorded(halve, (64,), call=body, limit=10)
    assert ended == [64]
    assert len(calls) == 10
    assert calls.stopped
    # Those that were open when it stopped are a path from the root.
    still_open = [index for index, whole in enumerate(calls.whole) if not whole]
    assert still_open[0] == 0
    assert all(calls.parent[inner] == outer for outer, inner in pairwise(still_open))
    assert sys.gettrace() is None


def test_a_run_of_exactly_the_limit_was_not_stopped() -> None:
    calls = recorded(halve, (4,), limit=7)
    assert len(calls) == 7
    assert not calls.stopped
    assert calls.whole.all()


@pytest.mark.parametrize(
    ("size_of", "fault"),
    [
        (lambda n: 1 / (n - 3), "the size of a call of halve could not be told: ZeroDivisionError: division by zero"),
        (
            lambda n: None,
            (
                "the size of a call of halve could not be told: TypeError: "
                "float() argument must be a string or a real number, not 'NoneType'"
            ),
        ),
    ],
)
def test_a_size_that_fails_ends_the_recording_and_not_the_run(size_of: object, fault: str) -> None:
    meter = meter_of(halve, size_of=size_of)
    meter.start()
    halve(6)
    meter.stop()
    assert meter.ledger.fault == fault
    assert meter.ledger.closed


def test_keys_tell_the_same_arguments_again() -> None:
    def fibonacci(n: int) -> int:
        return n if n < 2 else fibonacci(n - 1) + fibonacci(n - 2)

    calls = recorded(fibonacci, (10,))
    assert len(set(calls.key.tolist())) == 11


def test_memory_is_bounded_by_32_bytes_a_call() -> None:
    """Besides the arrays, a recording keeps what is open, and no frame or argument of plain calls."""
    import tracemalloc

    meter = meter_of(halve)
    tracemalloc.start()
    try:
        meter.start()
        halve(4096)
        meter.stop()
        gc.collect()
        held = tracemalloc.get_traced_memory()[0]
    finally:
        tracemalloc.stop()
    assert len(meter.ledger) == 8191
    # Arrays grow by an eighth ahead of what they hold; a tenth of a megabyte covers the interpreter's own caches.
    assert held < 8191 * 40 * 1.125 + 100_000


@pytest.mark.skipif(MONITORING, reason="sys.monitoring has room for several tools")
def test_beside_a_tracer_calls_are_seen_by_the_profile_function() -> None:
    def tracer(frame: object, event: str, arg: object) -> object:
        return tracer

    meter = meter_of(halve)
    sys.settrace(tracer)  # type: ignore[arg-type]
    try:
        meter.start()
        halve(5)
        meter.stop()
        assert sys.gettrace() is tracer
    finally:
        sys.settrace(None)
    assert not meter.counts_steps
    assert sys.getprofile() is None
    assert meter.ledger.calls().size.tolist() == [5, 2, 1, 1, 3, 1, 2, 1, 1]


@pytest.mark.skipif(MONITORING, reason="sys.monitoring has room for several tools")
def test_beside_a_tracer_and_a_profiler_it_refuses() -> None:
    sys.settrace(lambda *_: None)
    sys.setprofile(lambda *_: None)
    try:
        with pytest.raises(MeterError, match="other tools hold both"):
            meter_of(halve).start()
    finally:
        sys.setprofile(None)
        sys.settrace(None)


@pytest.mark.skipif(MONITORING, reason="sys.monitoring cannot be taken away so")
def test_code_that_takes_the_trace_function_is_told() -> None:
    def body(n: int) -> None:
        sys.settrace(None)
        halve(n)

    with pytest.raises(MeterError, match="replaced the trace or profile function"):
        recorded(halve, (4,), call=body)


@pytest.mark.skipif(not MONITORING, reason="there is no sys.monitoring")
def test_it_lives_beside_another_tool_and_refuses_where_all_ids_are_taken() -> None:
    taken = [tool for tool in range(6) if sys.monitoring.get_tool(tool) is None]  # type: ignore[attr-defined]
    for tool in taken[4:]:  # of the four that are left one is coverage's by custom
        sys.monitoring.use_tool_id(tool, "lighthouse")  # type: ignore[attr-defined]
    try:
        assert len(recorded(halve, (4,))) == 7
        for tool in taken[:4]:
            sys.monitoring.use_tool_id(tool, "lighthouse")  # type: ignore[attr-defined]
        with pytest.raises(MeterError, match=r"needs a tool id of sys.monitoring, and all are taken: .*lighthouse"):
            meter_of(halve).start()
        sys.monitoring.free_tool_id(taken[0])  # type: ignore[attr-defined]
        with pytest.raises(MeterError, match="needs two tool ids"):
            meter_of(halve).start()
        # What it had claimed it gave back.
        assert sys.monitoring.get_tool(taken[0]) is None  # type: ignore[attr-defined]
    finally:
        for tool in taken:
            if sys.monitoring.get_tool(tool) is not None:  # type: ignore[attr-defined]
                sys.monitoring.free_tool_id(tool)  # type: ignore[attr-defined]


@pytest.mark.slow
def test_a_million_calls_are_recorded_and_no_more() -> None:
    calls: Calls = recorded(halve, (600_000,))
    assert len(calls) == 1_000_000
    assert calls.stopped
