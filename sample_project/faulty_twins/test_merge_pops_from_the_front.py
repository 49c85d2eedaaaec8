"""`pop(0)` moves the whole rest of the list down: merging costs n²."""

from __future__ import annotations

from itertools import chain

import pytest
from harbour.arrivals import Arrival


def merge_manifests(manifests: list[list[Arrival]]) -> list[Arrival]:
    if len(manifests) == 1:
        return manifests[0][:]
    middle = len(manifests) // 2
    return merge_two(merge_manifests(manifests[:middle]), merge_manifests(manifests[middle:]))


def merge_two(left: list[Arrival], right: list[Arrival]) -> list[Arrival]:
    merged = []
    while left and right:
        merged.append(right.pop(0) if right[0] < left[0] else left.pop(0))
    return merged + left + right


@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n")
def test_merging_brings_all_arrivals_into_order(manifests: list[list[Arrival]], metered) -> None:
    with metered:
        merged = merge_manifests(manifests)
    assert merged == sorted(chain.from_iterable(manifests))
