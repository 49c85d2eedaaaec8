"""Recurrences with calls of n - k: sums, characteristic roots, products of coefficients."""

from __future__ import annotations

from fractions import Fraction

from pytest_growthbudget.bounds import roots
from pytest_growthbudget.bounds.derivation import (
    Derivation,
    Unsolved,
    accumulate,
    delay,
    known,
    needs_cost,
    show,
    superpolynomial,
    toll_text,
)
from pytest_growthbudget.bounds.enclosure import compare_numbers, sign, to_float
from pytest_growthbudget.bounds.exact import ONE, Number, depends_on, exp_number
from pytest_growthbudget.bounds.growth import CLASS, CONSTANT, Factor
from pytest_growthbudget.bounds.printing import show_number
from pytest_growthbudget.bounds.recurrence import Decrease, Recurrence, Shrink, Term
from pytest_growthbudget.bounds.roots import ln_with_surds


def decreasing(rec: Recurrence) -> Derivation | None:
    """Some argument is n - k; other kinds may stand beside it where they are provably negligible."""
    steps_down = [t for t in rec.terms if isinstance(t.argument, Decrease)]
    if not steps_down:
        return None
    others = [t for t in rec.terms if not isinstance(t.argument, Decrease)]
    if any(isinstance(t.argument, Shrink) for t in others):
        raise Unsolved("calls of n - k beside calls of n - d(n) are not solved")
    if all(t.fixed() for t in steps_down):
        return _characteristic(rec, steps_down, others)
    return _product(rec, steps_down, others)


def _homogeneous(rec: Recurrence, base: Factor, others: list[Term], steps: list[str]) -> Factor:
    """T from the growth `base` of the solution without toll: base · (1 + Σ toll/base)."""
    v = rec.variable
    if others:
        _check_negligible(rec, base, others, steps)
    if rec.toll is None:
        needs_cost(rec)
        steps.append(f"no toll: {rec.function}({v}) = Θ({show(rec, base)}) from positive base cases")
        return base
    density = rec.toll.over(base)
    side = Factor(density.factorial, density.rate).sign()
    toll, shown = toll_text(rec), show(rec, base)
    if side > 0:
        steps.append(f"the toll {toll} outgrows {shown} by an exponential factor, so the last toll dominates the sum")
        return rec.toll
    if side < 0:
        steps.append(f"Σ toll/({shown}) converges: the toll {toll} is smaller by an exponential factor")
        return base
    plain = Factor(power=density.power, log=density.log, loglog=density.loglog)
    total, why = accumulate(plain)
    steps.append(f"{rec.function}({v}) = Θ({shown} · (1 + Σ toll/({shown}))), and toll/({shown}) = {show(rec, plain)}")
    steps.append(f"{why}: 1 + Σ = Θ({show(rec, total)})")
    return base * total


def _check_negligible(rec: Recurrence, base: Factor, others: list[Term], steps: list[str]) -> None:
    """Calls of n/b or a root of n beside n - k.

    With base superpolynomial and M(n) the running maximum of T/base, M(n) ≤ C·(F(n) + Σ ε_m M(m)), where
    ε_m = c(m) base(bm)/base(m) has a finite sum; Gronwall's inequality then bounds M(n) by a multiple of F(n).
    """
    lead = base
    if not superpolynomial(base):
        if rec.toll is None or not superpolynomial(rec.toll):
            raise Unsolved(
                "calls of n - k beside calls of n/b or a root grow faster than any power, or in ways not proved here",
                "such growth is often n^Θ(log n), outside the class",
            )
        lead = rec.toll
    for term in others:
        if term.growth.factorial or term.growth.rate:
            raise Unsolved(f"an exponential coefficient takes the solution outside the class {CLASS}")
    steps.append(
        f"the calls of a fraction or root of {rec.variable} add at most a convergent factor, "
        f"since {show(rec, lead)} falls exponentially from {rec.variable} to that size (Gronwall)"
    )


def _characteristic(rec: Recurrence, down: list[Term], others: list[Term]) -> Derivation:
    v = rec.variable
    parts: list[tuple[Number, Fraction]] = [(known(t), delay(t)) for t in down if isinstance(t.argument, Decrease)]
    if len(parts) == 1:
        a, k = parts[0]
        rate = ln_with_surds(a) / k
    else:
        rational = [(a, k) for a, k in parts if isinstance(a, Fraction)]
        if len(rational) < len(parts):
            raise Unsolved("irrational coefficients of several calls are not solved")
        eq = roots.equation([(a, k) for a, k in rational])
        rate = roots.solve(list(eq.terms))
        toll = rec.toll
        if toll is not None and not toll.factorial and toll.rate != rate and roots.order(eq, toll.rate) == 0:
            rate = toll.rate
    base = Factor(rate=rate)
    steps: list[str] = []
    if rate == 0:
        name = (
            "summation" if len(parts) == 1 else "linear recurrence with constant coefficients (characteristic root 1)"
        )
        if len(parts) == 1:
            steps.append(f"{rec.function}({v}) = {rec.function}({v} - {parts[0][1]}) + toll unrolls to a sum of tolls")
        else:
            steps.append("the coefficients add up to 1, so the dominant characteristic root is 1, of multiplicity 1")
    else:
        name = "linear recurrence with constant coefficients (characteristic root)"
        equation = " + ".join(f"{show_number(a)}·x^(-{k})" if a != 1 else f"x^(-{k})" for a, k in parts)
        steps.append(f"characteristic equation 1 = {equation}")
        steps.append(
            f"positive coefficients: one positive root, simple, largest in modulus: "
            f"{show_number(exp_number(rate)) if not depends_on(rate, ('root', 'lnof')) else 'x'} ≈ {_exp_text(rate)}"
        )
    growth = _homogeneous(rec, base, others, steps)
    if rec.toll is not None and rate != 0 and rec.toll.rate == rate and not rec.toll.factorial:
        steps.insert(len(steps) - 1, "resonance: the toll grows at the rate of the characteristic root")
    steps.append(f"{rec.function}({v}) = Θ({show(rec, growth)})")
    return Derivation(growth, name, tuple(steps))


def _exp_text(rate: Number) -> str:
    return f"{to_float(exp_number(rate)):.6g}"


def _product(rec: Recurrence, down: list[Term], others: list[Term]) -> Derivation:
    """T(n) = c(n) T(n-k) + ...: the product of the coefficients, then the sum of tolls over it.

    For c(n) = a n^γ (1 + u/n + summable), Π over n, n-k, ... is Θ(a^(n/k) n!^(γ/k) n^(γ(1-1/k)/2 + u/k)) by
    Stirling's formula. A further call c₂(n) T(n-2k) adds c₂/(c(n-k)·...) ~ d n^(η-2γ)/a² relative to the first;
    it is summable below n^-1 and adds d/a² to u at n^-1 exactly.
    """
    v = rec.variable
    first = min(down, key=lambda t: delay(t))
    a = known(first)
    f = first.growth
    k = delay(first)
    if f.log or f.loglog or f.rate or f.factorial:
        raise Unsolved(f"the product of the coefficients {show(rec, f)} is outside the class {CLASS}")
    drift = first.drift
    _check_summable(first.remainder)
    gamma = f.power
    for term in down:
        if term is first:
            continue
        second = term.growth
        if second.rate or second.factorial or sign(gamma) < 0:
            raise Unsolved("a second call of n - k with this coefficient is not solved")
        steps_between = delay(term) / k
        size = second.power - gamma * steps_between
        side = compare_numbers(size, -ONE)
        if side > 0 or (side == 0 and (second.log or second.loglog)):
            raise Unsolved(
                "two calls of n - k weigh too evenly here for a proof",
                f"the solution may be outside the class {CLASS}",
            )
        if steps_between.denominator != 1:
            raise Unsolved("calls of n - k whose steps are no multiples of the shortest one are not solved here")
        if side == 0:
            if steps_between != 2 or (term.remainder is not None and not _summable(term.remainder, shift=True)):
                raise Unsolved("two calls of n - k weigh too evenly here for a proof")
            drift = drift + known(term) / (a * a)
    power = gamma * (ONE - 1 / k) / 2 + drift / k
    base = Factor(factorial=gamma / k, rate=ln_with_surds(a) / k, power=power)
    shown = show(rec, Factor(power=gamma)) if gamma else ""
    coefficient = " ".join(x for x in ("" if a == 1 and shown else show_number(a), shown) if x)
    steps = [
        f"the coefficient of {rec.function}({v} - {k}) is {coefficient}"
        + (f" · (1 + {show_number(drift)}/{v} + …)" if drift else "")
    ]
    steps.append(f"the product of the coefficients is Θ({show(rec, base)}) (Stirling)")
    growth = _homogeneous(rec, base, others, steps)
    steps.append(f"{rec.function}({v}) = Θ({show(rec, growth)})")
    return Derivation(growth, "first-order recurrence (product of the coefficients)", tuple(steps))


def _summable(remainder: Factor | None, shift: bool = False) -> bool:
    """Whether Σ remainder(m), or with `shift` Σ remainder(m)/m, converges; the remainder tends to 0."""
    if remainder is None or remainder.factorial or remainder.rate:
        return True
    return accumulate(remainder * Factor(power=-ONE) if shift else remainder)[0] == CONSTANT


def _check_summable(remainder: Factor | None) -> None:
    if not _summable(remainder):
        raise Unsolved(f"the product of these coefficients is outside the class {CLASS}")
