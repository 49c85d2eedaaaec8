"""Faults by the dozen: a clear outcome, no internal error, and nothing lost.

Bodies are counted by steps where the verdict matters, so that it does not depend on the machine.
"""

from __future__ import annotations

import signal

import pytest

CONFTEST = """
    import pytest

    @pytest.fixture
    def numbers(problem_size):
        return list(range(problem_size))
"""
needs_timer = pytest.mark.skipif(not hasattr(signal, "setitimer"), reason="this platform has no interval timer")


@pytest.fixture
def suite(pytester: pytest.Pytester) -> pytest.Pytester:
    pytester.makeconftest(CONFTEST)
    return pytester


def run(suite: pytest.Pytester, source: str, *args: str, **outcomes: int) -> str:
    """Run `source`, followed by a test that must still pass; return what was printed, its lines joined."""
    suite.makepyfile(test_it="import os, sys, threading, time\nimport pytest\n" + source + "\ndef test_last(): ...\n")
    result = suite.runpytest("-v", "-p", "no:randomly", *args)
    outcomes["passed"] = outcomes.get("passed", 0) + 1
    result.assert_outcomes(**outcomes)
    text = " ".join(result.stdout.str().split())
    assert "INTERNALERROR" not in text + result.stderr.str()
    return text


# ------------------------------------------------------------ bodies that fail


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


# ------------------------------------------------------------ fixtures that fail


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


# ------------------------------------------------------------ bodies that do not come back


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


# ------------------------------------------------------------ bodies that change their surroundings


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


# ------------------------------------------------------------ costs and sizes


METERS = """
    import pytest

    class Odd:
        unit = "points"
        deterministic = True

        def __init__(self, name, cost):
            self.name, self.cost = name, cost

        def start(self): ...
        def stop(self): return self.cost

    def pytest_growthbudget_meters(config):
        costs = {"negative": -3.0, "nothing": 0.0, "no_number": float("nan"), "endless": float("inf"), "text": "three"}
        return [Odd(name, cost) for name, cost in costs.items()]

    @pytest.fixture
    def numbers(problem_size):
        return list(range(problem_size))
"""


@pytest.mark.parametrize("meter", ["negative", "nothing", "no_number", "endless", "text"])
def test_costs_that_are_none(pytester: pytest.Pytester, meter: str) -> None:
    pytester.makeconftest(METERS)
    text = run(
        pytester,
        f"""
@pytest.mark.growth_budget("n", meter="{meter}", undecided="fail", largest=256)
def test_sum(numbers): ...
""",
        failed=1,
    )
    assert f"growth budget unmeasured: {meter} against n: " in text


def test_a_cost_that_does_not_depend_on_the_size_is_remarked_on(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
budget = pytest.mark.growth_budget("n", meter="steps", largest=4096)

@pytest.fixture
def forgetful(problem_size):
    return range(50)

@budget
def test_ignores_the_size(forgetful):
    for number in forgetful: number

@budget
def test_is_constant(numbers):
    for number in range(50): number

@budget
def test_is_linear(numbers):
    for number in numbers: number

@pytest.mark.growth_budget("1", meter="steps", largest=4096)
def test_is_meant_to_be_constant(numbers):
    for number in range(50): number
""",
        passed=4,
    )
    assert "4 growth budgets: 4 within" in text
    assert text.count("the cost hardly depends on the size") == 2
    ignoring = text.index("growth budgets ---")
    said = text[ignoring:]
    first, second, third = (
        said.index(name) for name in ("test_ignores_the_size", "test_is_constant", "test_is_linear")
    )
    assert "see whether the workload grows" in said[first:second]
    assert "The workload does grow" in said[second:third]


def test_a_size_that_the_user_has_a_fixture_for(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
seen = set()

@pytest.fixture(scope="session")
def problem_size():
    return 7

@pytest.mark.growth_budget("n", meter="steps", largest=64)
def test_budgeted(numbers):
    seen.add(len(numbers))
    for number in numbers: number

def test_plain(numbers):
    assert len(numbers) == 7 and len(seen) > 5
""",
        passed=2,
    )


def test_wide_workloads_do_not_outlive_the_test_that_sized_them(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
torn_down = []

@pytest.fixture(scope="session")
def wide(problem_size):
    yield [0] * problem_size
    torn_down.append(problem_size)

@pytest.fixture(scope="module")
def wider(wide):
    return wide

@pytest.fixture(scope="module")
def asking(request):
    return request.getfixturevalue("wide")

def test_before(wider, asking):
    assert len(wider) == len(asking) == 100

@pytest.mark.growth_budget("n", meter="steps", largest=64)
@pytest.mark.parametrize("kind", ["a", "b"])
def test_budgeted(wide, wider, problem_size, kind):
    assert len(wide) == len(wider) == problem_size
    for number in wide: number

def test_after(wide, wider, asking):
    assert len(wide) == len(wider) == len(asking) == 100
    assert torn_down[0] == 100 and 100 not in torn_down[1:]
""",
        passed=4,
    )


def test_parametrized_module_fixtures_beside_module_workloads(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
up = []

@pytest.fixture(scope="module", params=["list", "tuple"])
def kind(request):
    up.append(request.param)
    yield {"list": list, "tuple": tuple}[request.param]
    up.remove(request.param)

@pytest.fixture(scope="module")
def wide(kind, problem_size):
    return kind(range(problem_size))

@pytest.mark.growth_budget("n", meter="steps", largest=64)
def test_walks(wide, kind):
    assert isinstance(wide, kind) and len(up) == 1
    for number in wide: number

def test_plain(wide, kind):
    assert isinstance(wide, kind) and len(wide) == 100 and len(up) == 1
""",
        passed=4,
    )


def test_a_session_does_not_grow_by_its_repetitions(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
closed = []

@pytest.fixture(scope="session")
def register():
    yield
    closed.append("register")

@pytest.fixture(scope="session")
def table(register, problem_size):
    yield
    closed.append("table")

@pytest.mark.growth_budget("n", meter="steps", largest=256)
def test_walks(numbers, workload_rng, register, table):
    for number in numbers: number

def test_afterwards(request):
    closed.clear()
    stack = request.session._setupstate.stack
    assert sum(len(finalizers) for finalizers, _ in stack.values()) < 12
    stack[request.session][0].insert(0, lambda: print("closed:", *closed))
""",
        passed=2,
    )


# ------------------------------------------------------------ where a marker may stand


def test_class_hierarchies_usefixtures_and_methods_of_other_kinds(suite: pytest.Pytester) -> None:
    text = run(
        suite,
        """
budget = pytest.mark.growth_budget("n", meter="steps", largest=64)

class Base:
    @budget
    def test_inherited(self, numbers):
        for number in numbers: number

class TestDerived(Base): ...

@budget
class TestOuter:
    class TestInner:
        def test_deep(self, numbers):
            for number in numbers: number

class TestKinds:
    @staticmethod
    @budget
    def test_static(numbers):
        for number in numbers: number

    @classmethod
    @budget
    def test_class(cls, numbers):
        for number in numbers: number

@pytest.mark.usefixtures("numbers")
@budget
def test_uses(problem_size):
    for number in range(problem_size): number
""",
        passed=5,
    )
    assert "5 growth budgets: " in text
    assert "exceeded" not in text


@pytest.mark.filterwarnings("ignore::pytest.PytestReturnNotNoneWarning")
def test_a_test_that_returns(suite: pytest.Pytester) -> None:
    run(
        suite,
        """
@pytest.mark.growth_budget("n", meter="steps", largest=64)
def test_returns(numbers):
    return len(numbers)
""",
        passed=1,
    )


def refused(suite: pytest.Pytester, source: str) -> str:
    suite.makepyfile(test_bad="import pytest\n" + source)
    result = suite.runpytest("-p", "no:randomly")
    assert result.ret == pytest.ExitCode.INTERRUPTED
    text = result.stdout.str()
    assert text.count("ERROR collecting") == 1
    assert "INTERNALERROR" not in text
    assert "Traceback" not in text
    return " ".join(text.split())


def test_a_marker_on_a_lambda(suite: pytest.Pytester) -> None:
    text = refused(suite, 'test_it = pytest.mark.growth_budget("n")(lambda numbers: sum(numbers))')
    assert "test_bad.py::test_it: a growth budget cannot stand on a lambda; write a test function" in text


@pytest.mark.filterwarnings("ignore:Marks applied to fixtures")
def test_a_marker_on_a_fixture(suite: pytest.Pytester) -> None:
    text = refused(suite, '@pytest.mark.growth_budget("n")\n@pytest.fixture\ndef it(): ...\ndef test_it(it): ...')
    refusals = (
        "a growth budget cannot stand on a fixture",
        "Marks applied to fixtures have no effect",  # pytest 9.0
        "Marks cannot be applied to fixtures",  # pytest 9.1 and later
    )
    assert any(refusal in text for refusal in refusals)


def test_async_generators_and_generators(suite: pytest.Pytester) -> None:
    text = refused(suite, '@pytest.mark.growth_budget("n")\nasync def test_it(numbers):\n    yield 1')
    assert "a growth budget cannot stand on an async test yet" in text


def test_a_test_with_subtests(suite: pytest.Pytester) -> None:
    suite.makeconftest(CONFTEST + "\n    @pytest.fixture\n    def subtests(): ...\n")
    text = refused(suite, '@pytest.mark.growth_budget("n")\ndef test_it(numbers, subtests): ...')
    assert "a growth budget cannot stand on a test with subtests" in text


def test_the_hint_names_no_fixture_that_is_not_the_projects_own(suite: pytest.Pytester) -> None:
    text = refused(suite, '@pytest.mark.growth_budget("n")\ndef test_it(request, tmp_path, metered): ...')
    assert "give it to the test, or to a fixture that builds its workload" in text
