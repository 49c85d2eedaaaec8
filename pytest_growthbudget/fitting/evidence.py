"""One set of readings, ready to be judged: costs by size with footprints, and the fits made of them."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from pytest_growthbudget.fitting.allowance import allowance
from pytest_growthbudget.fitting.excess import Array, Excess, Observations, fit_excess, observe
from pytest_growthbudget.fitting.judgement import SizeRow
from pytest_growthbudget.measuring.readings import MemoryCurve, Promise, Series

Curve = Callable[[], MemoryCurve | None]


@dataclass(frozen=True, eq=False)
class Evidence:
    """Lower quartiles of the cost by size, shape (m,), with bytes touched (0.0 where unknown).

    `allow`: gives the logs of the memory allowance over the sizes, or None without a memory curve. It is called
    only when the allowance is needed, because the curve may first have to be measured.
    """

    seen: Observations
    footprints: Array
    counts: tuple[int, ...]
    noise: float
    allow: Callable[[], Array | None]

    def __len__(self) -> int:
        return len(self.seen)

    @cached_property
    def allowed(self) -> Array | None:
        """The memory allowance, None where it cannot be known."""
        return self.allow()

    @cached_property
    def plain(self) -> Excess:
        """The fit to the costs as they were read."""
        return fit_excess(self.seen, noise=self.noise)

    @cached_property
    def deflated(self) -> Excess | None:
        """The fit to the costs divided by the memory allowance."""
        if self.allowed is None:
            return None
        return fit_excess(self.seen.divided_by(self.allowed), noise=self.noise)

    @property
    def gamma(self) -> float:
        """The local exponent of the budget at the largest size."""
        return self.seen.gamma

    @property
    def footprint(self) -> float:
        """Bytes touched at the largest size."""
        return float(self.footprints[-1])

    def unit_cost(self) -> float:
        """The smallest cost per unit of the growth allowed."""
        return float(np.exp(self.seen.ahead.min()))

    def window(self, first: int, last: int) -> Evidence:
        """The same between two indices; the allowance stays that of the whole."""

        def allow() -> Array | None:
            return None if self.allowed is None else self.allowed[first:last]

        return Evidence(
            self.seen.window(first, last), self.footprints[first:last], self.counts[first:last], self.noise, allow
        )

    def up_to(self, footprint: float) -> Evidence:
        """The leading sizes that touch at most `footprint` bytes."""
        return self.window(0, int(np.searchsorted(self.footprints, footprint, side="right")))

    def last(self, count: int) -> Evidence:
        """The last `count` sizes."""
        return self.window(max(0, len(self) - count), len(self))

    def rows(self) -> tuple[SizeRow, ...]:
        """The readings as the report shows them."""
        return tuple(
            SizeRow(size=int(size), cost=cost, readings=count, footprint=footprint)
            for size, cost, count, footprint in zip(
                self.seen.sizes.tolist(),
                self.seen.costs.tolist(),
                self.counts,
                self.footprints.tolist(),
                strict=True,
            )
        )


def gather(
    promise: Promise, footprints: Mapping[int, float], several: Iterable[Series], curve: Curve, noise: float
) -> Evidence | None:
    """Puts series together, size by size; None where not one size was read with a positive cost.

    `footprints`: bytes touched by size, 0.0 where unknown.
    """
    costs: dict[int, list[float]] = {}
    for series in several:
        for size, read in zip(series.sizes, series.costs, strict=True):
            costs.setdefault(size, []).extend(read)
    quartiles = {size: lower_quartile(read) for size, read in costs.items() if read}
    sizes = sorted(size for size, cost in quartiles.items() if cost > 0)
    if not sizes:
        return None
    return assemble(
        promise,
        sizes,
        [quartiles[size] for size in sizes],
        [footprints.get(size, 0.0) for size in sizes],
        [len(costs[size]) for size in sizes],
        curve,
        noise,
    )


def assemble(
    promise: Promise,
    sizes: Sequence[int],
    costs: Sequence[float],
    footprints: Sequence[float],
    counts: Sequence[int],
    curve: Curve,
    noise: float,
) -> Evidence:
    """Evidence from its columns: sizes ascending, costs positive, all of shape (m,)."""
    seen = observe(sizes, costs, promise.log_growth, exponential=promise.exponential)
    touched = np.maximum.accumulate(np.asarray(footprints, dtype=float))

    def allow() -> Array | None:
        known = curve() if touched[0] > 0 else None
        return None if known is None else allowance(known, seen, touched)

    return Evidence(seen, touched, tuple(counts), noise, allow)


def lower_quartile(read: Sequence[float]) -> float:
    """The lower quartile, interpolated linearly between the order statistics.

    Of minimum, quartile, median and mean the quartile repeats best, on a quiet and on a loaded machine: the
    smallest readings are those of lucky inputs and warm caches.
    """
    ordered = sorted(read)
    place = (len(ordered) - 1) / 4
    below = int(place)
    above = min(below + 1, len(ordered) - 1)
    return float(ordered[below] + (place - below) * (ordered[above] - ordered[below]))
