"""The lines are sorted by port before they are added up, and so all held at once: memory grows as n."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import groupby

import pytest


def tonnes_by_port(lines: Iterable[str]) -> dict[str, int]:
    fields = sorted((line.split(";") for line in lines), key=lambda field: field[1])
    return {port: sum(int(field[2]) for field in group) for port, group in groupby(fields, lambda field: field[1])}


@pytest.mark.growth_budget("1", meter="peak_memory", smallest=16)
def test_totals_are_taken_without_holding_the_manifest(manifest_lines: Iterator[str], problem_size: int) -> None:
    totals = tonnes_by_port(manifest_lines)
    assert sum(totals.values()) == 7 * problem_size
    assert len(totals) <= 8
