"""The pattern of recorded calls: how many subproblems a call has, and how small they are.

Words. A *dividing* call has children; a call without is a *base case* where it is smaller than every dividing one,
and was *answered at once* where it is not (a memo hit, an early exit). Children answered at once are no subproblems.
The subproblems of one call are ranked by size, the largest first; all those of one rank make a *part*.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from pytest_growthbudget.auditing.calls import Calls, Floats, Ints

#: How a part depends on n: `ratio`·n, n - `by`, n^`power`, or a size that stays the same.
Kind = Literal["ratio", "difference", "power", "constant"]
Flags = NDArray[np.bool_]

_MOST_RANKS: Final = 8
_ENOUGH_CALLS: Final = 32
_ENOUGH_SIZES: Final = 5
_ROUNDING: Final = 2.0
_POWER_ROUNDING: Final = 0.05
_CLEAR: Final = 16.0
_MIX: Final = np.int64(0x2545F4914F6CDD1D)


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """A mean with the quantiles that hold 90 per cent of the calls."""

    mean: float
    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """The subproblems of one rank, or of all ranks where a call has many.

    `share`: how many of them a dividing call has on average. `value`: the ratio, the difference, the power or the
    constant size, by `kind`. `fixed`: whether it is the same for (nearly) every call, but for rounding.
    `ratio`: child's size over parent's, whatever the kind. `at`: the size of the largest parents, which tells how
    much of a ratio is rounding.
    """

    kind: Kind
    share: float
    value: Spread
    fixed: bool
    ratio: Spread
    at: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Pattern:
    """What the calls have in common.

    `count`: subproblems a dividing call; `count_power`: the exponent with which their number grows with n (0: it does
    not), `count_factor` what stands before that power. `partition`: whether the subproblems of a call add up to the
    whole, up to a constant. `smallest`: the least dividing call. `depth`: how deep the run of size `largest` nested.
    `at_once`: calls answered at once. `asked` and `distinct`: dividing calls, large ones, whose arguments could be
    told, and how many different ones. `growing`: the share of subproblems that are no smaller than their parent.
    `looked_at`: the dividing calls that the parts describe; `from_size`: the least of these.
    """

    calls: int
    dividing: int
    looked_at: int
    from_size: float
    count: Spread
    count_power: float
    count_factor: float
    parts: tuple[Part, ...]
    partition: bool
    base: Spread
    smallest: float
    largest: float
    depth: int
    at_once: int
    asked: int
    distinct: int
    growing: float
    returned: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Roles:
    """What each recorded call is; arrays of shape (m,). `dividing` and `at_once` are flags, `children` a count."""

    children: Ints
    dividing: Flags
    at_once: Flags
    smallest: float


def roles(calls: Calls) -> Roles:
    """Tells dividing calls, base cases and calls answered at once apart."""
    called = calls.parent[calls.parent >= 0]
    children = np.bincount(called, minlength=len(calls)).astype(np.int64)
    divides = (children > 0) & calls.whole
    smallest = float(calls.size[divides].min()) if divides.any() else float("inf")
    at_once = (children == 0) & calls.whole & (calls.size >= smallest)
    return Roles(children=children, dividing=divides, at_once=at_once, smallest=smallest)


def pattern(calls: Calls) -> Pattern | None:
    """The pattern of `calls`; None where no call has a subproblem."""
    role = roles(calls)
    if not role.dividing.any():
        return None
    counted = np.flatnonzero(calls.parent >= 0)
    counted = counted[role.dividing[calls.parent[counted]] & ~role.at_once[counted]]
    number = np.bincount(calls.parent[counted], minlength=len(calls))
    floor = _floor(calls.size[role.dividing], role.smallest)
    large = role.dividing & (calls.size >= floor)
    counted = counted[large[calls.parent[counted]]]
    n, s = calls.size[calls.parent[counted]], calls.size[counted]
    power = _count_power(calls.size[large], number[large])
    most = int(number[large].max(initial=0))
    if power or most > _MOST_RANKS:
        parts = [_part(n, s, len(s) / large.sum(), role.smallest)] if len(s) else []
    else:
        rank = _ranks(calls.parent[counted], s)
        parts = [
            _part(n[rank == r], s[rank == r], float((rank == r).sum() / large.sum()), role.smallest)
            for r in range(most)
        ]
    leaves = (role.children == 0) & calls.whole & ~role.at_once
    run = max(calls.runs, key=lambda one: one.size)
    told = large & (calls.key != 0)
    return Pattern(
        calls=len(calls),
        dividing=int(role.dividing.sum()),
        looked_at=int(large.sum()),
        from_size=floor,
        count=_spread(number[large].astype(float)),
        count_power=power,
        count_factor=float(np.median(number[large] / np.maximum(calls.size[large], 1.0) ** power)),
        parts=tuple(parts),
        partition=_is_partition(calls, counted, large),
        base=_spread(calls.size[leaves]) if leaves.any() else Spread(mean=0.0, low=0.0, high=0.0),
        smallest=role.smallest,
        largest=run.size,
        depth=run.depth,
        at_once=int(role.at_once.sum()),
        asked=int(told.sum()),
        distinct=_distinct(calls, told),
        growing=float(np.mean(s >= n)) if len(s) else 0.0,
        returned=calls.returned,
    )


def _floor(sizes: Floats, smallest: float) -> float:
    """From which size on the calls are looked at: as large as leaves enough of them, to be clear of rounding."""
    unit = max(smallest, 1.0)
    for times in (16, 8, 4, 2):
        kept = sizes[sizes >= times * unit]
        if len(kept) >= _ENOUGH_CALLS and len(np.unique(kept)) >= _ENOUGH_SIZES:
            return float(times * unit)
    return smallest


def _ranks(parents: Ints, sizes: Floats) -> Ints:
    """The rank of each child among those of its parent, 0 for the largest."""
    order = np.lexsort((-sizes, parents))
    sorted_parents = parents[order]
    first = np.concatenate(([True], sorted_parents[1:] != sorted_parents[:-1]))
    starts = np.maximum.accumulate(np.where(first, np.arange(len(order)), 0))
    rank = np.empty(len(order), dtype=np.int64)
    rank[order] = np.arange(len(order)) - starts
    return rank


def _spread(values: Floats) -> Spread:
    low, high = np.quantile(values, (0.05, 0.95))
    return Spread(mean=float(values.mean()), low=float(low), high=float(high))


def octaves(sizes: Floats, a_octave: int = 2) -> Ints:
    """The bin of each size: each size its own where there are few, else parts of an octave."""
    distinct, place = np.unique(sizes, return_inverse=True)
    if len(distinct) <= 24:
        return place.reshape(-1).astype(np.int64)
    bins: Ints = np.floor(np.log2(np.maximum(sizes, 0.5)) * a_octave).astype(np.int64)
    return bins


def _medians(n: Floats, s: Floats) -> tuple[Floats, Floats]:
    where = octaves(n)
    kinds = np.unique(where)
    return (
        np.array([np.median(n[where == k]) for k in kinds]),
        np.array([np.median(s[where == k]) for k in kinds]),
    )


def _part(n: Floats, s: Floats, share: float, smallest: float) -> Part:
    kind, power = _kind(n, s, smallest)
    ratio = _spread(s / n)
    if kind == "difference":
        value = _spread(n - s)
        fixed = bool(np.mean(np.abs((n - s) - np.median(n - s)) < 0.5) > 0.9)
    elif kind == "constant":
        value, fixed = _spread(s), bool(s.max() - s.min() < 0.5)
    elif kind == "power":
        value = Spread(mean=power, low=power, high=power)
        powers = np.log(np.maximum(s, 1.0)) / np.log(np.maximum(n, 2.0))
        clear = n >= min(_CLEAR, n.max())  # roots of small numbers are mostly rounding
        fixed = bool(np.mean(np.abs(powers[clear] - power) <= _POWER_ROUNDING) > 0.9)
    else:
        # Large calls are least rounded, so they say what the ratio is.
        top = n >= np.quantile(n, 0.9)
        middle = float(np.median(s[top] / n[top]))
        fixed = bool(np.mean(np.abs(s - middle * n) <= _ROUNDING) > 0.9)
        value = Spread(mean=middle, low=middle, high=middle) if fixed else ratio
    return Part(kind=kind, share=share, value=value, fixed=fixed, ratio=ratio, at=float(np.quantile(n, 0.9)))


def _kind(n: Floats, s: Floats, smallest: float) -> tuple[Kind, float]:
    """Which of the four forms the medians by size follow best, and the power of the last of them.

    The misfit is relative to n, beyond what rounding explains. Where two fit alike, the one that fits better to the
    last digit is taken, and a difference before a ratio.
    """
    x, y = _medians(n, s)
    if np.max(s) < max(smallest, 1.0):
        return "constant", 0.0
    power = 1.0
    usable = (x > 2) & (y > 1)
    if usable.sum() >= 3:
        power = float(np.median(np.log(y[usable]) / np.log(x[usable])))
    guesses: tuple[tuple[Kind, Floats], ...] = (
        ("difference", x - np.median(x - y)),
        ("ratio", np.median(y / x) * x),
        ("constant", np.full_like(y, np.median(y))),
        ("power", np.maximum(x, 1.0) ** power),
    )
    misfits = []
    for kind, guess in guesses:
        error = np.abs(y - guess)
        if kind == "power":
            # Roots are rare, and a power follows a scattered ratio as well as the ratio does.
            error = 2 * error if 0.1 < power < 0.9 else error + x
        if kind == "ratio" and np.median(y / x) <= 0:
            error = error + x
        misfits.append((round(float(np.mean(np.maximum(error - 1.0, 0) / x)), 3), float(np.mean(error / x))))
    best = min(range(len(guesses)), key=lambda i: (misfits[i], i))
    return guesses[best][0], power


def _count_power(sizes: Floats, number: Ints) -> float:
    """The exponent with which the number of subproblems grows; 0 where it does not clearly grow."""
    x, y = _medians(sizes, number.astype(float))
    usable = (x > 0) & (y > 0)
    if usable.sum() < _ENOUGH_SIZES or y[usable].max() < 2 * y[usable].min():
        return 0.0
    slope = float(np.polyfit(np.log(x[usable]), np.log(y[usable]), 1)[0])
    if slope <= 0.25:
        return 0.0
    half = round(2 * slope) / 2
    return half if half and abs(half - slope) < 0.15 else slope


def _is_partition(calls: Calls, counted: Ints, large: Flags) -> bool:
    """Whether n minus all subproblems of a call is the same small number for most calls."""
    total = np.bincount(calls.parent[counted], weights=calls.size[counted], minlength=len(calls))
    left = calls.size[large] - total[large]
    return bool(np.mean(np.abs(left - np.median(left)) <= _ROUNDING) > 0.9 and abs(np.median(left)) <= _ROUNDING)


def _distinct(calls: Calls, told: Flags) -> int:
    """How many different arguments the calls of all runs had, counted run by run."""
    run = np.cumsum(calls.parent < 0, dtype=np.int64)
    return len(np.unique(calls.key[told] ^ (run[told] * _MIX)))
