"""Quadratic bodies in which the quadratic term is plain to see."""

from __future__ import annotations

import difflib
import itertools
import math
import random
import re
from collections import deque
from typing import Any

import numpy as np

from .entry import QUADRATIC, Shelf
from .inputs import (
    Arguments,
    bulk,
    floats,
    integers,
    letters,
    points,
    small_integers,
    two_float_lists,
    two_symbol_lists,
)

shelf = Shelf()


@shelf.add(QUADRATIC, integers, expected=lambda values: list(dict.fromkeys(values)), reusable=True)
def distinct_in_list(values: list[int]) -> list[int]:
    kept: list[int] = []
    for value in values:
        if value not in kept:
            kept.append(value)
    return kept


@shelf.add(QUADRATIC, floats, expected=sorted, tags="counted random")
def insertion_sort(values: list[float]) -> list[float]:
    for place in range(1, len(values)):
        value, at = values[place], place - 1
        while at >= 0 and values[at] > value:
            values[at + 1] = values[at]
            at -= 1
        values[at + 1] = value
    return values


@shelf.add(QUADRATIC, floats, expected=sorted, tags="counted early_exit random")
def bubble_sort(values: list[float]) -> list[float]:
    for end in range(len(values) - 1, 0, -1):
        swapped = False
        for at in range(end):
            if values[at] > values[at + 1]:
                values[at], values[at + 1] = values[at + 1], values[at]
                swapped = True
        if not swapped:
            break
    return values


@shelf.add(QUADRATIC, floats, expected=sorted, tags="builtin")
def selection_by_min(values: list[float]) -> list[float]:
    chosen = []
    while values:
        least = min(values)
        values.remove(least)
        chosen.append(least)
    return chosen


def common_by_memo(one: list[int], other: list[int]) -> int:
    longest = np.zeros((len(one) + 1, len(other) + 1), dtype=int)
    for i, j in itertools.product(range(len(one)), range(len(other))):
        longest[i + 1, j + 1] = longest[i, j] + 1 if one[i] == other[j] else max(longest[i, j + 1], longest[i + 1, j])
    return int(longest[-1, -1])


@shelf.add(QUADRATIC, two_symbol_lists, expected=common_by_memo, reusable=True, tags="counted")
def longest_common_part(one: list[int], other: list[int]) -> int:
    above = [0] * (len(other) + 1)
    for mine in one:
        row = [0]
        for place, theirs in enumerate(other):
            row.append(above[place] + 1 if mine == theirs else max(above[place + 1], row[place]))
        above = row
    return above[-1]


@shelf.add(QUADRATIC, two_symbol_lists, tags="counted allocator cache", reusable=True, largest=1000)
def edits_between(one: list[int], other: list[int]) -> int:
    table = [[0] * (len(other) + 1) for _ in range(len(one) + 1)]
    table[0] = list(range(len(other) + 1))
    for i, mine in enumerate(one, 1):
        table[i][0] = i
        for j, theirs in enumerate(other, 1):
            table[i][j] = min(table[i - 1][j] + 1, table[i][j - 1] + 1, table[i - 1][j - 1] + (mine != theirs))
    return table[-1][-1]


@shelf.add(
    QUADRATIC,
    integers,
    expected=lambda values: [1 if values.count(v) == 1 else 2 for v in values],
    tags="builtin",
    reusable=True,
)
def count_each_in_list(values: list[int]) -> list[int]:
    return [values.count(value) for value in values]


@shelf.add(
    QUADRATIC,
    points,
    expected=lambda places: min(math.dist(a, b) for a, b in itertools.combinations(places, 2)),
    reusable=True,
    tags="counted",
)
def nearest_of_all_pairs(places: list[tuple[float, float]]) -> float:
    nearest = math.inf
    for i, (x, y) in enumerate(places):
        for other_x, other_y in places[i + 1 :]:
            nearest = min(nearest, (x - other_x) ** 2 + (y - other_y) ** 2)
    return math.sqrt(nearest)


@shelf.add(QUADRATIC, two_float_lists, expected=lambda a, b: np.convolve(a, b).tolist(), reusable=True, tags="counted")
def multiply_polynomials(one: list[float], other: list[float]) -> list[float]:
    product = [0.0] * (len(one) + len(other) - 1)
    for i, a in enumerate(one):
        for j, b in enumerate(other):
            product[i + j] += a * b
    return product


@shelf.add(QUADRATIC, floats, expected=lambda values: np.cumsum(values).tolist(), tags="builtin", reusable=True)
def sums_of_all_prefixes(values: list[float]) -> list[float]:
    return [sum(values[: end + 1]) for end in range(len(values))]


@shelf.add(QUADRATIC, floats, expected=sorted, tags="builtin presorted", reusable=True)
def sort_after_each_append(values: list[float]) -> list[float]:
    ordered: list[float] = []
    for value in values:
        ordered.append(value)
        ordered.sort()
    return ordered


@shelf.add(
    QUADRATIC,
    lambda n, rng: (bulk(rng).integers(1, n // 2 + 1, n).tolist(), n),
    expected=None,
    reusable=True,
    tags="counted",
)
def fill_the_hold(weights: list[int], room: int) -> int:
    best = [0] * (room + 1)
    for weight in weights:
        for space in range(room, weight - 1, -1):
            best[space] = max(best[space], best[space - weight] + weight)
    return best[room]


@shelf.add(QUADRATIC, lambda n, rng: ("a" * n,), expected=lambda text: None, tags="regex backtracking", reusable=True)
def pattern_that_backtracks(text: str) -> Any:
    return re.search("a+b", text)


@shelf.add(QUADRATIC, lambda n, rng: ("a" * n,), expected=len, reusable=True, tags="counted")
def palindrome_in_one_letter(text: str) -> int:
    longest = 0
    for centre in range(2 * len(text) - 1):
        left, right = centre // 2, (centre + 1) // 2
        while left >= 0 and right < len(text) and text[left] == text[right]:
            left -= 1
            right += 1
        longest = max(longest, right - left - 1)
    return longest


def longest_by_slices(one: list[int], other: list[int]) -> int:
    mine, theirs = "".join(map(str, one)), "".join(map(str, other))
    return max(j - i for i in range(len(mine) + 1) for j in range(i, len(mine) + 1) if mine[i:j] in theirs)


@shelf.add(QUADRATIC, two_symbol_lists, tags="library slow", reusable=True, largest=3000, expected=longest_by_slices)
def longest_match_by_difflib(one: list[int], other: list[int]) -> int:
    matcher = difflib.SequenceMatcher(None, one, other, autojunk=False)
    return matcher.find_longest_match(0, len(one), 0, len(other)).size


@shelf.add(
    QUADRATIC,
    small_integers,
    growth="T(n) = T(n-1) + n",
    reusable=True,
    tags="counted generator",
    expected=lambda values: sum(a + b == 0 for a, b in itertools.combinations(values, 2)),
)
def opposite_pairs(values: list[int]) -> int:
    return sum(values[i] + values[j] == 0 for i in range(len(values)) for j in range(i))


@shelf.add(
    QUADRATIC,
    floats,
    expected=sorted,
    growth="T(n) = T(n-1) + n",
    tags="counted recursion presorted uneven",
    reusable=True,
)
def quick_sort_first_pivot_on_sorted(values: list[float]) -> list[float]:
    waiting, finished = [sorted(values)], []
    while waiting:
        piece = waiting.pop()
        if not piece:
            continue
        pivot = piece[0]
        rest = piece[1:]
        below = [value for value in rest if value < pivot]
        above = [value for value in rest if value >= pivot]
        finished.append(pivot)
        waiting += [above, below]
    return finished


def path_in_bad_order(n: int, rng: random.Random) -> Arguments:
    return n, [(i, i + 1, 0.5 + rng.random()) for i in range(n - 2, -1, -1)]


@shelf.add(
    QUADRATIC,
    path_in_bad_order,
    expected=lambda n, edges: sum(weight for _, _, weight in edges),
    reusable=True,
    tags="counted",
)
def relax_edges_in_bad_order(n: int, edges: list[tuple[int, int, float]]) -> float:
    reach = [math.inf] * n
    reach[0] = 0.0
    changed = True
    while changed:
        changed = False
        for one, other, weight in edges:
            if reach[one] + weight < reach[other]:
                reach[other] = reach[one] + weight
                changed = True
    return reach[-1]


@shelf.add(QUADRATIC, floats, tags="counted large_constant", reusable=True, expected=lambda values: len(values) ** 2)
def set_up_then_all_pairs(values: list[float]) -> int:
    table = {i: i * i for i in range(10_000)}
    count = 0
    for _ in values:
        for _ in values:
            count += 1
    return count + len(table) - 10_000


@shelf.add(
    QUADRATIC,
    lambda n, rng: (deque(bulk(rng).random(n).tolist()),),
    expected=lambda queue: math.fsum(queue),
    tags="deque builtin",
    reusable=True,
)
def index_into_deque(queue: deque[float]) -> float:
    total = 0.0
    for place in range(len(queue)):
        total += queue[place]
    return total


@shelf.add(
    QUADRATIC,
    letters,
    tags="builtin strings",
    reusable=True,
    expected=lambda text: max(i for i in range(len(text)) if i == 0 or text[:i] in text[1:]),
)
def longest_repeated_start(text: str) -> int:
    longest = 0
    for length in range(1, len(text)):
        if text.find(text[:length], 1) >= 0:
            longest = length
    return longest
