"""What the memory hierarchy may add to a cost, and no more: the allowance of a body.

Linear code over scattered objects slows down several-fold once its footprint leaves the caches, though it does the
same work for each element. A `MemoryCurve` says how much linear kernels slow down on this machine, by footprint.
A body is allowed that much, limited in two ways: by the memory that a body within its budget could touch, and by
the time that touching memory could take for the elements it has.

All allowances are logs of a factor on the cost, shape (m,), for sizes in ascending order.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from pytest_growthbudget.fitting.excess import Array, Observations
from pytest_growthbudget.measuring.readings import MemoryCurve

SMALL_FOOTPRINT: Final = 32 * 1024.0
BYTES_PER_ELEMENT: Final = 64.0
EXTRA_FACTOR: Final = 2.0
GREATEST_FACTOR: Final = 12.0
_FOOTPRINT_EXPONENTS: Final = (1.0, 3.0)
_UTMOST: Final = 300.0  # in logs; only keeps the growth of an exponential budget inside a float


def allowance(curve: MemoryCurve, seen: Observations, footprints: Array) -> Array:
    """The log factor by which memory may have inflated each cost, non-decreasing in the size.

    The smaller of a multiple and a sum: the multiple by which a linear kernel slows down at that footprint, and
    the time that a kernel adds for each element, for as many elements as the body can have.
    """
    touched = budgeted_footprints(seen, footprints)
    return np.minimum(multiple(curve, touched), addition(curve, seen, footprints, touched))


def budgeted_footprints(seen: Observations, footprints: Array) -> Array:
    """The footprints, but no larger than a body within the budget could have.

    Such a body cannot touch memory that grows faster than its own budget, nor be denied memory linear in n.
    """
    growth = np.minimum(seen.log_growth - seen.log_growth[0], _UTMOST)
    grown = np.exp(np.maximum(growth, np.log(seen.sizes / seen.sizes[0])))
    budgeted: Array = np.minimum(footprints, max(footprints[0], SMALL_FOOTPRINT) * grown)
    return budgeted


def multiple(curve: MemoryCurve, touched: Array) -> Array:
    """The log inflation of the slowest linear kernel at each footprint."""
    return np.interp(np.log(np.maximum(touched, 1.0)), curve.log_bytes, curve.log_inflation)


def addition(curve: MemoryCurve, seen: Observations, footprints: Array, touched: Array) -> Array:
    """The log factor that the kernels' extra nanoseconds per element explain, at each size.

    A body whose cost grows faster than its footprint may touch each element more than once.
    """
    extra_each = np.interp(np.log(np.maximum(touched, 1.0)), curve.log_bytes, curve.extra)
    exponent = _footprint_exponent(seen.sizes, footprints)
    visits = np.exp(np.clip(seen.log_growth - exponent * np.log(seen.sizes), 0.0, _UTMOST))
    elements = np.maximum(seen.sizes, touched_elements(footprints))
    share = EXTRA_FACTOR * extra_each * elements * visits / seen.costs
    return np.maximum.accumulate(-np.log(np.maximum(1 - share, 1 / GREATEST_FACTOR)))


def touched_elements(footprints: Array) -> Array:
    """How many elements of the least usual size a footprint holds."""
    return footprints / BYTES_PER_ELEMENT


def _footprint_exponent(sizes: Array, footprints: Array) -> float:
    slope = np.log(footprints[-1] / footprints[0]) / np.log(sizes[-1] / sizes[0])
    return float(np.clip(slope, *_FOOTPRINT_EXPONENTS))
