"""More to promise than time: yardsticks, functions, ceilings, several sizes, counts and meters of one's own.

Where a verdict must be exact, a meter that adds up what the body charges stands in for a clock.
"""

from __future__ import annotations

import pytest

LEDGER = '''
class Ledger:
    """A meter of the test's own: bodies charge it, so every reading is exact."""

    name, unit, deterministic = "charge", "units", True
    charged = 0

    def start(self):
        Ledger.charged = 0

    def stop(self):
        return Ledger.charged
'''

CONFTEST = """
import pytest
from ledger import Ledger
from pytest_growthbudget.reporting.failure import first_line
from pytest_growthbudget.reporting.wire import to_wire


def pytest_growthbudget_meters(config):
    return [Ledger()]


def pytest_growthbudget_judged(item, judgement):
    with open("judged.txt", "a") as file:
        print(first_line(to_wire(judgement, undecided="warn")), file=file)


@pytest.fixture
def charge():
    def add(amount):
        Ledger.charged += amount
    return add


@pytest.fixture
def numbers(problem_size, workload_rng):
    return [workload_rng.random() for _ in range(problem_size)]
"""


@pytest.fixture
def suite(pytester: pytest.Pytester) -> pytest.Pytester:
    pytester.makepyfile(ledger=LEDGER)
    pytester.makeconftest(CONFTEST)
    pytester.syspathinsert()
    return pytester


def first_lines(suite: pytest.Pytester) -> list[str]:
    return (suite.path / "judged.txt").read_text().splitlines()


def test_a_meter_of_ones_own(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        @pytest.mark.growth_budget("n", meter="charge")
        def test_kept(problem_size, charge):
            charge(3 * problem_size)

        @pytest.mark.growth_budget("n", meter="charge")
        def test_broken(problem_size, charge):
            charge(3 * problem_size ** 2)
        """
    )
    result = suite.runpytest("-v")
    result.assert_outcomes(passed=1, failed=1)
    assert first_lines(suite) == [
        "growth budget kept: charge grows as n^1.00 where n is allowed",
        "growth budget exceeded: charge grows as n^2.00 where n is allowed",
    ]


def test_several_budgets_on_one_test_are_each_judged(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        @pytest.mark.growth_budget("n", meter="charge")
        @pytest.mark.growth_budget("1", meter="tally:queries")
        def test_page(problem_size, charge, tally):
            charge(problem_size)
            for _ in range(problem_size):
                tally.add("queries")
        """
    )
    result = suite.runpytest("-v")
    result.assert_outcomes(failed=1)
    assert sorted(first_lines(suite)) == [
        "growth budget exceeded: tally:queries grows as n^1.00 where 1 is allowed",
        "growth budget kept: charge grows as n^1.00 where n is allowed",
    ]


@pytest.mark.parametrize(
    ("cost", "line"),
    [
        ("V + E", "growth budget kept: charge grows as "),
        ("V + 1000 * E", "growth budget kept: charge grows as "),
        ("1000 * V + E", "growth budget kept: charge grows as "),
        ("V * E", "growth budget exceeded: charge grows as n^2.00 where V + E is allowed (V = E = n)"),
        ("V ** 2 + E", "growth budget exceeded: charge grows as V^"),
    ],
)
def test_two_sizes_are_judged_along_rays(suite: pytest.Pytester, cost: str, line: str) -> None:
    suite.makepyfile(
        f"""
        import pytest

        @pytest.mark.growth_budget("V + E", meter="charge", vary={{"V": "vertices", "E": "edges"}})
        def test_graph(vertices, edges, charge):
            V, E = vertices, edges
            charge({cost})
        """
    )
    suite.runpytest()
    (shown,) = first_lines(suite)
    assert shown.startswith(line)


def test_a_product_of_two_sizes(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        @pytest.mark.growth_budget("rows * columns", meter="charge", vary={"rows": "r", "columns": "c"})
        def test_table(r, c, charge):
            charge(r * c + r + c)
        """
    )
    suite.runpytest().assert_outcomes(passed=1)


def test_a_function_as_the_bound(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        def triangle(n):
            return n * (n + 1) // 2

        @pytest.mark.growth_budget(triangle, meter="charge")
        def test_kept(problem_size, charge):
            charge(triangle(problem_size))

        @pytest.mark.growth_budget(lambda n: n, meter="charge")
        def test_broken(problem_size, charge):
            charge(triangle(problem_size))
        """
    )
    result = suite.runpytest("-v")
    result.assert_outcomes(passed=1, failed=1)
    kept, broken = first_lines(suite)
    assert kept.endswith("where triangle(n) is allowed")
    assert broken.endswith("where a function of n is allowed")


def test_a_yardstick(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest
        from ledger import Ledger

        def reference(numbers):
            Ledger.charged += 7 * len(numbers) ** 2

        @pytest.mark.growth_budget(yardstick=reference, meter="charge")
        def test_kept(numbers):
            Ledger.charged += len(numbers) ** 2

        @pytest.mark.growth_budget(yardstick=reference, meter="charge")
        def test_broken(numbers):
            Ledger.charged += len(numbers) ** 3
        """
    )
    result = suite.runpytest("-v")
    result.assert_outcomes(passed=1, failed=1)
    assert first_lines(suite) == [
        "growth budget kept: charge grows as n^2.00 where reference's growth is allowed",
        "growth budget exceeded: charge grows as n^3.00 where reference's growth is allowed",
    ]
    result.stdout.fnmatch_lines(["*n *cost *yardstick *exponent *x allowed*"])


def test_a_yardstick_that_raises_is_unmeasured(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        def reference(numbers):
            raise LookupError("no such berth")

        @pytest.mark.growth_budget(yardstick=reference, smallest=10)
        def test_it(numbers):
            sum(numbers)
        """
    )
    suite.runpytest()
    (line,) = first_lines(suite)
    assert line == (
        "growth budget unmeasured: cpu_time against reference's growth: the yardstick reference raised LookupError "
        "at size 10: no such berth. It is called with the arguments of the test, in their order."
    )


def test_a_yardstick_that_cannot_take_the_arguments_is_refused(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        def reference(): ...

        @pytest.mark.growth_budget(yardstick=reference)
        def test_it(numbers):
            sum(numbers)
        """
    )
    result = suite.runpytest()
    result.assert_outcomes(errors=1)
    result.stdout.fnmatch_lines(
        [
            "test_a_yardstick_that_cannot_take_the_arguments_is_refused.py::test_it: the",
            "yardstick reference cannot be called with the arguments of the test (numbers):",
            "too many positional arguments",
        ]
    )


def test_a_ceiling_at_a_size_that_is_never_run(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        @pytest.mark.growth_budget("n", meter="charge", at=1_000_000, cost=4_000_000)
        def test_under(problem_size, charge):
            charge(3 * problem_size)

        @pytest.mark.growth_budget("n", meter="charge", at=1_000_000, cost=2_000_000)
        def test_over(problem_size, charge):
            charge(3 * problem_size)
        """
    )
    result = suite.runpytest("-v")
    result.assert_outcomes(passed=1, failed=1)
    assert first_lines(suite) == [
        "growth budget kept: charge grows as n^1.00 where n is allowed",
        "growth budget exceeded: charge is foreseen at 3,000,000 for n = 1,000,000 where 2,000,000 is allowed",
    ]


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ('"n", at=1000', "`at` and `cost` go together: the size, and the ceiling of the cost there"),
        (
            '"n", at=1000, cost="2 parsecs"',
            'cost must be a positive number, or text with a unit such as "2 s" or "64 MiB"; got \'2 parsecs\'',
        ),
        ('"n", yardstick=sorted', "growth_budget takes a bound or a yardstick, not both"),
        ("yardstick=3", "yardstick must be a function that takes the test's arguments; got 3"),
        ("lambda n: 5 - n", "a function of n gave -3 at n = 8; a positive number was expected"),
    ],
)
def test_promises_that_cannot_be_held_are_refused(suite: pytest.Pytester, arguments: str, message: str) -> None:
    suite.makepyfile(
        test_it=f"""
        import pytest

        @pytest.mark.growth_budget({arguments})
        def test_it(numbers): ...
        """
    )
    result = suite.runpytest()
    result.assert_outcomes(errors=1)
    assert message in " ".join(line.strip() for line in result.outlines)


def test_work_hidden_behind_the_steps_is_reported(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import pytest

        @pytest.mark.growth_budget("n", meter="steps")
        def test_hides_a_search(numbers):
            [number for number in numbers if number in numbers]
        """
    )
    result = suite.runpytest("-v")
    (line,) = first_lines(suite)
    # A clock decides here: on a machine at its limits the time behind the steps may be left undecided, never kept.
    assert line.startswith("growth budget exceeded: cpu_time hidden behind steps grows as n^") or (
        "whether time hides behind the steps" in result.stdout.str()
    )


def test_a_query_for_each_row_is_reported(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        """
        import sqlite3
        import pytest

        @pytest.fixture
        def register(problem_size, tally):
            base = sqlite3.connect(":memory:")
            base.execute("create table ships (name text, berth integer)")
            base.executemany("insert into ships values (?, ?)", [(str(i), i % 7) for i in range(problem_size)])
            base.set_trace_callback(lambda statement: tally.add("queries"))
            yield base
            base.close()

        @pytest.mark.growth_budget("1", meter="tally:queries")
        def test_one_query(register):
            register.execute("select name, berth from ships").fetchall()

        @pytest.mark.growth_budget("1", meter="tally:queries")
        def test_a_query_a_row(register):
            for (name,) in register.execute("select name from ships").fetchall():
                register.execute("select berth from ships where name = ?", (name,)).fetchone()
        """
    )
    result = suite.runpytest("-v")
    result.assert_outcomes(passed=1, failed=1)
    kept, broken = first_lines(suite)
    assert kept.startswith("growth budget kept: tally:queries")
    assert broken.startswith("growth budget exceeded: tally:queries grows as n^")
