"""What the theorems share: derivations, refusals, and the growth of a sum of tolls."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from pytest_growthbudget.bounds.enclosure import compare_numbers, to_float
from pytest_growthbudget.bounds.exact import ONE, Number, depends_on
from pytest_growthbudget.bounds.growth import CLASS, CONSTANT, Factor, monomial
from pytest_growthbudget.bounds.printing import show_monomial
from pytest_growthbudget.bounds.recurrence import Decrease, Ratio, Recurrence, Root, Term


class Unsolved(Exception):
    """Why a recurrence is not solved; `hint` may say what to write instead."""

    def __init__(self, message: str, hint: str = "") -> None:
        super().__init__(message)
        self.hint = hint


@dataclass(frozen=True, slots=True)
class Derivation:
    """A solved recurrence. `critical` is the critical exponent, where the theorem has one."""

    growth: Factor
    theorem: str
    steps: tuple[str, ...]
    critical: Number | None = None


def accumulate(density: Factor) -> tuple[Factor, str]:
    """The growth of 1 + Σ_{m ≤ n} density(m) for n^p log^q n (log log n)^r, and why.

    Raises:
        Unsolved: the sum is log log log n.
    """
    power, log, loglog = density.power, density.log, density.loglog
    side = compare_numbers(power, -ONE)
    if side < 0:
        return CONSTANT, "its exponent is below -1, so the sum converges"
    if side > 0:
        return Factor(
            power=power + 1, log=log, loglog=loglog
        ), "its exponent is above -1, so the sum is n times the last part"
    side = compare_numbers(log, -ONE)
    if side < 0:
        return CONSTANT, "1/n with log^q n, q < -1: the sum converges"
    if side > 0:
        return Factor(log=log + 1, loglog=loglog), "1/n with log^q n, q > -1: the sum gains one log n"
    side = compare_numbers(loglog, -ONE)
    if side < 0:
        return CONSTANT, "1/(n log n) with (log log n)^r, r < -1: the sum converges"
    if side > 0:
        return Factor(loglog=loglog + 1), "1/(n log n): the sum gains one log log n"
    raise Unsolved(f"the solution holds log log log n, outside the class {CLASS}")


def show(rec: Recurrence, f: Factor) -> str:
    return show_monomial(monomial({rec.variable: f}))


def toll_text(rec: Recurrence) -> str:
    return "0" if rec.toll is None else show(rec, rec.toll)


def needs_cost(rec: Recurrence) -> None:
    if rec.toll is None and rec.silent:
        raise Unsolved(f"{rec.function} is zero at some sizes or all: a base case is zero and there is no toll")


def known(term: Term) -> Number:
    if depends_on(term.coefficient, ("base", "some")):
        raise Unsolved(
            "the coefficient of a recursive call has to be a number that is known exactly",
            "inside O(…) only the toll may stand; a bare log has no stated base",
        )
    return term.coefficient


def polynomially_small(remainder: Factor | None) -> bool:
    """Whether a product of factors 1 + O(remainder) converges along n, n/2, … and along n, sqrt(n), … alike."""
    return remainder is None or Factor(remainder.factorial, remainder.rate, remainder.power).sign() < 0


def superpolynomial(f: Factor | None) -> bool:
    """Whether f grows faster than any power."""
    return f is not None and Factor(f.factorial, f.rate).sign() > 0


def ratio(term: Term) -> Number:
    """The factor of an argument factor·n; raises TypeError for other arguments."""
    if not isinstance(term.argument, Ratio):
        raise TypeError(term)
    return term.argument.factor


def delay(term: Term) -> Fraction:
    """k of an argument n - k; raises TypeError for other arguments."""
    if not isinstance(term.argument, Decrease):
        raise TypeError(term)
    return term.argument.by


def root(term: Term) -> Root:
    """The argument of a call of a root of n; raises TypeError for other arguments."""
    if not isinstance(term.argument, Root):
        raise TypeError(term)
    return term.argument


def approximately(p: Number) -> str:
    """ " ≈ 0.84" behind a number that is not rational, else nothing."""
    return "" if isinstance(p, Fraction) else f" ≈ {to_float(p):.6g}"
