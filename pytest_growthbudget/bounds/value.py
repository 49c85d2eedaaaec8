"""Values: sums of exact coefficients times monomials, with a bound on what was left out.

Here `log n` stands for ln n and `log log n` for ln ln n, exactly; bases are in the coefficients.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction
from itertools import count

from pytest_growthbudget.bounds.enclosure import floor_number, sign
from pytest_growthbudget.bounds.exact import (
    ONE,
    ZERO,
    Number,
    Real,
    Symbol,
    depends_on,
    exp_number,
    power_number,
    symbol,
)
from pytest_growthbudget.bounds.growth import (
    CLASS,
    CONSTANT,
    Factor,
    Monomial,
    compare_monomials,
    monomial,
    multiply,
    raised,
)
from pytest_growthbudget.bounds.roots import ln_with_surds

MAX_TERMS = 40
_counter = count(1)


class Outside(Exception):
    """The value cannot be expressed; the message says why."""


def unknown() -> Number:
    """A fresh positive factor that is bounded from both sides."""
    return symbol(Symbol("some", None, f"{next(_counter):012d}"))


@dataclass(frozen=True, slots=True)
class Value:
    """Σ coefficient · monomial + O(Σ errors)."""

    terms: dict[Monomial, Number]
    errors: tuple[Monomial, ...] = ()

    def constant(self) -> Number | None:
        """The number that this value is, or None."""
        if self.errors or any(self.terms.keys() - {()}):
            return None
        return self.terms.get((), ZERO)


def number(x: Number) -> Value:
    return Value({(): x} if x else {})


def size(name: str) -> Value:
    return Value({((name, Factor(power=ONE)),): ONE})


def add(values: Iterable[tuple[int, Value]]) -> Value:
    terms: dict[Monomial, Number] = {}
    errors: list[Monomial] = []
    for side, value in values:
        errors.extend(value.errors)
        for m, c in value.terms.items():
            total = terms.get(m, ZERO) + (c if side > 0 else -c)
            if total:
                terms[m] = total
            else:
                terms.pop(m, None)
    return _limited(terms, errors)


def _limited(terms: dict[Monomial, Number], errors: list[Monomial]) -> Value:
    if len(terms) + len(errors) > MAX_TERMS:
        raise Outside("the expression multiplies out to too many parts")
    return Value(terms, tuple(_maximal(errors)) if len(errors) > 1 else tuple(errors))


def _maximal(errors: Iterable[Monomial]) -> list[Monomial]:
    kept: list[Monomial] = []
    for m in dict.fromkeys(errors):
        if any(compare_monomials(m, k) in (-1, 0) for k in kept):
            continue
        kept = [k for k in kept if compare_monomials(k, m) != -1]
        kept.append(m)
    return kept


def times(a: Value, b: Value) -> Value:
    if len(a.terms) * len(b.terms) > MAX_TERMS:
        raise Outside("the expression multiplies out to too many parts")
    terms: dict[Monomial, Number] = {}
    for m, c in a.terms.items():
        for k, d in b.terms.items():
            product = multiply(m, k)
            total = terms.get(product, ZERO) + c * d
            if total:
                terms[product] = total
            else:
                terms.pop(product, None)
    errors = [multiply(m, e) for m in (*a.terms, *a.errors) for e in b.errors]
    errors += [multiply(m, e) for m in b.terms for e in a.errors]
    return _limited(terms, errors)


def _irrational(m: Monomial) -> bool:
    """Whether an equal monomial may be written differently; rational exponents have one form."""
    return any(isinstance(x, Real) for _, f in m for x in f.parts())


def leading(value: Value) -> list[tuple[Monomial, Number]]:
    """The parts that no other part bounds, merged and proved positive.

    Raises:
        Outside: the value is zero, or not positive for all large sizes, or the parts left out may decide.
    """
    merged: list[tuple[Monomial, Number]] = []
    if len(value.terms) == 1 and not value.errors:
        merged = list(value.terms.items())
    else:
        for m, c in value.terms.items():
            for i, (k, d) in enumerate(merged if _irrational(m) else ()):
                if compare_monomials(m, k) == 0:
                    merged[i] = (k, c + d)
                    break
            else:
                merged.append((m, c))
        merged = [(m, c) for m, c in merged if c]
        if len(merged) > 1:
            merged = [
                (m, c)
                for i, (m, c) in enumerate(merged)
                if not any(j != i and compare_monomials(m, k) == -1 for j, (k, _) in enumerate(merged))
            ]
    if not merged:
        raise Outside("this is zero" if not value.errors else "what remains after cancelling cannot be told")
    for e in value.errors:
        if not any(compare_monomials(e, m) == -1 for m, _ in merged):
            raise Outside("the largest parts cancel, and what remains cannot be told")
    for _, c in merged:
        if sign(c) <= 0:
            raise Outside("this is not positive for large sizes")
    return merged


def single(value: Value) -> tuple[Monomial, Number]:
    """The one leading part; raises Outside if there are several."""
    parts = leading(value)
    if len(parts) != 1:
        raise Outside("a sum of sizes that grow independently cannot stand here")
    return parts[0]


def loosened(value: Value) -> Value:
    """The same growth, its coefficients unknown."""
    return Value({m: unknown() for m, _ in leading(value)})


def relative_rest(value: Value, lead: Monomial, coefficient: Number) -> Value:
    """value / (coefficient · lead) - 1, which tends to 0."""
    inverse = raised(lead, Fraction(-1))
    terms = {}
    for m, c in value.terms.items():
        ratio = multiply(m, inverse)
        x = c / coefficient - (ONE if ratio == () else ZERO)
        if x:
            terms[ratio] = x
    return Value(terms, tuple(multiply(e, inverse) for e in value.errors))


def _power_of(c: Number, exponent: Number) -> Number:
    if depends_on(c, ("base", "some")) and (isinstance(exponent, Real) or (isinstance(c, Real) and len(c.num) > 1)):
        return unknown()
    return power_number(c, exponent)


def power(base: Value, exponent: Number) -> Value:
    """base^exponent for a constant exponent."""
    if not exponent:
        return number(ONE)
    fixed = base.constant()
    if fixed is not None:
        if sign(fixed) <= 0:
            if exponent == 1:
                return base
            raise Outside("a power of a number that is not positive")
        return number(power_number(fixed, exponent))
    if len(base.terms) == 1 and not base.errors:
        ((m, c),) = base.terms.items()
        if sign(c) <= 0:
            raise Outside("a power of something that is not positive")
        return Value({raised(m, exponent): _power_of(c, exponent)})
    whole = isinstance(exponent, Fraction) and exponent.denominator == 1 and 0 < exponent <= 8
    if whole and (len(base.terms) + len(base.errors)) ** min(int(exponent), 4) <= 27:  # type: ignore[arg-type]
        out = base
        for _ in range(int(exponent) - 1):  # type: ignore[arg-type]
            out = times(out, base)
        leading(base)
        return out
    parts = leading(base)
    if len(parts) > 1:
        if sign(exponent) < 0:
            raise Outside("a quotient by a sum of sizes that grow independently is not a sum of products")
        return Value({raised(m, exponent): unknown() for m, _ in parts})
    lead, coefficient = parts[0]
    rest = relative_rest(base, lead, coefficient)
    head = Value({raised(lead, exponent): _power_of(coefficient, exponent)})
    series = add([(1, number(ONE)), (1, times(number(exponent), rest))])
    tops = _maximal([*rest.terms, *rest.errors])
    squares = [multiply(a, b) for a in tops for b in tops]
    return times(head, _limited(dict(series.terms), [*series.errors, *_maximal(squares)]))


def divide(a: Value, b: Value) -> Value:
    fixed = b.constant()
    if fixed is not None:
        if not fixed:
            raise Outside("division by zero")
        return times(a, number(ONE / fixed))
    if a == b and not a.errors:
        return number(ONE)
    return times(a, power(b, Fraction(-1)))


def ln(value: Value) -> Value:
    """The natural logarithm, exact up to O(1); exactly for a constant or a single part."""
    fixed = value.constant()
    if fixed is not None:
        if sign(fixed) <= 0:
            raise Outside("the logarithm of a number that is not positive")
        return number(ln_with_surds(fixed))
    parts = leading(value)
    if len(parts) > 1:
        out: dict[Monomial, Number] = {}
        for m, _ in parts:
            for name, f in m:
                if f.sign() < 0:
                    raise Outside("the logarithm of a sum with a quotient of sizes")
                lead, _ = single(Value(_ln_factor(name, f)))
                out[lead] = unknown()
        return Value(out)
    m, c = parts[0]
    total = add([(1, number(ln_with_surds(c))), *((1, Value(_ln_factor(name, f))) for name, f in m)])
    if len(value.terms) == 1 and not value.errors:
        return Value(total.terms, _stirling(m))
    return Value(total.terms, ((),))


def _stirling(m: Monomial) -> tuple[Monomial, ...]:
    return ((),) if any(f.factorial for _, f in m) else ()


def _ln_factor(name: str, f: Factor) -> dict[Monomial, Number]:
    """ln of one factor; ln n! by Stirling's series up to its constant."""
    if f.loglog:
        raise Outside("the logarithm of log log n is outside the class")
    terms: dict[Monomial, Number] = {}

    def put(coefficient: Number, **parts: Number) -> None:
        if coefficient:
            terms[monomial({name: Factor(**parts)})] = coefficient

    put(f.factorial, power=ONE, log=ONE)
    put(f.rate - f.factorial, power=ONE)
    put(f.power + f.factorial / 2, log=ONE)
    put(f.log, loglog=ONE)
    return terms


_N_LOG = Factor(power=ONE, log=ONE)
_N = Factor(power=ONE)
_LOG = Factor(log=ONE)
_LOGLOG = Factor(loglog=ONE)


def exp(value: Value) -> Value:
    """e^value, where that is one monomial up to a constant factor.

    Raises:
        Outside: the exponent is known too loosely, or the result is outside the class.
    """
    out: Monomial = ()
    factor: Number = ONE
    inexact = False
    # What tends to 0 in the exponent is kept as a relative error: (1 + 1/n)^n is not 1.
    vanishing: list[Monomial] = []
    for e in value.errors:
        side = compare_monomials(e, ())
        if side == -1:
            vanishing.append(e)
        elif side == 0:
            inexact = True
        else:
            raise Outside("an exponent has to be known exactly, up to a constant")
    for m, c in value.terms.items():
        if m == ():
            if depends_on(c, ("base", "some")):
                inexact = True
            else:
                factor = exp_number(c)
            continue
        if compare_monomials(m, ()) == -1:
            vanishing.append(m)
            continue
        if depends_on(c, ("base",)):
            raise Outside("the base of a logarithm in an exponent decides: write log2, ln or log(n, 10)")
        if depends_on(c, ("some",)):
            raise Outside("an exponent has to be known exactly, and this one is known up to a factor")
        if len(m) != 1:
            raise Outside(f"an exponential of a product of sizes is outside the class {CLASS}")
        name, f = m[0]
        if f == _N_LOG:
            inexact = True
            out = multiply(out, monomial({name: Factor(factorial=c, rate=c, power=-c / 2)}))
        elif f == _N:
            out = multiply(out, monomial({name: Factor(rate=c)}))
        elif f == _LOG:
            out = multiply(out, monomial({name: Factor(power=c)}))
        elif f == _LOGLOG:
            out = multiply(out, monomial({name: Factor(log=c)}))
        else:
            raise Outside(f"this exponent takes the growth outside the class {CLASS}")
    return Value({out: unknown() if inexact else factor}, tuple(multiply(out, m) for m in _maximal(vanishing)))


def factorial(value: Value) -> Value:
    """(k n + b)! for rational k > 0 by Stirling's formula; a small number's exactly."""
    fixed = value.constant()
    if fixed is not None:
        if isinstance(fixed, Real) or fixed.denominator != 1 or not 0 <= fixed <= 300:
            raise Outside("the factorial of this number")
        out = 1
        for i in range(2, int(fixed) + 1):
            out *= i
        return number(Fraction(out))
    terms = dict(value.terms)
    shift = terms.pop((), ZERO)
    if value.errors or len(terms) != 1:
        raise Outside("a factorial is read only of k n + b")
    ((m, k),) = terms.items()
    if len(m) != 1 or m[0][1] != _N or sign(k) <= 0 or depends_on(k, ("base", "some")):
        raise Outside("a factorial is read only of k n + b")
    rate = k * ln_with_surds(k)
    return Value({monomial({m[0][0]: Factor(factorial=k, rate=rate, power=(ONE - k) / 2 + shift)}): unknown()})


def _is_whole(m: Monomial, c: Number) -> bool:
    """Whether this part is an integer at integer sizes."""
    if isinstance(c, Real) or c.denominator != 1:
        return False
    for _, f in m:
        rest = Factor(power=f.power)
        if f != rest or isinstance(f.power, Real) or f.power.denominator != 1 or f.power < 0:
            return False
    return True


def rounded(value: Value, up: bool) -> Value:
    """Floor or ceiling: exact for numbers, else off by at most one from something that grows."""
    fixed = value.constant()
    if fixed is not None:
        return number(Fraction(-floor_number(-fixed) if up else floor_number(fixed)))
    if not value.errors and all(_is_whole(m, c) for m, c in value.terms.items()):
        return value
    for m, _ in leading(value):
        if not m or any(f.sign() < 0 for _, f in m):
            raise Outside("rounding something that does not grow")
    return Value(value.terms, tuple(_maximal([*value.errors, ()])))


__all__ = [
    "CONSTANT",
    "Outside",
    "Value",
    "add",
    "divide",
    "exp",
    "factorial",
    "leading",
    "ln",
    "loosened",
    "number",
    "relative_rest",
]
