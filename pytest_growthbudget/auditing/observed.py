"""From a pattern and a toll to the recurrence that the code seems to follow, as text that can be pasted as a budget."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import groupby
from typing import Final

from pytest_growthbudget.auditing.pattern import Kind, Part, Pattern, Spread
from pytest_growthbudget.bounds.budget import Budget, parse_budget
from pytest_growthbudget.bounds.language import BoundError

_SIMPLE: Final = 12
_NEAR: Final = 0.006
_RARE: Final = 0.02
_LEAST: Final = Fraction(1, 10)
_OFTEN: Final = Fraction(9, 10)
_NEARLY_ALL: Final = Fraction(98, 100)


@dataclass(frozen=True, slots=True, kw_only=True)
class Term:
    """`count` subproblems a call of the size `argument` (text such as `n/2`).

    `value` is the ratio, the difference or the power, rounded for print; `spread` how it varies (None: it does not).
    `count_power`: the exponent with which the count grows with n.
    """

    count: Fraction
    count_power: Fraction
    kind: Kind
    value: Fraction
    spread: Spread | None
    variable: str = "n"

    @property
    def argument(self) -> str:
        value, n = self.value, self.variable
        if self.kind == "difference":
            return f"{n} - {_decimal(value)}"
        if self.kind == "power":
            return f"{n}^{_decimal(value)}" if value != Fraction(1, 2) else f"sqrt({n})"
        if value.numerator == 1:
            return f"{n}/{value.denominator}"
        if value.denominator <= _SIMPLE or (self.spread is None and value > _NEARLY_ALL):
            return f"{value.numerator}{n}/{value.denominator}"
        return f"{_decimal(value)} {n}"

    @property
    def text(self) -> str:
        count = "" if self.count == 1 else f"{_decimal(self.count)} "
        if self.count_power:
            power = "" if self.count_power == 1 else f"^{_decimal(self.count_power)}"
            count += f"{self.variable}{power} "
        return f"{count}T({self.argument})"


@dataclass(frozen=True, slots=True, kw_only=True)
class Observed:
    """The recurrence (or, without a subproblem, the bound) that the code seems to follow.

    `text` can be pasted as a budget. `theta` is what it implies, `theorem` by which theorem; `fault` says why it
    could not be solved, "" where it was.
    """

    text: str
    terms: tuple[Term, ...]
    toll: str
    theta: str
    theorem: str
    fault: str
    budget: Budget | None = None


def observe_terms(pattern: Pattern, variable: str = "n") -> tuple[Term, ...]:
    """The terms that grow with n, equal ones together, the largest first."""
    return tuple(replace(term, variable=variable) for term in _terms(pattern))


def _terms(pattern: Pattern) -> tuple[Term, ...]:
    parts = [part for part in pattern.parts if part.kind != "constant" and part.share >= _RARE]
    if pattern.count_power:
        power = Fraction(round(pattern.count_power * 100), 100)
        return tuple(_term(part, _factor(pattern.count_factor), power) for part in parts)
    terms = [_term(part, Fraction(part.share), Fraction(0)) for part in parts]
    if pattern.partition and len(terms) > 1 and all(term.kind == "ratio" and term.count > _OFTEN for term in terms):
        terms = _whole(terms)
    return tuple(replace(term, count=_count(float(term.count))) for term in _merged(terms))


def _term(part: Part, count: Fraction, power: Fraction) -> Term:
    mean = part.value.mean
    if part.kind == "difference":
        value = max(Fraction(round(mean)) if abs(mean - round(mean)) < 0.1 else Fraction(round(10 * mean), 10), _LEAST)
    elif part.kind == "power":
        value = _near_simple(mean, 0.03)
    else:
        value = _ratio(mean, max(_NEAR, 1 / part.at) if part.fixed else 0.0)
    return Term(count=count, count_power=power, kind=part.kind, value=value, spread=None if part.fixed else part.value)


def _ratio(mean: float, rounding: float) -> Fraction:
    """The simplest fraction within `rounding` of a ratio, else a decimal."""
    for most in range(2, _SIMPLE + 1):
        simple = Fraction(mean).limit_denominator(most)
        if 0 < simple < 1 and abs(float(simple) - mean) <= rounding:
            return simple
    digits = 2 if 0.02 <= mean <= 0.98 else 3
    rounded = Fraction(round(mean * 10**digits), 10**digits)
    return min(max(rounded, Fraction(1, 1000)), Fraction(999, 1000))


def _near_simple(value: float, tolerance: float) -> Fraction:
    simple = Fraction(value).limit_denominator(3)
    return simple if abs(float(simple) - value) <= tolerance else Fraction(round(value * 100), 100)


def _count(share: float) -> Fraction:
    whole = max(1, round(share))
    # A chain that ends early misses its last subproblem: that is no coefficient below 1.
    return Fraction(whole) if abs(share - whole) <= 0.1 * whole else Fraction(round(share * 100), 100)


def _factor(factor: float) -> Fraction:
    return Fraction(1) if 0.75 < factor < 1.35 else max(Fraction(round(factor * 100), 100), Fraction(1, 100))


def _whole(terms: Sequence[Term]) -> list[Term]:
    """The same with ratios that add up to one, as the subproblems share out all of the call's input."""
    rest = 1 - sum((term.value for term in terms[:-1]), Fraction(0))
    if rest <= 0 or abs(rest - terms[-1].value) > Fraction(1, 10):
        return list(terms)
    return [*terms[:-1], replace(terms[-1], value=rest)]


def _merged(terms: Iterable[Term]) -> Iterable[Term]:
    ordered = sorted(terms, key=_largest_first)
    for _, group in groupby(ordered, key=lambda term: (term.kind, term.value, term.count_power, term.spread is None)):
        same = list(group)
        yield replace(same[0], count=sum((term.count for term in same), Fraction(0)))


def _largest_first(term: Term) -> tuple[int, Fraction]:
    order = ("difference", "ratio", "power", "constant").index(term.kind)
    return order, term.value if term.kind == "difference" else -term.value


def _decimal(value: Fraction) -> str:
    return f"{float(value):.4g}"


def observed(terms: tuple[Term, ...], toll: str, variable: str = "n", function: str = "T") -> Observed:
    """The recurrence of `terms` and `toll` (text), solved by the theorems of `bounds`."""
    text = toll
    if terms:
        calls = " + ".join(term.text.replace("T(", f"{function}(") for term in terms)
        text = f"{function}({variable}) = {calls} + {toll}"
    try:
        budget = parse_budget(text)
    except BoundError as error:
        return Observed(text=text, terms=terms, toll=toll, theta="", theorem="", fault=error.message)
    return Observed(
        text=text, terms=terms, toll=toll, theta=budget.theta, theorem=budget.theorem, fault="", budget=budget
    )
