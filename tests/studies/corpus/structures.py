"""Linear bodies that build things: memo tables, objects, dicts, sets, queues."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass

from .entry import LINEAR, Shelf
from .inputs import (
    bulk,
    floats,
    integers,
    the_size,
)

shelf = Shelf()
PRIME = 2_147_483_647


@shelf.add(
    LINEAR, the_size, expected=lambda n: (pow(2, n + 1, PRIME) - 1) % PRIME, tags="counted memo resize", reusable=True
)
def memo_table_of_sums(n: int) -> int:
    memo = {0: 1}
    total = 1
    for i in range(1, n + 1):
        memo[i] = 2 * memo[i - 1] % PRIME
        total += memo[i]
    return total % PRIME


@dataclass
class Berth:
    """One berth with a name and a depth."""

    __slots__ = ("depth", "name")
    name: str
    depth: float


@shelf.add(LINEAR, floats, expected=lambda depths: (len(depths), sum(depths)), tags="allocator cache", reusable=True)
def make_objects(depths: list[float]) -> tuple[int, float]:
    berths = [Berth(name=f"berth {depth:.3f}", depth=depth) for depth in depths]
    return len(berths), sum(berth.depth for berth in berths)


@shelf.add(LINEAR, integers, expected=lambda values: len(values), tags="allocator cache", reusable=True)
def make_rows_of_dicts(values: list[int]) -> int:
    rows = []
    for value in values:
        rows.append({"berth": value & 255, "tons": value >> 8, "flag": None})  # noqa: PERF401 - the loop is what is studied
    return len(rows)


@shelf.add(LINEAR, floats, expected=len, tags="counted resize", reusable=True)
def append_one_by_one(values: list[float]) -> int:
    copied = []
    for value in values:
        copied.append(-value)  # noqa: PERF401 - the resizing is what is studied
    return len(copied)


@shelf.add(LINEAR, integers, expected=lambda values: len(set(values)), tags="counted resize cache hash", reusable=True)
def index_by_number(values: list[int]) -> int:
    index = {}
    for place, value in enumerate(values):
        index[value] = place  # noqa: PERF403 - the loop is what is studied
    return len(index)


@shelf.add(
    LINEAR,
    lambda n, rng: (bulk(rng).integers(0, max(1, n // 4), n).tolist(),),
    expected=len,
    tags="counted resize cache hash allocator",
    reusable=True,
)
def group_in_dict_of_lists(values: list[int]) -> int:
    groups: dict[int, list[int]] = {}
    for value in values:
        groups.setdefault(value, []).append(value)
    return sum(len(group) for group in groups.values())


@shelf.add(LINEAR, integers, expected=lambda values: None, tags="resize cache hash", reusable=True)
def pair_with_sum_minus_one(values: list[int]) -> int | None:
    seen = set()
    for value in values:
        if -1 - value in seen:
            return value
        seen.add(value)
    return None


@shelf.add(LINEAR, floats, expected=lambda values: values, tags="counted deque", reusable=True)
def queue_through_deque(values: list[float]) -> list[float]:
    waiting: deque[float] = deque()
    for value in values:
        waiting.append(value)
    served = []
    while waiting:
        served.append(waiting.popleft())
    return served
