"""Audits asked for by the marker, in inner pytest runs."""

from __future__ import annotations

import pytest

SORTING = """
    import pytest

    def quicksort(items):
        if len(items) < 2:
            return items
        below, above = [], []
        for item in items[1:]:
            (below if item < items[0] else above).append(item)
        return [*quicksort(below), items[0], *quicksort(above)]

    def walked(items):
        def walk(low, high):
            if high - low < 2:
                return 1
            middle = (low + high) // 2
            return walk(low, middle) + walk(middle, high)
        return walk(0, len(items))

    @pytest.fixture
    def increasing(problem_size):
        return list(range(problem_size))
"""


def run(pytester: pytest.Pytester, body: str, *options: str) -> pytest.RunResult:
    pytester.makepyfile(test_it=SORTING + body)
    return pytester.runpytest("-p", "no:cacheprovider", "-p", "no:randomly", *options)


BROKEN = """
    @pytest.mark.growth_budget("T(n) = 2 T(n/2) + n", meter="steps", audit=quicksort, size_of=len, largest=200)
    def test_sorting(increasing):
        quicksort(increasing)
"""


@pytest.mark.parametrize("options", [(), ("-n2",)], ids=["alone", "xdist"])
def test_a_budget_that_is_exceeded_says_which_promise_broke(
    pytester: pytest.Pytester, options: tuple[str, ...]
) -> None:
    result = run(pytester, BROKEN, *options)
    result.assert_outcomes(failed=1)
    lines = result.outlines
    assert "  look at    declared subproblems of n/2: found n - 1" in lines
    start = lines.index("audit of quicksort: the size of a subproblem is not as declared, which leads to")
    assert lines[start + 1 : start + 6] == [
        "  n^2",
        "",
        "  agrees   declared 2 subproblems: found 1 that grows with n, beside 1 of a",
        "           constant size",
        "  DIFFERS  declared subproblems of n/2: found n - 1",
    ]
    assert "  observed   T(n) = T(n - 1) + n" in lines


def test_what_differs_does_not_fail_a_budget_that_is_kept(pytester: pytest.Pytester) -> None:
    result = run(
        pytester,
        """
        @pytest.mark.growth_budget("T(n) = T(n/4) + T(n/5) + n", meter="steps", audit="test_it:walked.walk",
                                   size_of=lambda low, high: high - low, largest=400)
        @pytest.mark.parametrize("_", [0])
        def test_walking(increasing, _):
            walked(increasing)
        """.replace("\n        ", "\n    "),
        "-rP",
    )
    result.assert_outcomes(passed=1)
    result.stdout.fnmatch_lines(
        [
            "audit of walked.walk: the size of a subproblem is not as declared, though the",
            "  growth is: n",
            "  DIFFERS  declared subproblems of n/4: found n/2",
            "  observed   T(n) = 2 T(n/2) + 1",
        ]
    )


def test_the_audit_is_on_the_report_in_builtins(pytester: pytest.Pytester) -> None:
    pytester.makeconftest(
        """
        def pytest_runtest_logreport(report):
            for judgement in getattr(report, "growth_judgements", ()):
                audit = judgement["audit"]
                print("\\nHEARD", type(audit).__name__, audit["observed"], audit["relation"], audit["calls"] > 0)
        """
    )
    result = run(pytester, BROKEN, "-s", "-n2")
    result.stdout.fnmatch_lines(["HEARD dict T(n) = T(n - 1) + n faster True"])


def test_an_audit_that_cannot_be_made_says_why_and_fails_nothing(pytester: pytest.Pytester) -> None:
    result = run(
        pytester,
        """
    def tell(items):
        raise ValueError("not sized")

    @pytest.mark.growth_budget("n", meter="steps", audit=quicksort, size_of=tell, largest=200)
    def test_sorting(increasing):
        for item in increasing:
            quicksort([item])
    """,
        "-rP",
    )
    result.assert_outcomes(passed=1)
    result.stdout.fnmatch_lines(["  note       the size of a call of quicksort could not be told: ValueError:*"])


@pytest.mark.parametrize(
    ("marker", "message"),
    [
        (
            'growth_budget("n", audit="quicksort")',
            'test_it.py::test_sorting: audit must be a function, or text such as "package.module:function"; got*',
        ),
        ('growth_budget("n", audit="nowhere:quicksort")', "*the module 'nowhere' cannot be imported*"),
        ('growth_budget("n", audit="test_it:slowsort")', "*test_it has nothing named 'slowsort'*"),
        ('growth_budget("n", audit=len)', "*audit=len has no Python code whose calls could be watched*"),
        (
            "growth_budget(audit=quicksort)",
            "*growth_budget needs a bound to audit against; pytest_growthbudget.audit(function, ...)*",
        ),
        (
            'growth_budget("n", size_of=len)',
            "*size_of gives the sizes of an audited function; say which: audit=...*",
        ),
        (
            'growth_budget("n", audit=quicksort, size_of=lambda low, high: 1)',
            "*size_of takes low, high, but quicksort has the arguments items*",
        ),
    ],
)
def test_faults_are_told_at_collection(pytester: pytest.Pytester, marker: str, message: str) -> None:
    result = run(
        pytester,
        f"""
    @pytest.mark.{marker}
    def test_sorting(increasing):
        quicksort(increasing)
    """,
    )
    result.assert_outcomes(errors=1)
    text = " ".join(line.strip() for line in result.outlines)
    pattern = message.strip("*")
    assert pattern in text, text
    assert "INTERNALERROR" not in text


def test_pyproject_names_the_function_by_text(pytester: pytest.Pytester) -> None:
    pytester.makepyprojecttoml(
        """
        [[tool.growthbudget.budgets]]
        test = "test_it.py::test_sorting"
        bound = "T(n) = 2 T(n/2) + n"
        meter = "steps"
        largest = 200
        audit = "test_it:quicksort"
        """
    )
    result = run(
        pytester,
        """
    def test_sorting(increasing):
        quicksort(increasing)
    """,
    )
    result.assert_outcomes(failed=1)
    assert "  look at    declared subproblems of n/2: found n - 1" in result.outlines
