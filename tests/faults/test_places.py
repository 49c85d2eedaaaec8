"""Where a marker may stand."""

from __future__ import annotations

import pytest

from tests.faults.runs import CONFTEST, run


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
