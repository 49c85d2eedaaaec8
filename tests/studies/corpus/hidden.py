"""Quadratic terms with a tiny coefficient: moved memory, copied text, fast scans, behind linear work."""

from __future__ import annotations

import bisect
import hashlib
import json
import math
import random
from typing import Any

import numpy as np

from .entry import QUADRATIC, Shelf
from .inputs import Arguments, bulk, bytes_and_floats, floats, letters, number_words

shelf = Shelf()


@shelf.add(
    QUADRATIC,
    floats,
    expected=lambda values: values[::-1],
    tags="hidden builtin",
    reusable=True,
)
def insert_at_front(values: list[float]) -> list[float]:
    turned: list[float] = []
    for value in values:
        turned.insert(0, value)
    return turned


@shelf.add(QUADRATIC, floats, expected=math.fsum, tags="hidden builtin steps allocator")
def pop_from_front(values: list[float]) -> float:
    total = 0.0
    while values:
        total += values.pop(0)
    return total


@shelf.add(QUADRATIC, letters, expected=len, tags="hidden strings allocator", reusable=True)
def eat_text_letter_by_letter(text: str) -> int:
    eaten = 0
    while text:
        text = text[1:]
        eaten += 1
    return eaten


@shelf.add(QUADRATIC, floats, expected=math.fsum, tags="hidden slices allocator", reusable=True)
def slice_off_first(values: list[float]) -> float:
    total = 0.0
    while values:
        total += values[0]
        values = values[1:]
    return total


@shelf.add(
    QUADRATIC,
    bytes_and_floats,
    expected=lambda data, v: math.fsum(math.sqrt(x) * math.sin(x) for x in v),
    tags="hidden fast",
    reusable=True,
)
def scan_bytes_behind_arithmetic(data: bytes, values: list[float]) -> float:
    total = 0.0
    for value in values:
        total += math.sqrt(value) * math.sin(value)
        if 255 in data:
            total = 0.0
    return total


@shelf.add(QUADRATIC, floats, expected=sorted, tags="hidden library", reusable=True)
def insert_in_order(values: list[float]) -> list[float]:
    ordered: list[float] = []
    for value in values:
        bisect.insort(ordered, value)
    return ordered


@shelf.add(QUADRATIC, floats, expected=lambda values: tuple(values), tags="hidden allocator", reusable=True)
def grow_a_tuple(values: list[float]) -> tuple[float, ...]:
    grown: tuple[float, ...] = ()
    for value in values:
        grown += (value,)
    return grown


class Log:
    """Text that grows on an attribute, where CPython cannot extend it in place."""

    def __init__(self) -> None:
        self.text = ""

    def write(self, word: str) -> None:
        self.text = self.text + word


@shelf.add(
    QUADRATIC,
    number_words,
    expected=lambda words: "".join(words),
    tags="hidden strings allocator",
    reusable=True,
)
def grow_text_on_attribute(words: list[str]) -> str:
    log = Log()
    for word in words:
        log.write(word)
    return log.text


def short_lists(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).random((n, 3)).tolist(),)


@shelf.add(
    QUADRATIC,
    short_lists,
    expected=lambda lists: [v for short in lists for v in short],
    tags="hidden allocator builtin",
    reusable=True,
)
def flatten_by_adding_lists(lists: list[list[float]]) -> list[float]:
    return sum(lists, [])  # noqa: RUF017 - the quadratic summation is what is studied


@shelf.add(
    QUADRATIC,
    lambda n, rng: (bulk(rng).random(n),),
    expected=lambda values: values[::-1],
    tags="hidden numpy allocator",
    dominates=False,
    reusable=True,
)
def grow_an_array(values: Any) -> Any:
    grown = np.empty(0)
    for value in values:
        grown = np.concatenate(((value,), grown))
    return grown


@shelf.add(
    QUADRATIC,
    lambda n, rng: (bulk(rng).random(n),),
    expected=lambda values: np.cumsum(values),
    tags="hidden numpy streaming",
    dominates=False,
    reusable=True,
)
def add_prefixes_of_array(values: Any) -> Any:
    sums = np.empty(len(values))
    for end in range(len(values)):
        sums[end] = values[: end + 1].sum()
    return sums


@shelf.add(
    QUADRATIC,
    floats,
    expected=lambda values: dict.fromkeys(values, True),
    tags="hidden hash allocator",
    reusable=True,
)
def copy_table_at_each_step(values: list[float]) -> dict[float, bool]:
    table: dict[float, bool] = {}
    for value in values:
        table = {**table, value: True}
    return table


@shelf.add(
    QUADRATIC,
    lambda n, rng: (list(range(n)),),
    expected=lambda values: 0,
    tags="hidden builtin",
)
def remove_one_by_one(values: list[int]) -> int:
    for value in reversed(range(len(values))):
        values.remove(value)
    return len(values)


@shelf.add(
    QUADRATIC,
    letters,
    expected=lambda text: [text[:i].count("e") for i in range(len(text))],
    tags="hidden strings fast",
    reusable=True,
)
def count_letter_so_far(text: str) -> list[int]:
    return [text.count("e", 0, end) for end in range(len(text))]


def matrix_and_zeros(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).integers(1, 255, (n, 64)).astype(np.uint8).tobytes(),)


@shelf.add(
    QUADRATIC,
    matrix_and_zeros,
    expected=lambda data: [len(data)] * (len(data) // 64),
    tags="hidden slices fast",
    reusable=True,
)
def copy_buffer_for_each_record(data: bytes) -> list[int]:
    lengths = []
    buffer = bytearray(data)
    for record in range(len(data) // 64):
        buffer[record] = 0
        lengths.append(len(bytes(buffer)))
    return lengths


@shelf.add(
    QUADRATIC,
    bytes_and_floats,
    expected=lambda data, values: sum(len(repr(value)) + 11 for value in values),
    dominates=False,
    tags="hidden fast library",
    reusable=True,
)
def write_record_and_scan_bytes(data: bytes, values: list[float]) -> int:
    written = 0
    for value in values:
        written += len(json.dumps({"depth": value}))
        written += data.find(255) + 1
    return written


@shelf.add(
    QUADRATIC,
    lambda n, rng: (bytearray(n), bulk(rng).integers(0, 1 << 40, n).tolist()),
    expected=lambda flags, keys: b"\1" * len(flags),
    dominates=False,
    tags="hidden fast allocator library",
)
def copy_flags_behind_digests(flags: bytearray, keys: list[int]) -> bytes:
    seen = bytes(flags)
    for place, key in enumerate(keys):
        hashlib.sha256(str(key).encode()).hexdigest()
        flags[place] = 1
        seen = bytes(flags)
    return seen
