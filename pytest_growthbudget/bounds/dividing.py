"""Recurrences with calls of a fraction of n: the Master theorem and that of Akra and Bazzi.

Sources: M. Akra, L. Bazzi, Comput. Optim. Appl. 10 (1998) 195-210; T. Leighton, "Notes on better master theorems
for divide-and-conquer recurrences" (1996); J. Bentley, D. Haken, J. Saxe, SIGACT News 12 (1980) 36-44 (the Master
theorem).
"""

from __future__ import annotations

from fractions import Fraction

from pytest_growthbudget.bounds import roots
from pytest_growthbudget.bounds.derivation import (
    Derivation,
    Unsolved,
    accumulate,
    approximately,
    known,
    needs_cost,
    polynomially_small,
    ratio,
    root,
    show,
    superpolynomial,
    toll_text,
)
from pytest_growthbudget.bounds.enclosure import compare_numbers, to_float
from pytest_growthbudget.bounds.exact import ONE, Number, depends_on, exp_number
from pytest_growthbudget.bounds.growth import CLASS, CONSTANT, Factor
from pytest_growthbudget.bounds.printing import show_number
from pytest_growthbudget.bounds.recurrence import Ratio, Recurrence, Term
from pytest_growthbudget.bounds.roots import ln_with_surds


def dividing(rec: Recurrence) -> Derivation | None:
    """Arguments b n (and negligible others): Akra-Bazzi, named after the Master theorem for a single term."""
    main = [
        t
        for t in rec.terms
        if isinstance(t.argument, Ratio) and t.growth == CONSTANT and polynomially_small(t.remainder)
    ]
    minor = [t for t in rec.terms if t not in main]
    if not any(isinstance(t.argument, Ratio) for t in rec.terms):
        return None
    if not main:
        return _only_toll(rec)
    if superpolynomial(rec.toll):
        raise Unsolved("an exponential toll beside exponential coefficients is not solved")
    v = rec.variable
    pairs: list[tuple[Number, Number]] = [(known(t), -ln_with_surds(ratio(t))) for t in main]
    toll = rec.toll
    regular = toll is not None and not toll.rate and not toll.factorial
    p, relation = critical(pairs, toll.power if regular and toll is not None else None)
    steps = _split_steps(rec, main, p)
    if minor:
        _check_minor(rec, minor, p, relation, steps)
    if toll is None or not regular:
        needs_cost(rec)
        growth = Factor(power=p)
        steps.append(
            f"no toll: {rec.function}({v}) = Θ({show(rec, growth)})"
            if toll is None
            else f"the toll {toll_text(rec)} vanishes faster than any power"
        )
        return Derivation(growth, _name(main, -1, None), (*steps, f"{rec.function}({v}) = Θ({show(rec, growth)})"), p)
    shown, leaf = toll_text(rec), show(rec, Factor(power=p))
    if relation < 0:
        growth = Factor(power=p)
        steps.append(f"the toll {shown} is polynomially smaller than {leaf}: the base cases dominate")
    elif relation > 0:
        growth = toll
        steps.append(f"the toll {shown} is polynomially larger than {leaf}")
        steps.append(_regularity(pairs, toll.power))
    else:
        density = Factor(power=-ONE, log=toll.log, loglog=toll.loglog)
        total, why = accumulate(density)
        growth = Factor(power=p) * total
        steps.append(f"the toll {shown} matches {leaf} up to logarithms")
        steps.append(f"∫ toll/u^(p+1) du with toll/u^(p+1) = {show(rec, density)}: {why}")
    return Derivation(growth, _name(main, relation, toll), (*steps, f"{rec.function}({v}) = Θ({show(rec, growth)})"), p)


def critical(pairs: list[tuple[Number, Number]], power: Number | None) -> tuple[Number, int]:
    """p, and the sign of (toll's exponent - p)."""
    if len(pairs) == 1:
        a, w = pairs[0]
        p = ln_with_surds(a) / w
    else:
        rational = [(a, w) for a, w in pairs if isinstance(a, Fraction)]
        if len(rational) < len(pairs):
            raise Unsolved("irrational coefficients of several calls are not solved")
        p = roots.solve(rational)
        if power is not None and power != p and depends_on(p, ("root",)):
            side = roots.order(roots.equation(rational), power)
            return (power, 0) if side == 0 else (p, -side)
    return p, 0 if power is None else compare_numbers(power, p)


def _split_steps(rec: Recurrence, main: list[Term], p: Number) -> list[str]:
    v = rec.variable
    parts = []
    for t in main:
        head = "" if t.coefficient == 1 else f"{show_number(t.coefficient)}·"
        parts.append(f"{head}({show_number(ratio(t))})^p")
    equation = " + ".join(parts)
    if len(main) == 1:
        b = ONE / ratio(main[0])
        steps = [
            f"a = {show_number(main[0].coefficient)}, b = {show_number(b)}, toll {toll_text(rec)}",
            f"critical exponent p = log_b a = {show_number(p)}{approximately(p)}",
        ]
    else:
        steps = [f"critical exponent: {equation} = 1 gives p = {show_number(p)}{approximately(p)}"]
    if any(isinstance(t.argument, Ratio) and t.argument.perturbed for t in main):
        steps.append(f"rounding and shifts are O({v}/log^(1+ε) {v}), so they do not matter (Leighton 1996)")
    if any(not t.fixed() for t in main):
        steps.append("the coefficients differ from constants by factors 1 + O(n^-ε), whose product converges")
    factors = [ratio(t) for t in main]
    if any(compare_numbers(f, factors[0]) for f in factors[1:]):
        largest = max(factors, key=to_float)
        depth = -0.6931471805599453 / to_float(ln_with_surds(largest))
        steps.append(f"uneven split: the deepest branch is about {depth:.3g} log2 {v} calls long")
    return steps


def _regularity(pairs: list[tuple[Number, Number]], power: Number) -> str:
    c = sum(to_float(a) * to_float(exp_number(-(w * power))) for a, w in pairs)
    left = "a·f(n/b)" if len(pairs) == 1 else "Σ a_i·f(b_i n)"
    return f"regularity: {left} ≤ c·f(n) for large n with any c above {c:.6g} < 1"


def _check_minor(rec: Recurrence, minor: list[Term], p: Number, relation: int, steps: list[str]) -> None:
    """Terms that add less than a power of n: c(n) = n^γ…, argument n^θ…, with γ + θe < e.

    Here e is the larger of p and the toll's exponent. T = O(n^E) holds for some large E, as γ + θE < E there. Then
    the minor terms are tolls of exponent γ + θE; repeating lowers E to just above e, where these tolls are
    polynomially below n^e and change nothing. A coefficient that merely tends to 0 is enough where the toll
    dominates (its regularity is strict).
    """
    e = rec.toll.power if relation > 0 and rec.toll is not None else p
    for term in minor:
        f = term.growth
        if f.rate or f.factorial:
            if Factor(f.factorial, f.rate).sign() < 0:
                continue
            raise Unsolved(f"an exponential coefficient takes the solution outside the class {CLASS}")
        theta = ONE if isinstance(term.argument, Ratio) else root(term).exponent
        side = compare_numbers(f.power + theta * e, e)
        if side < 0:
            continue
        if side == 0 and isinstance(term.argument, Ratio) and relation > 0 and f.sign() < 0:
            continue
        raise Unsolved(
            "a call with a variable coefficient, or of a root of the size, weighs too much here for a proof",
            f"the solution may be outside the class {CLASS}",
        )
    steps.append("the other calls are smaller by a power of the size and do not change the growth (bootstrapping)")


def _only_toll(rec: Recurrence) -> Derivation:
    """No call has a constant coefficient: solved only where every one is negligible beside the toll."""
    if rec.toll is None or rec.toll.rate or rec.toll.factorial:
        raise Unsolved(f"variable coefficients of calls of n/b take the solution outside the class {CLASS}")
    for term in rec.terms:
        if term.growth.rate or term.growth.factorial:
            raise Unsolved(f"these coefficients take the solution outside the class {CLASS}")
        theta = ONE if isinstance(term.argument, Ratio) else root(term).exponent
        side = compare_numbers(term.growth.power + theta * rec.toll.power, rec.toll.power)
        if side > 0 or (side == 0 and not (isinstance(term.argument, Ratio) and term.growth.sign() < 0)):
            raise Unsolved(f"the product of these coefficients takes the solution outside the class {CLASS}")
    shown = toll_text(rec)
    return Derivation(
        rec.toll,
        "dominant toll (regularity condition)",
        (
            f"every call adds less than any fixed part of the toll {shown}",
            f"{rec.function}({rec.variable}) = Θ({shown})",
        ),
    )


def _name(main: list[Term], relation: int, toll: Factor | None) -> str:
    if len(main) > 1 or compare_numbers(main[0].coefficient, ONE) < 0:
        return "Akra-Bazzi theorem"
    if toll is None or relation < 0:
        return "Master theorem, case 1"
    if relation > 0:
        return "Master theorem, case 3"
    if toll.log == 0 and toll.loglog == 0:
        return "Master theorem, case 2"
    return "Master theorem, case 2 extended to logarithmic tolls (Akra-Bazzi integral)"
