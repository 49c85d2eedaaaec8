"""Products that divide and conquer: exact numbers of multiplications, from tallies, and the exponents they mean.

Every source is cited beside its check; "[from memory]" marks what was not looked up.
"""

from __future__ import annotations

import itertools
import math
import random
from collections.abc import Callable
from fractions import Fraction

import numpy as np
import pytest

from pytest_growthbudget.meters.registry import meter_for
from pytest_growthbudget.meters.tallies import Tally


def multiplications(multiply: Callable[[Tally], object]) -> int:
    """One reading of `tally:multiplications`."""
    tally = Tally()
    meter = meter_for("tally:multiplications", tally=tally)
    meter.start()
    multiply(tally)
    return int(meter.stop())


Polynomial = list[int]


def product(tally: Tally, a: int, b: int) -> int:
    tally.add("multiplications")
    return a * b


def add(a: Polynomial, b: Polynomial, sign: int = 1) -> Polynomial:
    return [x + sign * y for x, y in itertools.zip_longest(a, b, fillvalue=0)]


def shifted_sum(parts: list[Polynomial], step: int) -> Polynomial:
    total = [0] * (step * (len(parts) - 1) + max(map(len, parts)))
    for place, part in enumerate(parts):
        for i, coefficient in enumerate(part):
            total[step * place + i] += coefficient
    return total


def schoolbook(tally: Tally, a: Polynomial, b: Polynomial) -> Polynomial:
    total = [0] * (len(a) + len(b) - 1)
    for i, x in enumerate(a):
        for j, y in enumerate(b):
            total[i + j] += product(tally, x, y)
    return total


def karatsuba(tally: Tally, a: Polynomial, b: Polynomial) -> Polynomial:
    """Karatsuba and Ofman 1962 [from memory]: three products of half the length."""
    if len(a) == 1:
        return [product(tally, a[0], b[0])]
    half = len(a) // 2
    low = karatsuba(tally, a[:half], b[:half])
    high = karatsuba(tally, a[half:], b[half:])
    cross = karatsuba(tally, add(a[:half], a[half:]), add(b[:half], b[half:]))
    return shifted_sum([low, add(add(cross, low, -1), high, -1), high], half)


def toom_cook(parts: int) -> Callable[[Tally, Polynomial, Polynomial], Polynomial]:
    """Toom 1963, Cook 1966 [from memory]: 2 k - 1 products of a k-th of the length, at that many points.

    The points are 0, 1, -1, 2, -2, ...; interpolation solves the Vandermonde system in exact fractions.
    """
    points = [0, *itertools.chain.from_iterable((x, -x) for x in range(1, parts))]
    inverse = inverted([[Fraction(x) ** power for power in range(2 * parts - 1)] for x in points])

    def multiply(tally: Tally, a: Polynomial, b: Polynomial) -> Polynomial:
        if len(a) == 1:
            return [product(tally, a[0], b[0])]
        size = len(a) // parts

        def at(x: int, of: Polynomial) -> Polynomial:
            value = [0] * size
            for i in reversed(range(parts)):
                value = add([x * coefficient for coefficient in value], of[i * size : (i + 1) * size])
            return value

        values = [multiply(tally, at(x, a), at(x, b)) for x in points]
        coefficients = [
            [
                int(sum(weight * value[i] for weight, value in zip(row, values, strict=True)))
                for i in range(len(values[0]))
            ]
            for row in inverse
        ]
        return shifted_sum(coefficients, size)

    return multiply


def inverted(matrix: list[list]) -> list[list]:
    n = len(matrix)
    rows = [[*row, *(type(row[0])(i == j) for j in range(n))] for i, row in enumerate(matrix)]
    for i in range(n):
        pivot = next(k for k in range(i, n) if rows[k][i])
        rows[i], rows[pivot] = rows[pivot], rows[i]
        rows[i] = [value / rows[i][i] for value in rows[i]]
        for k in range(n):
            if k != i:
                rows[k] = [x - rows[k][i] * y for x, y in zip(rows[k], rows[i], strict=True)]
    return [row[n:] for row in rows]


def strassen(tally: Tally, a: np.ndarray, b: np.ndarray) -> np.ndarray:
    """Strassen 1969, Numer. Math. 13:354-356 [from memory]: seven products of half the order."""
    if len(a) == 1:
        return np.array([[product(tally, int(a[0, 0]), int(b[0, 0]))]])
    h = len(a) // 2
    a11, a12, a21, a22 = a[:h, :h], a[:h, h:], a[h:, :h], a[h:, h:]
    b11, b12, b21, b22 = b[:h, :h], b[:h, h:], b[h:, :h], b[h:, h:]
    m1 = strassen(tally, a11 + a22, b11 + b22)
    m2 = strassen(tally, a21 + a22, b11)
    m3 = strassen(tally, a11, b12 - b22)
    m4 = strassen(tally, a22, b21 - b11)
    m5 = strassen(tally, a11 + a12, b22)
    m6 = strassen(tally, a21 - a11, b11 + b12)
    m7 = strassen(tally, a12 - a22, b21 + b22)
    return np.block([[m1 + m4 - m5 + m7, m3 + m5], [m2 + m4, m1 - m2 + m3 + m6]])


class TestMultiplication:
    @pytest.mark.parametrize(
        ("multiply", "parts", "products", "exponent"),
        [
            (schoolbook, 2, 4, 2),
            (karatsuba, 2, 3, 1.58496),
            (toom_cook(2), 2, 3, 1.58496),
            (toom_cook(3), 3, 5, 1.46497),
            (toom_cook(4), 4, 7, 1.40368),
        ],
        ids=["schoolbook", "Karatsuba", "Toom-2", "Toom-3", "Toom-4"],
    )
    def test_exponents_of_polynomial_products(self, multiply, parts, products, exponent):
        """log of the products by the parts: lg 3, log_3 5, log_4 7 to five places (recomputed)."""
        rng = random.Random(11)
        counts = []
        for level in range(4):
            n = parts**level
            a, b = ([rng.randrange(-9, 10) for _ in range(n)] for _ in range(2))
            assert multiply(Tally(), a, b) == np.convolve(a, b).tolist()
            counts.append(multiplications(lambda tally, a=a, b=b: multiply(tally, a, b)))
        assert counts == [products**level for level in range(4)]
        assert math.log(counts[3] / counts[2], parts) == pytest.approx(exponent, abs=5e-6)

    def test_exponent_of_strassens_matrix_product(self):
        """lg 7 = 2.80735."""
        rng = np.random.default_rng(11)
        counts = []
        for level in range(5):
            a, b = rng.integers(-9, 10, (2, 2**level, 2**level))
            assert np.array_equal(strassen(Tally(), a, b), a @ b)
            counts.append(multiplications(lambda tally, a=a, b=b: strassen(tally, a, b)))
        assert counts == [7**level for level in range(5)]
        assert math.log2(counts[4] / counts[3]) == pytest.approx(2.80735, abs=5e-6)
