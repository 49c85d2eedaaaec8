"""Where an exceeded budget names the lines to look at, and where it keeps silent; never at the cost of the verdict."""

from __future__ import annotations

import re

import pytest

from pytest_growthbudget.fitting.judgement import Judgement, SizeRow
from pytest_growthbudget.running.hotspots import pair

CONFTEST = """
    import pytest

    @pytest.fixture
    def numbers(problem_size, workload_rng):
        return [workload_rng.random() for _ in range(problem_size)]
"""
#: Each ends in a cost that is a square of n in lines executed, so that no verdict depends on the machine.
NESTED = """
    import pytest

    def pairs(numbers):
        found = 0
        for a in numbers:
            for b in numbers:
                found += a < b
        return found

    @pytest.mark.growth_budget("n", meter="steps", largest=100)
    def test_pairs(numbers):
        pairs(numbers)
"""


@pytest.fixture
def suite(pytester: pytest.Pytester) -> pytest.Pytester:
    pytester.makeconftest(CONFTEST)
    return pytester


def looked_at(result: pytest.RunResult) -> list[str]:
    """The rows under `look at`, without their indent."""
    text = result.stdout.str()
    found = re.search(r"^  look at    (.*?)^  (?:note|repeat) ", text, re.S | re.M)
    assert found, text
    return [row.strip() for row in found.group(1).splitlines()]


@pytest.mark.parametrize("extra", [(), ("-n", "2")], ids=["alone", "xdist"])
def test_the_lines_that_run_too_often(suite: pytest.Pytester, extra: tuple[str, ...]) -> None:
    suite.makepyfile(test_it=NESTED)
    result = suite.runpytest(*extra)
    result.assert_outcomes(failed=1)
    rows = looked_at(result)
    assert re.fullmatch(r"what grows fastest from n = \d+ to \d+:", rows[0])
    assert re.fullmatch(r"test_it.py:6 runs n\^2.0 times: [\d,]+ -> [\d,]+", rows[1])
    assert rows[2] == "for b in numbers:"
    assert re.fullmatch(r"test_it.py:7 runs n\^2.0 times: [\d,]+ -> [\d,]+", rows[3])
    assert len(rows) == 5


def test_the_line_on_which_the_time_grows(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        def kept(numbers):
            seen = []
            for number in numbers:
                if number not in seen:
                    seen.append(number)
            return seen

        @pytest.mark.growth_budget("n")
        def test_kept(numbers, metered):
            with metered:
                kept(numbers)
        """
    )
    result = suite.runpytest()
    result.assert_outcomes(failed=1)
    rows = looked_at(result)
    assert rows[1].startswith("test_it.py:6 takes n^"), rows
    assert rows[2] == "if number not in seen:"


def test_a_trace_that_is_taken_leaves_the_general_hint(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import sys
        import pytest

        @pytest.fixture(autouse=True, scope="module")
        def traced():
            sys.settrace(lambda frame, event, arg: None)
            yield
            sys.settrace(None)

        @pytest.mark.growth_budget("n", meter="cpu_time")
        def test_pairs(numbers):
            for a in numbers:
                for b in numbers:
                    a < b
        """
    )
    result = suite.runpytest()
    result.assert_outcomes(failed=1)
    assert looked_at(result)[0].startswith("a pass over the input inside a step")


def test_a_body_that_fails_under_the_trace_keeps_its_verdict(suite: pytest.Pytester) -> None:
    suite.makepyfile(test_it=NESTED.replace("pairs(numbers)\n", "pairs(numbers)\n        refuse_the_trace()\n", 2))
    suite.makeconftest(
        CONFTEST
        + """
    import builtins, sys
    from pytest_growthbudget.meters.line_times import LineTimes

    def refuse_the_trace():
        tracer = sys.gettrace()
        assert tracer is None or "LineTimes" not in tracer.__qualname__

    builtins.refuse_the_trace = refuse_the_trace
"""
    )
    result = suite.runpytest()
    result.assert_outcomes(failed=1)
    result.stdout.fnmatch_lines(["*growth budget exceeded: steps grows as n^*"])
    assert looked_at(result)[0].startswith("a pass over the input inside a step")


def rows(*costs: float, unit: str = "ns") -> Judgement:
    sizes = tuple(SizeRow(size=100 * 2**i, cost=cost, readings=5) for i, cost in enumerate(costs))
    return Judgement(
        verdict="exceeded", reason="", bound="n", theta="n", unit=unit, sizes=sizes, allowed=(1.0,) * len(sizes)
    )


def test_the_dearest_affordable_size_is_held_against_a_quarter_of_it() -> None:
    assert pair(rows(1e4, 1e5, 1e6, 1e7))[0] == (1, 3)
    assert pair(rows(1e4, 1e5, 1e6, 1e9))[0] == (0, 2)
    assert pair(rows(1e4, 1e5)) == [(0, 1)]
    assert pair(rows(1e10, 1e11)) == []
    assert pair(rows(1e4)) == []
