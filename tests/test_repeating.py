"""One reported item a test: what pytest's users see of a budgeted test is what they see of any other."""

from __future__ import annotations

import re

import pytest

#: A body whose cost is exact: it charges a virtual meter. Verdicts do not depend on the machine.
CONFTEST = """
    import pytest

    @pytest.fixture
    def numbers(problem_size, workload_rng):
        return [workload_rng.random() for _ in range(problem_size)]
"""


@pytest.fixture
def suite(pytester: pytest.Pytester) -> pytest.Pytester:
    pytester.makeconftest(CONFTEST)
    return pytester


def test_one_item_a_test(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n", largest=64)
        def test_sum(numbers):
            sum(numbers)

        class TestClass:
            @pytest.mark.growth_budget("n", largest=64)
            @pytest.mark.parametrize("start", [0, 1])
            def test_sum(self, numbers, start):
                sum(numbers, start)

        def test_plain(numbers):
            assert len(numbers) == 100
        """
    )
    result = suite.runpytest("--collect-only", "-q")
    result.stdout.fnmatch_lines(
        [
            "test_it.py::test_sum",
            "test_it.py::TestClass::test_sum[[]0]",
            "test_it.py::TestClass::test_sum[[]1]",
            "test_it.py::test_plain",
            "",
            "4 tests collected*",
        ],
        consecutive=True,
    )


def test_a_node_id_selects_the_test(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n", largest=64)
        @pytest.mark.parametrize("start", [0, 1])
        def test_sum(numbers, start):
            sum(numbers, start)
        """
    )
    suite.runpytest("test_it.py::test_sum[1]").assert_outcomes(passed=1)
    suite.runpytest("-k", "test_sum and 0").assert_outcomes(passed=1, deselected=1)
    suite.runpytest("-m", "growth_budget").assert_outcomes(passed=2)
    suite.runpytest("-m", "not growth_budget").assert_outcomes(deselected=2)


def test_function_scoped_workloads_are_built_for_each_reading(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        built, called = [], []

        @pytest.fixture
        def numbers(problem_size):
            built.append(problem_size)
            yield list(range(problem_size))
            built.append("torn down")

        @pytest.mark.growth_budget("n", largest=64)
        def test_consumes_its_input(numbers):
            called.append(len(numbers))
            assert numbers, "a fresh workload has all its numbers"
            while numbers:
                numbers.pop()

        def test_afterwards():
            assert built[1::2] == ["torn down"] * (len(built) // 2)
            sizes = built[::2]
            assert set(called) == set(sizes) and len(set(sizes)) > 3
        """
    )
    suite.runpytest().assert_outcomes(passed=2)


def test_wide_workloads_stay_up_and_are_built_anew_only_for_another_size(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        built, up = [], []

        @pytest.fixture(scope="session")
        def register():
            up.append(1)
            yield "register"
            up.append(-1)

        @pytest.fixture(scope="module")
        def numbers(problem_size, register, workload_rng):
            built.append(problem_size)
            return [workload_rng.random() for _ in range(problem_size)]

        @pytest.mark.growth_budget("n", largest=64)
        def test_sum(numbers, register):
            sum(numbers)

        def test_afterwards():
            assert up == [1]
            weighed_anew = sum(a == b for a, b in zip(built, built[1:]))
            assert weighed_anew <= 6, "only to be weighed is a workload built that is there already"
        """
    )
    suite.runpytest().assert_outcomes(passed=2)


def test_each_reading_has_a_fresh_instance_of_its_class(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        class TestClass:
            def setup_method(self):
                self.ready = True

            @pytest.mark.growth_budget("n", largest=64)
            def test_sum(self, numbers):
                assert self.ready and not hasattr(self, "used")
                self.used = True
                sum(numbers)
        """
    )
    suite.runpytest().assert_outcomes(passed=1)


def test_parametrized_fixtures(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.fixture(params=["up", "down"])
        def numbers(request, problem_size):
            return sorted(range(problem_size), reverse=request.param == "down")

        @pytest.mark.growth_budget("n", largest=64)
        def test_sum(numbers):
            sum(numbers)
        """
    )
    result = suite.runpytest("-v")
    result.stdout.fnmatch_lines(["test_it.py::test_sum[[]up] PASSED*", "test_it.py::test_sum[[]down] PASSED*"])


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


def test_the_size_may_be_any_fixture_or_argument(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        seen = set()

        @pytest.fixture
        def vertex_count():
            return 7

        @pytest.mark.growth_budget("V", vary={"V": "vertex_count"}, largest=64)
        def test_fixture(vertex_count):
            seen.add(vertex_count)

        @pytest.mark.growth_budget("m", vary={"m": "rows"}, largest=64)
        def test_argument(rows):
            seen.add(rows)

        def test_afterwards(vertex_count):
            assert vertex_count == 7 and len(seen) > 5
        """
    )
    suite.runpytest().assert_outcomes(passed=3)


def test_workloads_are_a_function_of_the_seed(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n", smallest=4, largest=9)
        def test_draws(numbers):
            with open("draws.txt", "a") as file:
                print(numbers, file=file)
        """
    )

    def draws(seed: str) -> set[str]:
        path = suite.path / "draws.txt"
        path.unlink(missing_ok=True)
        suite.runpytest("--growth-seed", seed).assert_outcomes(passed=1)
        return set(path.read_text().splitlines()[:6])

    assert draws("5") == draws("5")
    assert not draws("5") & draws("6")


def test_metered_limits_what_is_read(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n")
        def test_linear_part(numbers, metered):
            with metered:
                for number in numbers:
                    number * 2
            with metered:
                for number in numbers:
                    number * 2
            if len(numbers) < 3000:
                [a for a in numbers for b in numbers[:50]]
        """
    )
    result = suite.runpytest("-v")
    result.assert_outcomes(passed=1)
    result.stdout.fnmatch_lines(["1 growth budget: 1 *"])
    result.stdout.no_fnmatch_line("*exceeded*")


def test_metered_without_a_block_is_unmeasured(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n", undecided="fail")
        def test_forgets(numbers, metered):
            sum(numbers)
        """
    )
    result = suite.runpytest()
    result.assert_outcomes(failed=1)
    result.stdout.fnmatch_lines(
        [
            (
                "growth budget unmeasured: cpu_time against n: the test asks for `metered` but ran no code inside "
                "`with metered:`; put the code that the budget is about into that block"
            )
        ]
    )


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


@pytest.mark.parametrize("scope", ["function", "module", "session"])
def test_the_footprint_is_that_of_the_workload_whatever_its_scope(suite: pytest.Pytester, scope: str) -> None:
    suite.makeconftest(
        f"""
        import pytest
        from pytest_growthbudget.running import trial
        from pytest_growthbudget.measuring.guards import Watch
        from pytest_growthbudget.meters.clocks import CpuTime
        from pytest_growthbudget.workloads.repeat import Repeater

        @pytest.fixture(scope={scope!r})
        def block(problem_size):
            return bytearray(problem_size)

        def weigh(item):
            repeater = Repeater(item, lambda size: {{"problem_size": size}}, Watch(60))
            repeater.take(1_000_000, CpuTime())
            assert 1_000_000 <= repeater.footprint(1_000_000) < 1_100_000
            assert repeater.footprint(10_000) < 100_000

        def pytest_configure():
            trial.hold = weigh
        """
    )
    suite.makepyfile(
        """
        import pytest

        @pytest.mark.growth_budget("1")
        def test_length(block):
            len(block)
        """
    )
    suite.runpytest_subprocess().assert_outcomes(passed=1)
