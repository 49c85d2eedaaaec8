"""How one test is repeated: its workloads, its sizes, and what of its body is read."""

from __future__ import annotations

import pytest


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
