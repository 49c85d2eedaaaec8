"""The report of `explain`: growth, derivation, what doubling the size costs, and what an uneven split costs."""

from __future__ import annotations

import math
import textwrap
from fractions import Fraction

from pytest_growthbudget.bounds.budget import Budget
from pytest_growthbudget.bounds.enclosure import to_float
from pytest_growthbudget.bounds.exact import ln_number
from pytest_growthbudget.bounds.growth import CONSTANT, Factor, Growth
from pytest_growthbudget.bounds.recurrence import Ratio, Recurrence

WIDTH = 80
_MAX_STATES = 200_000


def report(budget: Budget) -> str:
    """The whole answer as text of at most 80 columns."""
    lines = [*_wrapped("input    ", budget.text), *_wrapped("growth   ", f"Θ({budget.theta})")]
    near = readable(budget.growth)
    if near != budget.theta:
        lines += _wrapped("about    ", near)
    if budget.theorem:
        lines += _wrapped("theorem  ", budget.theorem)
    for i, step in enumerate(budget.steps, 1):
        lines += _wrapped(f"{i:>6}.  ", step)
    lines += ["", *_doubling(budget)]
    if budget.recurrence is not None:
        split = split_table(budget.recurrence, budget)
        if split:
            lines += ["", *split]
    return "\n".join(lines)


def _wrapped(label: str, text: str) -> list[str]:
    return textwrap.wrap(
        text, WIDTH, initial_indent=label, subsequent_indent=" " * len(label), break_long_words=True
    ) or [label.rstrip()]


def readable(growth: Growth) -> str:
    """The growth with irrational exponents and bases as short decimals; for reading, not for parsing."""
    return " + ".join(" ".join(_readable_factor(name, f) for name, f in m) or "1" for m in growth.monomials)


def _readable_factor(name: str, f: Factor) -> str:
    from pytest_growthbudget.bounds.budget import _plain
    from pytest_growthbudget.bounds.growth import monomial
    from pytest_growthbudget.bounds.printing import show_monomial

    if all(isinstance(x, Fraction) for x in (f.factorial, f.power, f.log, f.loglog)):
        shown = show_monomial(monomial({name: f}))
        if len(shown) < 24 and "{" not in shown:
            return shown
    plain = _plain(f)
    parts = []
    for key, text in (
        ("power", name),
        ("log", f"(log {name})"),
        ("loglog", f"(log log {name})"),
        ("factorial", f"({name}!)"),
    ):
        if plain[key]:
            parts.append(text if plain[key] == 1 else f"{text}^{plain[key]:.5g}")
    if plain["exp_base"] != 1:
        parts.insert(0, f"{plain['exp_base']:.5g}^{name}")
    return " ".join(parts)


def _doubling(budget: Budget) -> list[str]:
    """How much the growth rises when every size doubles (or, for exponentials, rises by one)."""
    names = budget.variables or ("n",)
    one_by_one = budget.exponential
    sizes = [10, 11, 12, 20, 21, 40] if one_by_one else [2**k for k in (4, 7, 10, 14, 17, 20, 24)]
    step = "n + 1" if one_by_one else "2 n"
    subject = names[0] if len(names) == 1 else "all sizes"
    head = f"{subject:>12}  {'growth':>12}  {'growth at ' + step + ' over n':>24}"
    lines = [head.replace(" n", f" {names[0]}") if len(names) == 1 else head]
    for n in sizes:
        here = budget.log_growth(dict.fromkeys(names, float(n)))
        there = budget.log_growth(dict.fromkeys(names, float(n + 1 if one_by_one else 2 * n)))
        lines.append(f"{n:>12,}  {_from_log(here):>12}  {'x ' + _from_log(there - here):>24}")
    return lines


def _from_log(x: float) -> str:
    """exp(x) to four digits, as a power of ten where it is large or small."""
    if -9.2 < x < 13.8:
        value = math.exp(x)
        return f"{value:,.0f}" if value >= 1000 else f"{value:.4g}"
    if not math.isfinite(x):
        return "huge"
    ten = math.floor(x / math.log(10))
    return f"{math.exp(x - ten * math.log(10)):.3f}e{ten:+d}"


def split_table(rec: Recurrence, budget: Budget) -> list[str]:
    """T(n)/growth(n) for an uneven split beside the even split of the same exponent; [] where there is none."""
    ratios = [t.argument.factor for t in rec.terms if isinstance(t.argument, Ratio)]
    weights = [t.coefficient for t in rec.terms]
    if len(ratios) < len(rec.terms) or len(set(ratios)) < 2 or not all(t.fixed() for t in rec.terms):
        return []
    toll = rec.toll
    critical = None if budget.derivation is None else budget.derivation.critical
    if toll is None or toll.rate or toll.factorial or critical is None or to_float(critical) <= 0:
        return []
    b = [to_float(r) for r in ratios]
    a = [to_float(w) for w in weights]
    total = sum(a)
    if total <= 1:
        return []
    even = total ** (-1.0 / to_float(critical))
    v, name = rec.variable, rec.function
    deepest = -math.log(2) / to_float(ln_number(max(ratios, key=to_float)))
    lines = [
        *textwrap.wrap(
            f"the split is uneven: the deepest branch is about {deepest:.3g} log2 {v} calls long, "
            f"{-math.log(2) / math.log(even):.3g} log2 {v} if every argument were {even:.4g} {v}",
            WIDTH,
        ),
        f"{v:>12}  {f'{name}/growth, this split':>22}  {f'{name}/growth, even split':>22}  {'costs':>8}",
    ]
    growth = budget.derivation.growth if budget.derivation else CONSTANT
    for exponent in (8, 12, 16, 20):
        n = float(2**exponent)
        here, there = evaluate(a, b, toll, n), evaluate([total], [even], toll, n)
        if here is None or there is None:
            break
        at = math.exp(growth.log_value(n))
        lines.append(
            f"{2**exponent:>12,}  {here / at:>22.3f}  {there / at:>22.3f}  {'x ' + format(here / there, '.3g'):>8}"
        )
    return lines if len(lines) > 2 else []


def evaluate(coefficients: list[float], factors: list[float], toll: Factor, n: float) -> float | None:
    """T(n) with T(x) = 1 below 2, by sizes from the top down; None if there are too many different sizes.

    Each size n·Πbᵢ^kᵢ is visited once, with the number of times (weighted by coefficients) that it is called.
    """
    total = 0.0
    level: dict[tuple[int, ...], float] = {(0,) * len(factors): 1.0}
    visited = 0
    logs = [math.log(b) for b in factors]
    log_n = math.log(n)
    while level:
        below: dict[tuple[int, ...], float] = {}
        visited += len(level)
        if visited > _MAX_STATES:
            return None
        for counts, weight in level.items():
            log_x = log_n + sum(k * lb for k, lb in zip(counts, logs, strict=True))
            if log_x < math.log(2) - 1e-9:
                total += weight
                continue
            total += weight * math.exp(toll.log_value(math.exp(log_x)))
            for i, a in enumerate(coefficients):
                key = (*counts[:i], counts[i] + 1, *counts[i + 1 :])
                below[key] = below.get(key, 0.0) + a * weight
        level = below
    return total
