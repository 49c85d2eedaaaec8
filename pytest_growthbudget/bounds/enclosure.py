"""Rigorous enclosures of exact numbers, and the order that they prove.

Intervals have Decimal ends. Sums, products and quotients are rounded outward; the logarithm and the exponential of
the decimal module are correctly rounded (General Decimal Arithmetic Specification 1.70), so one unit in the last
place on each side encloses them.
"""

from __future__ import annotations

import math
from decimal import ROUND_CEILING, ROUND_FLOOR, Context, Decimal
from fractions import Fraction
from functools import lru_cache

from pytest_growthbudget.bounds.exact import (
    Mono,
    Number,
    Poly,
    Real,
    Symbol,
    Undecidable,
)

Interval = tuple[Decimal, Decimal]
PRECISIONS = (25, 60, 150)
_INFINITE = (Decimal("-Infinity"), Decimal("Infinity"))
_ZERO = Decimal(0)


class Arithmetic:
    """Interval operations at one precision."""

    def __init__(self, digits: int) -> None:
        self.digits = digits
        limit = 10**15
        self.down = Context(prec=digits, rounding=ROUND_FLOOR, Emax=limit, Emin=-limit, traps=[])
        self.up = Context(prec=digits, rounding=ROUND_CEILING, Emax=limit, Emin=-limit, traps=[])

    def add(self, a: Interval, b: Interval) -> Interval:
        return self.down.add(a[0], b[0]), self.up.add(a[1], b[1])

    def mul(self, a: Interval, b: Interval) -> Interval:
        pairs = [(x, y) for x in a for y in b]
        low = [self.down.multiply(x, y) for x, y in pairs]
        high = [self.up.multiply(x, y) for x, y in pairs]
        if any(v.is_nan() for v in low):
            return _INFINITE
        return min(low), max(high)

    def inverse(self, a: Interval) -> Interval:
        if a[0] <= 0 <= a[1]:
            return _INFINITE
        return self.down.divide(Decimal(1), a[1]), self.up.divide(Decimal(1), a[0])

    def ln(self, a: Interval) -> Interval:
        if a[0] <= 0:
            return _INFINITE
        return self.down.next_minus(self.down.ln(a[0])), self.up.next_plus(self.up.ln(a[1]))

    def exp(self, a: Interval) -> Interval:
        low, high = self.down.exp(a[0]), self.up.exp(a[1])
        return max(_ZERO, self.down.next_minus(low)), self.up.next_plus(high)

    def fraction(self, x: Fraction) -> Interval:
        n, d = Decimal(x.numerator), Decimal(x.denominator)
        return self.down.divide(n, d), self.up.divide(n, d)

    def power(self, a: Interval, exponent: Fraction) -> Interval:
        if exponent == 1:
            return a
        if exponent.denominator == 1 and abs(exponent) <= 8:
            out = (Decimal(1), Decimal(1))
            for _ in range(abs(exponent.numerator)):
                out = self.mul(out, a)
            return out if exponent > 0 else self.inverse(out)
        if a[0] <= 0:
            return _INFINITE
        return self.exp(self.mul(self.fraction(exponent), self.ln(a)))


@lru_cache(maxsize=8)
def arithmetic(digits: int) -> Arithmetic:
    return Arithmetic(digits)


@lru_cache(maxsize=8192)
def enclose_symbol(sym: Symbol, digits: int) -> Interval:
    """An interval around one constant."""
    on = arithmetic(digits)
    if sym.kind == "ln":
        n = Decimal(sym.payload)
        return on.ln((n, n))
    if sym.kind == "rad":
        n = Decimal(sym.payload)
        return n, n
    if sym.kind == "e":
        return on.exp((Decimal(1), Decimal(1)))
    if sym.kind == "lnof":
        return on.ln(enclose(sym.payload, digits))
    if sym.kind == "exp":
        return on.exp(enclose(sym.payload, digits))
    if sym.kind == "root":
        return sym.payload.enclose(digits)  # type: ignore[no-any-return]
    raise Undecidable("a factor that is not stated matters here")


def _enclose_mono(mono: Mono, on: Arithmetic) -> Interval:
    out = (Decimal(1), Decimal(1))
    for sym, exponent in mono:
        out = on.mul(out, on.power(enclose_symbol(sym, on.digits), exponent))
    return out


def _enclose_poly(poly: Poly, on: Arithmetic) -> Interval:
    total = (_ZERO, _ZERO)
    for mono, coefficient in poly.items():
        part = on.fraction(coefficient)
        total = on.add(total, on.mul(part, _enclose_mono(mono, on)) if mono else part)
    return total


def enclose(x: Number, digits: int) -> Interval:
    """An interval that contains x, computed with so many digits."""
    on = arithmetic(digits)
    if not isinstance(x, Real):
        return on.fraction(x)
    top = _enclose_poly(x.num, on)
    if len(x.den) == 1:
        return top
    return on.mul(top, on.inverse(_enclose_poly(x.den, on)))


def to_float(x: Number) -> float:
    """The float nearest to x (to within a few units in the last place); infinities where it does not fit."""
    if not isinstance(x, Real):
        try:
            return float(x)
        except OverflowError:
            return math.inf if x > 0 else -math.inf
    low, high = enclose(x, 25)
    near, far = float(low), float(high)
    return near if near == far else near + (far - near) / 2


_UNKNOWN = ("base", "some")


def _split_unknown(poly: Poly) -> list[Poly]:
    """The coefficients of the polynomial seen as one in the unknown positive factors alone."""
    groups: dict[Mono, Poly] = {}
    for mono, coefficient in poly.items():
        unknown = tuple(p for p in mono if p[0].kind in _UNKNOWN)
        known = tuple(p for p in mono if p[0].kind not in _UNKNOWN)
        groups.setdefault(unknown, {})[known] = coefficient
    return list(groups.values())


def _sign_poly(poly: Poly) -> int:
    groups = _split_unknown(poly)
    if len(groups) > 1 or any(s.kind in _UNKNOWN for mono in poly for s, _ in mono):
        signs = {_sign_poly(group) for group in groups}
        if len(signs) == 1:
            return signs.pop()
        raise Undecidable("which of two parts is larger depends on a factor that is not stated")
    if len(poly) == 1:
        ((mono, coefficient),) = poly.items()
        if all(s.kind in ("ln", "rad", "e", "exp") for s, _ in mono):
            return 1 if coefficient > 0 else -1
    for digits in PRECISIONS:
        low, high = _enclose_poly(poly, arithmetic(digits))
        if low > 0:
            return 1
        if high < 0:
            return -1
    if _cancels(poly):
        return 0
    raise Undecidable("two numbers here agree to 150 digits, but their equality could not be proved")


def _cancels(poly: Poly) -> bool:
    """Whether this is c·m·(root - root') with two equations for one and the same root."""
    if len(poly) != 2:
        return False
    (a, x), (b, y) = poly.items()
    only_a = [p for p in a if p not in b]
    only_b = [p for p in b if p not in a]
    if x != -y or len(only_a) != 1 or len(only_b) != 1:
        return False
    (s, e), (t, f) = only_a[0], only_b[0]
    return s.kind == t.kind == "root" and e == f and bool(s.payload.same_root(t.payload))


@lru_cache(maxsize=8192)
def _sign_real(x: Real) -> int:
    top = _sign_poly(x.num)
    return top if len(x.den) == 1 else top * _sign_poly(x.den)


def sign(x: Number) -> int:
    """-1, 0 or 1.

    Raises:
        Undecidable: neither equality to zero nor a side of it could be proved.
    """
    if not isinstance(x, Real):
        return (x > 0) - (x < 0)
    return _sign_real(x)


def compare_numbers(a: Number, b: Number) -> int:
    """-1, 0 or 1 as a is below, at or above b; raises Undecidable like `sign`."""
    if not isinstance(a, Real) and not isinstance(b, Real):
        return (a > b) - (a < b)
    if a is b or a == b:
        return 0
    return sign(a - b)


def floor_number(x: Number) -> int:
    """The largest integer at most x; raises Undecidable where no proof tells."""
    if not isinstance(x, Real):
        return x.numerator // x.denominator
    near = to_float(x)
    if abs(near) > 2.0**50:
        raise Undecidable("a number here is too large to be rounded")
    guess = math.floor(near)
    while compare_numbers(x, Fraction(guess)) < 0:
        guess -= 1
    while compare_numbers(x, Fraction(guess + 1)) >= 0:
        guess += 1
    return guess
