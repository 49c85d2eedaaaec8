"""A scout in a child process ends what a signal cannot."""

from __future__ import annotations

import os
import time

import pytest

from pytest_growthbudget.measuring.guards import Overrun
from pytest_growthbudget.measuring.readings import Reading
from pytest_growthbudget.measuring.scout import USABLE, Scouted
from pytest_growthbudget.meters.clocks import wall_time_ns

pytestmark = pytest.mark.skipif(not USABLE, reason="this platform cannot fork")


def scouted(body: object, allowance: float = 20e9) -> tuple[Scouted, list[int]]:
    taken: list[int] = []

    def take(size: int, calls: int) -> Reading:
        taken.append(size)
        assert callable(body)
        body(size)
        return Reading(size=size, cost=1.0, calls=calls)

    return Scouted(take, lambda: allowance, wall_time_ns), taken


def test_readings_are_taken_in_this_process() -> None:
    take, taken = scouted(lambda size: None)
    assert [take(size, 1).size for size in (5, 7, 6, 7)] == [5, 7, 6, 7]
    assert taken == [5, 7, 6, 7]


def test_a_scout_that_does_not_come_back_is_killed() -> None:
    def stubborn(size: int) -> None:
        if size > 10:
            time.sleep(600)

    take, taken = scouted(stubborn, allowance=0.2e9)
    take(8, 1)
    with pytest.raises(Overrun):
        take(16, 1)
    assert taken == [8], "the size is never tried in this process"


def test_what_goes_wrong_in_the_scout_is_raised_by_the_call_itself() -> None:
    def breaks(size: int) -> None:
        raise LookupError(os.getpid())

    take, _ = scouted(breaks)
    with pytest.raises(LookupError) as caught:
        take(8, 1)
    assert caught.value.args == (os.getpid(),)


def test_a_regular_expression_that_backtracks_is_judged(pytester: pytest.Pytester) -> None:
    pytester.makepyfile(
        """
        import re
        import pytest

        @pytest.mark.growth_budget("n", scout=True, time_limit=4)
        def test_backtracks(problem_size):
            assert not re.match(r"(?:a+)+$", "a" * problem_size + "b")
        """
    )
    result = pytester.runpytest()
    result.assert_outcomes(failed=1)
    result.stdout.fnmatch_lines(["growth budget exceeded: cpu_time grows as *^n where n is allowed"])
