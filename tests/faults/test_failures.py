"""Bodies and fixtures that fail: a clear outcome, no internal error, and nothing lost."""

from __future__ import annotations

import pytest

from tests.faults.runs import run

FAILING = {
    "raises": ("raise ValueError('too many')", "ValueError: too many"),
    "runs-out-of-memory": ("bytearray(1 << 62)", "MemoryError"),
    "exits": ("sys.exit(3)", "SystemExit: 3"),
    "is-a-bare-base-exception": ("raise BaseException('odd')", "BaseException: odd"),
    "recurses-too-deep": ("down = lambda: down(); down()", "RecursionError"),
    "fails": ("pytest.fail('not so large')", "Failed: not so large"),
}


@pytest.mark.parametrize("meter", ["cpu_time", "steps"])
@pytest.mark.parametrize("case", FAILING)
def test_a_body_that_fails_at_one_size(suite: pytest.Pytester, case: str, meter: str) -> None:
    act, expected = FAILING[case]
    text = run(
        suite,
        f"""
@pytest.mark.growth_budget("n", meter="{meter}", smallest=16, largest=64)
def test_breaks(numbers):
    if len(numbers) > 16:
        {act}
""",
        failed=1,
    )
    assert expected in text
    assert "the test failed at problem_size = 23; no budget was judged" in text


def test_a_failure_inside_a_metered_block_is_not_hidden_by_its_meter(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
@pytest.mark.growth_budget("n", meter="steps", largest=64)
def test_breaks(numbers, metered):
    with metered:
        sys.settrace(None)
        raise ValueError("the body's own")
""",
        failed=1,
    )
    assert "ValueError: the body's own" in text


def test_the_whole_session_can_be_ended_by_a_body(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n", largest=64)
        def test_ends_all(numbers):
            pytest.exit("enough", returncode=7)

        def test_never_reached(): ...
        """
    )
    result = suite.runpytest()
    assert result.ret == 7
    result.stdout.fnmatch_lines(["*Exit: enough*"])


def test_skips_and_expected_failures_at_one_size(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
@pytest.mark.growth_budget("n", largest=64)
def test_skips(numbers):
    if len(numbers) > 20: pytest.skip("large")

@pytest.mark.growth_budget("n", largest=64)
def test_is_expected_to_fail(numbers):
    if len(numbers) > 20: pytest.xfail("large")
""",
        skipped=1,
        xfailed=1,
    )


def test_a_workload_that_memory_cannot_hold_ends_the_climb(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
@pytest.fixture
def large(problem_size):
    if problem_size > 1000:
        raise MemoryError
    return [None] * problem_size

@pytest.mark.growth_budget("n^2", meter="steps")
def test_walk(large):
    for number in large: number

@pytest.mark.growth_budget("n^2")
def test_walk_by_the_clock(large):
    for number in large: str(number)
""",
        "--growth-records=out.jsonl",
        passed=2,
    )
    assert "2 growth budgets: " in text
    assert "exceeded" not in text
    records = (suite.path / "out.jsonl").read_text()
    assert "not enough memory to build the workload of n = " in records


def test_a_first_workload_that_memory_cannot_hold_fails_the_test(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
@pytest.fixture
def large(problem_size):
    raise MemoryError("none left")

@pytest.mark.growth_budget("n", smallest=16)
def test_sum(large): ...
""",
        failed=1,
    )
    assert "MemoryError: none left" in text
    assert "the test failed at problem_size = 16" in text


def test_a_fixture_that_exits_and_one_that_fails_in_its_teardown(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
@pytest.fixture
def exits(problem_size): sys.exit(4)

@pytest.fixture
def fails_late(problem_size):
    yield [0] * problem_size
    raise RuntimeError("cannot tidy up")

@pytest.mark.growth_budget("n", largest=64)
def test_exits(exits): ...

@pytest.mark.growth_budget("n", largest=64)
def test_fails_late(fails_late): ...
""",
        failed=2,
    )
    assert "SystemExit: 4" in text
    assert "RuntimeError: cannot tidy up" in text
    assert text.count("the test failed at problem_size = ") == 2
