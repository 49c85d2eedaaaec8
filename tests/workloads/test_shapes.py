"""Each shape against its own definition, at every small size and at some large ones."""

from __future__ import annotations

import itertools
import math
import random
import sys

import pytest

from pytest_growthbudget.meters.tallies import Tally
from pytest_growthbudget.workloads import shapes

SIZES = [*range(41), 100, 1000, 1001, 1002, 1003]


def rng() -> random.Random:
    return random.Random("harbour")


def named(shape: shapes.Shape) -> str:
    return str(shape)


def quicksort(values: list) -> None:
    """Hoare's partition around the median of first, middle and last; the kind that Musser's permutation is for."""
    stack = [(0, len(values))]
    while stack:
        low, high = stack.pop()
        if high - low < 2:
            continue
        pivot = _median(values[low], values[low + (high - low) // 2], values[high - 1])
        i, j = low, high
        while True:
            while values[i] < pivot:
                i += 1
            j -= 1
            while pivot < values[j]:
                j -= 1
            if i >= j:
                break
            values[i], values[j] = values[j], values[i]
            i += 1
        stack += [(low, i), (i, high)]


def _median(x, y, z):
    if x < y:
        if y < z:
            return y
        return z if x < z else x
    if x < z:
        return x
    return z if y < z else y


def insertion_sort(values: list) -> None:
    for i in range(1, len(values)):
        j = i
        while j and values[j] < values[j - 1]:
            values[j], values[j - 1] = values[j - 1], values[j]
            j -= 1


def comparisons(sort, values: list[int]) -> int:
    tally = Tally()
    keys = tally.keys(values)
    sort(keys)
    assert [tally.unwrap(key) for key in keys] == sorted(values)
    return tally.count("comparisons")


@pytest.mark.parametrize("shape", shapes.SHAPES.values(), ids=named)
def test_a_shape_is_a_function_of_its_size_and_generator_alone(shape):
    for n in SIZES[:45]:
        one = shape(n, rng())
        assert len(one) == n
        assert one == shape(n, rng())


@pytest.mark.parametrize("shape", shapes.SHAPES.values(), ids=named)
def test_a_negative_size_is_refused(shape):
    with pytest.raises(ValueError, match=rf"the shape '{shape}' was asked for -1 items; a size is 0 or more"):
        shape(-1, rng())


def test_names_are_test_ids_and_the_registry_holds_each_family():
    families = (shapes.SEQUENCES, shapes.STRINGS, shapes.GRAPHS, shapes.INTERVALS)
    assert list(shapes.SHAPES.values()) == [shape for family in families for shape in family]
    assert all(name.isidentifier() for name in shapes.SHAPES)
    assert shapes.shape_named("organ_pipe") is shapes.SHAPES["organ_pipe"]


def test_an_unknown_name_is_answered_with_the_nearest():
    with pytest.raises(KeyError) as caught:
        shapes.shape_named("Organ-pipes")
    assert caught.value.args[0].startswith("no shape is named 'Organ-pipes'. Did you mean 'organ_pipe'? Known shapes: ")


def test_building_shapes_needs_no_pytest():
    import subprocess

    code = "import sys, pytest_growthbudget.workloads.shapes; sys.exit('pytest' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


@pytest.mark.parametrize("n", SIZES)
def test_sequences(n):
    build = {shape.name: shape(n, rng()) for shape in shapes.SEQUENCES}
    for name in ("shuffled", "sorted", "reversed", "nearly_sorted", "median_of_three_adversary"):
        assert sorted(build[name]) == list(range(n)), name
    assert build["sorted"] == list(range(n))
    assert build["reversed"] == build["sorted"][::-1]
    moved = [(place, value) for place, value in enumerate(build["nearly_sorted"]) if place != value]
    assert len(moved) == 2 * (n // 10)
    assert all(abs(place - value) == 1 for place, value in moved)
    assert set(build["few_distinct"]) <= set(range(8))
    falls = sum(b < a for a, b in itertools.pairwise(build["sawtooth"]))
    assert n < 4 or falls == math.ceil(n / math.isqrt(n)) - 1
    pipe = build["organ_pipe"]
    assert pipe == pipe[::-1]
    assert pipe[: (n + 1) // 2] == list(range((n + 1) // 2))


def test_a_shuffled_sequence_uses_the_generator():
    assert shapes.SHAPES["shuffled"](50, random.Random(1)) != shapes.SHAPES["shuffled"](50, random.Random(2))


@pytest.mark.parametrize("over", range(4))
def test_the_median_of_three_adversary_is_quadratic_at_every_size(over):
    """About n**2 / 5 comparisons, measured here; that it is quadratic is Musser 1997, section 2 [from memory]."""
    adversary, shuffled = shapes.SHAPES["median_of_three_adversary"], shapes.SHAPES["shuffled"]
    for n in (400 + over, 1600 + over):
        count = comparisons(quicksort, adversary(n, rng()))
        assert 0.19 * n * n < count < 0.22 * n * n
        assert comparisons(quicksort, shuffled(n, rng())) < 2.5 * n * math.log2(n)


def test_an_adversary_of_a_given_sort_is_quadratic_for_it():
    """McIlroy 1999: any quicksort whose pivot is one of a fixed number of items is driven quadratic."""

    def quicksort_middle(values: list) -> None:
        if len(values) > 1:
            pivot = values.pop(len(values) // 2)
            below = [value for value in values if value < pivot]
            above = [value for value in values if not value < pivot]
            quicksort_middle(below)
            quicksort_middle(above)
            values[:] = [*below, pivot, *above]

    for sort in (quicksort, quicksort_middle):
        shape = shapes.adversary_of(sort)
        assert str(shape) == f"adversary_of_{sort.__name__}"
        worst, usual = shape(300, rng()), shapes.SHAPES["shuffled"](300, rng())
        assert sorted(worst) == list(range(300))
        assert comparisons(sort, worst) > 300 * 300 / 6
        assert comparisons(sort, worst) > 3 * comparisons(sort, usual)


def test_an_adversary_cannot_make_a_merge_sort_quadratic():
    worst = shapes.adversary_of(list.sort)(1000, rng())
    assert sorted(worst) == list(range(1000))
    assert comparisons(list.sort, worst) < 1000 * math.log2(1000)


def test_insertion_sort_tells_the_shapes_apart():
    count = {shape.name: comparisons(insertion_sort, shape(200, rng())) for shape in shapes.SEQUENCES}
    assert count["sorted"] == 199
    assert count["nearly_sorted"] <= 199 + 2 * 20
    assert count["reversed"] == 200 * 199 // 2
    assert count["shuffled"] > 200 * 199 / 6


@pytest.mark.parametrize("n", SIZES)
def test_strings(n):
    build = {shape.name: shape(n, rng()) for shape in shapes.STRINGS}
    assert build["one_letter"] == "a" * n
    word = "a"
    while len(word) < n:  # the fixed point of a -> ab, b -> a: Lothaire, Algebraic Combinatorics on Words, 1.2.3
        word = "".join({"a": "ab", "b": "a"}[letter] for letter in word)
    assert build["fibonacci_word"] == word[:n]
    assert set(build["random_letters"]) <= set("abcdefghijklmnopqrstuvwxyz")


def edges(graph: list[list[int]]) -> set[tuple[int, int]]:
    for vertex, neighbours in enumerate(graph):
        assert neighbours == sorted(set(neighbours))
        assert vertex not in neighbours
        assert all(vertex in graph[other] for other in neighbours)
    return {(a, b) for a, neighbours in enumerate(graph) for b in neighbours if a < b}


def reached(graph: list[list[int]]) -> int:
    seen, waiting = {0}, [0]
    while waiting:
        for other in graph[waiting.pop()]:
            if other not in seen:
                seen.add(other)
                waiting.append(other)
    return len(seen)


@pytest.mark.parametrize("n", [*SIZES[1:41], 100])
def test_graphs(n):
    build = {shape.name: shape(n, rng()) for shape in shapes.GRAPHS}
    count = {name: len(edges(graph)) for name, graph in build.items()}
    assert count["path"] == count["star"] == count["binary_tree"] == n - 1
    assert count["complete"] == n * (n - 1) // 2
    assert count["random_sparse"] == min(2 * n - 2, n * (n - 1) // 2)
    width = math.isqrt(n)
    rows = [range(first, min(first + width, n)) for first in range(0, n, width)]
    assert count["grid"] == sum(len(row) - 1 for row in rows) + sum(len(row) for row in rows[1:]) <= 2 * n
    assert all(reached(graph) == n for graph in build.values())
    assert sorted(map(len, build["star"])) == [1] * (n - 1) + [n - 1]
    assert max(map(len, build["path"])) <= 2
    assert max(map(len, build["binary_tree"])) <= 3
    assert max(map(len, build["grid"])) <= 4


@pytest.mark.parametrize("n", [*SIZES[:41], 100])
def test_intervals(n):
    build = {shape.name: shape(n, rng()) for shape in shapes.INTERVALS}
    assert all(low < high for intervals in build.values() for low, high in intervals)
    for name, (overlap, inside) in {
        "nested": (True, True), "disjoint": (False, False), "all_overlapping": (True, False),
    }.items():  # fmt: skip
        for (a, b), (c, d) in itertools.combinations(build[name], 2):
            assert (max(a, c) <= min(b, d)) is overlap
            assert ((a < c and d < b) or (c < a and b < d)) is inside


def test_a_failing_test_names_its_shape(pytester):
    """The use that the module is for: one marker, one fixture with parameters, one test a shape."""
    pytester.makepyfile(
        """
        import random
        import pytest
        from pytest_growthbudget.workloads import shapes

        @pytest.fixture(params=shapes.SEQUENCES, ids=str)
        def manifest(request):
            return request.param(8, random.Random(1))

        def test_crates_arrive_in_order(manifest):
            assert manifest == sorted(manifest)
        """
    )
    result = pytester.runpytest_subprocess("-q", "-p", "no:cacheprovider")
    result.assert_outcomes(passed=2, failed=6)
    result.stdout.fnmatch_lines(["FAILED *::test_crates_arrive_in_order?organ_pipe?*"])
