from __future__ import annotations

from itertools import chain

import pytest
from harbour.arrivals import Arrival, merge_manifests, merge_two


def test_equal_arrivals_keep_the_order_of_the_manifests() -> None:
    assert merge_two([(5, "A"), (9, "A")], [(5, "A"), (7, "B")]) == [(5, "A"), (5, "A"), (7, "B"), (9, "A")]


def test_no_manifest_no_arrival() -> None:
    assert merge_manifests([]) == []


@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n")
@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n", meter="steps")
def test_merging_brings_all_arrivals_into_order(manifests: list[list[Arrival]], metered) -> None:
    with metered:
        merged = merge_manifests(manifests)
    assert merged == sorted(chain.from_iterable(manifests))
