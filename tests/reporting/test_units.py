"""Numbers as people read them."""

from __future__ import annotations

import pytest

from pytest_growthbudget.reporting import units


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (0.0, "ns", "0 ns"),
        (0.5, "ns", "0.5 ns"),
        (950, "ns", "950 ns"),
        (12_345, "ns", "12.3 us"),
        (4_060_000, "ns", "4.06 ms"),
        (2.5e9, "ns", "2.5 s"),
        (90e9, "ns", "1.5 min"),
        (7200e9, "ns", "2 h"),
        (86400e9 * 3, "ns", "3 d"),
        (3.156e16 * 2000, "ns", "2,000 y"),
        (1500, "bytes", "1.46 KiB"),
        (3 * 2**20, "bytes", "3 MiB"),
        (12345, "steps", "12,345"),
        (0.25, "steps", "0.25"),
        (None, "ns", "beyond counting"),
    ],
)
def test_costs(value: float | None, unit: str, text: str) -> None:
    assert units.cost(value, unit) == text


@pytest.mark.parametrize(
    ("value", "text"), [(7, "7"), (1024, "1,024"), (1_000_000, "1,000,000"), (3e18, "3e+18"), (2.5, "2.5")]
)
def test_counts(value: float, text: str) -> None:
    assert units.count(value) == text
