"""Linear bodies that are one or two calls of a built-in."""

from __future__ import annotations

import random
from collections import deque
from operator import itemgetter
from typing import Any

from .entry import LINEAR, Shelf
from .inputs import (
    Arguments,
    ascending,
    bulk,
    bytes_below_255,
    floats,
    integers,
    letters,
    number_words,
    prose,
    random_bytes,
    repeated_words,
    two_float_lists,
)

shelf = Shelf()


@shelf.add(LINEAR, floats, expected=lambda values: [*values], tags="builtin", reusable=True)
def copy_list(values: list[float]) -> list[float]:
    return values.copy()


@shelf.add(LINEAR, floats, expected=lambda values: sorted(values)[-1], tags="builtin", reusable=True)
def highest(values: list[float]) -> float:
    return max(values)


@shelf.add(
    LINEAR,
    two_float_lists,
    expected=lambda one, other: sorted(zip(one, other, strict=True), key=itemgetter(1))[0],
    tags="builtin",
    reusable=True,
)
def cheapest_pair_by_key(names: list[float], costs: list[float]) -> tuple[float, float]:
    return min(zip(names, costs, strict=True), key=itemgetter(1))


@shelf.add(LINEAR, number_words, expected=lambda words: "".join(words), tags="builtin strings", reusable=True)
def join_words(words: list[str]) -> str:
    return "".join(words)


@shelf.add(
    LINEAR,
    prose,
    expected=lambda text: len([word for word in text.split(" ") if word]),
    tags="builtin strings",
    reusable=True,
)
def count_split_words(text: str) -> int:
    return len(text.split())


@shelf.add(
    LINEAR,
    letters,
    expected=lambda text: "".join("*" if letter in "aeiou" else letter for letter in text),
    tags="builtin strings",
    reusable=True,
)
def mask_vowels(text: str) -> str:
    return text.translate({ord(vowel): "*" for vowel in "aeiou"})


@shelf.add(LINEAR, letters, expected=lambda text: "--".join(text.split("a")), tags="builtin strings", reusable=True)
def replace_letter(text: str) -> str:
    return text.replace("a", "--")


@shelf.add(
    LINEAR,
    bytes_below_255,
    expected=lambda data: -1,
    tags="builtin fast",
    reusable=True,
    largest=20_000_000,
)
def find_absent_byte(data: bytes) -> int:
    return data.find(255)


@shelf.add(
    LINEAR,
    integers,
    expected=lambda values: sorted(set(values)),
    tags="builtin hash resize cache",
    reusable=True,
)
def distinct_numbers(values: list[int]) -> set[int]:
    return set(values)


@shelf.add(
    LINEAR,
    number_words,
    expected=lambda words: {word: len(word) for word in words},
    tags="builtin hash resize cache",
    reusable=True,
)
def lengths_by_word(words: list[str]) -> dict[str, int]:
    return dict(zip(words, map(len, words), strict=True))


def two_sets(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return set(draw.integers(0, n, n).tolist()), set(draw.integers(0, n, n).tolist())


@shelf.add(
    LINEAR,
    two_sets,
    expected=lambda one, other: [value for value in sorted(one) if value in other],
    tags="builtin hash",
    reusable=True,
)
def common_members(one: set[int], other: set[int]) -> set[int]:
    return one & other


@shelf.add(LINEAR, floats, expected=lambda values: len(values) - 1, tags="builtin", reusable=True)
def place_of_last(values: list[float]) -> int:
    return values.index(values[-1])


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: [str(value) for value in values],
    tags="builtin allocator strings",
    reusable=True,
)
def write_floats(values: list[float]) -> list[str]:
    return list(map(repr, values))


@shelf.add(
    LINEAR,
    number_words,
    expected=lambda words: [int(word) for word in words],
    tags="builtin allocator",
    reusable=True,
)
def read_integers(words: list[str]) -> list[int]:
    return list(map(int, words))


@shelf.add(LINEAR, integers, tags="builtin", reusable=True)
def hash_of_tuple(values: list[int]) -> int:
    return hash(tuple(values))


@shelf.add(LINEAR, ascending, expected=list, tags="builtin presorted", reusable=True)
def sort_what_is_sorted(values: list[float]) -> list[float]:
    return sorted(values)


def nearly_ascending(n: int, rng: random.Random) -> Arguments:
    values = ascending(n, rng)[0]
    for place in range(0, n - 4, 4):
        other = place + rng.randrange(4)
        values[place], values[other] = values[other], values[place]
    return (values,)


@shelf.add(LINEAR, nearly_ascending, expected=lambda values: sorted(values), tags="builtin presorted", reusable=True)
def sort_what_is_nearly_sorted(values: list[float]) -> list[float]:
    return sorted(values)


def two_runs(n: int, rng: random.Random) -> Arguments:
    return (ascending(n // 2, rng)[0] + ascending(n - n // 2, rng)[0],)


@shelf.add(
    LINEAR,
    two_runs,
    expected=lambda values: sorted(values, reverse=True)[::-1],
    tags="builtin presorted",
    reusable=True,
)
def sort_two_runs(values: list[float]) -> list[float]:
    return sorted(values)


def full_deque(n: int, rng: random.Random) -> Arguments:
    return (deque(bulk(rng).random(n).tolist()),)


@shelf.add(
    LINEAR,
    full_deque,
    expected=lambda queue: [queue[i - len(queue) // 2] for i in range(len(queue))],
    tags="builtin deque fast",
)
def rotate_deque_half_way(queue: deque[float]) -> list[float]:
    queue.rotate(len(queue) // 2)
    return list(queue)


@shelf.add(
    LINEAR,
    repeated_words,
    expected=lambda words: sum(word == "quay7" for word in words),
    tags="builtin strings",
    reusable=True,
)
def count_one_word(words: list[str]) -> int:
    return words.count("quay7")


@shelf.add(
    LINEAR,
    random_bytes,
    expected=lambda data: "".join(f"{byte:02x}" for byte in data),
    tags="builtin fast strings",
    reusable=True,
    largest=20_000_000,
)
def as_hexadecimal(data: bytes) -> str:
    return data.hex()


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: [value * 2 for value in values],
    tags="builtin allocator",
    reusable=True,
)
def double_in_comprehension(values: list[float]) -> list[float]:
    return [2 * value for value in values]


@shelf.add(LINEAR, lambda n, rng: floats(n, rng) * 2, expected=lambda one, other: True, tags="builtin", reusable=True)
def lists_are_equal(one: list[float], other: list[float]) -> bool:
    return one == other


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: all(values[i] < 1 for i in range(len(values))),
    tags="builtin generator",
    reusable=True,
)
def all_below_one(values: list[float]) -> bool:
    return all(value < 1 for value in values)


@shelf.add(LINEAR, integers, expected=lambda values: (len(set(values)), 0), tags="builtin hash resize")
def empty_a_set(values: list[int]) -> tuple[int, int]:
    left: set[Any] = set(values)
    count = 0
    while left:
        left.pop()
        count += 1
    return count, len(left)
