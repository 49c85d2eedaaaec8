"""Standard inputs by size: each a pure function of the size and of a `random.Random`.

What a program costs depends on the shape of its input as much as on its size. A fixture with a parameter lets
one marker judge average and worst shapes, each a test of its own whose id, and so whose failure, names the
shape:

    @pytest.fixture(params=shapes.SEQUENCES, ids=str)
    def manifest(request, problem_size, workload_rng):
        return request.param(problem_size, workload_rng)

Four families: `SEQUENCES`, `STRINGS`, `GRAPHS`, `INTERVALS`. All together, by name: `SHAPES`.

A graph is a list of lists: `graph[v]` holds the neighbours of vertex v, ascending; every edge is undirected
and stands at both ends. An interval is a pair (low, high) with low < high, ends included.
"""

from __future__ import annotations

import difflib
import functools
import math
import random
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Any, Final, Generic, TypeVar

T_co = TypeVar("T_co", covariant=True)

Graph = list[list[int]]
Intervals = list[tuple[int, int]]


@dataclass(frozen=True)
class Shape(Generic[T_co]):
    """A named input shape. Calling it builds one input; `str` gives its name, which is its test id.

    `measures` says what the size counts, and what else follows from it.
    """

    name: str
    build: Callable[[int, random.Random], T_co]
    measures: str

    def __call__(self, n: int, rng: random.Random) -> T_co:
        """An input of size `n`. Raises ValueError where n is negative."""
        if n < 0:
            raise ValueError(f"the shape {self.name!r} was asked for {n} items; a size is 0 or more")
        return self.build(n, rng)

    def __str__(self) -> str:
        return self.name


# Sequences: lists of n integers.


def _shuffled(n: int, rng: random.Random) -> list[int]:
    values = list(range(n))
    rng.shuffle(values)
    return values


def _sorted(n: int, rng: random.Random) -> list[int]:
    return list(range(n))


def _reversed(n: int, rng: random.Random) -> list[int]:
    return list(range(n - 1, -1, -1))


def _nearly_sorted(n: int, rng: random.Random) -> list[int]:
    values = list(range(n))
    for pair in rng.sample(range(n // 2), n // 10):
        values[2 * pair], values[2 * pair + 1] = values[2 * pair + 1], values[2 * pair]
    return values


def _few_distinct(n: int, rng: random.Random) -> list[int]:
    return [rng.randrange(8) for _ in range(n)]


def _sawtooth(n: int, rng: random.Random) -> list[int]:
    tooth = max(1, math.isqrt(n))
    return [i % tooth for i in range(n)]


def _organ_pipe(n: int, rng: random.Random) -> list[int]:
    return [min(i, n - 1 - i) for i in range(n)]


def _median_of_three(n: int, rng: random.Random) -> list[int]:
    """Musser 1997, "Introspective sorting and selection algorithms", Softw. Pract. Exper. 27:983-993, section
    2.

    His permutation of 2k items, k even, is 1, k+1, 3, k+3, ..., k-1, 2k-1, 2, 4, ..., 2k [from memory]. Other
    sizes are made of it so that the number of comparisons stays a smooth function of n: two items short of
    the next permutation by leaving out its two largest, and one over by a largest item at the end.
    """
    even = n - n % 2
    half = (even + even % 4) // 2
    values = [item for i in range(1, half, 2) for item in (i, half + i)] + list(range(2, 2 * half + 1, 2))
    return [value - 1 for value in values if value <= even] + list(range(even, n))


def adversary_of(sort: Callable[[list[Any]], object]) -> Shape[list[int]]:
    """The shape that is bad for one given comparison sort, found by answering it as unhelpfully as may be.

    `sort` sorts a list in place by comparing its items with <; it is run once on n items at every build. The
    answers leave every item undecided ("gas") for as long as possible and freeze an item only when two
    undecided ones are compared, the one that was last seen as a probable pivot first; the input is read off
    the frozen order. Source: McIlroy 1999, "A killer adversary for quicksort", Softw. Pract. Exper.
    29:341-344. It makes any quicksort that picks its pivot from a fixed number of items quadratic, whatever
    the rule.
    """

    def build(n: int, rng: random.Random) -> list[int]:
        frozen: dict[int, int] = {}
        candidate = -1

        @functools.total_ordering
        class Item:
            def __init__(self, label: int) -> None:
                self.label = label

            def __lt__(self, other: Item) -> bool:
                nonlocal candidate
                a, b = self.label, other.label
                if a not in frozen and b not in frozen and a != b:
                    solid = a if a == candidate else b
                    frozen[solid] = len(frozen)
                if a not in frozen:
                    candidate = a
                elif b not in frozen:
                    candidate = b
                return frozen.get(a, n) < frozen.get(b, n)

            def __eq__(self, other: object) -> bool:
                return isinstance(other, Item) and self.label == other.label

            __hash__ = None  # type: ignore[assignment]  # an item's place changes while it is asked about

        sort([Item(label) for label in range(n)])
        rest = iter(range(len(frozen), n))
        return [frozen[label] if label in frozen else next(rest) for label in range(n)]

    name = getattr(sort, "__name__", type(sort).__name__)
    return Shape(f"adversary_of_{name}", build, "items, a permutation of 0 to n - 1")


# Strings: n characters.


def _one_letter(n: int, rng: random.Random) -> str:
    return "a" * n


def _fibonacci_word(n: int, rng: random.Random) -> str:
    shorter, longer = "a", "ab"
    while len(longer) < n:
        shorter, longer = longer, longer + shorter
    return longer[:n]


def _random_letters(n: int, rng: random.Random) -> str:
    return "".join(rng.choices("abcdefghijklmnopqrstuvwxyz", k=n))


# Graphs: n vertices.


def _graph(n: int, edges: Iterable[tuple[int, int]]) -> Graph:
    graph: Graph = [[] for _ in range(n)]
    for a, b in edges:
        graph[a].append(b)
        graph[b].append(a)
    for neighbours in graph:
        neighbours.sort()
    return graph


def _path(n: int, rng: random.Random) -> Graph:
    return _graph(n, ((v, v + 1) for v in range(n - 1)))


def _star(n: int, rng: random.Random) -> Graph:
    return _graph(n, ((0, v) for v in range(1, n)))


def _grid(n: int, rng: random.Random) -> Graph:
    width = max(1, math.isqrt(n))
    across = ((v, v + 1) for v in range(n - 1) if (v + 1) % width)
    return _graph(n, (*across, *((v, v + width) for v in range(n - width))))


def _complete(n: int, rng: random.Random) -> Graph:
    return [[w for w in range(n) if w != v] for v in range(n)]


def _random_sparse(n: int, rng: random.Random) -> Graph:
    edges = {(rng.randrange(v), v) for v in range(1, n)}
    wanted = min(2 * n - 2, n * (n - 1) // 2)
    while len(edges) < wanted:
        a, b = rng.randrange(n), rng.randrange(n)
        if a != b:
            edges.add((min(a, b), max(a, b)))
    return _graph(n, edges)


def _binary_tree(n: int, rng: random.Random) -> Graph:
    return _graph(n, (((v - 1) // 2, v) for v in range(1, n)))


# Intervals: n pairs, in random order.


def _nested(n: int, rng: random.Random) -> Intervals:
    return _in_random_order([(i, 2 * n - 1 - i) for i in range(n)], rng)


def _disjoint(n: int, rng: random.Random) -> Intervals:
    return _in_random_order([(2 * i, 2 * i + 1) for i in range(n)], rng)


def _all_overlapping(n: int, rng: random.Random) -> Intervals:
    return _in_random_order([(i, n + i) for i in range(n)], rng)


def _in_random_order(intervals: Intervals, rng: random.Random) -> Intervals:
    rng.shuffle(intervals)
    return intervals


SEQUENCES: Final[tuple[Shape[list[int]], ...]] = (
    Shape("shuffled", _shuffled, "items, a random permutation of 0 to n - 1"),
    Shape("sorted", _sorted, "items, 0 to n - 1 ascending"),
    Shape("reversed", _reversed, "items, n - 1 to 0 descending"),
    Shape("nearly_sorted", _nearly_sorted, "items, ascending, n // 10 random pairs of neighbours exchanged"),
    Shape("few_distinct", _few_distinct, "items, drawn at random from 8 values"),
    Shape("sawtooth", _sawtooth, "items, in ascending runs of isqrt(n) items from 0"),
    Shape("organ_pipe", _organ_pipe, "items, ascending to the middle and descending from there"),
    Shape("median_of_three_adversary", _median_of_three, "items, a permutation of 0 to n - 1"),
)
STRINGS: Final[tuple[Shape[str], ...]] = (
    Shape("one_letter", _one_letter, "characters, all the same"),
    Shape("fibonacci_word", _fibonacci_word, "characters, the first n of the infinite word abaababaabaab..."),
    Shape("random_letters", _random_letters, "characters, drawn at random from a to z"),
)
GRAPHS: Final[tuple[Shape[Graph], ...]] = (
    Shape("path", _path, "vertices; n - 1 edges"),
    Shape("star", _star, "vertices, all joined to vertex 0; n - 1 edges"),
    Shape("grid", _grid, "vertices, exactly, in rows of isqrt(n), the last may be short; under 2n edges"),
    Shape("complete", _complete, "vertices; n (n - 1) / 2 edges"),
    Shape("random_sparse", _random_sparse, "vertices, connected; 2n - 2 edges, or all there are when n < 4"),
    Shape("binary_tree", _binary_tree, "vertices, the children of v being 2v + 1 and 2v + 2; n - 1 edges"),
)
INTERVALS: Final[tuple[Shape[Intervals], ...]] = (
    Shape("nested", _nested, "intervals, each inside the next, in random order"),
    Shape("disjoint", _disjoint, "intervals, none touching another, in random order"),
    Shape("all_overlapping", _all_overlapping, "intervals, any two overlapping, none inside another, at random"),
)
SHAPES: Final[dict[str, Shape[Any]]] = {
    shape.name: shape for family in (SEQUENCES, STRINGS, GRAPHS, INTERVALS) for shape in family
}


def shape_named(name: str) -> Shape[Any]:
    """The shape of that name. Raises KeyError with a sentence that names the nearest one where there is none."""
    if name not in SHAPES:
        near = difflib.get_close_matches(name.lower().replace(" ", "_").replace("-", "_"), SHAPES, n=1)
        hint = f" Did you mean {near[0]!r}?" if near else ""
        raise KeyError(f"no shape is named {name!r}.{hint} Known shapes: {', '.join(SHAPES)}.")
    return SHAPES[name]
