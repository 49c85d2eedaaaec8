"""Readings put together: quartiles, order, footprints, and an allowance that is computed only when needed."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pytest_growthbudget.fitting.evidence import Evidence, gather, lower_quartile
from pytest_growthbudget.measuring.readings import MemoryCurve, Promise, Series

PROMISE = Promise(log_growth=math.log)


def unwanted() -> MemoryCurve:
    raise AssertionError("the memory curve was asked for without need")


def gathered(*several: Series, touched: dict[int, float] | None = None, curve=unwanted) -> Evidence:  # type: ignore[no-untyped-def]
    found = gather(PROMISE, touched or {}, several, curve, 0.01)
    assert found is not None
    return found


@given(st.lists(st.floats(0.1, 1e9), min_size=1, max_size=25))
def test_the_lower_quartile_is_numpys(read: list[float]) -> None:
    assert lower_quartile(read) == pytest.approx(float(np.quantile(read, 0.25)))


def test_series_are_merged_by_size() -> None:
    found = gathered(
        Series(sizes=(10, 20), costs=((4.0, 2.0), (8.0,))), Series(sizes=(5, 20), costs=((1.0,), (8.0, 8.0)))
    )
    assert found.seen.sizes.tolist() == [5, 10, 20]
    assert found.counts == (1, 2, 3)
    assert found.seen.costs.tolist() == [1.0, 2.5, 8.0]


def test_sizes_without_a_positive_cost_are_left_out() -> None:
    found = gathered(Series(sizes=(5, 10, 20), costs=((0.0, 0.0), (), (3.0,))))
    assert found.seen.sizes.tolist() == [20]
    assert gather(PROMISE, {}, [Series(sizes=(5,), costs=((0.0,),))], unwanted, 0.01) is None
    assert gather(PROMISE, {}, [], unwanted, 0.01) is None


def test_rows_are_plain_numbers_with_footprints() -> None:
    found = gathered(Series(sizes=(5, 10), costs=((1.0,), (2.0, 2.0))), touched={5: 100.0, 10: 200.0})
    assert [(row.size, row.cost, row.readings, row.footprint) for row in found.rows()] == [
        (5, 1.0, 1, 100.0),
        (10, 2.0, 2, 200.0),
    ]
    assert all(type(row.size) is int and type(row.footprint) is float for row in found.rows())


def test_a_window_has_its_part_of_the_whole_allowance() -> None:
    curve = MemoryCurve(
        log_bytes=(math.log(2**17), math.log(2**24)),
        log_inflation=(0.0, 2.0),
        extra=(0.0, 100.0),
        resident=2.0**20,
        cheapest=3.0,
    )
    sizes = tuple(2**k for k in range(10, 20))
    series = Series(sizes=sizes, costs=tuple((20.0 * n,) for n in sizes))
    whole = gathered(series, touched={n: 64.0 * n for n in sizes}, curve=lambda: curve)
    assert whole.allowed is not None
    assert whole.last(4).allowed is not None
    assert whole.last(4).allowed.tolist() == whole.allowed[-4:].tolist()
    assert (whole.last(4).seen.sizes.tolist(), whole.last(4).counts) == (list(sizes[-4:]), (1,) * 4)
    assert whole.last(99).seen.sizes.tolist() == list(sizes)
    assert whole.last(4).footprint == 64.0 * sizes[-1]
    assert whole.up_to(64.0 * 2**14).seen.sizes.tolist() == list(sizes[:5])
    assert len(whole.up_to(1.0)) == 0


def test_the_curve_is_not_asked_for_by_looking_at_the_plain_fit() -> None:
    sizes = tuple(2**k for k in range(10, 20))
    series = Series(sizes=sizes, costs=tuple((20.0 * n,) for n in sizes))
    found = gathered(series, touched={n: 64.0 * n for n in sizes})
    assert found.plain.delta.interval().estimate == pytest.approx(0, abs=0.01)
    with pytest.raises(AssertionError, match="without need"):
        _ = found.deflated


def test_unknown_footprints_have_no_allowance() -> None:
    sizes = tuple(2**k for k in range(10, 20))
    found = gathered(Series(sizes=sizes, costs=tuple((20.0 * n,) for n in sizes)))
    assert found.allowed is None
    assert found.last(6).allowed is None
    assert found.deflated is None


def test_a_footprint_known_from_some_size_on_is_unknown_below() -> None:
    found = gathered(Series(sizes=(5, 10), costs=((1.0,), (2.0,))), touched={10: 200.0})
    assert found.footprints.tolist() == [0.0, 200.0]
    assert found.allowed is None
