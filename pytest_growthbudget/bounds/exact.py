"""Exact real numbers, as far as growths need them.

A `Number` is a `Fraction` or a `Real`: a quotient of polynomials, with rational coefficients, in a few constants
(logarithms of primes, roots of primes, e, and the roots of characteristic equations). Two numbers whose
difference cancels formally are equal; no other pair is ever taken for equal. Strict order is decided in
`enclosure.py` with rigorous intervals.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from functools import lru_cache
from math import gcd, isqrt
from typing import Any, Union

ZERO = Fraction(0)
ONE = Fraction(1)


@dataclass(frozen=True, slots=True)
class Symbol:
    """A constant. `kind` is one of

    "ln"    the natural logarithm of the integer `payload` (a prime, or a large number not factored further);
    "rad"   the integer `payload` itself, carried only with exponents between 0 and 1;
    "e"     Euler's number;
    "root"  the root of the `roots.Equation` in `payload`;
    "lnof", "exp"  logarithm and exponential of the Number in `payload`;
    "base"  1/ln of the unstated base of a bare `log`;
    "some"  an unknown positive factor, bounded from both sides (from O(...), max and the like).
    """

    kind: str
    payload: Any = field(compare=False)
    key: str

    def __lt__(self, other: Symbol) -> bool:
        return (self.kind, self.key) < (other.kind, other.key)


Mono = tuple[tuple[Symbol, Fraction], ...]
Poly = dict[Mono, Fraction]
Number = Union[Fraction, "Real"]

BASE = Symbol("base", None, "")
EULER = Symbol("e", None, "")


class Undecidable(Exception):
    """The order of two numbers could not be established by proof."""


class Real:
    """An irrational (or not provably rational) number num/den; immutable. Build with `make`."""

    __slots__ = ("_hash", "den", "num")

    def __init__(self, num: Poly, den: Poly) -> None:
        self.num = num
        self.den = den
        self._hash: int | None = None

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Real) and self.num == other.num and self.den == other.den

    def __hash__(self) -> int:
        if self._hash is None:
            self._hash = hash((frozenset(self.num.items()), frozenset(self.den.items())))
        return self._hash

    def __reduce__(self) -> tuple[type[Real], tuple[Poly, Poly]]:
        return Real, (self.num, self.den)

    def __repr__(self) -> str:
        return f"Real({self.num!r}, {self.den!r})"

    def __add__(self, other: Number | int) -> Number:
        if isinstance(other, Real):
            if self.den == other.den:
                return make(_poly_add(self.num, other.num), self.den)
            num = _poly_add(_poly_mul(self.num, other.den), _poly_mul(other.num, self.den))
            return make(num, _poly_mul(self.den, other.den))
        if not other:
            return self
        return make(_poly_add(self.num, _scale(self.den, Fraction(other))), self.den)

    __radd__ = __add__

    def __neg__(self) -> Number:
        return Real(_scale(self.num, Fraction(-1)), self.den)

    def __sub__(self, other: Number | int) -> Number:
        return self + (-other)

    def __rsub__(self, other: Number | int) -> Number:
        return (-self) + other

    def __mul__(self, other: Number | int) -> Number:
        if isinstance(other, Real):
            return make(_poly_mul(self.num, other.num), _poly_mul(self.den, other.den))
        return make(_scale(self.num, Fraction(other)), self.den) if other else ZERO

    __rmul__ = __mul__

    def __truediv__(self, other: Number | int) -> Number:
        if isinstance(other, Real):
            return make(_poly_mul(self.num, other.den), _poly_mul(self.den, other.num))
        return make(_scale(self.num, 1 / Fraction(other)), self.den)

    def __rtruediv__(self, other: Fraction | int) -> Number:
        return make(_scale(self.den, Fraction(other)), self.num) if other else ZERO


def _scale(poly: Mapping[Mono, Fraction], by: Fraction) -> Poly:
    return {mono: coefficient * by for mono, coefficient in poly.items()}


def _poly_add(a: Poly, b: Poly) -> Poly:
    out = dict(a)
    for mono, coefficient in b.items():
        total = out.get(mono, ZERO) + coefficient
        if total:
            out[mono] = total
        else:
            del out[mono]
    return out


def _mono_mul(a: Mono, b: Mono) -> tuple[Mono, Fraction]:
    """The product, and the rational factor that roots of primes gave up to stay between exponents 0 and 1."""
    exponents: dict[Symbol, Fraction] = dict(a)
    for symbol, exponent in b:
        exponents[symbol] = exponents.get(symbol, ZERO) + exponent
    factor = ONE
    for symbol, exponent in exponents.items():
        if symbol.kind == "rad" and not 0 <= exponent < 1:
            whole = exponent.numerator // exponent.denominator
            if abs(whole) * symbol.payload.bit_length() > 5000:
                raise Undecidable("a number here is too large")
            factor *= Fraction(symbol.payload) ** whole
            exponents[symbol] = exponent - whole
    return tuple(sorted((s, e) for s, e in exponents.items() if e)), factor


def _poly_mul(a: Poly, b: Poly) -> Poly:
    if len(a) * len(b) > 2000:
        raise Undecidable("a number here has too many parts")
    out: Poly = {}
    for mono_a, x in a.items():
        for mono_b, y in b.items():
            mono, factor = _mono_mul(mono_a, mono_b) if mono_a and mono_b else (mono_a or mono_b, ONE)
            total = out.get(mono, ZERO) + x * y * factor
            if total:
                out[mono] = total
            else:
                del out[mono]
    return out


def make(num: Poly, den: Poly) -> Number:
    """num/den in the form in which equal quotients look alike, as a Fraction where it is one."""
    if not num:
        return ZERO
    if not den:
        raise ZeroDivisionError
    lead = min(den)
    if len(den) > 1 or lead or den[lead] != 1:
        inverse = tuple((symbol, -exponent) for symbol, exponent in lead)
        by, factor = _mono_mul((), inverse)
        scale: Poly = {by: factor / den[lead]}
        num, den = _poly_mul(num, scale), _poly_mul(den, scale)
    if len(den) == 1:
        if len(num) == 1 and () in num:
            return num[()]
    elif len(num) == len(den):
        first = next(iter(num))
        if first in den:
            ratio = num[first] / den[first]
            if all(den.get(mono, ZERO) * ratio == x for mono, x in num.items()):
                return ratio
    return Real(num, den)


def symbol(sym: Symbol, exponent: Fraction = ONE) -> Number:
    """The constant `sym`, raised."""
    mono, factor = _mono_mul((), ((sym, exponent),))
    return make({mono: factor}, {(): ONE})


def monomials(x: Real) -> Iterable[Mono]:
    """All products of constants that occur in `x`."""
    yield from x.num
    yield from x.den


def depends_on(x: Number, kinds: tuple[str, ...]) -> bool:
    """Whether `x` contains a constant of one of these kinds."""
    return isinstance(x, Real) and any(
        sym.kind in kinds or (sym.kind in ("lnof", "exp") and depends_on(sym.payload, kinds))
        for mono in monomials(x)
        for sym, _ in mono
    )


_SMALL_PRIMES = [p for p in range(2, 1000) if all(p % d for d in range(2, isqrt(p) + 1))]


@lru_cache(maxsize=4096)
def factor(n: int) -> tuple[tuple[int, int], ...]:
    """(divisor, exponent) pairs of n ≥ 1: primes, and at most one unfactored rest that is no perfect power.

    An unfactored rest can only make two equal numbers look different, never the reverse.
    """
    out: list[tuple[int, int]] = []
    for p in _SMALL_PRIMES:
        if p * p > n:
            break
        count = 0
        while n % p == 0:
            n //= p
            count += 1
        if count:
            out.append((p, count))
    if n > 1:
        root, exponent = perfect_power(n)
        out.append((root, exponent))
    return tuple(out)


def perfect_power(n: int) -> tuple[int, int]:
    """(r, k) with r**k == n and k as large as can be."""
    # Small primes are divided out before, so a root has ten bits at least; small n are rare and cheap.
    most = n.bit_length() if n < 10**6 else n.bit_length() // 9
    for k in range(most, 1, -1):
        r = integer_root(n, k)
        if r > 1 and r**k == n:
            return r, k
    return n, 1


def integer_root(n: int, k: int) -> int:
    """The largest r with r**k ≤ n."""
    if n < 2:
        return n
    r = 1 << -(-n.bit_length() // k)
    while True:
        better = ((k - 1) * r + n // r ** (k - 1)) // k
        if better >= r:
            return r
        r = better


def ln_symbol(prime: int) -> Symbol:
    return Symbol("ln", prime, str(prime))


@lru_cache(maxsize=4096)
def ln_fraction(x: Fraction) -> Number:
    """ln x of a positive rational, as a sum of logarithms of primes."""
    poly: Poly = {}
    for part, side in ((x.numerator, 1), (x.denominator, -1)):
        for prime, exponent in factor(part):
            mono: Mono = ((ln_symbol(prime), ONE),)
            poly[mono] = poly.get(mono, ZERO) + side * exponent
    return make({m: c for m, c in poly.items() if c}, {(): ONE})


def number_key(x: Number) -> str:
    """A text that two numbers share only when they are equal."""
    if isinstance(x, Real):
        return "/".join(
            "+".join(sorted(f"{c}" + "".join(f"*{s.kind}[{s.key}]^{e}" for s, e in mono) for mono, c in poly.items()))
            for poly in (x.num, x.den)
        )
    return str(x)


def ln_number(x: Number) -> Number:
    """ln x of a positive number."""
    if not isinstance(x, Real):
        return ln_fraction(x)
    if len(x.num) == 1 and len(x.den) == 1:
        ((mono, coefficient),) = x.num.items()
        if coefficient > 0:
            total = ln_fraction(coefficient)
            for sym, exponent in mono:
                if sym.kind == "rad":
                    total = total + exponent * ln_fraction(Fraction(sym.payload))
                elif sym.kind == "e":
                    total = total + exponent
                elif sym.kind == "exp":
                    total = total + exponent * sym.payload
                else:
                    total = total + exponent * symbol(_ln_of_symbol(sym))
            return total
    return symbol(Symbol("lnof", x, number_key(x)))


def _ln_of_symbol(sym: Symbol) -> Symbol:
    x = symbol(sym)
    return Symbol("lnof", x, number_key(x))


def exp_number(x: Number) -> Number:
    """e^x; a product of rational powers of primes wherever x is a rational combination of their logarithms."""
    if not isinstance(x, Real):
        return symbol(EULER, x) if x else ONE
    if len(x.den) == 1:
        out: Number = ONE
        rest: Poly = {}
        for mono, coefficient in x.num.items():
            if not mono:
                out = out * symbol(EULER, coefficient)
            elif len(mono) == 1 and mono[0][0].kind == "ln" and mono[0][1] == 1:
                prime = mono[0][0].payload
                out = out * symbol(Symbol("rad", prime, str(prime)), coefficient)
            elif len(mono) == 1 and mono[0][0].kind == "lnof" and mono[0][1] == 1 and coefficient.denominator == 1:
                out = out * power_number(mono[0][0].payload, coefficient)
            else:
                rest[mono] = coefficient
        if not rest:
            return out
        remainder = make(rest, {(): ONE})
        return out * symbol(Symbol("exp", remainder, number_key(remainder)))
    return symbol(Symbol("exp", x, number_key(x)))


def power_number(x: Number, exponent: Number) -> Number:
    """x^exponent of a positive x."""
    if not isinstance(exponent, Real) and exponent.denominator == 1 and abs(exponent) <= 64:
        k = exponent.numerator
        if not isinstance(x, Real):
            if abs(k) * max(x.numerator.bit_length(), x.denominator.bit_length()) > 5000:
                raise Undecidable("a number here is too large")
            return x**k
        out: Number = ONE
        for _ in range(abs(k)):
            out = out * x
        return out if k >= 0 else ONE / out
    if isinstance(x, Real) and len(x.num) == 1 and len(x.den) == 1 and not isinstance(exponent, Real):
        ((mono, coefficient),) = x.num.items()
        out = power_number(coefficient, exponent)
        for sym, e in mono:
            out = out * symbol(sym, e * exponent)
        return out
    return exp_number(exponent * ln_number(x))


def is_large(x: Number, bits: int) -> bool:
    """Whether some integer in x is longer than so many bits."""
    if isinstance(x, Real):
        return any(
            is_large(c, bits) or any(is_large(e, bits) or _is_large_symbol(s, bits) for s, e in mono)
            for poly in (x.num, x.den)
            for mono, c in poly.items()
        )
    return x.numerator.bit_length() > bits or x.denominator.bit_length() > bits


def _is_large_symbol(sym: Symbol, bits: int) -> bool:
    if sym.kind in ("ln", "rad"):
        return bool(sym.payload.bit_length() > bits)
    if sym.kind == "root":
        return any(is_large(a, bits) or is_large(w, bits) for a, w in sym.payload.terms)
    return sym.kind in ("lnof", "exp") and is_large(sym.payload, bits)


def common_measure(weights: Iterable[Fraction]) -> Fraction:
    """The largest rational of which all these are integer multiples."""
    numerator, denominator = 0, 1
    for w in weights:
        numerator = gcd(numerator * w.denominator, w.numerator * denominator)
        denominator *= w.denominator
        shrink = gcd(numerator, denominator)
        numerator, denominator = numerator // shrink, denominator // shrink
    return Fraction(numerator, denominator)
