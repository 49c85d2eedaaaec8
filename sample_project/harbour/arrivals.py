"""Notices of arrival, sent in by many agents, brought into one list by time."""

from __future__ import annotations

from collections.abc import Sequence

Arrival = tuple[int, str]
"""Minute of arrival and call sign."""


def merge_manifests(manifests: Sequence[list[Arrival]]) -> list[Arrival]:
    """Merge manifests, each in order of time, into one. Halves are merged first: T(n) = 2 T(n/2) + n."""
    if not manifests:
        return []
    if len(manifests) == 1:
        return manifests[0]
    middle = len(manifests) // 2
    return merge_two(merge_manifests(manifests[:middle]), merge_manifests(manifests[middle:]))


def merge_two(left: list[Arrival], right: list[Arrival]) -> list[Arrival]:
    """Merge two lists in order; of two equal arrivals the left one comes first."""
    merged: list[Arrival] = []
    i = j = 0
    while i < len(left) and j < len(right):
        if right[j] < left[i]:
            merged.append(right[j])
            j += 1
        else:
            merged.append(left[i])
            i += 1
    merged.extend(left[i:])
    merged.extend(right[j:])
    return merged
