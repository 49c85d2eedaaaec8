# ruff: noqa: RUF005 - a line an item is what the steps count; the rest is as code is found
"""Sorting and selection, each beside twins with one planted fault."""

from __future__ import annotations

import random

Items = list[int]


def merge(left: Items, right: Items) -> Items:
    merged = []
    i = j = 0
    while i < len(left) and j < len(right):
        if left[i] <= right[j]:
            merged.append(left[i])
            i += 1
        else:
            merged.append(right[j])
            j += 1
    return merged + left[i:] + right[j:]


def merge_sort(items: Items) -> Items:
    if len(items) < 2:
        return items
    middle = len(items) // 2
    return merge(merge_sort(items[:middle]), merge_sort(items[middle:]))


def merge_by_pop(left: Items, right: Items) -> Items:
    merged = []
    while left and right:
        merged.append(left.pop(0) if left[0] <= right[0] else right.pop(0))
    return merged + left + right


def merge_sort_by_pop(items: Items) -> Items:
    if len(items) < 2:
        return items
    middle = len(items) // 2
    return merge_by_pop(merge_sort_by_pop(items[:middle]), merge_sort_by_pop(items[middle:]))


def merge_sort_in_place(items: Items, low: int, high: int) -> None:
    if high - low < 2:
        return
    middle = (low + high) // 2
    merge_sort_in_place(items, low, middle)
    merge_sort_in_place(items, middle, high)
    items[low:high] = merge(items[low:middle], items[middle:high])


def merge_sort_tenth(items: Items) -> Items:
    """Splits off a tenth."""
    if len(items) < 2:
        return items
    cut = max(1, len(items) // 10)
    return merge(merge_sort_tenth(items[:cut]), merge_sort_tenth(items[cut:]))


def merge_sort_thrice(items: Items) -> Items:
    """Sorts its left half twice."""
    if len(items) < 2:
        return items
    middle = len(items) // 2
    merge_sort_thrice(items[:middle])
    return merge(merge_sort_thrice(items[:middle]), merge_sort_thrice(items[middle:]))


def insertion_merge_sort(items: Items) -> Items:
    """Merges by inserting one by one, with a search from the front: a quadratic merge."""
    if len(items) < 2:
        return items
    middle = len(items) // 2
    left, right = insertion_merge_sort(items[:middle]), insertion_merge_sort(items[middle:])
    for value in right:
        place = 0
        while place < len(left) and left[place] <= value:
            place += 1
        left = left[:place] + [value] + left[place:]
    return left


def parted(items: Items, pivot: int) -> tuple[Items, Items]:
    below, above = [], []
    for item in items:
        if item < pivot:
            below.append(item)
        elif item > pivot:
            above.append(item)
    return below, above


def quicksort(items: Items, rng: random.Random) -> Items:
    if len(items) < 2:
        return items
    pivot = items[rng.randrange(len(items))]
    below, above = parted(items, pivot)
    return [*quicksort(below, rng), pivot, *quicksort(above, rng)]


def quicksort_first(items: Items) -> Items:
    """Takes the first item as the pivot."""
    if len(items) < 2:
        return items
    below, above = parted(items, items[0])
    return [*quicksort_first(below), items[0], *quicksort_first(above)]


def quicksort_uneven(items: Items, least: int) -> Items:
    """Cuts off a hundredth; the items are whole numbers from `least` on without a gap."""
    if len(items) < 2:
        return items
    pivot = least + len(items) // 100
    below, above = parted(items, pivot)
    return [*quicksort_uneven(below, least), pivot, *quicksort_uneven(above, pivot + 1)]


def quickselect(items: Items, rank: int, rng: random.Random) -> int:
    pivot = items[rng.randrange(len(items))]
    below, above = parted(items, pivot)
    if rank < len(below):
        return quickselect(below, rank, rng)
    if rank == len(below):
        return pivot
    return quickselect(above, rank - len(below) - 1, rng)


def quickselect_both(items: Items, rank: int, rng: random.Random) -> int:
    """Looks into both parts, and uses one."""
    if len(items) < 2:
        return items[0] if items else -1
    pivot = items[rng.randrange(len(items))]
    below, above = parted(items, pivot)
    one = quickselect_both(below, min(rank, len(below) - 1), rng)
    other = quickselect_both(above, max(0, rank - len(below) - 1), rng)
    return one if rank < len(below) else pivot if rank == len(below) else other


def select(items: Items, rank: int) -> int:
    """Median of medians of five."""
    if len(items) <= 5:
        return sorted(items)[rank]
    medians = [sorted(items[i : i + 5])[len(items[i : i + 5]) // 2] for i in range(0, len(items), 5)]
    pivot = select(medians, len(medians) // 2)
    below, above = parted(items, pivot)
    if rank < len(below):
        return select(below, rank)
    if rank == len(below):
        return pivot
    return select(above, rank - len(below) - 1)


def select_by_first(items: Items, rank: int) -> int:
    """Finds the median of medians, then takes the least median as the pivot."""
    if len(items) <= 5:
        return sorted(items)[rank]
    medians = [sorted(items[i : i + 5])[len(items[i : i + 5]) // 2] for i in range(0, len(items), 5)]
    select_by_first(medians, len(medians) // 2)
    below, above = parted(items, min(medians))
    if rank < len(below):
        return select_by_first(below, rank)
    if rank == len(below):
        return min(medians)
    return select_by_first(above, rank - len(below) - 1)
