"""Audits against the theory of the algorithms: counts of calls that have closed forms, and mean splits.

Each expected figure stands beside its source; [from memory] where the source was not at hand.
"""

from __future__ import annotations

import math
import random
import sys
from collections.abc import Iterator

import numpy as np
import pytest

from pytest_growthbudget.auditing.observed import observe_terms
from pytest_growthbudget.auditing.pattern import Pattern, pattern
from pytest_growthbudget.auditing.toll import toll_of, work_by_size
from tests.auditing.examples import between, factors, matrices
from tests.auditing.made import recorded
from tests.auditing.recursions.others import fibonacci, hanoi, search
from tests.auditing.recursions.products import karatsuba, strassen
from tests.auditing.recursions.sorting import (
    insertion_merge_sort,
    merge_sort,
    merge_sort_in_place,
    quickselect,
    quicksort,
    quicksort_first,
    quicksort_uneven,
    select,
)


@pytest.fixture(autouse=True)
def no_tracer() -> Iterator[None]:
    """Run this file as in a session without a tracer, also when the session has one."""
    held = sys.gettrace() if sys.version_info < (3, 12) else None
    if held is not None:
        sys.settrace(None)
    yield
    if held is not None:
        sys.settrace(held)


def seen(*args: object, **keywords: object) -> Pattern:
    found = pattern(recorded(*args, **keywords))  # type: ignore[arg-type]
    assert found is not None
    return found


# ------------------------------------------------------------------ how many calls


@pytest.mark.parametrize("n", [2, 17, 100, 1000])
def test_merge_sort_makes_2n_minus_1_calls_to_a_depth_of_log_n(n: int) -> None:
    """A binary tree with n leaves has n - 1 inner nodes; halving to ceilings gives depth ceil(lg n) (Knuth, TAOCP 1,
    section 2.3.4.5 [from memory]).
    """
    calls = recorded(merge_sort, (random.Random(n).sample(range(n), n),))
    (run,) = calls.runs
    assert run.calls == 2 * n - 1
    assert run.depth == math.ceil(math.log2(n)) + 1


@pytest.mark.parametrize("discs", [1, 5, 10])
def test_hanoi_makes_2_to_the_n_minus_1_moves(discs: int) -> None:
    """2^n - 1 moves (Graham, Knuth and Patashnik, Concrete Mathematics, section 1.1 [from memory]): one a dividing
    call, and 2^n calls that find no disc.
    """
    calls = recorded(hanoi, (discs, list(range(discs)), [], []))
    assert len(calls) == 2 ** (discs + 1) - 1
    found = pattern(calls)
    assert found is not None
    assert found.dividing == 2**discs - 1


@pytest.mark.parametrize("n", [2, 8, 19])
def test_naive_fibonacci_makes_nearly_twice_its_next_number_of_calls(n: int) -> None:
    """C(n) = C(n-1) + C(n-2) + 1 with C(0) = C(1) = 1 gives C(n) = 2 F(n+1) - 1, by induction."""
    numbers = [0, 1]
    while len(numbers) < n + 2:
        numbers.append(numbers[-1] + numbers[-2])
    assert len(recorded(fibonacci, (n,))) == 2 * numbers[n + 1] - 1


@pytest.mark.parametrize("levels", [1, 4, 7])
def test_karatsuba_multiplies_3_to_the_k_pairs_of_digits(levels: int) -> None:
    """n^lg 3 products for n = 2^k (Karatsuba and Ofman 1962; Knuth, TAOCP 2, section 4.3.3 [from memory])."""
    calls = recorded(karatsuba, tuple(factors(2**levels)(random.Random(1))))
    assert int((calls.size == 1).sum()) == 3**levels
    assert len(calls) == (3 ** (levels + 1) - 1) // 2


@pytest.mark.parametrize("levels", [1, 3])
def test_strassen_multiplies_7_to_the_k_blocks(levels: int) -> None:
    """Seven products of halves (Strassen 1969, Numerische Mathematik 13:354-356 [from memory])."""
    calls = recorded(strassen, tuple(matrices(8 * 2**levels)(random.Random(1))))
    assert int((calls.size == 8).sum()) == 7**levels


def test_binary_search_looks_at_most_floor_lg_n_plus_1_times() -> None:
    """Knuth, TAOCP 3, section 6.2.1, theorem B [from memory]; one call more finds nothing left."""
    n = 1000
    depths = [
        recorded(search, (list(range(n)), wanted, 0, n), size_of=between).runs[0].depth for wanted in range(0, n, 37)
    ]
    assert max(depths) <= math.floor(math.log2(n)) + 2
    assert min(depths) >= math.floor(math.log2(n + 1)) + 1


# ------------------------------------------------------------------ how they split


def test_the_larger_part_of_random_quicksort_is_three_quarters_on_average() -> None:
    """The pivot's rank is uniform (Hoare 1962, Computer Journal 5:10-16 [from memory]), so the larger part is uniform
    between a half and the whole: mean 3/4, standard deviation 1/(4 sqrt 3).
    """
    rng = random.Random(8)
    found = seen(quicksort, *[(rng.sample(range(2000), 2000), rng) for _ in range(5)])
    large, small = found.parts
    error = 1 / (4 * math.sqrt(3)) / math.sqrt(found.looked_at)
    assert large.ratio.mean == pytest.approx(0.75, abs=4 * error + 1 / found.from_size)
    assert small.ratio.mean == pytest.approx(0.25, abs=4 * error + 1 / found.from_size)
    assert found.partition
    # 90 per cent of a uniform variable between 1/2 and 1.
    assert large.ratio.low == pytest.approx(0.525, abs=0.02)
    assert large.ratio.high == pytest.approx(0.975, abs=0.02)


def test_quicksort_on_sorted_input_takes_one_item_off() -> None:
    """The worst case of a pivot at the end (Sedgewick 1977, Acta Informatica 7:327-355 [from memory])."""
    found = seen(quicksort_first, (list(range(300)),))
    assert [term.text for term in observe_terms(found)] == ["T(n - 1)"]
    assert found.depth == 300


def test_a_split_of_99_to_1_is_as_deep_as_its_logarithm() -> None:
    """Depth log n to the base 100/99, while the cost stays Θ(n log n) (Cormen, Leiserson, Rivest and Stein,
    Introduction to Algorithms, section 7.2 "Balanced partitioning", there with 9 to 1 [from memory]).
    """
    n = 4000
    found = seen(quicksort_uneven, (random.Random(3).sample(range(n), n), 0))
    assert found.parts[0].value.mean == pytest.approx(0.99, abs=1e-3)
    # Below 100 items nothing is cut off but the pivot: these levels are at most a hundred.
    assert math.log(n / 100, 100 / 99) * 0.85 < found.depth < math.log(n / 100, 100 / 99) + 100


def test_random_quickselect_of_a_random_rank_keeps_two_thirds_on_average() -> None:
    """With pivot and rank uniform the rank lies in the lower part, of share x, with probability x: the mean share kept
    is the integral of x² + (1-x)² over 0..1, which is 2/3.
    """
    rng = random.Random(6)
    found = seen(quickselect, *[(rng.sample(range(3000), 3000), rng.randrange(3000), rng) for _ in range(60)])
    error = 0.24 / math.sqrt(found.looked_at)
    assert found.parts[0].ratio.mean == pytest.approx(2 / 3, abs=4 * error + 1 / found.from_size)


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_median_of_medians_takes_a_fifth_and_at_most_seven_tenths(seed: int) -> None:
    """Blum, Floyd, Pratt, Rivest and Tarjan 1973, J. Computer and System Sciences 7:448-461 [from memory]: the medians
    are n/5 items, and at least 3n/10 - 6 lie on either side of their median.
    """
    n = 20000
    calls = recorded(select, (random.Random(seed).sample(range(n), n), n // 2))
    parents = calls.parent[calls.parent >= 0]
    larger_bound = 0.7 * calls.size[parents] + 6
    child = calls.size[calls.parent >= 0]
    assert (child <= larger_bound).all()
    found = pattern(calls)
    assert found is not None
    medians = [part for part in found.parts if part.fixed]
    assert [part.value.mean for part in medians] == pytest.approx([0.2], abs=1e-3)
    assert sum(part.value.mean for part in found.parts) < 0.9


# ------------------------------------------------------------------ what a call does itself


def test_insertion_of_half_into_half_is_quadratic() -> None:
    """The i-th of n/2 sorted items passes the i before it and on average i of the other half: n²/4 turns of the inner
    loop in all, 2 steps each.
    """
    calls = recorded(insertion_merge_sort, (random.Random(5).sample(range(1024), 1024),))
    turns = float(calls.own[0]) / 2
    assert turns == pytest.approx(1024**2 / 4, rel=0.1)
    toll = toll_of(work_by_size(calls, "steps"))
    assert toll is not None
    assert toll.exponent.low < 2 < toll.exponent.high + 0.05


def test_a_merge_is_linear() -> None:
    """At most n - 1 comparisons a merge (Knuth, TAOCP 3, section 5.2.4 [from memory]), 4 steps each."""
    calls = recorded(merge_sort_in_place, (random.Random(5).sample(range(4096), 4096), 0, 4096), size_of=between)
    work = work_by_size(calls, "steps")
    assert np.all(work.work <= 4 * work.sizes + 20)
    toll = toll_of(work)
    assert toll is not None
    assert toll.exponent.estimate == pytest.approx(1, abs=0.03)
