"""The end of a run, by verbosity; and where the measuring time went."""

from __future__ import annotations

from typing import Any

import pytest

from pytest_growthbudget.reporting.summary import where_time_went, write_summary


class Terminal:
    """What the summary needs of pytest's terminal reporter."""

    def __init__(self, verbosity: int) -> None:
        self.config = self
        self.verbosity = verbosity
        self.lines: list[str] = []

    def get_verbosity(self) -> int:
        return self.verbosity

    def ensure_newline(self) -> None:
        pass

    def section(self, title: str, sep: str) -> None:
        self.lines.append(f"{sep} {title}")

    def write_line(self, line: str) -> None:
        self.lines += line.splitlines()


def judgement(test: str, seconds: float, verdict: str = "within", **changed: Any) -> dict[str, Any]:
    return {
        "test": test, "seconds": seconds, "verdict": verdict, "meter": "cpu_time", "theta": "n log n", "ray": "",
        "reason": "its interval of 0.3 to 0.9 lies on both sides of the slack; a longer time_limit would settle it",
        "exponent": {"estimate": 1.1, "low": 1.0, "high": 1.2}, "excess": None, "variable": "n", "nearest": None,
        "ceiling": None, "notes": [], "undecided": "warn", **changed,
    }  # fmt: skip


def written(verbosity: int, *judged: dict[str, Any]) -> list[str]:
    terminal = Terminal(verbosity)
    write_summary(terminal, list(judged))
    return terminal.lines


SOUND, OPEN = judgement("test_a.py::test_a", 1.0), judgement("test_a.py::test_b", 2.0, "undecided")
TOTAL = "2 growth budgets: 1 within, 1 undecided (measured in 3 s)"
UNDECIDED = [
    "test_a.py::test_b",
    "    growth budget undecided: cpu_time against n log n: its interval of 0.3 to",
    "    0.9 lies on both sides of the slack; a longer time_limit would settle it",
]


def test_quiet_is_one_line() -> None:
    assert written(-1, SOUND, OPEN) == [TOTAL]


def test_what_would_settle_an_open_verdict_is_said() -> None:
    assert written(0, SOUND, OPEN) == ["- growth budgets", *UNDECIDED, TOTAL]


def test_an_open_verdict_that_may_pass_is_counted_and_no_more() -> None:
    may_pass = judgement("test_a.py::test_b", 2.0, "undecided", undecided="pass")
    assert written(0, SOUND, may_pass) == ["- growth budgets", TOTAL]
    assert written(1, SOUND, may_pass)[3:6] == UNDECIDED


def test_verbose_lists_each_and_its_time() -> None:
    assert written(1, SOUND, OPEN) == [
        "- growth budgets",
        "test_a.py::test_a",
        "    growth budget kept: cpu_time grows as n^1.10 where n log n is allowed",
        *UNDECIDED,
        "measuring took longest for",
        "        2 s  test_a.py::test_b (cpu_time against n log n)",
        "        1 s  test_a.py::test_a (cpu_time against n log n)",
        TOTAL,
    ]


@pytest.mark.parametrize(("seconds", "said"), [(2.0, False), (4.0, True)])
def test_a_slow_suite_says_where_the_time_went(seconds: float, said: bool) -> None:
    judged = [judgement(f"test_a.py::test_{i}", seconds + i / 10) for i in range(4)]
    lines = where_time_went(judged)
    assert bool(lines) is said
    if said:
        assert [line.split()[2] for line in lines[1:]] == [
            "test_a.py::test_3",
            "test_a.py::test_2",
            "test_a.py::test_1",
        ]


def test_one_budget_took_all_the_time_there_was() -> None:
    assert where_time_went([judgement("test_a.py::test_a", 99.0)], always=True) == []
