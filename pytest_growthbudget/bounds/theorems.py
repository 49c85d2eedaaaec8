"""Solutions of recurrences, one function a theorem; each returns a Derivation, or None where it does not apply.

All tolls and coefficients are positive, so T is monotone in them: a toll known up to Θ gives T up to Θ.

Sources: M. Akra, L. Bazzi, Comput. Optim. Appl. 10 (1998) 195-210; T. Leighton, "Notes on better master theorems
for divide-and-conquer recurrences" (1996); J. Bentley, D. Haken, J. Saxe, SIGACT News 12 (1980) 36-44 (the Master
theorem); G. Birkhoff, Trans. AMS 32 (1930) 205-246 (expansions for variable coefficients, here only the
first-order case, which is an explicit product).
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from pytest_growthbudget.bounds import roots
from pytest_growthbudget.bounds.enclosure import compare_numbers, sign, to_float
from pytest_growthbudget.bounds.exact import ONE, ZERO, Number, depends_on, exp_number, ln_number
from pytest_growthbudget.bounds.growth import CONSTANT, Factor, compare_factors
from pytest_growthbudget.bounds.growth import monomial as as_monomial
from pytest_growthbudget.bounds.printing import show_monomial, show_number
from pytest_growthbudget.bounds.recurrence import Decrease, Ratio, Recurrence, Root, Shrink, Term

CLASS = "c^n n^p log^q n log log^r n n!^s"


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
        return Factor(power=power + 1, log=log, loglog=loglog), "its exponent is above -1, so the sum is n times the last part"
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


def show(rec: Recurrence, f: Factor) -> str:
    return show_monomial(as_monomial({rec.variable: f}))


def _toll_text(rec: Recurrence) -> str:
    return "0" if rec.toll is None else show(rec, rec.toll)


def _needs_cost(rec: Recurrence) -> None:
    if rec.toll is None and rec.silent:
        raise Unsolved("T is zero throughout: the base cases are zero and there is no toll")


def _known(term: Term) -> Number:
    if depends_on(term.coefficient, ("base", "some")):
        raise Unsolved(
            "the coefficient of a recursive call has to be a number that is known exactly",
            "inside O(…) only the toll may stand; a bare log has no stated base",
        )
    return term.coefficient


def _superpolynomial(f: Factor | None) -> bool:
    """Whether f grows faster than any power."""
    return f is not None and Factor(f.factorial, f.rate).sign() > 0


def dominant_toll(rec: Recurrence) -> Derivation | None:
    """Exponential or factorial tolls where every argument is at most a fixed part of n.

    Then f(bn)/f(n) falls faster than any power of n, so Σ cᵢ(n) f(bᵢ n) ≤ f(n)/2 for large n whatever the
    polynomially bounded cᵢ, and T = Θ(f) by induction.
    """
    if not _superpolynomial(rec.toll) or rec.toll is None:
        return None
    for term in rec.terms:
        if not isinstance(term.argument, (Ratio, Root)) or term.growth.factorial or term.growth.rate:
            return None
    toll = _toll_text(rec)
    return Derivation(
        rec.toll,
        "dominant toll (regularity condition)",
        (
            f"the toll {toll} grows faster than any power of {rec.variable}, and every argument is at most a fixed part of {rec.variable}",
            f"regularity: the calls' own tolls add up to at most half of {toll} for large {rec.variable}, so the toll dominates",
            f"T({rec.variable}) = Θ({toll})",
        ),
    )


# --- n - k ---------------------------------------------------------------------------------------------------


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
        _needs_cost(rec)
        steps.append(f"no toll: T({v}) = Θ({show(rec, base)}) from positive base cases")
        return base
    density = rec.toll.over(base)
    side = Factor(density.factorial, density.rate).sign()
    toll, shown = _toll_text(rec), show(rec, base)
    if side > 0:
        steps.append(f"the toll {toll} outgrows {shown} by an exponential factor, so the last toll dominates the sum")
        return rec.toll
    if side < 0:
        steps.append(f"Σ toll/({shown}) converges: the toll {toll} is smaller by an exponential factor")
        return base
    plain = Factor(power=density.power, log=density.log, loglog=density.loglog)
    total, why = accumulate(plain)
    steps.append(f"T({v}) = Θ({shown} · (1 + Σ toll/({shown}))), and toll/({shown}) = {show(rec, plain)}")
    steps.append(f"{why}: 1 + Σ = Θ({show(rec, total)})")
    return base * total


def _check_negligible(rec: Recurrence, base: Factor, others: list[Term], steps: list[str]) -> None:
    """Calls of n/b or a root of n beside n - k.

    With base superpolynomial and M(n) the running maximum of T/base, M(n) ≤ C·(F(n) + Σ ε_m M(m)), where
    ε_m = c(m) base(bm)/base(m) has a finite sum; Gronwall's inequality then bounds M(n) by a multiple of F(n).
    """
    lead = base
    if not _superpolynomial(base):
        if rec.toll is None or not _superpolynomial(rec.toll):
            raise Unsolved(
                "calls of n - k beside calls of n/b or a root grow faster than any power, or cancel in ways not proved here",
                "such growth is often n^Θ(log n), outside the class",
            )
        lead = rec.toll
        if compare_factors(Factor(lead.factorial, lead.rate), Factor(base.factorial, base.rate)) <= 0:
            raise Unsolved("calls of n - k beside calls of n/b are solved only where one side provably dominates")
    for term in others:
        if term.growth.factorial or term.growth.rate:
            raise Unsolved(f"an exponential coefficient takes the solution outside the class {CLASS}")
    steps.append(
        f"the calls of a fraction or root of {rec.variable} add at most a convergent factor, "
        f"since {show(rec, lead)} falls exponentially from {rec.variable} to that size (Gronwall)"
    )


def _characteristic(rec: Recurrence, down: list[Term], others: list[Term]) -> Derivation:
    v = rec.variable
    parts: list[tuple[Number, Fraction]] = [(_known(t), t.argument.by) for t in down if isinstance(t.argument, Decrease)]
    if len(parts) == 1:
        a, k = parts[0]
        rate = ln_number(a) / k if a != 1 else ZERO
    else:
        rational = [(a, k) for a, k in parts if isinstance(a, Fraction)]
        if len(rational) < len(parts):
            raise Unsolved("irrational coefficients of several calls are not solved")
        eq = roots.equation([(a, k) for a, k in rational])
        rate = roots.solve(list(eq.terms))
        if rec.toll is not None and rec.toll.rate and not rec.toll.factorial and roots.order(eq, rec.toll.rate) == 0:
            rate = rec.toll.rate
    base = Factor(rate=rate)
    steps: list[str] = []
    if rate == 0:
        name = "summation" if len(parts) == 1 else "linear recurrence with constant coefficients (characteristic root 1)"
        if len(parts) == 1:
            steps.append(f"T({v}) = T({v} - {parts[0][1]}) + toll unrolls to a sum of tolls")
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
    steps.append(f"T({v}) = Θ({show(rec, growth)})")
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
    first = min(down, key=lambda t: t.argument.by)  # type: ignore[union-attr]
    if sum(t.argument == first.argument for t in down) > 1:
        raise Unsolved("several calls of the same argument with different coefficients: write their sum as one")
    a = _known(first)
    f = first.growth
    k = first.argument.by  # type: ignore[union-attr]
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
        steps_between = term.argument.by / k  # type: ignore[union-attr]
        size = second.power - gamma * steps_between
        side = compare_numbers(size, -ONE)
        if side > 0 or (side == 0 and (second.log or second.loglog)):
            raise Unsolved("two calls of n - k weigh too evenly here for a proof", f"the solution may be outside the class {CLASS}")
        if side == 0:
            if steps_between != 2 or (term.remainder is not None and not _summable(term.remainder, shift=True)):
                raise Unsolved("two calls of n - k weigh too evenly here for a proof")
            drift = drift + _known(term) / (a * a)
    power = gamma * (ONE - 1 / k) / 2 + drift / k
    base = Factor(factorial=gamma / k, rate=ln_number(a) / k if a != 1 else ZERO, power=power)
    shown = show(rec, Factor(power=gamma)) if gamma else ""
    coefficient = " ".join(x for x in ("" if a == 1 and shown else show_number(a), shown) if x)
    steps = [f"the coefficient of T({v} - {k}) is {coefficient}" + (f" · (1 + {show_number(drift)}/{v} + …)" if drift else "")]
    steps.append(f"the product of the coefficients is Θ({show(rec, base)}) (Stirling)")
    growth = _homogeneous(rec, base, others, steps)
    steps.append(f"T({v}) = Θ({show(rec, growth)})")
    return Derivation(growth, "first-order recurrence (product of the coefficients)", tuple(steps))


def _summable(remainder: Factor | None, shift: bool = False) -> bool:
    if remainder is None:
        return True
    if shift:
        return remainder.sign() < 0 and accumulate(remainder * Factor(power=-ONE))[0] == CONSTANT
    return remainder.sign() < 0 and (remainder.rate != 0 or accumulate(remainder)[0] == CONSTANT)


def _check_summable(remainder: Factor | None) -> None:
    if not _summable(remainder):
        raise Unsolved(f"the product of these coefficients is outside the class {CLASS}")


# --- n - d(n) ------------------------------------------------------------------------------------------------


def shrinking(rec: Recurrence) -> Derivation | None:
    """T(n) = T(n - d(n)) + f(n) with d unbounded and o(n): Σ over the chain is Θ(∫ f/d), f varying slowly over d."""
    if not any(isinstance(t.argument, Shrink) for t in rec.terms):
        return None
    term = rec.terms[0]
    if len(rec.terms) > 1 or not isinstance(term.argument, Shrink):
        raise Unsolved("calls of n - d(n) beside other calls are not solved")
    if not term.fixed() or term.coefficient != 1:
        raise Unsolved(f"a coefficient other than 1 before T(n - d(n)) takes the solution outside the class {CLASS}")
    _needs_cost(rec)
    if rec.toll is not None and (rec.toll.rate or rec.toll.factorial):
        raise Unsolved("an exponential toll with T(n - d(n)) is not solved")
    v = rec.variable
    step = term.argument.by
    if rec.toll is None:
        return Derivation(CONSTANT, "summation", (f"no toll: T({v}) is that of the base case",))
    total, why = accumulate(rec.toll.over(step))
    return Derivation(
        total,
        "summation",
        (
            f"steps of size Θ({show(rec, step)}): T({v}) = Θ(1 + ∫ toll/step) with toll/step = {show(rec, rec.toll.over(step))}",
            why,
            f"T({v}) = Θ({show(rec, total)})",
        ),
    )


# --- n/b -----------------------------------------------------------------------------------------------------


def dividing(rec: Recurrence) -> Derivation | None:
    """Arguments b n (and negligible others): Akra-Bazzi, named after the Master theorem for a single term."""
    main = [t for t in rec.terms if isinstance(t.argument, Ratio) and _settled(t)]
    minor = [t for t in rec.terms if t not in main]
    if not any(isinstance(t.argument, Ratio) for t in rec.terms):
        return None
    if not main:
        return _only_toll(rec)
    v = rec.variable
    pairs: list[tuple[Number, Number]] = [(_known(t), -ln_number(t.argument.factor)) for t in main]  # type: ignore[union-attr]
    toll = rec.toll
    regular = toll is not None and not toll.rate and not toll.factorial
    p, relation = _critical(pairs, toll.power if regular and toll is not None else None)
    steps = _split_steps(rec, main, p)
    if minor:
        _check_minor(rec, minor, p, relation, steps)
    if toll is None or not regular:
        _needs_cost(rec)
        growth = Factor(power=p)
        steps.append(f"no toll: T({v}) = Θ({show(rec, growth)})" if toll is None else f"the toll {_toll_text(rec)} vanishes faster than any power")
        return Derivation(growth, _name(main, -1, None), (*steps, f"T({v}) = Θ({show(rec, growth)})"), p)
    shown, leaf = _toll_text(rec), show(rec, Factor(power=p))
    density = Factor(power=toll.power - p - 1, log=toll.log, loglog=toll.loglog)
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
    return Derivation(growth, _name(main, relation, toll), (*steps, f"T({v}) = Θ({show(rec, growth)})"), p)


def _settled(term: Term) -> bool:
    """A constant coefficient up to a factor 1 + O(n^-ε), whose product along any branch converges."""
    if term.growth != CONSTANT:
        return False
    return term.remainder is None or bool(term.remainder.rate) or sign(term.remainder.power) < 0


def _critical(pairs: list[tuple[Number, Number]], power: Number | None) -> tuple[Number, int]:
    """p, and the sign of (toll's exponent - p)."""
    if len(pairs) == 1:
        a, w = pairs[0]
        p = ln_number(a) / w
    else:
        rational = [(a, w) for a, w in pairs if isinstance(a, Fraction)]
        if len(rational) < len(pairs):
            raise Unsolved("irrational coefficients of several calls are not solved")
        p = roots.solve(rational)
        if power is not None and depends_on(p, ("root",)):
            side = roots.order(roots.equation(rational), power)
            return (power, 0) if side == 0 else (p, -side)
    return p, 0 if power is None else compare_numbers(power, p)


def _split_steps(rec: Recurrence, main: list[Term], p: Number) -> list[str]:
    v = rec.variable
    parts = []
    for t in main:
        ratio: Number = t.argument.factor  # type: ignore[union-attr]
        head = "" if t.coefficient == 1 else f"{show_number(t.coefficient)}·"
        parts.append(f"{head}({show_number(ratio)})^p")
    equation = " + ".join(parts)
    approx = "" if isinstance(p, Fraction) else f" ≈ {to_float(p):.6g}"
    if len(main) == 1:
        b = 1 / main[0].argument.factor  # type: ignore[union-attr]
        steps = [
            f"a = {show_number(main[0].coefficient)}, b = {show_number(b)}, toll {_toll_text(rec)}",
            f"critical exponent p = log_b a = {show_number(p)}{approx}",
        ]
    else:
        steps = [f"critical exponent: {equation} = 1 gives p = {show_number(p)}{approx}"]
    if any(t.argument.perturbed for t in main):  # type: ignore[union-attr]
        steps.append(f"rounding and shifts stay below {v}/log^2 {v}, so they do not matter (Leighton 1996)")
    if any(not t.fixed() for t in main):
        steps.append("the coefficients differ from constants by factors 1 + O(n^-ε), whose product converges")
    factors = [t.argument.factor for t in main]  # type: ignore[union-attr]
    if len(factors) > 1 and any(compare_numbers(f, factors[0]) for f in factors[1:]):
        largest = max(factors, key=to_float)
        depth = -0.6931471805599453 / to_float(ln_number(largest))
        steps.append(f"uneven split: the deepest branch is about {depth:.3g} log2 {v} calls long")
    return steps


def _regularity(pairs: list[tuple[Number, Number]], power: Number) -> str:
    c = sum(to_float(a) * to_float(exp_number(-(w * power))) for a, w in pairs)
    left = "a·f(n/b)" if len(pairs) == 1 else "Σ a_i·f(b_i n)"
    return f"regularity: {left} ≤ c·f(n) for large n with any c above {c:.6g} < 1"


def _check_minor(rec: Recurrence, minor: list[Term], p: Number, relation: int, steps: list[str]) -> None:
    """Terms that add less than a power of n: c(n) = n^γ…, argument n^θ…, with γ + θe < e for e = max(p, toll's exponent).

    From T = O(n^E) for some E (which holds for large E as γ + θE < E), the minor terms are tolls of exponent
    γ + θE; repeating lowers E to just above e, where these tolls are polynomially below n^e and change nothing.
    A coefficient that merely tends to 0 is enough where the toll dominates (its regularity is strict).
    """
    e = rec.toll.power if relation > 0 and rec.toll is not None else p
    for term in minor:
        if isinstance(term.argument, (Decrease, Shrink)):
            raise Unsolved("calls of n/b beside calls of n - k are not solved here")
        f = term.growth
        if f.rate or f.factorial:
            if Factor(f.factorial, f.rate).sign() < 0:
                continue
            raise Unsolved(f"an exponential coefficient takes the solution outside the class {CLASS}")
        theta = ONE if isinstance(term.argument, Ratio) else term.argument.exponent
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
        if isinstance(term.argument, (Decrease, Shrink)) or term.growth.rate or term.growth.factorial:
            raise Unsolved(f"these coefficients take the solution outside the class {CLASS}")
        theta = ONE if isinstance(term.argument, Ratio) else term.argument.exponent
        side = compare_numbers(term.growth.power + theta * rec.toll.power, rec.toll.power)
        if side > 0 or (side == 0 and not (isinstance(term.argument, Ratio) and term.growth.sign() < 0)):
            raise Unsolved(f"the product of these coefficients takes the solution outside the class {CLASS}")
    shown = _toll_text(rec)
    return Derivation(
        rec.toll,
        "dominant toll (regularity condition)",
        (f"every call adds less than any fixed part of the toll {shown}", f"T({rec.variable}) = Θ({shown})"),
    )


def _name(main: list[Term], relation: int, toll: Factor | None) -> str:
    if len(main) > 1:
        return "Akra-Bazzi theorem"
    if toll is None or relation < 0:
        return "Master theorem, case 1"
    if relation > 0:
        return "Master theorem, case 3"
    if toll.log == 0 and toll.loglog == 0:
        return "Master theorem, case 2"
    return "Master theorem, case 2 extended to logarithmic tolls (Akra-Bazzi integral)"


# --- roots of n ----------------------------------------------------------------------------------------------


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
        theta = term.argument.exponent  # type: ignore[union-attr]
        if theta == 0 or term.growth.log or term.growth.loglog or term.growth.rate or term.growth.factorial or not _settled_root(term):
            raise Unsolved(f"this recursion into roots or logarithms of the size is outside the class {CLASS}")
        here = term.growth.power / (1 - theta)
        if delta is not None and compare_numbers(delta, here) != 0:
            raise Unsolved("calls of roots with different powers as coefficients are not solved")
        if here and not term.argument.plain:  # type: ignore[union-attr]
            raise Unsolved("a power as coefficient beside a root with a factor is not solved")
        delta = here
        pairs.append((_known(term), -ln_number(theta)))
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
    p, relation = _critical(pairs, exponent)
    approx = "" if isinstance(p, Fraction) else f" ≈ {to_float(p):.6g}"
    steps.append(f"critical exponent of m: p = {show_number(p)}{approx}")
    if scaled is None:
        if toll is None:
            _needs_cost(rec)
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
    steps.append(f"T({v}) = Θ({show(rec, growth)})")
    return Derivation(growth, "substitution m = log n, then Akra-Bazzi" if len(pairs) > 1 else "substitution m = log n, then the Master theorem", tuple(steps), p)


def _settled_root(term: Term) -> bool:
    """1 + O(n^-ε) along n, n^θ, …: the sizes fall doubly exponentially, so the product converges."""
    return term.remainder is None or bool(term.remainder.rate) or sign(term.remainder.power) < 0


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
        if compare_numbers(term.growth.power + term.argument.exponent * toll.power, toll.power) >= 0:  # type: ignore[union-attr]
            return None
    shown = _toll_text(rec)
    return Derivation(
        toll,
        "dominant toll (regularity condition)",
        (
            f"every call's own toll is smaller than {shown} by a power of {rec.variable}",
            f"T({rec.variable}) = Θ({shown})",
        ),
    )
