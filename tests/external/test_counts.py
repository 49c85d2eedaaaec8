"""Exact counts and documented growth, read with this package's own meters and held against their sources.

Every source is cited beside its check; "[from memory]" marks what was not looked up.
"""

from __future__ import annotations

import bisect
import heapq
import itertools
import math
import random
from collections.abc import Callable, Iterator

import numpy as np
import pytest
import scipy.cluster.hierarchy
import scipy.sparse.csgraph

from pytest_growthbudget.meters.memory import PeakMemory
from pytest_growthbudget.meters.registry import meter_for
from pytest_growthbudget.meters.steps import Steps
from pytest_growthbudget.meters.tallies import Tally

WORD = 8  # bytes of a pointer, and of a float64


def comparisons(algorithm: Callable[[list], object], values: list) -> int:
    return tallied("comparisons", lambda tally: tally.keys(values), algorithm)


def tallied(name: str, workload: Callable[[Tally], object], body: Callable[..., object]) -> int:
    """One reading of `tally:NAME`, the workload built before it."""
    tally = Tally()
    meter = meter_for(f"tally:{name}", tally=tally)
    built = workload(tally)
    meter.start()
    body(built)
    return int(meter.stop())


def peak(body: Callable[[], object]) -> float:
    body()
    meter = PeakMemory()
    meter.start()
    body()
    return meter.stop()


def shuffled(n: int, seed: int) -> list[int]:
    values = list(range(n))
    random.Random(seed).shuffle(values)
    return values


class TestSorting:
    @pytest.mark.parametrize("n", [10, 100, 1000, 4096])
    def test_sorted_takes_n_minus_1_comparisons_where_there_is_one_run(self, n):
        """CPython, Objects/listsort.txt: "as few as N-1" comparisons; ascending, descending and all equal."""
        for values in (list(range(n)), list(range(n, 0, -1)), [7] * n):
            assert comparisons(sorted, values) == n - 1

    @pytest.mark.parametrize(("n", "log2_factorial"), [(1000, 8530), (10_000, 118_459)])
    def test_sorted_of_random_input_is_about_one_per_cent_above_the_least_possible(self, n, log2_factorial):
        """Objects/listsort.txt's table: 1 % above lg n! at 2**15 to 2**20 items; 8,625 at n = 1000 (measured, 3.11).

        The least that any comparison sort needs on average is about lg n!: Knuth, TAOCP 3, 5.3.1 [from memory].
        """
        assert math.ceil(math.lgamma(n + 1) / math.log(2)) == log2_factorial
        counts = [comparisons(sorted, shuffled(n, seed)) for seed in range(5)]
        assert log2_factorial < sum(counts) / len(counts) < 1.02 * log2_factorial

    @pytest.mark.parametrize("n", [2, 3, 5, 8, 13, 100, 1000, 1024, 1500])
    def test_the_worst_case_of_merge_sort_is_attained(self, n):
        """W(n) = W(floor n/2) + W(ceil n/2) + n - 1 = n ceil(lg n) - 2**ceil(lg n) + 1: a textbook's exercise
        (Knuth, TAOCP 3, 5.2.4 [from memory]); recurrence and formula agree, and an input built by un-merging
        takes that many: 8,977 at n = 1000, 9,217 at 1024, 14,453 at 1500.
        """
        levels = math.ceil(math.log2(n))
        worst = n * levels - 2**levels + 1
        assert worst == {1000: 8977, 1024: 9217, 1500: 14453}.get(n, worst)
        assert merge_sort_recurrence(n) == worst
        assert merge_sort(worst_for_merge_sort(list(range(n)))) == list(range(n))
        assert comparisons(merge_sort, worst_for_merge_sort(list(range(n)))) == worst
        assert comparisons(merge_sort, shuffled(n, 3)) <= worst

    @pytest.mark.parametrize(("n", "count"), [(10, 45), (100, 4950), (500, 124_750)])
    def test_insertion_sort_of_reversed_input(self, n, count):
        """n (n - 1) / 2: every item meets every smaller one. Common knowledge; Knuth, TAOCP 3, 5.2.1 [from memory]."""
        assert n * (n - 1) // 2 == count
        assert comparisons(insertion_sort, list(range(n, 0, -1))) == count
        assert comparisons(insertion_sort, list(range(n))) == n - 1

    def test_selection_sort_takes_the_same_for_every_input(self):
        """n (n - 1) / 2, whatever the order [from memory]."""
        for values in (list(range(60)), shuffled(60, 1), [1] * 60):
            assert comparisons(selection_sort, values) == 60 * 59 // 2

    def test_quicksort_with_a_random_pivot(self):
        """2 (n + 1) H_n - 4 n expected comparisons [from memory]: 10,986 at n = 1000; a run strays by about 0.65 n."""
        n = 1000
        expected = 2 * (n + 1) * sum(1 / k for k in range(1, n + 1)) - 4 * n
        assert round(expected) == 10_986
        counts = [comparisons(lambda keys: quicksort(keys, random.Random(1)), shuffled(n, seed)) for seed in range(20)]
        assert abs(sum(counts) / 20 - expected) < 4 * 0.65 * n / math.sqrt(20)


def insertion_sort(values: list) -> None:
    for i in range(1, len(values)):
        for j in range(i, 0, -1):
            if not values[j] < values[j - 1]:
                break
            values[j], values[j - 1] = values[j - 1], values[j]


def selection_sort(values: list) -> None:
    for i in range(len(values)):
        least = i
        for j in range(i + 1, len(values)):
            if values[j] < values[least]:
                least = j
        values[i], values[least] = values[least], values[i]


def quicksort(values: list, rng: random.Random) -> list:
    if len(values) < 2:
        return values
    pivot = values.pop(rng.randrange(len(values)))
    below, above = [], []
    for value in values:
        (below if value < pivot else above).append(value)
    return [*quicksort(below, rng), pivot, *quicksort(above, rng)]


def merge_sort(values: list) -> list:
    if len(values) < 2:
        return values
    half = len(values) // 2
    left, right = merge_sort(values[:half]), merge_sort(values[half:])
    merged = []
    i = j = 0
    while i < len(left) and j < len(right):
        if right[j] < left[i]:
            merged.append(right[j])
            j += 1
        else:
            merged.append(left[i])
            i += 1
    return [*merged, *left[i:], *right[j:]]


def merge_sort_recurrence(n: int) -> int:
    return 0 if n < 2 else merge_sort_recurrence(n // 2) + merge_sort_recurrence(n - n // 2) + n - 1


def worst_for_merge_sort(ordered: list[int]) -> list[int]:
    """Un-merge: deal the items out in turn, so that the last two items of each merge come from different halves."""
    if len(ordered) < 2:
        return ordered
    return worst_for_merge_sort(ordered[1::2]) + worst_for_merge_sort(ordered[0::2])


class TestSearchingAndHeaps:
    @pytest.mark.parametrize(("n", "most"), [(1, 1), (7, 3), (8, 4), (1000, 10), (1023, 10), (1024, 11)])
    def test_bisection_takes_floor_lg_n_plus_1(self, n, most):
        """Knuth, TAOCP 3, 6.2.1, theorem B [from memory]: at most floor(lg n) + 1, and some search takes that many."""
        assert math.floor(math.log2(n)) + 1 == most
        tally = Tally()
        keys = tally.keys(range(0, 2 * n, 2))
        meter = meter_for("tally:comparisons", tally=tally)
        counts = []
        for target in range(-1, 2 * n + 1):
            meter.start()
            bisect.bisect_left(keys, target)
            counts.append(meter.stop())
        assert max(counts) == most

    @pytest.mark.parametrize("n", [10, 1000, 4096])
    def test_heapify_takes_fewer_than_2n(self, n):
        """Linear (CPython, Doc/library/heapq.rst); fewer than 2 n comparisons (Floyd 1964 [from memory])."""
        for values in (list(range(n)), list(range(n, 0, -1)), *(shuffled(n, seed) for seed in range(5))):
            assert comparisons(heapq.heapify, values) < 2 * n

    def test_a_heap_of_a_thousand_random_items(self):
        """Lib/heapq.py's comments: heapify 1,659 to 1,663 comparisons, 1000 pops 8,678 to 8,703.

        Those are a few runs; the bands here are wider by what five other seeds may differ.
        """
        for seed in range(5):
            assert 1600 < comparisons(heapq.heapify, shuffled(1000, seed)) < 1720
            popped = tallied("comparisons", lambda tally, seed=seed: heap(tally.keys(shuffled(1000, seed))), pop_all)
            assert 8600 < popped < 8780

    def test_the_expected_search_in_a_list_is_linear(self):
        """docs.python.org, "Time complexity of operations on built-in types": `x in s` is O(n) for a list."""
        for n in (10, 100, 1000):
            assert tallied("equalities", lambda tally, n=n: tally.keys(range(n)), lambda keys, n=n: -1 in keys) == n

    def test_a_dict_whose_hashes_are_all_equal_is_quadratic_to_fill(self):
        """The same page: dict and set operations are O(n) each "when all hashes are equal"."""

        class Berth:
            def __hash__(self) -> int:
                return 1

        for n in (20, 40):
            filled = tallied("equalities", lambda tally, n=n: tally.keys(Berth() for _ in range(n)), set)
            assert n * (n - 1) // 2 <= filled <= n * n
        distinct = tallied("hashes", lambda tally: tally.keys(range(500)), set)
        assert distinct == 500


def heap(values: list) -> list:
    heapq.heapify(values)
    return values


def pop_all(values: list) -> None:
    while values:
        heapq.heappop(values)


class TestRecursion:
    @pytest.mark.parametrize("discs", range(11))
    def test_the_towers_of_hanoi_take_2_to_the_n_minus_1_moves(self, discs):
        """Lucas 1883 [from memory]; H(n) = 2 H(n - 1) + 1."""

        def move(tally: Tally, n: int) -> None:
            tally.add("moves", 0)
            if n:
                move(tally, n - 1)
                tally.add("moves")
                move(tally, n - 1)

        assert tallied("moves", lambda tally: tally, lambda tally: move(tally, discs)) == 2**discs - 1

    @pytest.mark.parametrize("n", range(1, 17))
    def test_naive_fibonacci_takes_2_f_of_n_plus_1_minus_1_calls(self, n):
        """C(n) = C(n-1) + C(n-2) + 1 with C(1) = C(2) = 1 is 2 F(n) - 1; with C(0) = C(1) = 1 it is 2 F(n+1) - 1,
        F(1) = F(2) = 1 [from memory]. This one stops at 0 and 1.
        """

        def fibonacci(tally: Tally, k: int) -> int:
            tally.add("calls")
            return k if k < 2 else fibonacci(tally, k - 1) + fibonacci(tally, k - 2)

        following = next(itertools.islice(fibonacci_numbers(), n, None))
        assert tallied("calls", lambda tally: tally, lambda tally: fibonacci(tally, n)) == 2 * following - 1

    def test_steps_see_the_same_calls(self):
        """The count of steps is a fixed multiple of the number of calls above, plus a constant."""

        def fibonacci(k: int) -> int:
            if k < 2:
                return k
            return fibonacci(k - 1) + fibonacci(k - 2)

        meter, numbers = Steps(), list(itertools.islice(fibonacci_numbers(), 20))
        counts = []
        for n in range(2, 15):
            meter.start()
            fibonacci(n)
            counts.append(meter.stop())
        # Entered and two lines a call, whether it recurses or not.
        assert {count - 3 * (2 * numbers[n] - 1) for n, count in enumerate(counts, 2)} == {2.0}

    def test_euclid_divides_at_most_five_times_the_digits(self):
        """Lame 1844 [from memory]: at most 5 times the number of digits of the smaller number."""

        def gcd(tally: Tally, a: int, b: int) -> int:
            while b:
                tally.add("divisions")
                a, b = b, a % b
            return a

        rng = random.Random(7)
        for _ in range(200):
            a, b = rng.randrange(1, 10**9), rng.randrange(1, 10 ** rng.randrange(1, 9))
            divisions = tallied(
                "divisions", lambda tally: tally, lambda tally, a=a, b=b: gcd(tally, max(a, b), min(a, b))
            )
            assert divisions <= 5 * len(str(min(a, b)))
        low, high = itertools.islice(fibonacci_numbers(), 39, 41)
        assert tallied("divisions", lambda tally: tally, lambda tally: gcd(tally, high, low)) == 39


def fibonacci_numbers() -> Iterator[int]:
    """F(1), F(2), ... = 1, 1, 2, 3, ..."""
    a, b = 1, 1
    while True:
        yield a
        a, b = b, a + b


class TestMemory:
    @pytest.mark.parametrize("n", [1, 8, 9, 100, 1000, 4096, 100_000])
    def test_a_list_over_allocates_by_an_eighth_and_six(self, n):
        """CPython, Objects/listobject.c, list_resize: room for n + n / 8 + 6 items, in steps of 4 pointers at most."""

        def grow() -> list:
            crates: list = []
            for _ in itertools.repeat(None, n):
                crates.append(None)  # noqa: PERF401
            return crates

        # 64 words: the list's header, the iterator, and (on Python 3.10) the frame.
        assert n <= peak(grow) / WORD <= 1.125 * n + 6 + 64

    @pytest.mark.parametrize("n", [1000, 10_000])
    def test_sorting_a_list_takes_at_most_half_of_it_beside(self, n):
        """Objects/listsort.txt: temporary memory of at most n / 2 pointers; none where there is nothing to merge."""
        workload = shuffled(n, 2)

        def sort_copy() -> list:
            copy = workload[:]
            copy.sort()
            return copy

        beside = peak(sort_copy) - peak(lambda: workload[:])
        assert 0.2 * n * WORD < beside <= 0.5 * n * WORD + 500
        ordered = list(range(n))
        assert peak(lambda: ordered.sort()) < 500

    def test_linkage_takes_quadratic_memory(self):
        """scipy, cluster.hierarchy.linkage: "requires O(n^2) memory"; the condensed distances are n (n - 1) / 2."""
        rng = np.random.default_rng(3)
        sizes = (100, 200, 400)
        points = {n: rng.random((n, 2)) for n in sizes}
        peaks = [peak(lambda n=n: scipy.cluster.hierarchy.linkage(points[n], "average")) for n in sizes]
        assert all(read >= n * (n - 1) / 2 * WORD for n, read in zip(sizes, peaks, strict=True))
        assert math.log2(peaks[2] / peaks[1]) == pytest.approx(2, abs=0.1)

    def test_floyd_warshall_takes_quadratic_memory(self):
        """networkx, floyd_warshall_numpy and kin: O(n^2) space; scipy's returns the n x n matrix of distances."""
        # From 256 KiB on, numpy reuses the memory of temporary arrays, so smaller ones take more an entry.
        sizes = (200, 283, 400)
        graphs = {n: np.triu(np.ones((n, n))) for n in sizes}
        peaks = [peak(lambda n=n: scipy.sparse.csgraph.floyd_warshall(graphs[n])) for n in sizes]
        assert all(read >= n * n * WORD for n, read in zip(sizes, peaks, strict=True))
        assert math.log2(peaks[2] / peaks[0]) == pytest.approx(2, abs=0.02)

    def test_an_outer_product_takes_n_squared_and_an_inner_one_next_to_nothing(self):
        """numpy.outer returns an array of shape (M, N); numpy.dot of two vectors a scalar."""
        tide = {n: np.ones(n) for n in (200, 400)}
        small, large = (peak(lambda v=v: np.outer(v, v)) for v in (tide[200], tide[400]))
        assert large - small == pytest.approx((400**2 - 200**2) * WORD, rel=0.01)
        assert peak(lambda: np.dot(tide[400], tide[400])) < 500
