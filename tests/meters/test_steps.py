"""Steps: exact counts, what is counted and what is not, and threads."""

from __future__ import annotations

import concurrent.futures.thread
import sys
import threading
from itertools import pairwise

import pytest

from pytest_growthbudget.meters import frames
from pytest_growthbudget.meters.steps import Steps, count_lines
from pytest_growthbudget.meters.tallies import Tally
from tests.meters.counting import no_collector, no_tracer, steps, unloaded

__all__ = ["no_collector", "no_tracer"]


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
    code = unloaded.__code__
    first = code.co_firstlineno
    ours = {line - first: count for (file, line), count in counts.items() if file == code.co_filename}
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
