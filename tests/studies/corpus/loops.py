"""Linear bodies in plain Python: loops, stacks, recursion, generators, text building."""

from __future__ import annotations

import itertools
import math
import random
from collections import deque
from collections.abc import Iterator
from typing import Any

import numpy as np

from .entry import LINEAR, Shelf
from .inputs import (
    Arguments,
    ascending,
    bulk,
    floats,
    letters,
    number_words,
    small_integers,
    sparse_graph,
)

shelf = Shelf()
PRIME = 2_147_483_647


@shelf.add(LINEAR, floats, expected=math.fsum, reusable=True, tags="counted")
def add_up(values: list[float]) -> float:
    total = 0.0
    for value in values:
        total += value
    return total


def best_slice_by_prefixes(values: list[int]) -> int:
    prefixes = np.concatenate(([0], np.cumsum(values)))
    return int(max(0, np.max(prefixes - np.minimum.accumulate(prefixes))))


@shelf.add(LINEAR, small_integers, expected=best_slice_by_prefixes, reusable=True, tags="counted")
def best_slice(values: list[int]) -> int:
    best = current = 0
    for value in values:
        current = max(0, current + value)
        best = max(best, current)
    return best


def tides(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).integers(0, 3, n).tolist(),)


@shelf.add(
    LINEAR,
    tides,
    expected=lambda v: [(k, len(list(g))) for k, g in itertools.groupby(v)],
    reusable=True,
    tags="counted",
)
def run_lengths(values: list[int]) -> list[tuple[int, int]]:
    runs = []
    current, length = values[0], 0
    for value in values:
        if value == current:
            length += 1
        else:
            runs.append((current, length))
            current, length = value, 1
    runs.append((current, length))
    return runs


def nested_brackets(n: int, rng: random.Random) -> Arguments:
    half = n // 2
    return ("".join(rng.choices("([{", k=half)),)


@shelf.add(LINEAR, nested_brackets, expected=lambda opening: True, tags="counted")
def brackets_match(opening: str) -> bool:
    pairs = {"(": ")", "[": "]", "{": "}"}
    text = opening + "".join(pairs[mark] for mark in reversed(opening))
    stack: list[str] = []
    for mark in text:
        if mark in pairs:
            stack.append(pairs[mark])
        elif not stack or stack.pop() != mark:
            return False
    return not stack


@shelf.add(LINEAR, floats, expected=lambda values: values[::-1], tags="counted")
def reverse_in_place(values: list[float]) -> list[float]:
    low, high = 0, len(values) - 1
    while low < high:
        values[low], values[high] = values[high], values[low]
        low += 1
        high -= 1
    return values


def two_ascending(n: int, rng: random.Random) -> Arguments:
    return ascending(n // 2, rng) + ascending(n - n // 2, rng)


@shelf.add(LINEAR, two_ascending, expected=lambda one, other: sorted(one + other), reusable=True, tags="counted")
def merge_ascending(one: list[float], other: list[float]) -> list[float]:
    merged = []
    i = j = 0
    while i < len(one) and j < len(other):
        if one[i] <= other[j]:
            merged.append(one[i])
            i += 1
        else:
            merged.append(other[j])
            j += 1
    return merged + one[i:] + other[j:]


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: math.fsum(x * x for x in values if x > 0.25),
    tags="counted generator",
    reusable=True,
)
def generator_pipeline(values: list[float]) -> float:
    def above(source: list[float]) -> Iterator[float]:
        for value in source:
            if value > 0.25:
                yield value

    def squared(source: Iterator[float]) -> Iterator[float]:
        for value in source:
            yield value * value

    return sum(squared(above(values)))


@shelf.add(LINEAR, floats, growth="T(n) = 2 T(n/2) + 1", expected=math.fsum, tags="counted recursion", reusable=True)
def add_up_by_halves(values: list[float]) -> float:
    def part(low: int, high: int) -> float:
        if high - low == 1:
            return values[low]
        middle = (low + high) // 2
        return part(low, middle) + part(middle, high)

    return part(0, len(values))


@shelf.add(LINEAR, floats, expected=lambda values: sorted(values)[len(values) // 2], tags="counted random recursion")
def select_with_random_pivot(values: list[float]) -> float:
    place = len(values) // 2
    while True:
        pivot = random.choice(values)
        below = [value for value in values if value < pivot]
        if place < len(below):
            values = below
            continue
        above = [value for value in values if value > pivot]
        same = len(values) - len(below) - len(above)
        if place < len(below) + same:
            return pivot
        place -= len(below) + same
        values = above


@shelf.add(
    LINEAR, lambda n, rng: (bulk(rng).integers(0, 64, n).tolist(),), expected=sorted, reusable=True, tags="counted"
)
def count_and_spread(values: list[int]) -> list[int]:
    counts = [0] * 64
    for value in values:
        counts[value] += 1
    spread: list[int] = []
    for value, count in enumerate(counts):
        spread.extend([value] * count)
    return spread


@shelf.add(
    LINEAR, letters, expected=lambda text: int.from_bytes(text.encode(), "big") % PRIME, reusable=True, tags="counted"
)
def rolling_hash(text: str) -> int:
    code = 0
    for letter in text:
        code = (code * 256 + ord(letter)) % PRIME
    return code


def text_and_pattern(n: int, rng: random.Random) -> Arguments:
    text = "".join(rng.choices("ab", k=n))
    return text, "abaababaab"


@shelf.add(
    LINEAR,
    text_and_pattern,
    reusable=True,
    expected=lambda text, pattern: sum(text.startswith(pattern, i) for i in range(len(text))),
    tags="counted",
)
def matches_by_prefix_table(text: str, pattern: str) -> int:
    border = [0]
    for mark in pattern[1:]:
        length = border[-1]
        while length and pattern[length] != mark:
            length = border[length - 1]
        border.append(length + (pattern[length] == mark))
    found = matched = 0
    for mark in text:
        while matched and (matched == len(pattern) or pattern[matched] != mark):
            matched = border[matched - 1]
        matched += pattern[matched] == mark
        found += matched == len(pattern)
    return found


@shelf.add(
    LINEAR,
    number_words,
    expected=lambda words: "".join(f"<{word}>" for word in words),
    tags="strings",
    reusable=True,
)
def build_text_in_list(words: list[str]) -> str:
    parts = []
    for word in words:
        parts.append(f"<{word}>")  # noqa: PERF401 - the loop is what is studied
    return "".join(parts)


@shelf.add(LINEAR, number_words, expected=lambda words: ";".join(words) + ";", tags="counted strings", reusable=True)
def build_text_by_adding(words: list[str]) -> str:
    text = ""
    for word in words:
        text += word
        text += ";"
    return text


def island_sizes(graph: list[list[tuple[int, float]]]) -> int:
    seen, stack = {0}, [0]
    while stack:
        for other, _ in graph[stack.pop()]:
            if other not in seen:
                seen.add(other)
                stack.append(other)
    return len(seen)


@shelf.add(LINEAR, sparse_graph(4), expected=island_sizes, tags="counted bimodal cache", reusable=True, largest=400_000)
def reach_from_first_vertex(graph: list[list[tuple[int, float]]]) -> int:
    reached = [False] * len(graph)
    reached[0] = True
    frontier = deque([0])
    count = 0
    while frontier:
        vertex = frontier.popleft()
        count += 1
        for other, _ in graph[vertex]:
            if not reached[other]:
                reached[other] = True
                frontier.append(other)
    return count


@shelf.add(LINEAR, floats, expected=max, tags="large_constant", reusable=True)
def set_up_then_scan(values: list[float]) -> float:
    table = {}
    for i in range(3000):
        table[i] = i * i
    highest = 0.0
    for value in values:
        if value > highest:
            highest = value
    return highest


def binary_heap_shape(n: int, rng: random.Random) -> Arguments:
    def grow(count: int) -> Any:
        if not count:
            return None
        left = (count - 1) // 2
        return (grow(left), rng.random(), grow(count - 1 - left))

    return (grow(n),)


def count_nodes(tree: Any) -> int:
    count, stack = 0, [tree]
    while stack:
        node = stack.pop()
        if node is not None:
            count += 1
            stack += [node[0], node[2]]
    return count


@shelf.add(
    LINEAR,
    binary_heap_shape,
    expected=lambda tree: (count_nodes(tree), True),
    tags="counted recursion generator",
    reusable=True,
    growth="T(n) = 2 T(n/2) + 1",
    largest=400_000,
)
def walk_tree(tree: Any) -> tuple[int, bool]:
    labels: list[float] = []

    def walk(node: Any) -> None:
        if node is None:
            return
        walk(node[0])
        labels.append(node[1])
        walk(node[2])

    walk(tree)
    return len(labels), all(0 <= label < 1 for label in labels)


@shelf.add(
    LINEAR,
    lambda n, rng: (bulk(rng).random(n).tolist(), 16),
    reusable=True,
    expected=lambda values, width: [max(values[i : i + width]) for i in range(len(values) - width + 1)],
    smallest=32,
    tags="counted",
)
def highest_in_window(values: list[float], width: int) -> list[float]:
    candidates: deque[int] = deque()
    highest = []
    for place, value in enumerate(values):
        while candidates and values[candidates[-1]] <= value:
            candidates.pop()
        candidates.append(place)
        if candidates[0] <= place - width:
            candidates.popleft()
        if place >= width - 1:
            highest.append(values[candidates[0]])
    return highest
