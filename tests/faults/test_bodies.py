"""Bodies that do not come back, or change their surroundings. They are counted by steps where the verdict matters, so
that it does not depend on the machine.
"""

from __future__ import annotations

import pytest

from tests.faults.runs import needs_timer, run


@needs_timer
@pytest.mark.parametrize("meter", ["cpu_time", "steps"])
def test_a_body_that_never_returns_at_any_size_fails(suite: pytest.Pytester, meter: str) -> None:
    text = run(
        suite,
        f"""
@pytest.mark.growth_budget("n", meter="{meter}", time_limit=0.2)
def test_hangs(numbers):
    while True: pass
""",
        failed=1,
    )
    assert "no call of this test came back: at its smallest size it was stopped after 0.1 s" in text


@needs_timer
def test_a_body_that_does_not_return_from_one_size_on_is_not_within(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
@pytest.mark.growth_budget("n", meter="steps", time_limit=5)
def test_hangs(numbers):
    for number in numbers: number
    while len(numbers) > 300: pass
""",
        passed=1,
    )
    assert "growth budget undecided: steps against n: the sizes read keep the budget, but a call at n = " in text
    assert "did not come back within" in text


def test_a_secretly_exponential_body_is_judged_within_its_time(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
def count(k):
    return 1 if k < 2 else count(k - 1) + count(k - 2)

@pytest.mark.growth_budget("n", meter="steps", time_limit=5)
def test_branches(numbers):
    count(len(numbers))
""",
        failed=1,
    )
    assert "growth budget exceeded: steps grows as 1.6^n where n is allowed" in text


def test_bodies_that_change_their_surroundings(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
budget = pytest.mark.growth_budget("n", meter="steps", largest=128)

def walk(numbers):
    for number in numbers: number

@budget
def test_patched_time(numbers, monkeypatch):
    for name in ("time", "perf_counter", "perf_counter_ns", "process_time_ns", "monotonic"):
        monkeypatch.setattr(time, name, lambda: 0)
    walk(numbers)

@budget
def test_removed_directory(numbers, tmp_path, monkeypatch):
    directory = tmp_path / "gone"
    directory.mkdir()
    monkeypatch.chdir(directory)
    directory.rmdir()
    walk(numbers)

@budget
def test_no_stdout(numbers, monkeypatch):
    monkeypatch.setattr(sys, "stdout", None)
    walk(numbers)

@budget
def test_threads_left_running(numbers):
    if not hasattr(threading, "left"):
        threading.left = threading.Thread(target=time.sleep, args=(0.5,), daemon=True)
        threading.left.start()
    walk(numbers)

@budget
def test_other_recursion_limit(numbers):
    usual = sys.getrecursionlimit()
    sys.setrecursionlimit(usual + 50)
    walk(numbers)
    sys.setrecursionlimit(usual)

@budget
def test_environment(numbers, monkeypatch):
    monkeypatch.setenv("GROWTH", str(len(numbers)))
    walk(numbers)

@pytest.mark.growth_budget("n^3", meter="cpu_time", undecided="fail")
def test_time_is_read_all_the_same(numbers, monkeypatch):
    monkeypatch.setattr(time, "process_time_ns", lambda: 0)
    for _ in range(100): sum(numbers)
""",
        passed=7,
    )
    assert "7 growth budgets: " in text
    assert "exceeded" not in text


def test_records_are_written_where_the_run_began(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
@pytest.mark.growth_budget("n", meter="steps", largest=64)
def test_moves(numbers, tmp_path):
    os.chdir(tmp_path)
    for number in numbers: number
""",
        "--growth-records=out.jsonl",
        passed=1,
    )
    assert (suite.path / "out.jsonl").read_text().count("\n") == 1


def test_a_body_that_closes_its_stdout_ends_as_it_would_without_a_budget(suite: pytest.Pytester) -> None:
    """pytest itself cannot go on after that; what was judged before is on record all the same."""
    suite.makepyfile(
        test_it="""
        import sys
        import pytest

        @pytest.mark.growth_budget("n", meter="steps", largest=64)
        def test_sound(numbers):
            for number in numbers: number

        @pytest.mark.growth_budget("n", meter="steps", largest=64)
        def test_closes(numbers):
            sys.stdout.close()
        """
    )
    plain = suite.runpytest_subprocess("--growth=off", "-p", "no:randomly")
    budgeted = suite.runpytest_subprocess("--growth-records=out.jsonl", "-p", "no:randomly")
    assert budgeted.ret == plain.ret != 0
    assert '"within"' in (suite.path / "out.jsonl").read_text()
