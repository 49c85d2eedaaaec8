"""Each manifest is merged into all that came before it, not half with half: T(n) = T(n-1) + n, which is n²."""

from __future__ import annotations

from functools import reduce
from itertools import chain

import pytest
from harbour.arrivals import Arrival, merge_two


def merge_manifests(manifests: list[list[Arrival]]) -> list[Arrival]:
    return reduce(merge_two, manifests)


@pytest.mark.growth_budget("T(n) = 2 T(n/2) + n")
def test_merging_brings_all_arrivals_into_order(manifests: list[list[Arrival]], metered) -> None:
    with metered:
        merged = merge_manifests(manifests)
    assert merged == sorted(chain.from_iterable(manifests))
