"""Growth: sums of products c^n · n^p · (log n)^q · (log log n)^r · n!^s, one such factor a variable."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from functools import reduce
from typing import Literal

from pytest_growthbudget.bounds.enclosure import compare_numbers, sign, to_float
from pytest_growthbudget.bounds.exact import ONE, ZERO, Number, Undecidable

Relation = Literal["slower", "same", "faster"]


@dataclass(frozen=True, slots=True)
class Factor:
    """The growth in one variable: exp(rate·n) · n^power · (log n)^log · (log log n)^loglog · n!^factorial."""

    factorial: Number = ZERO
    rate: Number = ZERO
    power: Number = ZERO
    log: Number = ZERO
    loglog: Number = ZERO
    _hash: int = field(default=0, init=False, repr=False, compare=False)

    def __hash__(self) -> int:
        # Hashing a Fraction takes a modular inverse; monomials are hashed often.
        if not self._hash:
            object.__setattr__(self, "_hash", hash(self.parts()) or 1)
        return self._hash

    def __reduce__(self) -> tuple[type[Factor], tuple[Number, ...]]:
        # The hash kept above is this process's own.
        return Factor, self.parts()

    def parts(self) -> tuple[Number, Number, Number, Number, Number]:
        """From the part that decides first to the one that decides last."""
        return self.factorial, self.rate, self.power, self.log, self.loglog

    def __mul__(self, other: Factor) -> Factor:
        return Factor(*(a + b if a and b else a or b for a, b in zip(self.parts(), other.parts(), strict=True)))

    def raised(self, exponent: Number) -> Factor:
        return Factor(*(x * exponent if x else x for x in self.parts()))

    def sign(self) -> int:
        """1 if the factor tends to infinity, -1 if to 0, 0 if it is constant."""
        for part in self.parts():
            if part:
                side = sign(part)
                if side:
                    return side
        return 0

    def over(self, other: Factor) -> Factor:
        return self * other.raised(Fraction(-1))

    def log_value(self, n: float) -> float:
        """The natural logarithm of the factor at size n ≥ 1; logs are held at 1 where they would be smaller."""
        n = max(n, 1)
        log_n = math.log(n)
        if log_n > 700.0 and (self.factorial or self.rate or math.isinf(log_n)):
            return math.inf * self.sign()
        factorial, rate, power, log, loglog = (to_float(x) for x in self.parts())
        total = power * log_n
        if rate:
            total += rate * n
        if factorial:
            total += factorial * math.lgamma(n + 1.0)
        log_2 = max(log_n / _LN2, 1.0)
        if log:
            total += log * math.log(log_2)
        if loglog:
            total += loglog * math.log(max(math.log2(log_2), 1.0))
        return total


_LN2 = math.log(2.0)
CONSTANT = Factor()
#: The class as messages name it.
CLASS = "c^n n^p log^q n (log log n)^r n!^s"
Monomial = tuple[tuple[str, Factor], ...]


def compare_factors(a: Factor, b: Factor) -> int:
    """-1, 0 or 1 as a grows slower than, like or faster than b (one variable: a total order)."""
    if a is b:
        return 0
    for x, y in zip(a.parts(), b.parts(), strict=True):
        if x is not y and x != y:
            side = compare_numbers(x, y)
            if side:
                return side
    return 0


def monomial(factors: Mapping[str, Factor]) -> Monomial:
    """The product of factors by variable; constant ones are dropped."""
    return tuple(sorted((name, f) for name, f in factors.items() if f != CONSTANT))


def multiply(a: Monomial, b: Monomial) -> Monomial:
    if not a:
        return b
    if not b:
        return a
    out = dict(a)
    for name, f in b:
        out[name] = out[name] * f if name in out else f
    return monomial(out)


def raised(a: Monomial, exponent: Number) -> Monomial:
    return monomial({name: f.raised(exponent) for name, f in a})


def compare_monomials(a: Monomial, b: Monomial) -> int | None:
    """-1, 0, 1, or None where neither bounds the other. Variables grow independently of one another."""
    left, right = dict(a), dict(b)
    pairs = [(f, right.get(name, CONSTANT)) for name, f in a]
    pairs += [(CONSTANT, f) for name, f in b if name not in left]
    found = 0
    for f, g in pairs:
        side = compare_factors(f, g)
        if side:
            if found and side != found:
                return None
            found = side
    return found


def along(a: Monomial, weights: Mapping[str, Fraction]) -> Factor:
    """The factor in one scale λ when each variable v in `weights` is λ^weight and the others are held.

    Exponential and factorial factors need weight 1, else the result is outside the class and Undecidable is raised.
    """
    total = CONSTANT
    for name, f in a:
        weight = weights.get(name, ZERO)
        if not weight:
            continue
        if weight != 1 and (f.rate or f.factorial):
            raise Undecidable("an exponential in one of several variables")
        total = total * Factor(f.factorial, f.rate, f.power * weight, f.log, f.loglog)
    return total


@dataclass(frozen=True, slots=True)
class Growth:
    """A sum of monomials of which none bounds another; one for a single variable.

    `weights` are the constants as written, one for each monomial (1.0 where they are not known).
    """

    monomials: tuple[Monomial, ...]
    weights: tuple[float, ...]

    def variables(self) -> tuple[str, ...]:
        return tuple(sorted({name for m in self.monomials for name, _ in m}))

    def log_value(self, sizes: Mapping[str, float]) -> float:
        """The natural logarithm of the sum at these sizes, without overflow. Sizes below 1 count as 1."""
        if len(self.monomials) == 1:
            return sum(f.log_value(sizes[name]) for name, f in self.monomials[0])
        values = [
            math.log(w) + sum(f.log_value(sizes[name]) for name, f in m)
            for m, w in zip(self.monomials, self.weights, strict=True)
        ]
        top = max(values)
        if not math.isfinite(top):
            return top
        return top + math.log(sum(math.exp(v - top) for v in values))


def growth_along(growth: Growth, weights: Mapping[str, Fraction]) -> Factor:
    """The fastest of the parts in one scale, as `along` has it."""
    factors = (along(m, weights) for m in growth.monomials)
    return reduce(lambda best, f: f if compare_factors(f, best) > 0 else best, factors)


def _below_a_mean(m: Monomial, others: list[Monomial]) -> bool:
    """Whether m ≤ a^t · b^(1-t) ≤ a + b for two of the others (weighted means), which makes m redundant."""
    for i, a in enumerate(others):
        for b in others[i + 1 :]:
            for t in _mixes(m, a, b):
                mean = multiply(raised(a, t), raised(b, ONE - t))
                if compare_monomials(m, mean) in (-1, 0):
                    return True
    return False


def _mixes(m: Monomial, a: Monomial, b: Monomial) -> set[Number]:
    """The t in (0, 1) at which some part of m equals that of a^t b^(1-t)."""
    out: set[Number] = set()
    for name in {**dict(m), **dict(a), **dict(b)}:
        rows = [dict(x).get(name, CONSTANT).parts() for x in (m, a, b)]
        for want, high, low in zip(*rows, strict=True):
            if high != low:
                t = (want - low) / (high - low)
                if sign(t) > 0 and compare_numbers(t, ONE) < 0:
                    out.add(t)
    return out


def bounded_by(a: Growth, b: Growth) -> bool | None:
    """Whether a = O(b): True or False by proof, None where neither was found."""
    if all(_covered(m, b) for m in a.monomials):
        return True
    names = sorted({*a.variables(), *b.variables()})
    if any(_outgrows(a, b, weights) for weights in _rays(names)):
        return False
    return None


def _outgrows(a: Growth, b: Growth, weights: Mapping[str, Fraction]) -> bool:
    """Whether a is proved to grow faster than b along one ray."""
    try:
        return compare_factors(growth_along(a, weights), growth_along(b, weights)) > 0
    except Undecidable:
        return False


def _covered(m: Monomial, b: Growth) -> bool:
    others = list(b.monomials)
    return any(compare_monomials(m, k) in (-1, 0) for k in others) or (
        1 < len(others) <= 8 and _below_a_mean(m, others)
    )


def _rays(names: list[str]) -> Iterable[dict[str, Fraction]]:
    steps = (ZERO, ONE, Fraction(2), Fraction(5), Fraction(1, 3)) if len(names) <= 3 else (ZERO, ONE)
    if len(names) > 8:
        for name in names:
            yield {name: ONE}
        yield dict.fromkeys(names, ONE)
        return
    total = len(steps) ** len(names)
    for code in range(1, total):
        weights, rest = {}, code
        for name in names:
            rest, digit = divmod(rest, len(steps))
            weights[name] = steps[digit]
        yield weights


def relation(a: Growth, b: Growth) -> Relation | None:
    """a's growth against b's; None where they are incomparable (raises Undecidable where no proof was found)."""
    if len(a.monomials) == 1 and len(b.monomials) == 1:
        side = compare_monomials(a.monomials[0], b.monomials[0])
        if side is None:
            return None
        return "same" if side == 0 else "slower" if side < 0 else "faster"
    below, above = bounded_by(a, b), bounded_by(b, a)
    if below and above:
        return "same"
    if below and above is False:
        return "slower"
    if above and below is False:
        return "faster"
    if below is False and above is False:
        return None
    raise Undecidable("no proof of the order of these two sums was found")


def scaled(growth: Growth, scales: Mapping[str, float], held: Mapping[str, float]) -> Callable[[float], float]:
    """log growth as a function of one scale n: variable v has size scales[v]·n, or held[v]."""

    def at(n: float) -> float:
        sizes = {v: scales[v] * n if v in scales else held[v] for v in growth.variables()}
        return growth.log_value(sizes)

    return at
