"""What memory may add to a cost: the two limits, by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest

from pytest_growthbudget.fitting.allowance import addition, allowance, budgeted_footprints, multiple
from pytest_growthbudget.fitting.excess import Observations, observe
from pytest_growthbudget.measuring.readings import MemoryCurve

MIB = 2.0**20
CURVE = MemoryCurve(
    log_bytes=(math.log(MIB / 8), math.log(MIB), math.log(16 * MIB)),
    log_inflation=(0.0, math.log(1.2), math.log(6.0)),
    extra=(0.0, 2.0, 50.0),
    resident=MIB,
    cheapest=3.0,
)
SIZES = [1000, 4000, 16000, 64000, 256000]


def seen(cost, exponent=1.0) -> Observations:  # type: ignore[no-untyped-def]
    return observe(SIZES, [cost(n) for n in SIZES], lambda n: exponent * math.log(n))


def bytes_each(each: float) -> np.ndarray:  # type: ignore[type-arg]
    return each * np.array(SIZES, dtype=float)


def test_the_multiple_is_read_off_the_curve() -> None:
    at = np.array([1e3, MIB / 8, MIB, 4 * MIB, 16 * MIB, 1e12])
    expected = [1, 1, 1.2, math.sqrt(1.2 * 6), 6, 6]
    assert np.exp(multiple(CURVE, at)).tolist() == pytest.approx(expected)


def test_a_footprint_beyond_the_budget_is_not_allowed_for() -> None:
    """A linear budget whose body holds n² bytes: it may count on memory linear in n only."""
    squares = np.array([float(n) ** 2 for n in SIZES])
    linear = squares[0] * np.array(SIZES) / SIZES[0]
    assert budgeted_footprints(seen(lambda n: n), squares).tolist() == pytest.approx(linear.tolist())
    assert budgeted_footprints(seen(lambda n: n, 2.0), squares).tolist() == pytest.approx(squares.tolist())


def test_a_small_footprint_may_grow_from_32_kib() -> None:
    tiny = np.array([10.0, 1e6, 1e6, 1e6, 1e9])
    grown = 32 * 1024 * np.array(SIZES) / SIZES[0]
    assert budgeted_footprints(seen(lambda n: n), tiny).tolist() == pytest.approx(np.minimum(tiny, grown).tolist())


def test_a_flat_budget_may_still_hold_its_input() -> None:
    footprints = bytes_each(100.0)
    assert budgeted_footprints(seen(lambda n: n, 0.0), footprints).tolist() == pytest.approx(footprints.tolist())


def test_the_addition_is_two_kernels_worth_an_element() -> None:
    """At 16 MiB, which holds 2^18 elements of 64 bytes, a kernel adds 50 ns to each."""
    case = seen(lambda n: 1000.0 * n)
    footprints = np.array([MIB / 8] * 4 + [16 * MIB])
    added = addition(CURVE, case, footprints, footprints)
    share = 2 * 50 * 2**18 / (1000 * 256000)
    assert np.exp(added).tolist() == pytest.approx([1, 1, 1, 1, 1 / (1 - share)])


def test_the_addition_stops_at_twelvefold() -> None:
    footprints = np.array([MIB / 8] * 4 + [16 * MIB])
    added = addition(CURVE, seen(lambda n: 1.0 * n), footprints, footprints)
    assert np.exp(added[-1]) == pytest.approx(12)


def test_a_square_over_a_line_of_memory_may_touch_each_element_n_times() -> None:
    footprints = bytes_each(64.0)
    line = addition(CURVE, seen(lambda n: 10.0 * n * n), footprints, footprints)
    square = addition(CURVE, seen(lambda n: 10.0 * n * n, 2.0), footprints, footprints)
    assert line[-1] < 0.01
    assert square[-1] > math.log(6)


def test_memory_that_grows_as_the_budget_is_touched_once() -> None:
    """A square over a square of memory: the elements are n², each visited once, as in the line over a line."""
    start = 64.0 * np.array(SIZES[:1], dtype=float)
    squares = start * (np.array(SIZES) / SIZES[0]) ** 2
    square = addition(CURVE, seen(lambda n: 100.0 * n * n, 2.0), squares, squares)
    share = 2 * 50 * squares[-1] / 64 / (100.0 * SIZES[-1] ** 2)
    assert square[-1] == pytest.approx(-math.log(1 - share))


def test_a_flat_budget_may_touch_each_element_once() -> None:
    footprints = bytes_each(64.0)
    flat = addition(CURVE, seen(lambda n: 1000.0 * n, 0.0), footprints, footprints)
    line = addition(CURVE, seen(lambda n: 1000.0 * n), footprints, footprints)
    assert flat.tolist() == pytest.approx(line.tolist())


def test_the_allowance_is_the_smaller_and_never_falls() -> None:
    case = seen(lambda n: 100.0 * n)
    footprints = bytes_each(100.0)
    allowed = allowance(CURVE, case, footprints)
    touched = budgeted_footprints(case, footprints)
    assert np.all(allowed <= multiple(CURVE, touched) + 1e-12)
    assert np.all(allowed <= addition(CURVE, case, footprints, touched) + 1e-12)
    assert np.all(np.diff(allowed) >= 0)


def test_an_exponential_budget_stays_finite() -> None:
    n = list(range(100, 2000, 100))
    case = observe(n, [5.0 * size for size in n], lambda size: size * math.log(2), exponential=True)
    assert np.all(np.isfinite(allowance(CURVE, case, 1e4 * np.array(n, dtype=float))))
