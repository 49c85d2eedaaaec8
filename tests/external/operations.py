"""Operations of the interpreter, its library and numpy, with the growth that their documentation gives.

Sources, cited by these short names beside each operation:

- "complexity": docs.python.org, library/time-complexity ("Time complexity of operations on built-in types", source
  Doc/library/time-complexity.rst at commit 0392d7e5).
- "stdtypes": Doc/library/stdtypes.rst, common sequence operations, note 6.
- "collections", "bisect", "heapq", "difflib": the library pages of these modules.
- "listsort": Objects/listsort.txt at commit 008f1383.
- "numpy.sort", "numpy.partition": their docstrings at commit 1f90bbb5. "numpy 1.17": the release notes.
- "scipy signal": tutorial signal.rst at commit 3dbf660a, on direct and FFT convolution.
- "common practice": a fact of the trade.
"""

from __future__ import annotations

import heapq
import random
import re
from bisect import bisect_left, insort
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass
from difflib import SequenceMatcher
from typing import Any

import numpy as np

LOOK_UPS = 1000


@dataclass(frozen=True, kw_only=True)
class Operation:
    """A body, its workload at size n, its documented growth, and a budget a class too tight ("" for none).

    `counted`: the values of the workload are wrapped by `tally.keys`. `smallest`: where to begin, for a body whose
    growth is hidden by the price of the call before that. `largest`: where to stop, for one that never becomes dear.
    """

    name: str
    source: str
    growth: str
    tight: str
    build: Callable[[int, random.Random], Any]
    body: Callable[[Any], object]
    meter: str = "cpu_time"
    smallest: int | None = None
    largest: int | None = None

    @property
    def counted(self) -> bool:
        return self.meter.startswith("tally:")


def array(n: int, rng: random.Random) -> Any:
    return np.random.default_rng(rng.randrange(2**32)).random(n)


def floats(n: int, rng: random.Random) -> list[float]:
    drawn: list[float] = array(n, rng).tolist()
    return drawn


def ascending(n: int, rng: random.Random) -> list[float]:
    return sorted(floats(n, rng))


def words(n: int, rng: random.Random) -> list[str]:
    return list(map(str, floats(n, rng)))


def whole_numbers(n: int, rng: random.Random) -> Any:
    return np.random.default_rng(rng.randrange(2**32)).integers(0, 100, n)


def next_prime(n: int) -> int:
    while any(n % k == 0 for k in range(2, int(n**0.5) + 1)):
        n += 1
    return n


def some_of(values: list[float], rng: random.Random) -> list[float]:
    return [rng.choice(values) for _ in range(LOOK_UPS)]


def pop_all(values: list[float], place: int) -> None:
    while values:
        values.pop(place)


def insert_all_in_front(values: list[float]) -> None:
    kept: list[float] = []
    for value in values:
        kept.insert(0, value)


def append_all(values: list[float]) -> None:
    kept: list[float] = []
    for value in values:
        kept.append(value)  # noqa: PERF402 - the append is what is measured


def insort_all(values: list[float]) -> None:
    kept: list[float] = []
    for value in values:
        insort(kept, value)


def queue_through(values: list[float]) -> None:
    queue = deque(values)
    for value in values:
        queue.append(value)
        queue.popleft()


def concatenate_tuples(values: list[float]) -> None:
    kept: tuple[float, ...] = ()
    for value in values:
        kept += (value,)


def cut_off_the_front(data: Any) -> None:
    while len(data):
        data = data[16:]


def delete_the_front(data: bytearray) -> None:
    while data:
        del data[:16]


def heapsort(values: list[float]) -> None:
    heapq.heapify(values)
    while values:
        heapq.heappop(values)


class Collides:
    """A key whose hash is that of all others."""

    def __hash__(self) -> int:
        return 1


def emptied_set(n: int, rng: random.Random) -> set[int]:
    numbers = set(range(n))
    for number in range(1, n):
        numbers.remove(number)  # difference_update would build the table anew
    return numbers


OPERATIONS = [
    Operation(
        name="list.pop(0), n times",
        source="complexity: pop at k takes n - k; collections: 'O(n) memory movement costs'",
        growth="n^2",
        tight="n",
        build=floats,
        body=lambda values: pop_all(values, 0),
    ),
    Operation(
        name="list.pop(), n times",
        source="complexity: pop at k takes n - k, so the last takes 1",
        growth="n",
        tight="log n",
        build=floats,
        body=lambda values: pop_all(values, -1),
    ),
    Operation(
        name="list.insert(0, x), n times",
        source="complexity: insert at k takes n - k; collections: 'O(n) memory movement costs'",
        growth="n^2",
        tight="n",
        build=floats,
        body=insert_all_in_front,
    ),
    Operation(
        name="list.append, n times",
        source="complexity: append takes 1, amortised",
        growth="n",
        tight="log n",
        build=floats,
        body=append_all,
    ),
    Operation(
        name="absent in list",
        source="complexity: x in s takes n",
        growth="n",
        tight="log n",
        build=floats,
        body=lambda values: 2.0 in values,
    ),
    Operation(
        name="min and max of a list",
        source="complexity: min and max take n",
        growth="n",
        tight="log n",
        build=floats,
        body=lambda values: (min(values), max(values)),
    ),
    Operation(
        name="slice of a list",
        source="complexity: a slice of length k takes k",
        growth="n",
        tight="log n",
        build=floats,
        body=lambda values: values[1:],
    ),
    Operation(
        name="sorted, random order",
        source="complexity: sort takes n log n",
        growth="n log n",
        tight="",
        build=floats,
        body=sorted,
    ),
    Operation(
        name="sorted, random order, comparisons",
        source="listsort: about 1 % above lg(n!) comparisons on random input",
        growth="n log n",
        tight="n",
        build=floats,
        body=sorted,
        meter="tally:comparisons",
    ),
    Operation(
        name="sorted, in order already",
        source="complexity: sorted input takes n comparisons",
        growth="n",
        tight="log n",
        build=ascending,
        body=sorted,
    ),
    Operation(
        name="sorted, in order already, comparisons",
        source="listsort: exactly n - 1 comparisons",
        growth="n",
        tight="n / log n",
        build=ascending,
        body=sorted,
        meter="tally:comparisons",
    ),
    Operation(
        name="dict look-ups, a thousand among n",
        source="complexity: get takes 1 on average",
        growth="1",
        tight="",
        build=lambda n, rng: (dict.fromkeys(keys := floats(n, rng)), some_of(keys, rng)),
        body=lambda both: [both[0][key] for key in both[1]],
        largest=200_000,
    ),
    Operation(
        name="dict from n keys",
        source="complexity: set takes 1 on average",
        growth="n",
        tight="log n",
        build=floats,
        body=dict.fromkeys,
    ),
    Operation(
        name="dict from n keys with one hash",
        source="complexity: set takes n where all hashes are equal",
        growth="n^2",
        tight="n",
        build=lambda n, rng: [Collides() for _ in range(n)],
        body=dict.fromkeys,
    ),
    Operation(
        name="a set of 100 met with one of n, fifty times",
        source="complexity: intersection takes the smaller of the two lengths",
        growth="1",
        tight="",
        build=lambda n, rng: (set(range(100)), set(range(n + 100))),
        body=lambda both: [both[0] & both[1] for _ in range(50)],
        largest=200_000,
    ),
    Operation(
        name="union of two sets of n",
        source="complexity: union takes the sum of the lengths",
        growth="n",
        tight="log n",
        build=lambda n, rng: (set(floats(n, rng)), set(floats(n, rng))),
        body=lambda both: both[0] | both[1],
    ),
    Operation(
        name="iteration of an emptied set",
        source="complexity, note 6: costs what the former size cost, since the table does not shrink",
        growth="n",
        tight="log n",
        build=emptied_set,
        body=list,
    ),
    Operation(
        name="range membership, a thousand times",
        source="complexity: x in range takes 1 for integers",
        growth="1",
        tight="",
        build=lambda n, rng: (range(0, 3 * n, 3), [rng.randrange(3 * n) for _ in range(LOOK_UPS)]),
        body=lambda both: [number in both[0] for number in both[1]],
        largest=200_000,
    ),
    Operation(
        name="bisect, comparisons of a thousand look-ups",
        source="bisect: O(log n); at most floor(lg n) + 1 comparisons",
        growth="log n",
        tight="",
        build=ascending,
        body=lambda keys: [bisect_left(keys, keys[i * len(keys) // LOOK_UPS]) for i in range(LOOK_UPS)],
        meter="tally:comparisons",
    ),
    Operation(
        name="insort, n times",
        source="bisect: insort is O(n), 'dominated by the linear time insertion step'",
        growth="n^2",
        tight="n",
        build=floats,
        body=insort_all,
    ),
    Operation(
        name="heapify",
        source="heapq: heapify works 'in linear time'",
        growth="n",
        tight="log n",
        build=floats,
        body=heapq.heapify,
    ),
    Operation(
        name="heapify, comparisons",
        source="heapq: heapify works 'in linear time'; always fewer than 2n comparisons",
        growth="n",
        tight="n / log n",
        build=floats,
        body=heapq.heapify,
        meter="tally:comparisons",
    ),
    Operation(
        name="heapsort, comparisons",
        source="heapq: heapsort is O(n log n)",
        growth="n log n",
        tight="n",
        build=floats,
        body=heapsort,
        meter="tally:comparisons",
    ),
    Operation(
        name="deque, in at one end and out at the other",
        source="collections: 'approximately the same O(1) performance in either direction'",
        growth="n",
        tight="log n",
        build=floats,
        body=queue_through,
    ),
    Operation(
        name="str.join",
        source="stdtypes: joining is the linear way to build a string",
        growth="n",
        tight="log n",
        build=words,
        body="".join,
    ),
    Operation(
        name="tuple concatenation, n times",
        source="stdtypes: repeated concatenation of immutable sequences is quadratic in total",
        growth="n^2",
        tight="n",
        build=floats,
        body=concatenate_tuples,
    ),
    Operation(
        name="bytes cut at the front",
        source="complexity: a slice of length k takes k",
        growth="n^2",
        tight="n",
        build=lambda n, rng: rng.randbytes(16 * n),
        body=cut_off_the_front,
    ),
    Operation(
        name="memoryview cut at the front",
        source="complexity: a slice of a memoryview takes 1",
        growth="n",
        tight="log n",
        build=lambda n, rng: rng.randbytes(16 * n),
        body=lambda data: cut_off_the_front(memoryview(data)),
    ),
    Operation(
        name="bytearray deleted at the front",
        source="complexity: deleting at the front of a bytearray takes 1, amortised",
        growth="n",
        tight="log n",
        build=lambda n, rng: bytearray(rng.randbytes(16 * n)),
        body=delete_the_front,
    ),
    Operation(
        name="str.find, periodic text",
        source="complexity: find takes n at worst (two-way search)",
        growth="n",
        tight="log n",
        build=lambda n, rng: ("a" * 64 * n, "a" * 32 * n + "b"),
        body=lambda both: both[0].find(both[1]),
    ),
    Operation(
        name="longest match of like texts",
        source="difflib: SequenceMatcher is quadratic at worst",
        growth="n^2",
        tight="n",
        build=lambda n, rng: SequenceMatcher(None, "a" * n, "a" * n, autojunk=False),
        body=lambda matcher: matcher.find_longest_match(),
    ),
    Operation(
        name="re, a run tried from every place",
        source="common practice: a backtracking search starts anew at every place",
        growth="n^2",
        tight="n",
        build=lambda n, rng: "a" * n,
        body=re.compile("a*b").search,
    ),
    Operation(
        name="re, nested repetition",
        source="common practice: nested repetition backtracks exponentially",
        growth="2^n",
        tight="n^3",
        build=lambda n, rng: "a" * n,
        body=re.compile("(?:a+)+b").match,
    ),
    Operation(
        name="numpy.sort",
        source="numpy.sort: introsort, O(n log n)",
        growth="n log n",
        tight="",
        build=array,
        body=np.sort,
        smallest=500,
    ),
    Operation(
        name="numpy.partition",
        source="numpy.partition: introselect, O(n) at worst",
        growth="n",
        tight="log n",
        smallest=2000,
        build=array,
        body=lambda values: np.partition(values, len(values) // 2),
    ),
    Operation(
        name="numpy.fft.fft of a prime length",
        source="numpy 1.17: O(n log n) at prime lengths too",
        growth="n log n",
        tight="",
        build=lambda n, rng: array(next_prime(max(n, 2)), rng),
        body=np.fft.fft,
        smallest=500,
    ),
    Operation(
        name="numpy.convolve",
        source="scipy signal: direct convolution is O(n^2)",
        growth="n^2",
        tight="n log n",
        # Whole numbers: floats would be handed to several threads, whose waiting counts as work.
        build=lambda n, rng: (whole_numbers(n, rng), whole_numbers(n, rng)),
        body=lambda both: np.convolve(*both),
        smallest=100,
    ),
]


TOO_TIGHT = [operation for operation in OPERATIONS if operation.tight]
