"""Each neighbour for real: budgets come out as they do alone, or are refused with the way round."""

from __future__ import annotations

import importlib.util
import os
import signal
import subprocess
import sys
import textwrap

import pytest

SOURCE = """
import pytest

@pytest.fixture
def numbers(problem_size, workload_rng):
    return [workload_rng.random() for _ in range(problem_size)]

@pytest.mark.growth_budget("n", meter="steps", largest=256)
def test_sound(numbers):
    for number in numbers: number

@pytest.mark.growth_budget("n", meter="steps", largest=128)
def test_unsound(numbers):
    for number in numbers:
        for other in numbers: other

def test_plain(numbers):
    assert len(numbers) == 100
"""


def needs(module: str) -> pytest.MarkDecorator:
    missing = importlib.util.find_spec(module) is None
    return pytest.mark.skipif(missing, reason=f"{module} is not installed")


#: Neighbours that change an inner run by being there are left out of it, but where they are the subject.
ABSENT = [
    option
    for module, plugin in (
        ("pytest_randomly", "randomly"),
        ("pytest_asyncio", "asyncio"),
        ("pytest_rerunfailures", "rerunfailures"),
    )
    if importlib.util.find_spec(module)
    for option in ("-p", f"no:{plugin}")
]


def without(*present: str) -> list[str]:
    """The options that leave every neighbour out but those `present`."""
    return [
        option
        for pair in zip(ABSENT[::2], ABSENT[1::2], strict=True)
        if pair[1].partition(":")[2] not in present
        for option in pair
    ]


@pytest.fixture
def suite(pytester: pytest.Pytester, monkeypatch: pytest.MonkeyPatch) -> pytest.Pytester:
    """A suite in a process of its own: what a neighbour does to its process stays there."""
    monkeypatch.setenv("PYTHONPATH", os.pathsep.join(path for path in sys.path if path))
    pytester.makepyfile(test_it=SOURCE)
    return pytester


def judged(result: pytest.RunResult, summary: str = "2 growth budgets: *1 exceeded*") -> None:
    """Assert that `SOURCE` came out as it does alone."""
    assert "INTERNALERROR" not in result.stdout.str() + result.stderr.str()
    result.assert_outcomes(passed=2, failed=1)
    result.stdout.fnmatch_lines([summary])


def only(suite: pytest.Pytester, source: str) -> None:
    suite.makepyfile(test_it=textwrap.dedent(source))


# ------------------------------------------------------------ pytest and the interpreter

OPTIONS = {
    "no-cache": ("-p", "no:cacheprovider"),
    "importlib": ("--import-mode=importlib",),
    "append": ("--import-mode=append",),
    "warnings-as-errors": ("-W", "error"),
    "durations": ("--durations=3",),
    "setups-shown": ("--setup-show",),
    "no-capture": ("-s",),
    "plain-assertions": ("--assert=plain",),
    "no-logging-plugin": ("-p", "no:logging"),
    "no-warnings-plugin": ("-p", "no:warnings"),
    "strict-markers": ("--strict-markers",),
}


@pytest.mark.parametrize("case", OPTIONS)
def test_options_of_pytest(suite: pytest.Pytester, case: str) -> None:
    judged(suite.runpytest_subprocess(*OPTIONS[case], *without()))


def test_setups_can_be_planned_and_made_without_running_a_body(suite: pytest.Pytester) -> None:
    for option in ("--setup-plan", "--setup-only"):
        result = suite.runpytest_subprocess(option, *without())
        assert result.ret in (pytest.ExitCode.OK, pytest.ExitCode.NO_TESTS_COLLECTED)
        result.stdout.fnmatch_lines(["*test_it.py::test_sound*"])


@pytest.mark.parametrize("flags", [("-X", "dev"), ("-W", "error"), ("-O",), ("-I",)], ids=" ".join)
def test_flags_of_the_interpreter(suite: pytest.Pytester, flags: tuple[str, ...]) -> None:
    if "-I" in flags:
        found = subprocess.run(
            [sys.executable, "-I", "-c", "import pytest_growthbudget"], cwd="/", capture_output=True, check=False
        )
        if found.returncode:
            pytest.skip("the package is not installed, only on the path")
    judged(suite.run(sys.executable, *flags, "-m", "pytest", *without()))


@pytest.mark.parametrize("seed", ["0", "4294967295"])
def test_hash_seeds(suite: pytest.Pytester, monkeypatch: pytest.MonkeyPatch, seed: str) -> None:
    monkeypatch.setenv("PYTHONHASHSEED", seed)
    judged(suite.runpytest_subprocess(*without()))


def test_the_debugger_at_a_failing_body(suite: pytest.Pytester) -> None:
    only(
        suite,
        """
        import pytest

        @pytest.mark.growth_budget("n", smallest=16, largest=64)
        def test_breaks(problem_size):
            assert problem_size < 0
        """,
    )
    command = [sys.executable, "-m", "pytest", "--pdb", *without()]
    done = subprocess.run(
        command, input="p 'at', problem_size\nq\n", capture_output=True, text=True, check=False, cwd=suite.path
    )
    assert "('at', 16)" in done.stdout
    assert "-> assert problem_size < 0" in done.stdout


@pytest.mark.skipif(not hasattr(signal, "setitimer"), reason="this platform has no interval timer")
def test_a_body_that_is_being_debugged_is_not_interrupted(suite: pytest.Pytester) -> None:
    only(
        suite,
        """
        import time
        import pytest

        stops = [1]

        @pytest.mark.growth_budget("n", smallest=16, largest=64, time_limit=0.5)
        def test_stops(problem_size):
            if stops:
                stops.pop()
                breakpoint()
        """,
    )
    command = [sys.executable, "-m", "pytest", *without()]
    commands = "import time\np time.sleep(1)\np 'still', 'here'\nc\n"
    done = subprocess.run(command, input=commands, capture_output=True, text=True, check=False, cwd=suite.path)
    assert "('still', 'here')" in done.stdout
    assert "1 passed" in done.stdout


def test_doctests_and_test_cases_beside_budgets(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        documented='''
        def double(x):
            """
            >>> double(2)
            4
            """
            return 2 * x
        ''',
        test_case="""
        import unittest

        class TestCase(unittest.TestCase):
            def test_it(self):
                with self.subTest(size=1):
                    self.assertTrue(True)
        """,
    )
    result = suite.runpytest_subprocess("--doctest-modules", *without())
    result.assert_outcomes(passed=4, failed=1)
    result.stdout.fnmatch_lines(["2 growth budgets: *1 exceeded*"])


@pytest.mark.skipif(pytest.version_tuple < (9,), reason="subtests are built into pytest 9")
def test_subtests_of_pytest_itself_are_refused(suite: pytest.Pytester) -> None:
    only(
        suite,
        """
        import pytest

        @pytest.mark.growth_budget("n")
        def test_it(problem_size, subtests): ...
        """,
    )
    result = suite.runpytest_subprocess(*without())
    result.stdout.fnmatch_lines(["test_it.py::test_it: a growth budget cannot stand on a test with subtests,*"])
    assert result.ret == pytest.ExitCode.INTERRUPTED


# ------------------------------------------------------------ other plugins


@needs("xdist")
@pytest.mark.parametrize("dist", ["load", "loadscope", "worksteal"])
def test_xdist(suite: pytest.Pytester, dist: str) -> None:
    judged(suite.runpytest_subprocess("-n", "2", "--dist", dist, *without()))


@needs("pytest_cov")
@pytest.mark.parametrize("workers", ["0", "2"])
def test_cov(suite: pytest.Pytester, workers: str) -> None:
    only(suite, SOURCE.replace('meter="steps", ', "").replace('("n"', '("n^3"'))
    suite.makeini("[pytest]\naddopts = --cov=.\n")
    result = suite.runpytest_subprocess("-n", workers, "-v", *without())
    result.assert_outcomes(passed=3)
    result.stdout.fnmatch_lines(["test_it.py * 100%"])


@needs("pytest_timeout")
@pytest.mark.parametrize("method", ["signal", "thread"])
def test_timeout_leaves_quick_tests_alone(suite: pytest.Pytester, method: str) -> None:
    judged(suite.runpytest_subprocess("--timeout=120", f"--timeout-method={method}", *without()))


@needs("pytest_timeout")
def test_timeout_ends_bodies_and_fixtures_that_hang(suite: pytest.Pytester) -> None:
    """It holds the alarm first; then this plugin's own watch stands back, and the alarm is free again afterwards."""
    only(
        suite,
        """
        import signal
        import pytest

        @pytest.fixture
        def hanging(problem_size):
            while problem_size > 20: pass

        @pytest.mark.timeout(6)
        @pytest.mark.growth_budget("n", smallest=16, largest=64)
        def test_body(problem_size):
            while problem_size > 20: pass

        @pytest.mark.timeout(6)
        @pytest.mark.growth_budget("n", smallest=16, largest=64)
        def test_fixture(hanging): ...

        @pytest.mark.timeout(0)
        @pytest.mark.growth_budget("n", smallest=16, largest=64, time_limit=0.2)
        def test_without_a_timeout(problem_size):
            while problem_size > 20: pass

        def test_last():
            assert signal.getitimer(signal.ITIMER_REAL)[0] == 0
        """,
    )
    result = suite.runpytest_subprocess(*without())
    result.assert_outcomes(passed=2, failed=2)
    text = result.stdout.str()
    assert text.count("Timeout (>6.0s) from pytest-timeout") >= 2
    assert text.count("the test failed at problem_size = 23") == 2
    assert "a call at n = 23 did not come back" in text or "could be read where" in text


@needs("pytest_randomly")
def test_randomly(suite: pytest.Pytester) -> None:
    for seed in ("1", "2"):
        result = suite.runpytest_subprocess("-p", "randomly", f"--randomly-seed={seed}", *without("randomly"))
        judged(result)


@needs("pytest_rerunfailures")
def test_reruns_count_once(suite: pytest.Pytester) -> None:
    result = suite.runpytest_subprocess("--reruns", "2", "--growth-records=out.jsonl", *without("rerunfailures"))
    judged(result)
    assert result.parseoutcomes()["rerun"] == 2
    assert (suite.path / "out.jsonl").read_text().count("\n") == 2


@needs("pytest_rerunfailures")
def test_a_rerun_that_passes_is_the_one_that_counts(suite: pytest.Pytester) -> None:
    only(
        suite,
        """
        import pytest

        runs = []

        @pytest.fixture(scope="module")
        def numbers(problem_size):
            return list(range(problem_size))

        @pytest.mark.growth_budget("n", meter="steps", smallest=16, largest=256)
        def test_flaky(numbers, problem_size):
            assert len(numbers) == problem_size
            if problem_size > 100 and not runs:
                runs.append(1)
                assert False
            for number in numbers: number
        """,
    )
    result = suite.runpytest_subprocess("--reruns", "1", *without("rerunfailures"))
    result.stdout.fnmatch_lines(["1 growth budget: 1 *", "*1 passed, 1 rerun*"])


@needs("pytest_repeat")
def test_repeat(suite: pytest.Pytester) -> None:
    result = suite.runpytest_subprocess("--count", "2", *without())
    result.assert_outcomes(passed=4, failed=2)
    result.stdout.fnmatch_lines(["4 growth budgets: *2 exceeded*"])


ASYNC = """
import pytest

{marker}
@pytest.mark.growth_budget("n")
async def test_it(problem_size): ...
"""


@pytest.mark.parametrize(
    "marker",
    [
        pytest.param("pytest.mark.asyncio", marks=needs("pytest_asyncio")),
        pytest.param("pytest.mark.anyio", marks=needs("anyio")),
    ],
)
def test_async_tests_are_refused(suite: pytest.Pytester, marker: str) -> None:
    only(suite, ASYNC.format(marker="@" + marker))
    result = suite.runpytest_subprocess(*without("asyncio"))
    result.stdout.fnmatch_lines(["test_it.py::test_it*: a growth budget cannot stand on an async test*"])
    assert result.ret == pytest.ExitCode.INTERRUPTED


@needs("pytest_asyncio")
def test_async_fixtures_build_workloads(suite: pytest.Pytester) -> None:
    only(suite, SOURCE.replace("@pytest.fixture\ndef", "import pytest_asyncio\n@pytest_asyncio.fixture\nasync def"))
    judged(suite.runpytest_subprocess("--asyncio-mode=auto", *without("asyncio")))


@needs("hypothesis")
def test_hypothesis_beside_budgets(suite: pytest.Pytester) -> None:
    only(
        suite,
        SOURCE
        + """
from hypothesis import given, strategies

@given(strategies.integers())
def test_property(x):
    assert x == x
""",
    )
    result = suite.runpytest_subprocess("--hypothesis-show-statistics", *without())
    result.assert_outcomes(passed=3, failed=1)
    result.stdout.fnmatch_lines(["2 growth budgets: *1 exceeded*"])
