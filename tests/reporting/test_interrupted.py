"""What is said of a budget whose measuring was interrupted."""

from __future__ import annotations

from pytest_growthbudget.reporting.interrupted import Unfinished, describe


def unfinished(costs: dict[int, list[float]], ray: str = "") -> Unfinished:
    return Unfinished(
        test="test_a.py::test_a", promise="n log n", meter="cpu_time", unit="ns", variable="n", limit=10.0, began=0,
        ray=ray, costs=costs,
    )  # fmt: skip


def test_sizes_and_costs_so_far() -> None:
    assert describe(unfinished({1600: [2e6, 3e6], 100: [5e4, 4e4, 6e4, 9e4, 7e4]})) == [
        "test_a.py::test_a",
        "    interrupted while cpu_time was read against n log n",
        "             n        cost  readings",
        "           100     50.0 us         5",
        "         1,600        2 ms         2",
    ]


def test_nothing_was_read() -> None:
    assert describe(unfinished({}, "V alone, E = 100"))[1:] == [
        "    interrupted while cpu_time was read against n log n (V alone, E = 100)",
        "    nothing was read yet",
    ]
