"""Solutions of recurrences, one function a theorem; each returns a Derivation, or None where it does not apply.

All tolls and coefficients are positive, so T is monotone in them: a toll known up to Θ gives T up to Θ.
"""

from __future__ import annotations

from pytest_growthbudget.bounds.decreasing import decreasing
from pytest_growthbudget.bounds.derivation import (
    Derivation,
    Unsolved,
    accumulate,
    needs_cost,
    show,
    superpolynomial,
    toll_text,
)
from pytest_growthbudget.bounds.dividing import dividing
from pytest_growthbudget.bounds.growth import CLASS, CONSTANT
from pytest_growthbudget.bounds.recurrence import Ratio, Recurrence, Root, Shrink
from pytest_growthbudget.bounds.rooting import rooting


def solve(rec: Recurrence) -> Derivation:
    """The growth of a recurrence with positive base cases.

    Raises:
        Unsolved: no theorem here covers it, or the solution is outside the class.
        exact.Undecidable: two numbers are too close for a proof.
    """
    for theorem in (dominant_toll, decreasing, shrinking, dividing, rooting):
        found = theorem(rec)
        if found is not None:
            return found
    raise Unsolved("no theorem here covers this mix of arguments")


def dominant_toll(rec: Recurrence) -> Derivation | None:
    """Exponential or factorial tolls where every argument is at most a fixed part of n.

    Then f(bn)/f(n) falls faster than any power of n, so Σ cᵢ(n) f(bᵢ n) ≤ f(n)/2 for large n whatever the
    cᵢ of at most polynomial growth, and T = Θ(f) by induction.
    """
    if not superpolynomial(rec.toll) or rec.toll is None:
        return None
    for term in rec.terms:
        if not isinstance(term.argument, (Ratio, Root)) or superpolynomial(term.growth):
            return None
    toll = toll_text(rec)
    return Derivation(
        rec.toll,
        "dominant toll (regularity condition)",
        (
            f"the toll {toll} outgrows every power of {rec.variable}; the arguments are at most a part of it",
            f"regularity: the calls' own tolls add up to at most half of {toll} for large {rec.variable}",
            f"{rec.function}({rec.variable}) = Θ({toll})",
        ),
    )


def shrinking(rec: Recurrence) -> Derivation | None:
    """T(n) = T(n - d(n)) + f(n) with d unbounded and o(n): Σ over the chain is Θ(∫ f/d), f varying slowly over d."""
    if not any(isinstance(t.argument, Shrink) for t in rec.terms):
        return None
    term = rec.terms[0]
    if len(rec.terms) > 1 or not isinstance(term.argument, Shrink):
        raise Unsolved("calls of n - d(n) beside other calls are not solved")
    if not term.fixed() or term.coefficient != 1:
        raise Unsolved(f"a coefficient other than 1 before T(n - d(n)) takes the solution outside the class {CLASS}")
    needs_cost(rec)
    if rec.toll is not None and (rec.toll.rate or rec.toll.factorial):
        raise Unsolved("an exponential toll with T(n - d(n)) is not solved")
    v = rec.variable
    step = term.argument.by
    if rec.toll is None:
        return Derivation(CONSTANT, "summation", (f"no toll: {rec.function}({v}) is that of the base case",))
    total, why = accumulate(rec.toll.over(step))
    return Derivation(
        total,
        "summation",
        (
            f"steps of size Θ({show(rec, step)}): {rec.function}({v}) = Θ(1 + ∫ toll/step)",
            f"toll/step = {show(rec, rec.toll.over(step))}",
            why,
            f"{rec.function}({v}) = Θ({show(rec, total)})",
        ),
    )
