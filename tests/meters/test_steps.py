"""Steps: exact counts, what is counted and what is not, threads, and living beside other tools."""

from __future__ import annotations

import ast
import concurrent.futures.thread
import contextlib
import difflib
import fractions
import gc
import inspect
import io
import os
import statistics
import subprocess
import sys
import textwrap
import threading
import tokenize
from itertools import pairwise

import pytest

from pytest_growthbudget.meters import frames, tracing
from pytest_growthbudget.meters.protocol import MeterError
from pytest_growthbudget.meters.steps import Steps, count_lines
from pytest_growthbudget.meters.tallies import Tally

MONITORING = sys.version_info >= (3, 12)


@pytest.fixture(autouse=True)
def no_tracer():
    """Run this file's readings as in a session without a tracer, also when the session has one."""
    if MONITORING:
        yield
        return
    held = sys.gettrace()
    sys.settrace(None)
    yield
    sys.settrace(held)


@pytest.fixture(autouse=True)
def no_collector():
    """As in a campaign: what other packages hang on the garbage collector must not be counted."""
    gc.collect()
    gc.disable()
    yield
    gc.enable()


def steps(body) -> int:
    meter = Steps()
    meter.start()
    body()
    count = meter.stop()
    assert type(count) is float
    assert count == int(count)
    return int(count) - 2  # this function's own lines between start and stop; the campaign's do not count


def unloaded(crates: int) -> int:
    left = 0
    for crate in range(crates):
        left += crate
    return left


def pairs(crates: int) -> int:
    found = 0
    for one in range(crates):
        for other in range(one):
            found += one > other
    return found


def hanoi(discs: int) -> None:
    if discs:
        hanoi(discs - 1)
        hanoi(discs - 1)


def berths(n):
    for berth in range(n):  # noqa: UP028 - a line a turn is what is counted
        yield berth


SOURCE = inspect.getsource(difflib)


def differences():
    lines = SOURCE.splitlines()
    return list(difflib.unified_diff(lines[:200], lines[50:260]))


def tokens():
    return list(tokenize.generate_tokens(io.StringIO(SOURCE[:20000]).readline))


def folded_text():
    return textwrap.fill(SOURCE[:5000], 40)


def spread():
    return statistics.median(fractions.Fraction(i, 7) for i in range(60)), statistics.stdev(range(50))


def syntax_tree():
    return ast.unparse(ast.parse(inspect.getsource(tracing)))


def test_a_loop_counts_two_lines_a_turn():
    # Entered the lambda and the function: 2. Lines: the lambda's, `left = 0`, `return`, and the loop's last look
    # at its iterator: 4. Each turn: 2.
    assert [steps(lambda n=n: unloaded(n)) for n in (0, 1, 10, 1000)] == [6, 8, 26, 2006]


def test_counts_of_a_double_loop_are_an_exact_quadratic():
    """Differences of a polynomial's values at equal steps vanish beyond its degree (Newton): the degree is exact."""
    counts = [steps(lambda n=n: pairs(n)) for n in range(1, 12)]
    first = [b - a for a, b in pairwise(counts)]
    second = [b - a for a, b in pairwise(first)]
    assert set(second) == {2}
    assert all(difference > 0 for difference in first)


def test_calls_and_recursion_are_followed():
    # A call that does nothing: entered, 1 line. One that recurses: entered, 3 lines. 2**n - 1 of these, 2**n of those.
    assert [steps(lambda n=n: hanoi(n)) - 2 for n in range(8)] == [2 * 2**n + 4 * (2**n - 1) for n in range(8)]


def test_a_generator_counts_each_resumption():
    few, many = (steps(lambda n=n: sum(berths(n))) for n in (10, 110))
    assert many - few == 100 * 3  # resumed, `for`, `yield`


@pytest.mark.parametrize(
    ("body", "turn"),
    [
        (lambda n: [crate + 1 for crate in range(n)], 1),
        (lambda n: {crate: crate + n for crate in range(n)}, 1),
        (lambda n: [crate for crate in range(n) if crate % 2], 1),
        (lambda n: sum(crate + 1 for crate in range(n)), 2),
    ],
    ids=["list", "dict", "filter", "generator"],
)
def test_a_loop_that_stands_on_one_line_counts_its_turns(body, turn):
    """On Python 3.12 and later no line event tells of them: PEP 709 inlines them, PEP 669 speaks at a new line."""
    few, many = steps(lambda: body(100)), steps(lambda: body(1100))
    assert many - few in (1000 * turn, 1000 * (turn + 1))


def test_a_while_loop_on_one_line_counts_its_turns():
    def empty(n):
        waiting = [0] * n
        while waiting: waiting.pop()  # noqa: E701 # fmt: skip

    assert steps(lambda: empty(1100)) - steps(lambda: empty(100)) in (1000, 2000)


def test_hidden_work_costs_one_step():
    """What steps cannot see, and why a verdict on them alone is not enough: `in` scans the list in C."""
    crates = list(range(1000))
    few, many = (steps(lambda known=known: [c for c in crates if c in known]) for known in ([1], list(range(2000))))
    assert few == many


@pytest.mark.parametrize("body", [lambda: unloaded(500), lambda: pairs(30), lambda: sorted(berths(50))])
def test_the_same_input_gives_the_same_count(body):
    meter, counts = Steps(), set()
    for _ in range(4):
        meter.start()
        body()
        counts.add(meter.stop())
    assert len(counts) == 1
    assert counts == {float(steps(body) + 2)}


def test_the_count_goes_on_the_same_beyond_two_million_steps():
    """The counter in use changes with the size of the last count; its answers must not."""
    meter, counts = Steps(), []
    for _ in range(3):
        for crates in (1_100_000, 10):
            meter.start()
            unloaded(crates)
            counts.append(meter.stop())
    assert len(set(counts[::2])) == len(set(counts[1::2])) == 1
    assert counts[0] - counts[1] == 2 * (1_100_000 - 10)


def test_a_reading_may_start_in_the_middle_of_the_function_under_test():
    """As `metered` does: the frame that started the reading is running already, and its lines count."""

    def body(n):
        meter = Steps()
        total = 0
        for _ in range(50):
            total += 1
        meter.start()
        for _ in range(n):
            total += 1
        return meter.stop()

    assert body(110) - body(10) == 200


def test_nothing_is_counted_outside_a_reading():
    meter = Steps()
    meter.start()
    unloaded(10)
    first = meter.stop()
    unloaded(1000)
    meter.start()
    unloaded(10)
    assert meter.stop() == first


def test_a_reading_that_was_broken_off_does_no_harm():
    meter = Steps()
    meter.start()
    unloaded(7)
    meter.start()
    unloaded(10)
    again = meter.stop()
    meter.start()
    unloaded(10)
    assert meter.stop() == again
    assert sys.gettrace() is None


def test_this_packages_own_code_does_not_count():
    tally = Tally()
    keys = tally.keys(range(100))

    def body():
        return keys[0] < keys[1]

    few = steps(body)
    many = steps(lambda: sorted(keys))
    assert few == 2
    assert many == 2
    assert tally.count("comparisons") == 100


def test_pytests_own_code_does_not_count():
    def body():
        with pytest.raises(ZeroDivisionError):
            unloaded(1 // 0)

    assert steps(body) < 10


def test_what_counts_is_said_by_file():
    import importlib.metadata
    import json

    assert frames.counted(__file__)
    assert frames.counted(json.__file__)
    assert frames.counted("<string>")
    for machinery in (pytest.__file__, frames.__file__, threading.__file__, concurrent.futures.thread.__file__):
        assert not frames.counted(machinery)
    assert not frames.counted("<frozen importlib._bootstrap>")
    assert not frames.counted(importlib.metadata.__file__)


def test_threads_that_the_body_starts_count():
    def body(threads):
        crew = [threading.Thread(target=unloaded, args=(1000,)) for _ in range(threads)]
        for one in crew:
            one.start()
        for one in crew:
            one.join()

    counts = [steps(lambda n=n: body(n)) for n in (1, 2, 3, 3, 3)]
    assert counts[1] - counts[0] == counts[2] - counts[1] > 2000
    assert counts[2] == counts[3] == counts[4]


def test_a_pool_of_threads_counts_its_tasks():
    def body():
        with concurrent.futures.ThreadPoolExecutor(3) as pool:
            return list(pool.map(unloaded, [100] * 20))

    counts = {steps(body) for _ in range(5)}
    assert len(counts) == 1
    assert counts.pop() > 20 * 200


def test_a_thread_that_outlives_the_reading_is_left_alone():
    go, done, seen = threading.Event(), threading.Event(), []

    def straggler():
        go.wait(10)
        seen.append(unloaded(100))
        seen.append(sys.gettrace())
        done.set()

    late = threading.Thread(target=straggler)
    steps(late.start)
    go.set()
    assert done.wait(10)
    late.join()
    assert seen == [4950, None]
    assert steps(lambda: unloaded(10)) == 26


def test_an_exception_in_the_body_passes_through():
    meter = Steps()
    meter.start()
    with pytest.raises(ZeroDivisionError):
        unloaded(1 // 0)
    assert meter.stop() > 0


def test_lines_are_counted_one_by_one():
    counts = count_lines(lambda: unloaded(40))
    first = unloaded.__code__.co_firstlineno
    ours = {line - first: count for (file, line), count in counts.items() if file == __file__ and line >= first}
    assert {offset: ours[offset] for offset in (1, 2, 3, 4)} == {1: 1, 2: 41, 3: 40, 4: 1}


def test_the_turns_of_a_one_line_loop_are_executions_of_its_line():
    def body(n):
        return [[one + 1 for one in range(n)] for _ in range(n)]

    counts = count_lines(lambda: body(30))
    line = body.__code__.co_firstlineno + 1
    assert 900 <= counts[__file__, line] <= 1000


def test_counting_lines_passes_the_bodys_exception_through_and_lets_go():
    with pytest.raises(ZeroDivisionError):
        count_lines(lambda: 1 // 0)
    assert sys.gettrace() is None
    assert steps(lambda: unloaded(10)) == 26


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


def run_under_coverage(core: str) -> str:
    """Two readings in a process that coverage watches from within; what they give, and the lines that it missed."""
    program = textwrap.dedent(
        """
        import sys
        import coverage
        watch = coverage.Coverage(data_file=None, include=[{here!r}], messages=False)
        watch.start()
        import importlib.util
        spec = importlib.util.spec_from_file_location("measured", {here!r})
        measured = importlib.util.module_from_spec(spec)
        try:
            spec.loader.exec_module(measured)
            meter, counts = measured.Steps(), []
            for _ in range(2):
                meter.start()
                measured.unloaded(10)
                counts.append(meter.stop())
            first = measured.unloaded.__code__.co_firstlineno
            watch.stop()
            missed = watch.analysis2({here!r})[3]
            print(*counts, "missing", [line for line in missed if first <= line <= first + 4])
        except Exception as error:
            print(type(error).__name__, error)
        """
    ).format(here=__file__)
    done = subprocess.run(
        [sys.executable, "-c", program],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "COVERAGE_CORE": core, "PYTHONPATH": os.pathsep.join(sys.path)},
    )
    assert done.returncode == 0, done.stderr
    return done.stdout.strip()
