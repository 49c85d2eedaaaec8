"""What was declared, held against what was found, term by term.

Every term of a recurrence is a promise of at most: fewer subproblems, smaller ones and a cheaper toll keep it. A
check that does not agree says that this promise is broken, not that the budget is: whether the growth suffers is told
by solving the observed recurrence.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from typing import Final, Literal

from pytest_growthbudget.auditing.observed import Observed, Term
from pytest_growthbudget.auditing.pattern import Pattern
from pytest_growthbudget.auditing.toll import Toll
from pytest_growthbudget.bounds.budget import Budget, compare
from pytest_growthbudget.bounds.enclosure import to_float
from pytest_growthbudget.bounds.growth import CONSTANT, Factor, monomial
from pytest_growthbudget.bounds.language import BoundError
from pytest_growthbudget.bounds.printing import show_monomial
from pytest_growthbudget.bounds.recurrence import Argument, Decrease, Ratio, Recurrence, Shrink
from pytest_growthbudget.fitting.judgement import Interval, two_places

About = Literal["subproblems", "argument", "toll", "overlap"]

COUNT_SLACK: Final = 0.1
RATIO_SLACK: Final = 0.03
TOLL_SLACK: Final = 0.15
TIME_SLACK: Final = 0.4
_REPEATS: Final = 0.8
_FEWEST_REPEATS: Final = 16


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One promise: what was declared, what was found, and whether it is kept (None: it could not be told)."""

    about: About
    declared: str
    found: str
    agrees: bool | None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Slot:
    """One declared subproblem."""

    argument: Argument
    text: str


def declared_text(argument: Argument, variable: str = "n") -> str:
    """The argument of a declared term as text."""
    if isinstance(argument, Ratio):
        factor = argument.factor
        if isinstance(factor, Fraction):
            head = variable if factor.numerator == 1 else f"{factor.numerator}{variable}"
            return f"{head}/{factor.denominator}"
        return f"{to_float(factor):.4g} {variable}"
    if isinstance(argument, Decrease):
        return f"{variable} - {float(argument.by):g}"
    if isinstance(argument, Shrink):
        return f"{variable} - {show_monomial(monomial({variable: argument.by}))}"
    exponent = to_float(argument.exponent)
    return f"sqrt({variable})" if exponent == 0.5 else f"{variable}^{exponent:.4g}"


def toll_text(recurrence: Recurrence) -> str:
    """The declared toll as text; "0" for none."""
    if recurrence.toll is None:
        return "0"
    return "1" if recurrence.toll == CONSTANT else show_monomial(monomial({recurrence.variable: recurrence.toll}))


def toll_growth(toll: Factor | None) -> Factor:
    """The growth that own work may have: a call costs something, so no toll means a constant one."""
    return CONSTANT if toll is None else toll


def checks(
    recurrence: Recurrence, pattern: Pattern, found: Observed, toll: Toll | None, excess: Interval | None
) -> tuple[Check, ...]:
    """The promises of `recurrence` one by one. `excess` is that of own work over the declared toll."""
    return (
        _subproblems(recurrence, pattern, found),
        *_arguments(recurrence, found),
        _toll(recurrence, toll, excess),
    )


def _subproblems(recurrence: Recurrence, pattern: Pattern, found: Observed) -> Check:
    fixed = all(term.fixed() for term in recurrence.terms)
    growing = any(term.count_power for term in found.terms)
    seen = sum((float(term.count) for term in found.terms), 0.0)
    text = " + ".join(term.text for term in found.terms) if growing else f"{seen:.3g}"
    steady = sum(part.share for part in pattern.parts if part.kind == "constant")
    if steady >= 0.5:
        text += f" that grows with {recurrence.variable}, beside {steady:.3g} of a constant size"
    elif not growing and pattern.count.low != pattern.count.high:
        text += f" on average ({pattern.count.low:g} to {pattern.count.high:g} in 90 % of calls)"
    if not fixed:
        # A coefficient that grows with n is compared by the growth it leads to alone.
        return Check(about="subproblems", declared="a number that grows", found=text, agrees=None)
    promised = sum(to_float(term.coefficient) for term in recurrence.terms)
    agrees = not growing and seen <= promised * (1 + COUNT_SLACK)
    return Check(about="subproblems", declared=f"{promised:.4g}", found=text, agrees=agrees)


def _arguments(recurrence: Recurrence, found: Observed) -> Iterator[Check]:
    """The subproblems of a call against those declared, the largest against the largest and so on."""
    slots = _slots(recurrence)
    for term, slot in _paired(found.terms, slots):
        yield Check(
            about="argument",
            declared=slot.text,
            found=_described(term),
            agrees=_no_larger(term, slot.argument),
        )


def _slots(recurrence: Recurrence) -> list[_Slot]:
    slots = []
    for term in recurrence.terms:
        whole = round(to_float(term.coefficient)) if term.fixed() else 1
        text = declared_text(term.argument, recurrence.variable)
        slots += [_Slot(argument=term.argument, text=text)] * min(max(whole, 1), 64)
    return sorted(slots, key=_descending)


def _descending(slot: _Slot) -> tuple[int, float]:
    argument = slot.argument
    if isinstance(argument, Decrease):
        return 0, float(argument.by)
    if isinstance(argument, Shrink):
        return 1, 0.0
    if isinstance(argument, Ratio):
        return 2, -to_float(argument.factor)
    return 3, -to_float(argument.exponent)


def _paired(terms: tuple[Term, ...], slots: list[_Slot]) -> Iterator[tuple[Term, _Slot]]:
    """Each found term beside the declared ones that it meets; what is one too many is told by the count."""
    place, told = 0, set()
    for term in terms:
        for _ in range(max(1, round(float(term.count)))):
            if place >= len(slots):
                return
            slot = slots[place]
            place += 1
            if (id(term), slot.text) not in told:
                told.add((id(term), slot.text))
                yield term, slot


def _described(term: Term) -> str:
    if term.spread is None:
        return term.argument
    low, high = term.spread.low, term.spread.high
    if term.kind == "difference":
        return f"n - {term.spread.mean:.3g} on average ({low:g} to {high:g} less in 90 % of calls)"
    return f"{term.spread.mean:.2f} n on average ({low:.2f} to {high:.2f} in 90 % of calls)"


def _no_larger(term: Term, declared: Argument) -> bool | None:
    """Whether the found subproblem is no larger than declared, on average; None where forms cannot be compared."""
    rank = {"difference": 0, "ratio": 2, "power": 3, "constant": 4}[term.kind]
    value = float(term.value)
    if isinstance(declared, Decrease):
        return rank > 0 or value >= float(declared.by) * 0.9
    if isinstance(declared, Shrink):
        return None if rank == 0 else True
    if isinstance(declared, Ratio):
        return rank > 2 or (rank == 2 and value <= to_float(declared.factor) + RATIO_SLACK)
    return rank > 3 or (rank == 3 and value <= to_float(declared.exponent) + RATIO_SLACK)


def _toll(recurrence: Recurrence, toll: Toll | None, excess: Interval | None) -> Check:
    declared = toll_text(recurrence)
    if toll is None:
        return Check(about="toll", declared=declared, found="too few sizes to tell", agrees=None)
    low, high = toll.exponent.low, toll.exponent.high
    unit = "time" if toll.unit == "ns" else toll.unit
    power = f"{recurrence.variable}^{two_places(toll.exponent.estimate)}"
    found = f"own work ({unit}) grows as {power} (95 % {low:.2f} to {high:.2f})"
    if toll.hidden:
        found += ", which steps do not show"
    agrees = None if excess is None else keeps_toll(toll, excess)
    return Check(about="toll", declared=declared, found=found, agrees=agrees)


def keeps_toll(toll: Toll, excess: Interval) -> bool:
    """Whether own work with this excess over the declared toll still keeps it.

    Time is given more: what memory adds to linear code alone is an excess of 0.3 and more.
    """
    slack = TIME_SLACK if toll.unit == "ns" else TOLL_SLACK
    return excess.low <= slack / 2 or excess.estimate <= slack


def overlap(pattern: Pattern) -> Check | None:
    """The same arguments again: told where it happens often and the calls give something back."""
    if not pattern.returned or pattern.asked - pattern.distinct < _FEWEST_REPEATS:
        return None
    if pattern.distinct > _REPEATS * pattern.asked:
        return None
    return Check(
        about="overlap",
        declared="",
        found=f"{pattern.asked:,} calls had {pattern.distinct:,} different arguments",
        agrees=False,
    )


def relation(found: Observed, declared: Budget) -> Literal["slower", "same", "faster", ""]:
    """The growth that the observed recurrence implies against the declared one: "slower", "same", "faster" or ""."""
    if found.budget is None:
        return ""
    try:
        return compare(found.budget, declared)
    except BoundError:
        return ""
