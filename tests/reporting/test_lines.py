"""The lines that grow fastest, as they stand in the report."""

from __future__ import annotations

from typing import Any

from pytest_growthbudget.reporting.lines import INSIDE, describe


def line(**changed: Any) -> dict[str, Any]:
    values = {
        "file": "catalogue.py", "line": 42, "source": "if ship in seen:", "kind": "runs",
        "sizes": [64, 256], "before": 4096.0, "after": 65536.0,
    }  # fmt: skip
    return {**values, **changed}


def test_executions() -> None:
    assert describe([line()], "n", 67) == [
        "what grows fastest from n = 64 to 256:",
        "catalogue.py:42 runs n^2.0 times: 4,096 -> 65,536",
        "    if ship in seen:",
    ]


def test_times() -> None:
    assert describe([line(kind="takes", before=500.0, after=2000.0, source="")], "V", 67) == [
        "what grows fastest from V = 64 to 256:",
        "catalogue.py:42 takes V^1.0 longer each time: 500 ns -> 2 us",
        INSIDE,
    ]


def test_a_steep_growth_is_told_by_its_base() -> None:
    told = describe([line(sizes=[5, 17], before=32.0, after=2.0**17)], "n", 67)
    assert told[1] == "catalogue.py:42 runs 2^n times: 32 -> 131,072"


def test_a_long_file_name_has_a_row_of_its_own() -> None:
    file = "harbour/" + "very_long_name_" * 3 + ".py"
    assert describe([line(file=file)], "n", 67)[1:3] == [f"{file}:42", "    runs n^2.0 times: 4,096 -> 65,536"]
    assert len(INSIDE) <= 67
