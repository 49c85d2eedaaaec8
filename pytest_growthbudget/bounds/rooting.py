"""Recurrences with calls of roots of n, by substitution."""

from __future__ import annotations

from pytest_growthbudget.bounds.derivation import (
    Derivation,
    Unsolved,
    accumulate,
    approximately,
    known,
    needs_cost,
    polynomially_small,
    root,
    show,
    toll_text,
)
from pytest_growthbudget.bounds.dividing import critical
from pytest_growthbudget.bounds.enclosure import compare_numbers, sign
from pytest_growthbudget.bounds.exact import ONE, ZERO, Number
from pytest_growthbudget.bounds.growth import CLASS, Factor
from pytest_growthbudget.bounds.printing import show_number
from pytest_growthbudget.bounds.recurrence import Recurrence, Root
from pytest_growthbudget.bounds.roots import ln_with_surds


def rooting(rec: Recurrence) -> Derivation | None:
    """All arguments n^θ: with m = log n and U(m) = T(n)/n^δ they are θm, and Akra-Bazzi applies in m."""
    if not all(isinstance(t.argument, Root) for t in rec.terms):
        return None
    v = rec.variable
    toll = rec.toll
    found = _root_toll(rec)
    if found is not None:
        return found
    delta: Number | None = None
    pairs: list[tuple[Number, Number]] = []
    for term in rec.terms:
        theta = root(term).exponent
        if (
            theta == 0
            or term.growth.log
            or term.growth.loglog
            or term.growth.rate
            or term.growth.factorial
            or not polynomially_small(term.remainder)
        ):
            raise Unsolved(f"this recursion into roots or logarithms of the size is outside the class {CLASS}")
        here = term.growth.power / (ONE - theta)
        if delta is not None and compare_numbers(delta, here) != 0:
            raise Unsolved("calls of roots with different powers as coefficients are not solved")
        if here and not root(term).plain:
            raise Unsolved("a power as coefficient beside a root with a factor is not solved")
        delta = here
        pairs.append((known(term), -ln_with_surds(theta)))
    shift = Factor(power=delta or ZERO)
    steps = [f"substitute m = log {v}: a root of {v} becomes a fraction of m"]
    if delta:
        steps.append(f"divide by {show(rec, shift)}: the coefficients become constants")
    scaled = None if toll is None else toll.over(shift)
    if scaled is not None:
        falls = Factor(scaled.factorial, scaled.rate, scaled.power).sign()
        if falls > 0:
            raise Unsolved("the toll outweighs the calls in a way that is not proved here")
        if falls < 0:
            scaled = None
    exponent: Number | None = None if scaled is None else scaled.log
    p, relation = critical(pairs, exponent)
    steps.append(f"critical exponent of m: p = {show_number(p)}{approximately(p)}")
    if scaled is None:
        if toll is None:
            needs_cost(rec)
        total = Factor(log=p)
        steps.append("the toll is too small to matter: the base cases dominate")
    elif relation < 0:
        total = Factor(log=p)
        steps.append(f"the toll is m^{show_number(scaled.log)} up to logarithms, below m^p: the base cases dominate")
    elif relation > 0:
        total = scaled
        steps.append("the toll is polynomially larger in m than m^p, so the toll dominates")
    else:
        inner, why = accumulate(Factor(power=-ONE, log=scaled.loglog))
        if inner.loglog:
            raise Unsolved(f"the solution holds log log log n, outside the class {CLASS}")
        total = Factor(log=p, loglog=inner.log)
        steps.append(f"the toll matches m^p up to logarithms of m: {why}")
    growth = shift * total
    steps.append(f"{rec.function}({v}) = Θ({show(rec, growth)})")
    return Derivation(
        growth,
        "substitution m = log n, then Akra-Bazzi"
        if len(pairs) > 1
        else "substitution m = log n, then the Master theorem",
        tuple(steps),
        p,
    )


def _root_toll(rec: Recurrence) -> Derivation | None:
    """The toll dominates: f = n^k… and every call is smaller by a power, γ + θk < k."""
    toll = rec.toll
    if toll is None:
        return None
    if sign(toll.power) <= 0 or toll.rate or toll.factorial:
        return None
    for term in rec.terms:
        if term.growth.rate or term.growth.factorial:
            return None
        if compare_numbers(term.growth.power + root(term).exponent * toll.power, toll.power) >= 0:
            return None
    shown = toll_text(rec)
    return Derivation(
        toll,
        "dominant toll (regularity condition)",
        (
            f"every call's own toll is smaller than {shown} by a power of {rec.variable}",
            f"{rec.function}({rec.variable}) = Θ({shown})",
        ),
    )
