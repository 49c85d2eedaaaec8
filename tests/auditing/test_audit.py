"""The function `audit`: what it takes, what it refuses, and its report, word for word where steps decide."""

from __future__ import annotations

import random
import subprocess
import sys
import textwrap
import threading
from typing import Any

import pytest

import pytest_growthbudget
from pytest_growthbudget.auditing.audit import Audit, audit
from pytest_growthbudget.auditing.target import TargetError
from pytest_growthbudget.bounds.budget import parse_budget
from pytest_growthbudget.bounds.language import BoundError
from pytest_growthbudget.reporting.audit import blame, first_line
from tests.auditing.recursions.others import fibonacci, hanoi
from tests.auditing.recursions.sorting import insertion_merge_sort, merge_sort, quicksort_first

ITEMS = random.Random(1).sample(range(512), 512)


def test_it_is_a_public_name() -> None:
    assert pytest_growthbudget.audit is audit
    assert pytest_growthbudget.Audit is Audit


def test_without_a_bound_it_finds_the_recurrence() -> None:
    found = audit(merge_sort, ITEMS)
    assert found.observed is not None
    assert found.observed.text == "T(n) = 2 T(n/2) + n"
    assert parse_budget(found.observed.text).theta == "n log n"
    assert (found.declared, found.theta, found.relation, found.checks, found.notes) == ("", "", "", (), ())
    report = str(found)
    first, _, rest = report.partition("\n\n")
    assert first == "audit of merge_sort: it seems to follow T(n) = 2 T(n/2) + n"
    assert rest.startswith(
        "  observed   T(n) = 2 T(n/2) + n\n"
        "  implies    n log n (Master theorem, case 2)\n"
        "  calls      2,046 in 2 runs, of which 1,022 divide; depth 10 at size 512; base\n"
        "             case of size 1\n"
        "  own work   steps grow as n^1.0"
    )


def test_the_report_on_a_broken_argument() -> None:
    found = audit(quicksort_first, list(range(300)), bound="T(n) = 2 T(n/2) + n")
    lines = str(found).splitlines()
    assert lines[:6] == [
        "audit of quicksort_first: the size of a subproblem is not as declared, which",
        "  leads to n^2",
        "",
        "  agrees   declared 2 subproblems: found 1 that grows with n, beside 1 of a",
        "           constant size",
        "  DIFFERS  declared subproblems of n/2: found n - 1",
    ]
    assert lines[6].startswith("  agrees   declared toll n: own work (steps) grows as n^")
    assert "  observed   T(n) = T(n - 1) + n" in lines
    assert "  implies    n^2 (summation); declared: n log n" in lines
    assert all(len(line) <= 80 for line in lines)
    assert blame(found.wire()) == "declared subproblems of n/2: found n - 1"


def test_the_report_on_a_broken_toll() -> None:
    found = audit(insertion_merge_sort, ITEMS, bound="T(n) = 2 T(n/2) + n")
    assert first_line(found.wire()) == "audit of insertion_merge_sort: the toll is not as declared, which leads to n^2"
    (check,) = found.broken
    assert blame(found.wire()) == f"declared toll n: {check.found}"
    assert check.found.startswith("own work (steps) grows as n^1.9")


def test_the_report_on_overlap() -> None:
    found = audit(fibonacci, 17, bound="T(n) = T(n - 1) + 1")
    assert first_line(found.wire()) == (
        "audit of fibonacci: the number of subproblems is not as declared, which leads to "
        "((1 + sqrt(5))/2)^n; the same subproblems are solved again and again"
    )
    assert blame(found.wire()).endswith("a memo table is missing")


def test_what_is_harmless_is_not_blamed() -> None:
    """A split that differs from the one declared, but leads to the same growth, broke no budget."""
    found = audit(merge_sort, ITEMS, bound="T(n) = T(n/4) + T(3n/4) + n")
    assert found.relation == "same"
    assert blame(found.wire()) == ""
    declared_slower = audit(merge_sort, ITEMS, bound="T(n) = 2 T(n/3) + n log n")
    assert [check.about for check in declared_slower.broken] == ["argument"]
    assert declared_slower.relation == "same"
    assert blame(declared_slower.wire()) == ""


def test_a_bound_that_is_no_recurrence_is_compared_by_what_the_code_implies() -> None:
    found = audit(quicksort_first, list(range(300)), bound="n log n")
    assert found.checks == ()
    assert found.relation == "faster"
    assert first_line(found.wire()) == "audit of quicksort_first: it seems to follow T(n) = T(n - 1) + n"


def test_the_variable_of_the_bound_is_used() -> None:
    found = audit(merge_sort, ITEMS, bound="T(rows) = 2 T(rows/2) + rows")
    assert found.observed is not None
    assert found.observed.text == "T(rows) = 2 T(rows/2) + rows"
    assert found.broken == ()


def test_the_arguments_stay_as_they_were() -> None:
    source, goal, spare = [3, 2, 1], [], []  # type: ignore[var-annotated]
    audit(hanoi, 3, source, goal, spare)
    assert (source, goal, spare) == ([3, 2, 1], [], [])


def locked(items: list[int], lock: Any) -> int:
    return 0 if len(items) < 2 else locked(items[1:], lock)


def test_arguments_that_cannot_be_copied_mean_one_run() -> None:
    found = audit(locked, ITEMS[:100], threading.Lock())
    assert found.calls == 100
    assert found.notes == ("The arguments cannot be copied, so work hidden in C functions was not looked for.",)


def outer(items: list[int]) -> int:
    def count(low: int, high: int) -> int:
        if high - low < 2:
            return 1
        middle = (low + high) // 2
        return count(low, middle) + count(middle, high)

    return count(0, len(items))


@pytest.mark.parametrize("of", ["count", f"{__name__}:outer.count", outer.__code__])
def test_a_function_inside_is_named_by_text(of: object) -> None:
    if of is outer.__code__:
        found = audit(outer, ITEMS, of=of)
        assert found.pattern is None
        return
    found = audit(outer, ITEMS, of=of, size_of=lambda low, high: high - low)
    assert found.observed is not None
    assert found.observed.text == "T(n) = 2 T(n/2) + 1"


def flat(items: list[int]) -> int:
    return sum(items)


def stuck(items: list[int], place: int) -> int:
    return 0 if place == len(items) else stuck(items, place + 1)


@pytest.mark.parametrize(
    ("call", "notes"),
    [
        (
            lambda: audit(flat, [1, 2]),
            (
                "flat makes no calls of itself.",
                "The calls have too few different sizes to tell how own work grows; run it on a larger input.",
            ),
        ),
        (
            lambda: audit(flat, [1, 2], of=outer),
            ("outer was not called: audit the function that does the work.",),
        ),
        (
            lambda: audit(stuck, [1, 2, 3], 0),
            (
                (
                    "In 100 % of the calls a subproblem is no smaller than its parent: what size_of gives does not "
                    "shrink. Give a size that does, such as size_of=lambda low, high: high - low."
                ),
                "The calls have too few different sizes to tell how own work grows; run it on a larger input.",
            ),
        ),
        (
            lambda: audit(fibonacci, 22, limit=2000),
            ("Recording stopped after 2,000 calls; those still open then are left out.",),
        ),
    ],
)
def test_what_the_reader_has_to_know(call: Any, notes: tuple[str, ...]) -> None:
    found = call()
    assert found.notes == notes
    assert all(len(line) <= 80 for line in str(found).splitlines())


def test_without_a_recurrence_the_report_says_so() -> None:
    assert str(audit(stuck, [1, 2, 3], 0)).startswith(
        "audit of stuck: no recurrence could be told\n\n  calls      160 in 40 runs, "
    )


@pytest.mark.parametrize(
    ("call", "fault", "message"),
    [
        (lambda: audit(len, [1]), TargetError, "audit=len has no Python code"),
        (lambda: audit(outer, ITEMS, of="nowhere"), TargetError, "outer defines no function named 'nowhere'"),
        (lambda: audit(outer, ITEMS, of="count.deeper"), TargetError, "outer defines no function named 'count.deeper'"),
        (lambda: audit(fibonacci, 3, size_of=len), TargetError, "the size of a call of fibonacci could not be told"),
        (lambda: audit(flat, [1], bound="n ^^"), BoundError, "expected"),
        (lambda: audit(flat, ["a"]), TypeError, "unsupported operand"),
    ],
)
def test_faults(call: Any, fault: type[Exception], message: str) -> None:
    with pytest.raises(fault, match=message.replace("^", r"\^")):
        call()
    assert sys.gettrace() is None


def builtins_only(value: Any) -> bool:
    if type(value) in (list, dict):
        return all(map(builtins_only, value if type(value) is list else [*value, *value.values()]))
    return value is None or type(value) in (int, float, str, bool)


def test_the_wire_form_is_made_of_builtins() -> None:
    found = audit(fibonacci, 15, bound="T(n) = T(n - 1) + 1").wire()
    assert builtins_only(found)
    assert found["relation"] == "faster"
    assert [check["about"] for check in found["checks"]] == ["subproblems", "argument", "toll", "overlap"]


def test_importing_the_package_does_not_import_numpy_for_it() -> None:
    script = "import sys; from pytest_growthbudget.auditing import target; print('numpy' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    assert done.stdout == "False\n"


@pytest.mark.skipif(sys.version_info >= (3, 12), reason="sys.monitoring has room for several tools")
def test_beside_a_tracer_the_clock_stands_in_for_steps() -> None:
    script = textwrap.dedent(
        """
        import sys
        def tracer(frame, event, arg):
            return tracer
        sys.settrace(tracer)
        from pytest_growthbudget import audit
        def halve(items):
            return items if len(items) < 2 else halve(items[: len(items) // 2]) + halve(items[len(items) // 2 :])
        found = audit(halve, list(range(256)), bound="T(n) = 2 T(n/2) + n")
        print(found.observed.text.partition("+")[0], [check.agrees for check in found.checks[:2]])
        print(sys.gettrace() is tracer)
        print(found.notes[0])
        """
    )
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines() == [
        "T(n) = 2 T(n/2)  [True, True]",
        "True",
        "Another tool holds the trace function, so own work was read by the clock, which that tool slows down.",
    ]
