"""What a repeated test leaves in the session: outcomes, output, and nothing else."""

from __future__ import annotations

import re

import pytest


def test_skips_and_expected_failures(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        pytestmark = pytest.mark.growth_budget("n", largest=64)

        @pytest.mark.skip(reason="not today")
        def test_marked_skip(numbers): ...

        def test_skips_itself(numbers):
            pytest.skip("not at this size")

        @pytest.mark.xfail(reason="known", strict=True)
        def test_known_to_fail(numbers):
            assert len(numbers) < 20

        @pytest.mark.xfail(raises=ZeroDivisionError, strict=True)
        def test_known_to_raise(numbers):
            1 / 0

        @pytest.mark.xfail(strict=False)
        def test_passes_all_the_same(numbers):
            sum(numbers)
        """
    )
    suite.runpytest().assert_outcomes(skipped=2, xfailed=2, xpassed=1)


def test_a_body_that_fails_shows_its_own_traceback_and_the_size(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n", smallest=10, largest=64)
        def test_breaks(numbers):
            print("the body says", len(numbers))
            assert len(numbers) < 20
        """
    )
    result = suite.runpytest("--tb=short")
    result.assert_outcomes(failed=1)
    result.stdout.fnmatch_lines(
        [
            "test_it.py:6: in test_breaks",
            "    assert len(numbers) < 20",
            "E   assert 20 < 20",
            "*the body says 20",
            "*growth budget*",
            "the test failed at problem_size = 20; no budget was judged",
        ]
    )
    text = result.stdout.str()
    assert "the body says 14" not in text, "what earlier readings printed is dropped"
    assert "repeat.py" not in text, "the traceback is the test's own"


def test_a_fixture_that_fails_shows_the_size(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.fixture
        def numbers(problem_size):
            if problem_size > 30:
                raise RuntimeError("no more")
            return list(range(problem_size))

        @pytest.mark.growth_budget("n", smallest=10, largest=64)
        def test_sum(numbers):
            sum(numbers)

        def test_next():
            pass
        """
    )
    result = suite.runpytest()
    result.assert_outcomes(failed=1, passed=1)
    result.stdout.fnmatch_lines(
        ["E*RuntimeError: no more", "the test failed at problem_size = 40; no budget was judged"]
    )


def test_last_failed_and_exit_first(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        pytestmark = pytest.mark.growth_budget("n", largest=64)

        def test_good(numbers):
            sum(numbers)

        def test_bad(numbers):
            assert False

        def test_after(numbers):
            sum(numbers)
        """
    )
    suite.runpytest("-x").assert_outcomes(passed=1, failed=1)
    suite.runpytest("--lf").assert_outcomes(failed=1)


def test_fixtures_of_pytest_itself_work_in_a_budgeted_test(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import logging, warnings
        import pytest

        @pytest.mark.growth_budget("n", largest=64)
        def test_everything(numbers, tmp_path, monkeypatch, capsys, caplog, recwarn, request):
            (tmp_path / "file").write_text("x")
            monkeypatch.setenv("GROWTH", "1")
            print("hello")
            assert capsys.readouterr().out == "hello\\n"
            logging.getLogger().warning("careful")
            assert [record.message for record in caplog.records] == ["careful"]
            warnings.warn("old", DeprecationWarning)
            assert len(recwarn) == 1
            assert request.node.name == "test_everything"
        """
    )
    suite.runpytest().assert_outcomes(passed=1)


def test_repeated_output_logs_and_warnings_are_not_kept(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import logging, warnings
        import pytest

        @pytest.mark.growth_budget("n", largest=64)
        def test_talks(numbers):
            print("talk")
            logging.getLogger().warning("log")
            warnings.warn("warned", UserWarning)
            sum(numbers)
        """
    )
    result = suite.runpytest("-rP", "-W", "always")
    result.assert_outcomes(passed=1)
    text = result.stdout.str()
    assert result.outlines.count("talk") <= 2
    assert text.count("WARNING") <= 2


def test_off_runs_each_test_once_at_the_ordinary_size(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        sizes = []

        @pytest.mark.growth_budget("n")
        def test_sum(numbers, metered):
            with metered:
                sizes.append(len(numbers))

        @pytest.mark.growth_budget("V", vary={"V": "count"})
        def test_argument(count):
            sizes.append(count)

        def test_afterwards():
            assert sizes == [100, 100]
        """
    )
    result = suite.runpytest("--growth", "off", "-v")
    result.assert_outcomes(passed=3)
    result.stdout.fnmatch_lines(
        ["growth budgets: off", "test_it.py::test_sum PASSED*", "test_it.py::test_argument PASSED*"]
    )


def test_off_keeps_below_the_largest_size_of_a_test(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("2^n", largest=12)
        def test_steep(problem_size):
            assert problem_size == 12

        def test_plain(problem_size):
            assert problem_size == 100
        """
    )
    result = suite.runpytest("--growth", "off", "-v")
    result.assert_outcomes(passed=2)
    result.stdout.fnmatch_lines(["test_it.py::test_steep PASSED*"])


@pytest.mark.parametrize("extra", [(), ("-n", "2")], ids=["alone", "xdist"])
@pytest.mark.parametrize("junit", [False, True], ids=["terminal", "junit"])
def test_a_quadratic_body_is_reported(suite: pytest.Pytester, extra: tuple[str, ...], junit: bool) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n")
        def test_quadratic(numbers):
            seen = []
            for number in numbers:
                if number not in seen:
                    seen.append(number)

        @pytest.mark.growth_budget("n^2")
        def test_sound(numbers):
            seen = []
            for number in numbers:
                if number not in seen:
                    seen.append(number)
        """
    )
    result = suite.runpytest(*extra, *(["--junitxml=out.xml"] if junit else []))
    result.assert_outcomes(passed=1, failed=1)
    lines = [line for line in result.outlines if "growth budget exceeded" in line]
    assert re.fullmatch(
        r"growth budget exceeded: cpu_time grows as n\^(1\.[4-9]\d|2\.[0-2]\d) where n is allowed", lines[0]
    )
    result.stdout.fnmatch_lines(
        ["*- growth budget -*", "  declared   n", "  observed   n^*", "2 growth budgets: *1 exceeded*"]
    )
    start = next(i for i, line in enumerate(result.outlines) if "- growth budget -" in line)
    report = result.outlines[start : result.outlines.index("", start + 20)]
    assert all(len(line) <= 80 for line in report)
    if junit:
        text = (suite.path / "out.xml").read_text()
        assert 'message="Failed: growth budget exceeded: cpu_time grows as' in text
