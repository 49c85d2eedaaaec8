"""A run that is interrupted, a session whose time for measuring is used up, and properties in junit XML."""

from __future__ import annotations

import re
import signal
import subprocess
import sys
import time
from xml.etree import ElementTree

import pytest

from tests.suites import NUMBERS

#: The second test is interrupted in its second budget, the first of which is judged by then.
INTERRUPTED = """
    import pytest

    @pytest.mark.growth_budget("n", meter="tally:looks", largest=64)
    def test_sound(numbers, tally):
        tally.add("looks", len(numbers))

    sizes = []

    @pytest.mark.growth_budget("n", meter="tally:looks", largest=64)
    @pytest.mark.growth_budget("n", meter="tally:finds", largest=64)
    def test_stopped(numbers, tally):
        tally.add("looks", len(numbers))
        tally.add("finds", len(numbers))
        if sizes and sizes[-1] > len(numbers):
            sizes.append(0)
        sizes.append(len(numbers))
        if sizes.count(0) and len(numbers) > 20:
            {interrupt}

    def test_never_reached():
        pass
"""


@pytest.mark.parametrize("interrupt", ["raise KeyboardInterrupt", "pytest.exit('enough')"])
def test_an_interrupted_run_says_what_it_has(suite: pytest.Pytester, interrupt: str) -> None:
    suite.makepyfile(test_it=INTERRUPTED.replace("{interrupt}", interrupt))
    result = suite.runpytest_subprocess()
    assert result.ret == pytest.ExitCode.INTERRUPTED
    text = result.stdout.str()
    assert re.search(
        r"test_it\.py::test_stopped\n"
        r"    interrupted while tally:(looks|finds) was read against n\n"
        r"             n        cost  readings\n"
        r"(             *\d+ +\d+ +\d+\n){3,}",
        text,
    ), text
    result.stdout.fnmatch_lines(["[12] growth budget*: [12] within (measured in *"])


def test_the_interrupt_of_a_terminal(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pathlib, time
        import pytest

        @pytest.mark.growth_budget("n", time_limit=600)
        def test_waits(numbers):
            if len(numbers) > 20:
                pathlib.Path("reading").touch()
                time.sleep(600)
            for _ in range(200 * len(numbers)):
                pass
        """
    )
    process = subprocess.Popen(
        [sys.executable, "-m", "pytest", "-p", "no:cacheprovider"], stdout=subprocess.PIPE, text=True
    )
    while not (suite.path / "reading").exists():
        assert process.poll() is None
        time.sleep(0.02)
    process.send_signal(signal.SIGINT)
    output, _ = process.communicate(timeout=60)
    assert process.returncode == pytest.ExitCode.INTERRUPTED
    assert "test_it.py::test_waits\n    interrupted while cpu_time was read against n\n" in output
    assert "KeyboardInterrupt" in output


LINEAR = """
    import pytest

    @pytest.mark.growth_budget("n", meter="tally:looks", largest=64)
    def test_first(numbers, tally):
        tally.add("looks", len(numbers))

    ran = []

    @pytest.mark.growth_budget("n", meter="tally:looks", largest=64)
    @pytest.mark.growth_budget("n", meter="tally:finds", largest=64)
    def test_second(numbers, tally):
        ran.append(len(numbers))
        tally.add("looks", len(numbers))
        tally.add("finds", len(numbers))

    @pytest.mark.growth_budget("n", meter="tally:looks", largest=64)
    def test_third(numbers, tally):
        tally.add("looks", len(numbers))
        assert len(numbers) == 64

    def test_afterwards():
        assert ran == [100]
"""


@pytest.mark.parametrize("source", ["option", "pyproject"])
def test_a_session_has_so_much_time_and_no_more(suite: pytest.Pytester, source: str) -> None:
    suite.makepyfile(test_it=LINEAR)
    # So little that the first test, which begins all the same, uses it up.
    extra = ["--growth-session-time-limit", "1e-9"] if source == "option" else []
    if source == "pyproject":
        suite.makepyprojecttoml("[tool.growthbudget]\nsession_time_limit = 1e-9\n")
    result = suite.runpytest(*extra)
    result.assert_outcomes(passed=3, failed=1)
    result.stdout.fnmatch_lines(
        [
            "the test failed at problem_size = 100; no budget was judged",
            "test_it.py::test_second",
            "    growth budget unmeasured: tally:* against n: the 1e-09 s that this",
            "    session may spend on measuring are used up; raise session_time_limit, or run",
            "    this test in a session of its own",
            "3 growth budgets: 3 unmeasured*",
        ]
    )


def test_what_is_left_of_the_time_is_used(suite: pytest.Pytester) -> None:
    suite.makepyfile(test_it=LINEAR.replace("== 64", "> 0").replace("== [100]", "is not None"))
    result = suite.runpytest("--growth-session-time-limit", "600", "-v")
    result.assert_outcomes(passed=4)
    assert "unmeasured" not in result.stdout.str()


def test_each_worker_has_its_own_time(suite: pytest.Pytester) -> None:
    suite.makepyfile(test_it=LINEAR.replace("== 64", "> 0").replace("== [100]", "is not None"))
    result = suite.runpytest("-n", "2", "--growth-session-time-limit", "1e-9")
    assert result.stdout.str().count("the 1e-09 s that this\n    worker may spend") == 4


def test_a_limit_that_is_none_is_refused(suite: pytest.Pytester) -> None:
    result = suite.runpytest("--growth-session-time-limit", "0")
    result.stderr.fnmatch_lines(
        ["ERROR: --growth-session-time-limit: session_time_limit must be a positive number of seconds; got 0.0"]
    )


@pytest.mark.parametrize("extra", [(), ("-n", "2")], ids=["alone", "xdist"])
@pytest.mark.parametrize("junit", [False, True], ids=["terminal", "junit"])
def test_properties(suite: pytest.Pytester, extra: tuple[str, ...], junit: bool) -> None:
    suite.makeconftest(
        NUMBERS
        + """
    def pytest_runtest_logreport(report):
        if report.when == "call":
            for name, value in report.user_properties:
                assert type(name) is type(value) is str
                with open("heard.txt", "a") as file:
                    print(name, value, sep=" = ", file=file)
"""
    )
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n log n", meter="tally:looks", largest=64)
        def test_sound(numbers, tally, record_property):
            tally.add("looks", len(numbers))
            record_property("kind", "even")

        @pytest.mark.growth_budget("n", meter="tally:looks", largest=64)
        def test_square(numbers, tally):
            tally.add("looks", len(numbers) ** 2)

        def test_plain():
            pass
        """
    )
    result = suite.runpytest("-W", "default", *extra, *(["--junitxml=out.xml"] if junit else []))
    result.assert_outcomes(passed=2, failed=1)
    lines = set((suite.path / "heard.txt").read_text().splitlines())
    assert {
        "kind = even",
        "growth.tally:looks.verdict = within",
        "growth.tally:looks.budget = n log n",
        "growth.tally:looks.verdict = exceeded",
        "growth.tally:looks.excess = 1.000",
    } <= lines
    if junit:
        cases = {case.get("name"): case for case in ElementTree.parse(suite.path / "out.xml").iter("testcase")}
        square = {p.get("name"): p.get("value") for p in cases["test_square"].iter("property")}
        assert square["growth.tally:looks.verdict"] == "exceeded"
        assert re.fullmatch(r"[01]\.\d{3} to 1\.\d{3}", square["growth.tally:looks.excess_interval"] or "")
        names = [p.get("name") for p in cases["test_sound"].iter("property")]
        assert len(names) == len(set(names)), "each once, however many readings there were"
        assert not list(cases["test_plain"].iter("property"))
