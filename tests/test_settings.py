"""Settings: marker before command line before pyproject.toml before default."""

from __future__ import annotations

from pathlib import Path

import pytest

from pytest_growthbudget import plans
from pytest_growthbudget import settings as s

HEARS = """
import pytest

def pytest_growthbudget_judged(item, judgement):
    with open("heard.txt", "a") as file:
        print(item.nodeid, judgement.bound, judgement.meter, judgement.slack, judgement.confidence, file=file)

@pytest.fixture
def numbers(problem_size):
    return list(range(problem_size))
"""


def test_the_defaults() -> None:
    settings = s.Settings()
    assert (settings.confidence, settings.time_limit, settings.undecided) == (0.95, 10.0, "warn")
    assert (settings.seed, settings.ordinary_size, settings.budgets) == (1, 100, ())
    assert settings.slack_of("cpu_time") == 0.15
    assert settings.slack_of("tally:queries") == 0.05
    assert settings.slack_of("joules", deterministic=True) == 0.05


def test_every_key_of_pyproject_is_read(tmp_path: Path) -> None:
    path = tmp_path / "pyproject.toml"
    path.write_text(
        """
        [tool.growthbudget]
        confidence = 0.99
        time_limit = 3
        undecided = "fail"
        seed = 7
        ordinary_size = 50

        [tool.growthbudget.slack]
        cpu_time = 0.3
        "tally:queries" = 0.01

        [[tool.growthbudget.budgets]]
        test = "tests/test_it.py::*"
        bound = "n log n"
        meter = "steps"
        """
    )
    settings = s.read_pyproject(path)
    assert (settings.confidence, settings.time_limit, settings.undecided) == (0.99, 3.0, "fail")
    assert (settings.seed, settings.ordinary_size) == (7, 50)
    assert (settings.slack_of("cpu_time"), settings.slack_of("tally:queries")) == (0.3, 0.01)
    assert settings.slack_of("tally:comparisons") == 0.05
    (placed,) = settings.budgets
    assert (placed.test, dict(placed.arguments)) == ("tests/test_it.py::*", {"bound": "n log n", "meter": "steps"})


def test_no_pyproject_and_no_table_give_the_defaults(tmp_path: Path) -> None:
    assert s.read_pyproject(tmp_path / "pyproject.toml") == s.Settings()
    (tmp_path / "pyproject.toml").write_text("[project]\nname = 'x'\n")
    assert s.read_pyproject(tmp_path / "pyproject.toml") == s.Settings()


@pytest.mark.parametrize(
    ("glob", "nodeid", "matches"),
    [
        ("tests/test_it.py::test_sort", "tests/test_it.py::test_sort", True),
        ("tests/test_it.py::test_sort", "tests/test_it.py::test_sort[3-a]", True),
        ("tests/test_it.py::test_sort[3-*]", "tests/test_it.py::test_sort[3-a]", True),
        ("tests/test_it.py::test_sort[3-*]", "tests/test_it.py::test_sort[4-a]", False),
        ("tests/*::test_sort", "tests/deep/test_it.py::test_sort", True),
        ("*::TestIt::*", "tests/test_it.py::TestIt::test_sort", True),
        ("*::TestIt::*", "tests/test_it.py::test_sort", False),
    ],
)
def test_globs_of_node_ids(glob: str, nodeid: str, matches: bool) -> None:
    placed = s.PlacedBudget(test=glob, arguments={"bound": "n"}, source="pyproject.toml")
    assert placed.matches(nodeid) is matches
    if matches:
        assert placed.may_match(nodeid.partition("[")[0])


def heard(pytester: pytest.Pytester) -> list[str]:
    path = pytester.path / "heard.txt"
    lines = path.read_text().splitlines() if path.exists() else []
    path.unlink(missing_ok=True)
    return lines


def test_budgets_from_pyproject_alone(pytester: pytest.Pytester) -> None:
    pytester.makeconftest(HEARS)
    pytester.makepyprojecttoml(
        """
        [[tool.growthbudget.budgets]]
        test = "test_it.py::test_*sum*"
        bound = "n"
        largest = 64
        """
    )
    pytester.makepyfile(
        test_it="""
        import pytest

        def test_sum(numbers):
            sum(numbers)

        @pytest.mark.parametrize("start", [1, 2])
        def test_sum_from(numbers, start):
            sum(numbers, start)

        def test_other(numbers):
            assert len(numbers) == 100
        """
    )
    result = pytester.runpytest()
    result.assert_outcomes(passed=4)
    assert [line.split()[0] for line in heard(pytester)] == [
        "test_it.py::test_sum",
        "test_it.py::test_sum_from[1]",
        "test_it.py::test_sum_from[2]",
    ]


def test_a_marker_comes_before_pyproject_and_other_meters_stay(pytester: pytest.Pytester) -> None:
    pytester.makeconftest(HEARS)
    pytester.makepyprojecttoml(
        """
        [tool.growthbudget]
        confidence = 0.9

        [tool.growthbudget.slack]
        cpu_time = 0.3

        [[tool.growthbudget.budgets]]
        test = "*"
        bound = "n^2"
        largest = 64

        [[tool.growthbudget.budgets]]
        test = "*"
        bound = "n^3"
        meter = "steps"
        largest = 64
        """
    )
    pytester.makepyfile(
        test_it="""
        import pytest

        @pytest.mark.growth_budget("n", largest=64, confidence=0.99)
        def test_sum(numbers):
            sum(numbers)

        def test_other(numbers):
            sum(numbers)
        """
    )
    pytester.runpytest().assert_outcomes(passed=2)
    assert heard(pytester) == [
        "test_it.py::test_sum n cpu_time 0.3 0.99",
        "test_it.py::test_sum n^3 steps 0.05 0.9",
        "test_it.py::test_other n^2 cpu_time 0.3 0.9",
        "test_it.py::test_other n^3 steps 0.05 0.9",
    ]


def test_the_nearest_marker_of_a_meter_counts(pytester: pytest.Pytester) -> None:
    pytester.makeconftest(HEARS)
    pytester.makepyfile(
        test_it="""
        import pytest

        pytestmark = pytest.mark.growth_budget("n^3", largest=64)

        class TestIt:
            pytestmark = pytest.mark.growth_budget("n^2", largest=64)

            def test_class(self, numbers):
                sum(numbers)

            @pytest.mark.growth_budget("n", largest=64)
            def test_own(self, numbers):
                sum(numbers)

        def test_module(numbers):
            sum(numbers)
        """
    )
    pytester.runpytest().assert_outcomes(passed=3)
    assert [line.split()[1] for line in heard(pytester)] == ["n^2", "n", "n^3"]


def test_command_line_before_pyproject(pytester: pytest.Pytester) -> None:
    path = pytester.makepyprojecttoml(
        """
        [tool.growthbudget]
        time_limit = 3
        seed = 7

        [[tool.growthbudget.budgets]]
        test = "*"
        bound = "n"
        time_limit = 4
        """
    )
    config = pytester.parseconfig("--growth-time-limit", "2", "--rootdir", str(path.parent))
    settings = s.resolve(config)
    assert (settings.time_limit, settings.seed) == (2.0, 7)
    plan = plans.plan_of((), {"bound": "n"}, settings, "a test")
    assert plan.time_limit == 2.0
    assert plans.plan_of((), {"bound": "n", "time_limit": 5}, settings, "a test").time_limit == 5.0


def test_the_marker_is_registered_with_its_signature(pytester: pytest.Pytester) -> None:
    line = next(
        line for line in pytester.runpytest("--markers").outlines if line.startswith("@pytest.mark.growth_budget")
    )
    assert line.startswith("@pytest.mark.growth_budget(bound, *, yardstick=None, meter='cpu_time', vary=None, ")
    assert all(f"{name}=" in line for name in plans.marker_arguments()[1:])
