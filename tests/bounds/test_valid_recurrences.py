"""The valid recurrences: the growth expected, and an exact evaluation of T that no theorem enters, against it.

An entry's `python` is its right side as a Python expression of our own data; T is unrolled by it with T = 1 at small
sizes. For "ratio" n is real; for "step" n runs over the integers, in arbitrary precision; for "root" the expression
is in m = log2 n, and for "root-scaled" it gives T(n)/n. If the claim is right, D = log T - log growth settles: its
slope against log n, log log n and log log log n tends to 0, while a wrong exponent shows as its error.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import mpmath
import pytest

from pytest_growthbudget.bounds.budget import parse_budget

TOP = {"ratio": 180, "step": 1440, "root": 2.0**160, "root-scaled": 2.0**160}


class _Missing(Exception):
    """A size whose T is needed first."""


def _unrolled(code: Any, variable: str, base: float) -> Callable[[float], float]:
    """T by an explicit stack: slow branches are thousands of calls deep."""
    memo: dict[float, float] = {}

    def lookup(x: float) -> float:
        if x <= base:
            return 1.0
        key = round(math.log(x), 10)
        if key not in memo:
            raise _Missing(x)
        return memo[key]

    names = {**_FLOATS, "T": lookup}

    def t(x: float) -> float:
        stack = [x]
        while stack:
            try:
                memo[round(math.log(stack[-1]), 10)] = eval(code, {**names, variable: stack[-1]})
                stack.pop()
            except _Missing as missing:  # noqa: PERF203 - the exception is the call
                stack.append(missing.args[0])
        return memo[round(math.log(x), 10)]

    return t


def log_t(entry: Mapping[str, Any]) -> list[list[tuple[float, float]]]:
    """Two groups of (log n, log T(n)), widely apart; within a group the sizes spread, so that periods average out."""
    kind = entry["kind"]
    code = compile(entry["python"], entry["input"], "eval")
    if kind == "step":
        return _steps(code)
    many = entry["python"].count("T(") > 1 or "0.9" in entry["python"]
    out: list[list[tuple[float, float]]] = []
    if kind == "ratio":
        t = _unrolled(code, "n", 40.0)
        for k in (22, 44) if many else (TOP[kind] // 2, TOP[kind]):
            sizes = [2.0 ** (k + j * 0.61) for j in range(4 if many else 16)]
            out.append([(math.log(n), math.log(t(n))) for n in sizes])
        return out
    t = _unrolled(code, "m", 16.0)
    for m in (2.0**15, 2.0**30) if many else (2.0**80, TOP[kind]):
        sizes = [m * 2 ** (j * 0.61) for j in range(6)]
        out.append([(x * math.log(2), math.log(t(x))) for x in sizes])
    return out


_FLOATS: dict[str, Any] = {
    "log": math.log, "log2": math.log2, "sqrt": math.sqrt, "ceil": math.ceil, "floor": math.floor,
}  # fmt: skip


def _steps(code: Any) -> list[list[tuple[float, float]]]:
    top = int(TOP["step"])
    values: list[Any] = []
    names = {
        "log": mpmath.log, "sqrt": mpmath.sqrt, "factorial": mpmath.factorial, "mpf": mpmath.mpf, "isqrt": math.isqrt,
        "int": int,
    }  # fmt: skip
    with mpmath.workdps(30):
        one = mpmath.mpf(1)

        def t(x: int) -> Any:
            return values[x] if x >= 8 else one

        for n in range(top + 1):
            here = one if n < 8 else mpmath.mpf(eval(code, {**names, "T": t, "n": n}))
            values += [here]
        return [[(math.log(n), float(mpmath.log(values[n])))] for n in (top // 4, top)]


def log_claim(expect: Mapping[str, float], log_n: float) -> float:
    """log growth at n = exp(log_n)."""
    total = expect["power"] * log_n + expect["log"] * math.log(log_n)
    if expect["loglog"]:
        total += expect["loglog"] * math.log(math.log(log_n))
    if expect["exp_base"] != 1 or expect["factorial"]:
        n = round(math.exp(log_n))
        total += n * math.log(expect["exp_base"]) + expect["factorial"] * math.lgamma(n + 1)
    return total


def drift(entry: Mapping[str, Any]) -> tuple[float, float, float]:
    """The slopes of log T - log growth against log n, log log n and log log log n between the two largest sizes."""
    expect = dict(entry["expect"])
    if entry["kind"] == "root-scaled":
        expect["power"] -= 1
    (x0, d0), (x1, d1) = (
        (
            sum(x for x, _ in group) / len(group),
            sum(y - log_claim(expect, x) for x, y in group) / len(group),
        )
        for group in log_t(entry)
    )
    d = d1 - d0
    scales: list[Callable[[float], float]] = [
        lambda x: x,
        math.log,
        lambda x: math.log(math.log(x)),
    ]
    slopes = [d / (f(x1) - f(x0)) for f in scales]
    return slopes[0], slopes[1], slopes[2]


ENTRIES = json.loads((Path(__file__).parent / "valid" / "recurrences.json").read_text("utf-8"))
LIMITS = {"ratio": (0.02, 0.5), "step": (0.09, 0.56), "root": (1e-6, 0.02), "root-scaled": (1e-6, 0.02)}
by_input = pytest.mark.parametrize("entry", ENTRIES, ids=[e["input"] for e in ENTRIES])


@by_input
def test_growth_is_the_expected_one(entry: dict[str, Any]) -> None:
    """Every exponent agrees with the entry's to ten digits, by the theorem named; the growth reads back to itself."""
    budget = parse_budget(entry["input"])
    assert budget.kind == "recurrence"
    (term,) = budget.terms()
    (found,) = term.values()
    assert found == pytest.approx(entry["expect"], rel=1e-10, abs=1e-10)
    assert budget.theorem == entry["theorem"]
    assert budget.steps[-1].endswith(f"Θ({budget.theta})")
    assert parse_budget(budget.theta).growth.monomials == budget.growth.monomials


@pytest.mark.parametrize("entry", [e for e in ENTRIES if not e.get("near_critical")], ids=lambda e: e["input"])
def test_unrolled_values_settle_on_the_growth(entry: dict[str, Any]) -> None:
    """T itself, unrolled, stays within a factor of the growth; a wrong log n shows as a slope of 1 against log log n.

    What is left of slower parts (n against n log n at 2^180) is below 0.5 ("step", up to n = 1440: 0.56).
    """
    by_n, by_log, by_loglog = drift(entry)
    assert abs(by_n) < LIMITS[entry["kind"]][0]
    assert abs(by_log) < LIMITS[entry["kind"]][1]
    if entry["expect"]["loglog"]:
        assert abs(by_loglog) < 0.75


@pytest.mark.parametrize(("part", "off"), [("power", 0.2), ("log", 1.0)])
@pytest.mark.parametrize("entry", [e for e in ENTRIES if not e.get("near_critical")][::16], ids=lambda e: e["input"])
def test_a_wrong_claim_would_show(entry: dict[str, Any], part: str, off: float) -> None:
    """The check above fails for a growth that is off by n^0.2 or by log n."""
    for side in (off, -off):
        by_n, by_log, _ = drift({**entry, "expect": {**entry["expect"], part: entry["expect"][part] + side}})
        assert abs(by_n) >= LIMITS[entry["kind"]][0] or abs(by_log) >= LIMITS[entry["kind"]][1]


@pytest.mark.parametrize("entry", [e for e in ENTRIES if e.get("near_critical")], ids=lambda e: e["input"])
def test_near_critical_tolls_fall_on_the_right_side(entry: dict[str, Any]) -> None:
    """a / b^k against 1 in 50 digits, where no size that fits a machine could tell."""
    expect = entry["expect"]
    text = entry["input"]
    a, b = int(text[7 : text.index("T(n/")] or 1), int(text[text.index("n/") + 2 : text.index(")", 9)])
    with mpmath.workdps(50):
        k = mpmath.mpf(text.rsplit("^", 1)[1])
        leaves = mpmath.log(a) / mpmath.log(b)
        assert expect["power"] == pytest.approx(float(max(leaves, k)), abs=1e-9)
        assert abs(leaves - k) > 1e-9
    assert expect["log"] == 0
