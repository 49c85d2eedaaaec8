# ruff: noqa: PERF401 - a line an item is what the steps count; the rest is as code is found
"""Products of polynomials and matrices, each beside a twin with one planted fault."""

from __future__ import annotations

from typing import Any

import numpy as np

Items = list[int]


def _sum(one: Items, other: Items) -> Items:
    total = []
    for place in range(max(len(one), len(other))):
        total.append((one[place] if place < len(one) else 0) + (other[place] if place < len(other) else 0))
    return total


def _gathered(low: Items, middle: Items, high: Items, half: int) -> Items:
    product = [0] * (2 * half + len(high))
    for place, value in enumerate(low):
        product[place] += value
    for place, value in enumerate(high):
        product[place + 2 * half] += value
    for place, value in enumerate(middle):
        product[place + half] += value
    return product


def karatsuba(one: Items, other: Items) -> Items:
    """The product of two polynomials of the same length, a power of two."""
    if len(one) == 1:
        return [one[0] * other[0]]
    half = len(one) // 2
    low = karatsuba(one[:half], other[:half])
    high = karatsuba(one[half:], other[half:])
    cross = karatsuba(_sum(one[:half], one[half:]), _sum(other[:half], other[half:]))
    middle = []
    for place, value in enumerate(cross):
        middle.append(value - low[place] - high[place])
    return _gathered(low, middle, high, half)


def karatsuba_four(one: Items, other: Items) -> Items:
    """Multiplies four halves."""
    if len(one) == 1:
        return [one[0] * other[0]]
    half = len(one) // 2
    low = karatsuba_four(one[:half], other[:half])
    high = karatsuba_four(one[half:], other[half:])
    middle = _sum(karatsuba_four(one[:half], other[half:]), karatsuba_four(one[half:], other[:half]))
    return _gathered(low, middle, high, half)


def strassen(a: Any, b: Any) -> Any:
    """Matrices whose side is a power of two; blocks of 8 are multiplied by numpy."""
    if len(a) <= 8:
        return a @ b
    h = len(a) // 2
    a11, a12, a21, a22 = a[:h, :h], a[:h, h:], a[h:, :h], a[h:, h:]
    b11, b12, b21, b22 = b[:h, :h], b[:h, h:], b[h:, :h], b[h:, h:]
    m1 = strassen(a11 + a22, b11 + b22)
    m2 = strassen(a21 + a22, b11)
    m3 = strassen(a11, b12 - b22)
    m4 = strassen(a22, b21 - b11)
    m5 = strassen(a11 + a12, b22)
    m6 = strassen(a21 - a11, b11 + b12)
    m7 = strassen(a12 - a22, b21 + b22)
    return np.block([[m1 + m4 - m5 + m7, m3 + m5], [m2 + m4, m1 - m2 + m3 + m6]])


def strassen_eight(a: Any, b: Any) -> Any:
    """The plain eight products."""
    if len(a) <= 8:
        return a @ b
    h = len(a) // 2
    a11, a12, a21, a22 = a[:h, :h], a[:h, h:], a[h:, :h], a[h:, h:]
    b11, b12, b21, b22 = b[:h, :h], b[:h, h:], b[h:, :h], b[h:, h:]
    return np.block(
        [
            [strassen_eight(a11, b11) + strassen_eight(a12, b21), strassen_eight(a11, b12) + strassen_eight(a12, b22)],
            [strassen_eight(a21, b11) + strassen_eight(a22, b21), strassen_eight(a21, b12) + strassen_eight(a22, b22)],
        ]
    )
