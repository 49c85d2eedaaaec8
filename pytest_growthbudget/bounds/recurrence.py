"""Recurrences as plain records: T(n) = Σ coefficient · T(argument) + toll."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction

from pytest_growthbudget.bounds import value as v
from pytest_growthbudget.bounds.enclosure import compare_numbers, sign
from pytest_growthbudget.bounds.exact import ONE, ZERO, Number, depends_on
from pytest_growthbudget.bounds.growth import (
    CONSTANT,
    Factor,
    Monomial,
    compare_factors,
    compare_monomials,
)
from pytest_growthbudget.bounds.meaning import Meaning
from pytest_growthbudget.bounds.tree import Call
from pytest_growthbudget.bounds.value import Outside, Value


@dataclass(frozen=True, slots=True)
class Ratio:
    """The argument `factor`·n (0 < factor < 1), up to a perturbation of o(n / log^(1+ε) n) if `perturbed`."""

    factor: Number
    perturbed: bool = False


@dataclass(frozen=True, slots=True)
class Decrease:
    """The argument n - `by`, with a constant `by` > 0."""

    by: Fraction


@dataclass(frozen=True, slots=True)
class Shrink:
    """The argument n - d(n), where d grows like `by`, without bound and slower than n."""

    by: Factor


@dataclass(frozen=True, slots=True)
class Root:
    """The argument n^`exponent` (0 ≤ exponent < 1), exactly (up to rounding) if `plain`, else times smaller factors."""

    exponent: Number
    plain: bool = True


Argument = Ratio | Decrease | Shrink | Root


@dataclass(frozen=True, slots=True)
class Term:
    """`coefficient` · `growth` · (1 + `drift`/n + O(`remainder`)) · T(`argument`)."""

    coefficient: Number
    argument: Argument
    growth: Factor = CONSTANT
    drift: Number = ZERO
    remainder: Factor | None = None

    def fixed(self) -> bool:
        """Whether the coefficient is a constant."""
        return self.growth == CONSTANT and not self.drift and self.remainder is None


@dataclass(frozen=True, slots=True)
class Recurrence:
    """`toll` None is a toll of zero. `silent`: every base case given is zero, so without a toll T is zero too."""

    terms: tuple[Term, ...]
    toll: Factor | None = None
    variable: str = "n"
    function: str = "T"
    silent: bool = False

    @classmethod
    def of(
        cls, terms: Iterable[tuple[int | Fraction, Argument]], toll: Factor | None = None, variable: str = "n"
    ) -> Recurrence:
        """A recurrence from numbers: (coefficient, argument) pairs and a toll such as `Factor(power=Fraction(1))`.

        Raises:
            ValueError: a coefficient is not positive, or an argument does not shrink.
        """
        built = []
        for coefficient, argument in terms:
            if coefficient <= 0:
                raise ValueError(f"the coefficient {coefficient} is not positive")
            _check_shrinks(argument)
            built.append(Term(Fraction(coefficient), argument))
        if not built:
            raise ValueError("a recurrence needs a term")
        return cls(tuple(built), toll, variable)


def _check_shrinks(argument: Argument) -> None:
    if isinstance(argument, Ratio):
        fine = sign(argument.factor) > 0 and compare_numbers(argument.factor, ONE) < 0
    elif isinstance(argument, Decrease):
        fine = argument.by > 0
    elif isinstance(argument, Root):
        fine = sign(argument.exponent) >= 0 and compare_numbers(argument.exponent, ONE) < 0
    else:
        fine = argument.by.sign() > 0 and compare_factors(argument.by, Factor(power=ONE)) < 0
    if not fine:
        raise ValueError(f"the argument {argument} does not shrink")


def read_term(meaning: Meaning, coefficient: Value, call: Call, variable: str) -> Term:
    """One term, its coefficient and argument classified.

    Raises:
        BoundError: the coefficient is not positive, or the argument does not shrink in a way that is solved.
    """
    argument = _read_argument(meaning, call, variable)
    try:
        parts = v.leading(coefficient)
        m, constant = parts[0]
        lead = dict(m).get(variable, CONSTANT)
        drift: Number = ZERO
        remainder: Factor | None = None
        rest = v.relative_rest(coefficient, m, constant)
        for k, c in rest.terms.items():
            f = dict(k)[variable]
            if f == Factor(power=-ONE):
                drift = c
            elif remainder is None or compare_factors(f, remainder) > 0:
                remainder = f
        for k in rest.errors:
            f = dict(k)[variable]
            if remainder is None or compare_factors(f, remainder) > 0:
                remainder = f
    except Outside as reason:
        if "zero" in str(reason) or "positive" in str(reason):
            meaning.fail(
                "the coefficient of this call is not positive",
                call,
                "the theorems hold for positive coefficients; with others, terms may cancel",
            )
        meaning.fail(f"the coefficient of this call: {reason}", call)
    return Term(constant, argument, lead, drift, remainder)


def _read_argument(meaning: Meaning, call: Call, variable: str) -> Argument:
    value = meaning.of(call.argument)
    shown = meaning.text[call.argument.start : call.argument.end]
    if value.constant() is not None:
        meaning.fail(
            f"the argument {shown} does not depend on {variable}",
            call.argument,
            "put a constant cost into the toll",
        )
    try:
        m, c = v.single(value)
    except Outside as reason:
        meaning.fail(f"the argument {shown}: {reason}", call.argument)
    lead = dict(m).get(variable, CONSTANT)
    if depends_on(c, ("some",)):
        meaning.fail("the argument of a call has to be known exactly", call.argument)
    order = compare_factors(lead, Factor(power=ONE))
    if order > 0 or (order == 0 and (depends_on(c, ("base",)) or compare_numbers(c, ONE) > 0)):
        _refuse_growing(meaning, call, shown, variable)
    if order == 0:
        rest = Value({k: x for k, x in value.terms.items() if compare_monomials(k, m) != 0}, value.errors)
        if compare_numbers(c, ONE) < 0:
            return _ratio(meaning, call, c, rest, variable)
        return _decrease(meaning, call, rest, shown, variable)
    if lead.sign() <= 0:
        meaning.fail(f"the argument {shown} does not grow with {variable}", call.argument)
    if compare_numbers(lead.power, ONE) >= 0:
        meaning.fail(
            f"the argument {shown} shrinks by neither a factor, a difference nor a root",
            call.argument,
            "solved are n/b, n - k, n - d(n) and n^c with 0 < c < 1",
        )
    plain = c == 1 and lead == Factor(power=lead.power) and _only_rounded(value)
    return Root(lead.power, plain)


def _only_rounded(value: Value) -> bool:
    return len(value.terms) == 1 and all(compare_monomials(e, ()) in (-1, 0) for e in value.errors)


def _refuse_growing(meaning: Meaning, call: Call, shown: str, variable: str) -> None:
    meaning.fail(
        f"the argument {shown} does not shrink: it must be smaller than {variable}",
        call.argument,
        f"write a part of {variable}, as in {variable}/2, {variable} - 1 or sqrt({variable})",
    )


def _ratio(meaning: Meaning, call: Call, c: Number, rest: Value, variable: str) -> Argument:
    parts: list[Monomial] = [*rest.terms, *rest.errors]
    for k in parts:
        f = dict(k).get(variable, CONSTANT)
        if compare_numbers(f.power, ONE) >= 0 and compare_numbers(f.log, -ONE) >= 0:
            meaning.fail(
                "the argument strays too far from a fixed part of the size",
                call.argument,
                "the perturbation must be O(n / log^(1+ε) n) (Leighton 1996)",
            )
    return Ratio(c, bool(parts))


def _decrease(meaning: Meaning, call: Call, rest: Value, shown: str, variable: str) -> Argument:
    if not rest.terms and not rest.errors:
        _refuse_growing(meaning, call, shown, variable)
    try:
        m, d = v.single(v.times(v.number(-ONE), rest))
    except Outside:
        if rest.errors:
            meaning.fail(f"the argument {shown} is not known exactly enough", call.argument)
        _refuse_growing(meaning, call, shown, variable)
    if m == ():
        if rest.errors or len(rest.terms) > 1 or not isinstance(d, Fraction):
            meaning.fail(f"the argument {shown} has to be n - k with a rational k", call.argument)
        return Decrease(d)
    if depends_on(d, ("some",)):
        meaning.fail(f"the argument {shown} is not known exactly enough", call.argument)
    by = dict(m)[variable]
    if by.sign() < 0:
        _refuse_growing(meaning, call, shown, variable)
    return Shrink(by)


__all__ = ["Argument", "Decrease", "Ratio", "Recurrence", "Root", "Shrink", "Term", "read_term"]
