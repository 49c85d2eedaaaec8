"""Roots of Σ aᵢ exp(-wᵢ x) = 1 with aᵢ, wᵢ > 0: critical exponents and growth rates alike.

The left side falls strictly from infinity to 0, so there is exactly one real root. With wᵢ = ln(1/bᵢ) it is the
exponent p of Akra and Bazzi (1998, eq. 2), Σ aᵢ bᵢ^p = 1; with wᵢ = kᵢ it is ln ρ of the positive root of the
characteristic equation Σ aᵢ ρ^(-kᵢ) = 1.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from decimal import Context, Decimal
from fractions import Fraction
from functools import lru_cache

from pytest_growthbudget.bounds.enclosure import (
    Interval,
    arithmetic,
    compare_numbers,
    enclose,
    floor_number,
    sign,
    to_float,
)
from pytest_growthbudget.bounds.exact import (
    ONE,
    ZERO,
    Number,
    Real,
    Symbol,
    Undecidable,
    common_measure,
    exp_number,
    ln_fraction,
    ln_number,
    number_key,
    symbol,
)


@dataclass(frozen=True)
class Equation:
    """Σ a exp(-w x) = 1 over `terms` = ((a, w), ...), sorted, with distinct positive w and positive a."""

    terms: tuple[tuple[Fraction, Number], ...]

    @property
    def key(self) -> str:
        return ";".join(f"{a}@{number_key(w)}" for a, w in self.terms)

    def same_root(self, other: Equation) -> bool:
        """Whether two characteristic equations of small degree share their root.

        They do where the greatest common divisor of their polynomials changes sign across it.
        """
        mine, theirs = _polynomial(self), _polynomial(other)
        if mine is None or theirs is None:
            return False
        common = _common_divisor(mine, theirs)
        if len(common) < 2:
            return False
        low, high = self.enclose(60)
        on = arithmetic(80)
        ends = [Fraction(on.exp((x, x))[i]) for i, x in enumerate((low, high))]
        return _at(common, ends[0]) * _at(common, ends[1]) <= 0

    def approximate(self) -> float:
        """The root to about 15 digits (Newton steps on the logarithm of the left side, kept inside a bracket)."""
        logs = [math.log(a.numerator) - math.log(a.denominator) for a, _ in self.terms]
        weights = [to_float(w) for _, w in self.terms]
        at_zero = _log_sum(logs, weights, 0.0)[0]
        ends = (at_zero / max(weights), at_zero / min(weights))
        low, high = min(ends), max(ends)
        x = low
        for _ in range(200):
            value, slope = _log_sum(logs, weights, x)
            if value > 0:
                low = max(low, x)
            else:
                high = min(high, x)
            nearer = x - value / slope
            if not low <= nearer <= high:
                nearer = (low + high) / 2
            if nearer == x or abs(nearer - x) < 1e-16 * abs(x):
                return nearer
            x = nearer
        return x

    def enclose(self, digits: int) -> Interval:
        """An interval around the root, its ends proved by the sign of the left side minus one."""
        return _enclose_root(self, digits)

    def sum_at(self, x: Interval, digits: int) -> Interval:
        """An enclosure of the left side over an interval of x."""
        on = arithmetic(digits)
        total = (Decimal(0), Decimal(0))
        for a, w in self.terms:
            exponent = on.mul(enclose(w, digits), (x[1].copy_negate(), x[0].copy_negate()))
            total = on.add(total, on.mul(on.fraction(a), on.exp(exponent)))
        return total


def _polynomial(equation: Equation) -> list[Fraction] | None:
    """Coefficients of x^K - Σ a x^(K-k), constant first; None unless all k are integers up to 40."""
    weights = [w for _, w in equation.terms]
    if not all(isinstance(w, Fraction) and w.denominator == 1 and w <= 40 for w in weights):
        return None
    degree = int(max(w for w in weights if isinstance(w, Fraction)))
    out = [ZERO] * (degree + 1)
    out[degree] = ONE
    for a, w in equation.terms:
        out[degree - int(w)] -= a  # type: ignore[arg-type]
    return out


def _common_divisor(a: list[Fraction], b: list[Fraction]) -> list[Fraction]:
    """The greatest common divisor of two polynomials with leading coefficient 1, as is its own."""
    while b:
        rest = list(a)
        while len(rest) >= len(b):
            factor = rest[-1]
            shift = len(rest) - len(b)
            for i, c in enumerate(b):
                rest[shift + i] -= factor * c
            rest.pop()
        while rest and not rest[-1]:
            rest.pop()
        a, b = b, [c / rest[-1] for c in rest]
    return a


def _at(polynomial: list[Fraction], x: Fraction) -> Fraction:
    total = ZERO
    for c in reversed(polynomial):
        total = total * x + c
    return total


def _log_sum(logs: list[float], weights: list[float], x: float) -> tuple[float, float]:
    exponents = [la - w * x for la, w in zip(logs, weights, strict=True)]
    top = max(exponents)
    parts = [math.exp(e - top) for e in exponents]
    total = sum(parts)
    return top + math.log(total), -sum(p * w for p, w in zip(parts, weights, strict=True)) / total


@lru_cache(maxsize=4096)
def _enclose_root(equation: Equation, digits: int) -> Interval:
    work = Context(prec=digits + 15, Emax=10**15, Emin=-(10**15), traps=[])
    x = work.create_decimal_from_float(equation.approximate())
    parts = []
    for a, w in equation.terms:
        low, high = enclose(w, digits + 15)
        parts.append(
            (
                work.divide(Decimal(a.numerator), Decimal(a.denominator)),
                work.divide(work.add(low, high), Decimal(2)),
            )
        )
    for _ in range(max(1, (digits + 15).bit_length() - 3)):
        value, slope = Decimal(-1), Decimal(0)
        for a_dec, w_dec in parts:
            part = work.multiply(a_dec, work.exp(work.multiply(w_dec.copy_negate(), x)))
            value = work.add(value, part)
            slope = work.subtract(slope, work.multiply(w_dec, part))
        x = work.subtract(x, work.divide(value, slope))
    margin = work.scaleb(work.add(x.copy_abs(), Decimal(1).scaleb(-30)), Decimal(3 - digits))
    for _ in range(digits):
        low, high = work.subtract(x, margin), work.add(x, margin)
        left = equation.sum_at((low, low), digits + 10)
        right = equation.sum_at((high, high), digits + 10)
        if left[0] > 1 and right[1] < 1:
            return low, high
        margin = work.multiply(margin, Decimal(10))
    raise Undecidable("the root of a characteristic equation could not be enclosed")


def equation(terms: list[tuple[Fraction, Number]]) -> Equation:
    """The equation with equal weights merged and the rest in a fixed order."""
    merged: list[tuple[Fraction, Number]] = []
    for a, w in terms:
        for i, (b, v) in enumerate(merged):
            if compare_numbers(v, w) == 0:
                merged[i] = (a + b, v)
                break
        else:
            merged.append((a, w))
    return Equation(tuple(sorted(merged, key=lambda t: (to_float(t[1]), number_key(t[1])))))


def sums_to_one(eq: Equation, x: Number) -> bool:
    """Whether Σ aᵢ exp(-wᵢ x) = 1 holds by exact cancellation.

    Rational powers of primes with exponents in [0, 1) are linearly independent over the rationals (Besicovitch
    1940), so with positive coefficients every part has to be rational by itself.
    """
    total: Number = ZERO
    try:
        for a, w in eq.terms:
            total = total + a * exp_number(-(w * x))
    except Undecidable:
        return False
    return total == ONE


def order(eq: Equation, x: Number) -> int:
    """-1, 0 or 1 as the root lies below, at or above x."""
    if sums_to_one(eq, x):
        return 0
    for digits in (25, 60, 150):
        low, high = eq.sum_at(enclose(x, digits), digits)
        if high < 1:
            return -1
        if low > 1:
            return 1
    if isinstance(x, Real) and sign(symbol(Symbol("root", eq, eq.key)) - x) == 0:
        return 0
    raise Undecidable("a critical exponent agrees with the toll's to 150 digits, but no proof of equality was found")


def solve(terms: list[tuple[Fraction, Number]]) -> Number:
    """The root, in closed form where one was found: rational, a quotient of logarithms, or a named root."""
    eq = equation(terms)
    if len(eq.terms) == 1:
        ((a, w),) = eq.terms
        return ln_fraction(a) / w
    if sum(a for a, _ in eq.terms) == 1:
        return ZERO
    unit = eq.terms[0][1]
    ratios = [w / unit for _, w in eq.terms]
    if all(isinstance(r, Fraction) for r in ratios):
        rational = [r for r in ratios if isinstance(r, Fraction)]
        measure = common_measure(rational)
        powers = [(a, r / measure) for (a, _), r in zip(eq.terms, rational, strict=True)]
        return growth_rate(tuple((a, k.numerator) for a, k in powers)) / (unit * measure)
    guess = Fraction(eq.approximate()).limit_denominator(24)
    if sums_to_one(eq, guess):
        return guess
    return symbol(Symbol("root", eq, eq.key))


@lru_cache(maxsize=2048)
def growth_rate(terms: tuple[tuple[Fraction, int], ...]) -> Number:
    """ln ρ for Σ a ρ^(-k) = 1 with integers k > 0 that have no common divisor."""
    eq = Equation(tuple((a, Fraction(k)) for a, k in sorted(terms, key=lambda t: t[1])))
    degree = max(k for _, k in terms)
    if degree <= 256:
        rate = eq.approximate()
        if abs(rate) < 40:
            guess = Fraction(math.exp(rate)).limit_denominator(1000)
            if guess > 0 and sum((a / guess**k for a, k in terms), ZERO) == 1:
                return ln_fraction(guess)
    return symbol(Symbol("root", eq, eq.key))


def ln_with_surds(x: Number) -> Number:
    """ln x, where (u + v sqrt(d)) is recognised as a root of its quadratic when that has the right signs."""
    if isinstance(x, Real) and len(x.den) == 1 and len(x.num) == 2:
        rational = x.num.get(())
        other = [(m, c) for m, c in x.num.items() if m]
        if rational is not None and rational > 0 and len(other) == 1 and other[0][1] > 0:
            mono, v = other[0]
            if all(s.kind == "rad" and e == Fraction(1, 2) for s, e in mono):
                d = Fraction(1)
                for s, _ in mono:
                    d *= s.payload
                rest = v * v * d - rational * rational
                if rest > 0:
                    return growth_rate(((2 * rational, 1), (rest, 2)))
    return ln_number(x)


__all__ = [
    "Equation",
    "equation",
    "floor_number",
    "growth_rate",
    "ln_with_surds",
    "order",
    "solve",
    "sums_to_one",
]
