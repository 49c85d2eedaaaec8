"""Linear bodies whose cost is the memory hierarchy: each step lands somewhere else."""

from __future__ import annotations

import random
from itertools import pairwise
from typing import Any

from .entry import LINEAR, LOGLINEAR, Shelf
from .inputs import Arguments, bulk, labels, scattered_floats

shelf = Shelf()


def shuffled_chain(n: int, rng: random.Random) -> Arguments:
    """A linked list whose links lead about the memory in random order; the nodes are kept alive beside it."""
    nodes: list[list[Any]] = [[None, i] for i in range(n)]
    order = bulk(rng).permutation(n).tolist()
    for here, there in pairwise(order):
        nodes[here][0] = nodes[there]
    return nodes[order[0]], nodes


@shelf.add(
    LINEAR,
    shuffled_chain,
    expected=lambda head, nodes: sum(range(len(nodes))),
    tags="counted cache",
    reusable=True,
    largest=400_000,
)
def follow_shuffled_chain(head: Any, nodes: list[Any]) -> int:
    total = 0
    while head is not None:
        total += head[1]
        head = head[0]
    return total


@shelf.add(
    LINEAR,
    scattered_floats,
    expected=lambda values: sum(sorted(values)),
    tags="cache builtin",
    reusable=True,
    largest=400_000,
)
def sum_of_scattered(values: list[float]) -> float:
    return sum(values)


def values_and_order(n: int, rng: random.Random) -> Arguments:
    return (*scattered_floats(n, rng), bulk(rng).permutation(n).tolist())


@shelf.add(
    LINEAR,
    values_and_order,
    expected=lambda values, order: sum(values),
    tags="counted cache",
    reusable=True,
    largest=400_000,
)
def visit_in_random_order(values: list[float], order: list[int]) -> float:
    total = 0.0
    for place in order:
        total += values[place]
    return total


def table_and_all_keys(n: int, rng: random.Random) -> Arguments:
    keys = bulk(rng).integers(0, 1 << 40, n).tolist()
    order = bulk(rng).permutation(n).tolist()
    return dict.fromkeys(keys, 1), [keys[i] for i in order]


@shelf.add(
    LINEAR,
    table_and_all_keys,
    expected=lambda table, keys: len(keys),
    tags="counted cache hash",
    reusable=True,
    largest=400_000,
)
def look_up_every_key(table: dict[int, int], keys: list[int]) -> int:
    total = 0
    for key in keys:
        total += table[key]
    return total


def names_and_set(n: int, rng: random.Random) -> Arguments:
    names = labels(n, rng)
    asked = names[: n // 2] + labels(n - n // 2, rng)
    rng.shuffle(asked)
    return set(names), asked


@shelf.add(
    LINEAR,
    names_and_set,
    tags="cache hash strings",
    largest=200_000,
    reusable=True,
    expected=lambda names, asked: len([name for name in asked if name in names]),
)
def count_known_names(names: set[str], asked: list[str]) -> int:
    return sum(name in names for name in asked)


def next_places(n: int, rng: random.Random) -> Arguments:
    order = bulk(rng).permutation(n).tolist()
    following = [0] * n
    for here, there in zip(order, order[1:] + order[:1], strict=True):
        following[here] = there
    return (following,)


@shelf.add(LINEAR, next_places, expected=len, tags="counted cache", reusable=True)
def length_of_cycle(following: list[int]) -> int:
    place, length = following[0], 1
    while place:
        place = following[place]
        length += 1
    return length


@shelf.add(LINEAR, scattered_floats, expected=list, tags="cache builtin", reusable=True, largest=400_000)
def copy_scattered(values: list[float]) -> list[float]:
    return list(values)


def unordered_records(n: int, rng: random.Random) -> Arguments:
    records = [(weight, i) for i, weight in enumerate(bulk(rng).random(n).tolist())]
    rng.shuffle(records)
    return (records,)


@shelf.add(
    LOGLINEAR,
    unordered_records,
    expected=lambda records: sorted(records, key=lambda r: r[0]),
    tags="cache builtin allocator",
    largest=200_000,
    reusable=True,
)
def sort_scattered_records(records: list[tuple[float, int]]) -> list[tuple[float, int]]:
    return sorted(records)


def merged_sets(n: int, rng: random.Random) -> Arguments:
    ends = bulk(rng).integers(0, n, (n, 2)).tolist()
    return n, [tuple(pair) for pair in ends]


def components_by_flood(n: int, pairs: list[tuple[int, int]]) -> int:
    neighbours: list[list[int]] = [[] for _ in range(n)]
    for one, other in pairs:
        neighbours[one].append(other)
        neighbours[other].append(one)
    seen: set[int] = set()
    count = 0
    for start in range(n):
        if start in seen:
            continue
        count += 1
        stack = [start]
        seen.add(start)
        while stack:
            for other in neighbours[stack.pop()]:
                if other not in seen:
                    seen.add(other)
                    stack.append(other)
    return count


@shelf.add(LINEAR, merged_sets, expected=components_by_flood, tags="counted cache", reusable=True, largest=400_000)
def join_disjoint_sets(n: int, pairs: list[tuple[int, int]]) -> int:
    parent = list(range(n))
    count = n
    for one, other in pairs:
        while parent[one] != one:
            parent[one] = parent[parent[one]]
            one = parent[one]
        while parent[other] != other:
            parent[other] = parent[parent[other]]
            other = parent[other]
        if one != other:
            parent[one] = other
            count -= 1
    return count
