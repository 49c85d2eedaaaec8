"""`in` on a list looks through the list: n distinct ids cost n²."""

from __future__ import annotations

import pytest


def distinct_ids(ids: list[str]) -> list[str]:
    kept: list[str] = []
    for container in ids:
        if container not in kept:
            kept.append(container)
    return kept


@pytest.mark.growth_budget("n")
def test_each_container_is_listed_once(repeated_ids: list[str], metered) -> None:
    with metered:
        kept = distinct_ids(repeated_ids)
    assert kept == list(dict.fromkeys(repeated_ids))
