"""Linear bodies in numpy: streaming, gathering, and those whose overhead hides the growth for long."""

from __future__ import annotations

import random
from typing import Any

import numpy as np

from .entry import LINEAR, Shelf
from .inputs import Arguments, array, bulk, two_arrays

shelf = Shelf()
LONG = 8_000_000


@shelf.add(
    LINEAR,
    array,
    expected=lambda values: sum(values.tolist()),
    tags="numpy fast streaming",
    reusable=True,
    largest=LONG,
)
def sum_array(values: Any) -> float:
    return float(values.sum())


def array_and_order(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.random(n), draw.permutation(n)


@shelf.add(
    LINEAR,
    array_and_order,
    expected=lambda values, order: [values[i] for i in order],
    tags="numpy cache gather",
    reusable=True,
    largest=LONG,
)
def gather(values: Any, order: Any) -> Any:
    return values[order]


@shelf.add(
    LINEAR,
    array_and_order,
    expected=lambda values, order: dict(zip(order.tolist(), values.tolist(), strict=True)).get(0),
    tags="numpy cache gather",
    reusable=True,
    largest=LONG,
)
def scatter(values: Any, order: Any) -> float:
    placed = np.empty_like(values)
    placed[order] = values
    return float(placed[0])


@shelf.add(
    LINEAR,
    two_arrays,
    expected=lambda one, other: [a * 2 + b for a, b in zip(one, other, strict=True)],
    tags="numpy streaming allocator",
    reusable=True,
    largest=LONG,
)
def scale_and_add(one: Any, other: Any) -> Any:
    return one * 2.0 + other


@shelf.add(
    LINEAR,
    array,
    expected=lambda values: np.array([values[: i + 1].sum() for i in range(len(values))]),
    tags="numpy streaming",
    reusable=True,
    largest=LONG,
)
def cumulative_sum(values: Any) -> Any:
    return np.cumsum(values)


@shelf.add(
    LINEAR,
    array,
    expected=lambda values: [value for value in values if value > 0.5],
    tags="numpy branchy allocator",
    reusable=True,
    largest=LONG,
)
def keep_above_half(values: Any) -> Any:
    return values[values > 0.5]


@shelf.add(
    LINEAR,
    lambda n, rng: (bulk(rng).integers(0, 100, n),),
    expected=lambda v: [int((v == i).sum()) for i in range(100)],
    tags="numpy",
    reusable=True,
    largest=LONG,
)
def count_codes(codes: Any) -> Any:
    return np.bincount(codes, minlength=100)


@shelf.add(
    LINEAR,
    array,
    expected=lambda values: sorted(values)[len(values) // 2],
    tags="numpy random",
    reusable=True,
    largest=LONG,
)
def middle_by_partition(values: Any) -> float:
    middle = len(values) // 2
    return float(np.partition(values, middle)[middle])


@shelf.add(
    LINEAR,
    array,
    expected=lambda v: [0.25 * a + 0.5 * b + 0.25 * c for a, b, c in zip(v, v[1:], v[2:], strict=False)],
    tags="numpy streaming",
    reusable=True,
    largest=LONG,
)
def smooth_by_three(values: Any) -> Any:
    return np.convolve(values, (0.25, 0.5, 0.25), mode="valid")


@shelf.add(
    LINEAR,
    array,
    expected=lambda values: np.exp(-(values**2)),
    tags="numpy streaming allocator",
    reusable=True,
    largest=LONG,
)
def bell_curve(values: Any) -> Any:
    return np.exp(-(values**2))


@shelf.add(
    LINEAR,
    lambda n, rng: (bulk(rng).integers(-9, 9, n, dtype=np.int8),),
    expected=lambda v: sum(int(x) for x in v),
    tags="numpy fast streaming",
    reusable=True,
    largest=4 * LONG,
)
def sum_of_bytes(values: Any) -> int:
    return int(values.sum(dtype=np.int64))


@shelf.add(
    LINEAR,
    lambda n, rng: (bulk(rng).integers(0, 1 << 16, n, dtype=np.uint16),),
    expected=lambda values: sorted(values.tolist()),
    tags="numpy streaming",
    reusable=True,
    largest=LONG,
)
def radix_sort_of_shorts(values: Any) -> Any:
    return np.sort(values, kind="stable")


@shelf.add(LINEAR, array, expected=lambda values: values.tolist(), tags="numpy allocator cache", reusable=True)
def array_to_list(values: Any) -> Any:
    return values.tolist()


@shelf.add(
    LINEAR,
    array,
    expected=lambda v: float(np.percentile(v, 90) - np.percentile(v, 10)),
    tags="numpy large_constant",
    reusable=True,
    largest=LONG,
)
def spread_of_tenths(values: Any) -> float:
    low, high = np.quantile(values, (0.1, 0.9))
    return float(high - low)
