"""What is wrong is said once, in one clean error, before anything is measured: alone and under xdist."""

from __future__ import annotations

import textwrap

import pytest

HEAD = """
import unittest
import pytest

@pytest.fixture
def numbers(problem_size):
    return list(range(problem_size))

@pytest.fixture
def constant():
    return [1, 2, 3]
"""

CASES = {
    "a bound that cannot be read": (
        '@pytest.mark.growth_budget("n log(")\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it:
        the expression ends too early: a number, a size or a bracket was expected
          n log(
                ^
        """,
    ),
    "an unknown keyword": (
        '@pytest.mark.growth_budget("n", slak=0.2)\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it: growth_budget has no argument 'slak'; did you mean
        'slack'?
        """,
    ),
    "no bound": (
        "@pytest.mark.growth_budget\ndef test_it(numbers): ...",
        'test_bad.py::test_it: growth_budget needs a bound, such as "n log n"\n',
    ),
    "two bounds": (
        '@pytest.mark.growth_budget("n", "n^2")\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it: growth_budget takes one bound; got 2: stack one marker a
        budget
        """,
    ),
    "a value of the wrong kind": (
        '@pytest.mark.growth_budget("n", slack="much")\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it: slack must be a positive exponent below 10; got 'much'
        """,
    ),
    "sizes that leave no room": (
        '@pytest.mark.growth_budget("n", smallest=100, largest=150)\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it: largest must be at least twice smallest; got smallest=100,
        largest=150
        """,
    ),
    "an unknown meter": (
        '@pytest.mark.growth_budget("n", meter="cputime")\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it: no meter is named 'cputime'. Did you mean 'cpu_time'?
        Known meters: cpu_time, wall_time, steps, peak_memory, tally:NAME.
        """,
    ),
    "no fixture that asks for a size": (
        '@pytest.mark.growth_budget("n")\ndef test_it(constant): ...',
        """\
        test_bad.py::test_it: no fixture of this test asks for the size 'problem_size',
        so its workload cannot grow; give it to the fixture that builds the workload
        (constant):
            @pytest.fixture
            def constant(problem_size): ...
        """,
    ),
    "a test without arguments": (
        '@pytest.mark.growth_budget("n")\ndef test_it(): ...',
        """\
        test_bad.py::test_it: no fixture of this test asks for the size 'problem_size',
        so its workload cannot grow; give it to the test, or to a fixture that builds
        its workload:
            @pytest.fixture
            def workload(problem_size): ...
        """,
    ),
    "two variables and no vary": (
        '@pytest.mark.growth_budget("V + E")\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it: the bound has the variables E, V; say which fixture or
        argument gives each: vary={"E": "...", "V": "..."}
        """,
    ),
    "vary forgets a variable": (
        '@pytest.mark.growth_budget("V + E", vary={"V": "numbers"})\ndef test_it(numbers): ...',
        "test_bad.py::test_it: vary does not say what gives 'E'\n",
    ),
    "twice with the same meter": (
        '@pytest.mark.growth_budget("n")\n@pytest.mark.growth_budget("n^2")\ndef test_it(numbers): ...',
        "test_bad.py::test_it: two budgets for the meter 'cpu_time'; keep one\n",
    ),
    "a size that is parametrized already": (
        '@pytest.mark.growth_budget("n")\n@pytest.mark.parametrize("problem_size", [1, 2])\ndef test_it(numbers): ...',
        """\
        test_bad.py::test_it: problem_size is parametrized already; a growth budget sets
        the sizes itself: take that parametrization away, or budget another size with
        vary=...
        """,
    ),
    "an async test": (
        '@pytest.mark.growth_budget("n")\nasync def test_it(numbers): ...',
        """\
        test_bad.py::test_it: a growth budget cannot stand on an async test yet; call
        the coroutine in a plain test with asyncio.run(...)
        """,
    ),
    "a test of a unittest.TestCase": (
        'class TestIt(unittest.TestCase):\n    @pytest.mark.growth_budget("n")\n    def test_it(self): ...',
        """\
        test_bad.py::TestIt::test_it: a growth budget cannot stand on a method of a
        unittest.TestCase, which takes no fixtures; write it as a plain test function or
        in a class without that base
        """,
    ),
    "a property test": (
        (
            "from hypothesis import given, strategies\n"
            '@pytest.mark.growth_budget("n")\n@given(strategies.integers())\ndef test_it(numbers, x): ...'
        ),
        """\
        test_bad.py::test_it: a growth budget cannot stand on a @given test, whose body
        runs many examples a call; put it on a plain test that builds its workload from
        problem_size
        """,
    ),
}


def error_of(lines: list[str]) -> str:
    start = next(i for i, line in enumerate(lines) if "ERROR collecting test_bad.py" in line) + 1
    end = next(i for i, line in enumerate(lines[start:], start) if line.startswith("===="))
    return "\n".join(lines[start:end]) + "\n"


@pytest.mark.parametrize("case", CASES, ids=lambda name: name.replace(" ", "-"))
def test_a_bad_budget_is_one_clean_error(pytester: pytest.Pytester, case: str) -> None:
    source, expected = CASES[case]
    pytester.makepyfile(test_bad=HEAD + source)
    result = pytester.runpytest()
    assert result.ret == pytest.ExitCode.INTERRUPTED
    assert error_of(result.outlines) == textwrap.dedent(expected)


def test_bad_budgets_under_xdist(pytester: pytest.Pytester) -> None:
    source, expected = CASES["an unknown keyword"]
    pytester.makepyfile(test_bad=HEAD + source, test_good="def test_good(): ...")
    result = pytester.runpytest("-n", "2")
    assert result.ret != 0
    assert error_of(result.outlines) == textwrap.dedent(expected)
    text = result.stdout.str()
    assert text.count("ERROR collecting") == 1
    assert "INTERNALERROR" not in text


def test_a_bad_budget_is_no_fault_where_budgets_are_off(pytester: pytest.Pytester) -> None:
    pytester.makepyfile(test_bad=HEAD + CASES["an unknown keyword"][0])
    pytester.runpytest("--growth", "off").assert_outcomes(passed=1)


PYPROJECT = {
    "an unknown key": (
        "[tool.growthbudget]\nconfidance = 0.9\n",
        "pyproject.toml, [tool.growthbudget]: unknown key 'confidance'; did you mean 'confidence'?",
    ),
    "a value of the wrong kind": (
        '[tool.growthbudget]\ntime_limit = "ten"\n',
        "pyproject.toml, [tool.growthbudget]: time_limit must be a positive number of seconds; got 'ten'",
    ),
    "an unknown policy": (
        '[tool.growthbudget]\nundecided = "panic"\n',
        "pyproject.toml, [tool.growthbudget]: undecided must be one of 'warn', 'fail', 'pass'; got 'panic'",
    ),
    "a bad slack": (
        "[tool.growthbudget.slack]\ncpu_time = -1\n",
        "pyproject.toml, [tool.growthbudget.slack], cpu_time: slack must be a positive exponent below 10; got -1",
    ),
    "a budget for no test": (
        '[[tool.growthbudget.budgets]]\nbound = "n"\n',
        'pyproject.toml, [[tool.growthbudget.budgets]] number 1: needs test = "glob of node ids"',
    ),
    "an unknown argument of a budget": (
        '[[tool.growthbudget.budgets]]\ntest = "*"\nbund = "n"\n',
        "pyproject.toml, [[tool.growthbudget.budgets]] number 1: unknown key 'bund'; did you mean 'bound'?",
    ),
    "a bound that cannot be read": (
        '[[tool.growthbudget.budgets]]\ntest = "*"\nbound = "n log("\n',
        "pyproject.toml, [[tool.growthbudget.budgets]] number 1:",
    ),
}


@pytest.mark.parametrize("extra", [(), ("-n", "2")], ids=["alone", "xdist"])
@pytest.mark.parametrize("case", PYPROJECT, ids=lambda name: name.replace(" ", "-"))
def test_a_bad_pyproject_is_a_usage_error(pytester: pytest.Pytester, case: str, extra: tuple[str, ...]) -> None:
    table, expected = PYPROJECT[case]
    pytester.makepyprojecttoml(table)
    pytester.makepyfile("def test_plain(): ...")
    result = pytester.runpytest(*extra)
    assert result.ret == pytest.ExitCode.USAGE_ERROR
    errors = [line for line in result.errlines if line]
    assert errors[0] == f"ERROR: {expected}"


def test_a_bad_option_is_a_usage_error(pytester: pytest.Pytester) -> None:
    result = pytester.runpytest("--growth-time-limit", "-3")
    assert result.ret == pytest.ExitCode.USAGE_ERROR
    assert [line for line in result.errlines if line] == [
        "ERROR: --growth-time-limit: time_limit must be a positive number of seconds; got -3.0"
    ]
