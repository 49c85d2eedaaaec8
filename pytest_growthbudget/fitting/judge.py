"""One decision on costs that were read elsewhere: no measuring, no second look, no memory curve."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np

from pytest_growthbudget.bounds.budget import Budget, parse_budget
from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.fitting.evidence import Evidence, gather
from pytest_growthbudget.fitting.excess import CLOCK_NOISE, FEWEST_SIZES
from pytest_growthbudget.fitting.finding import conclude, shown_excess
from pytest_growthbudget.fitting.judgement import Finding, Judgement, VerdictName
from pytest_growthbudget.fitting.scale import allowed, on_one_scale
from pytest_growthbudget.fitting.verdict import Limits, given_limits, is_exceeded, is_within, rises_enough
from pytest_growthbudget.measuring.readings import Promise, Series

NO_MEMORY = (
    "no memory allowance was made, since it is not known where these costs were read: outside the caches of a "
    "machine linear work looks steeper than it is"
)


class ReadingsError(ValueError):
    """Sizes or costs that cannot be judged; the message says which and how to mend it."""


def judge(
    sizes: Sequence[int] | Any,
    costs: Sequence[float] | Sequence[Sequence[float]] | Any,
    budget: str | Budget,
    *,
    confidence: float = 0.95,
    slack: float = 0.15,
) -> Judgement:
    """Judges given costs against a budget in one variable.

    `sizes` has shape (m,), whole numbers of at least 1; a size may occur more than once. `costs` has shape (m,),
    (m, r), or is m lists of unequal length; any unit, all positive. At least five different sizes are needed.

    Raises:
        ReadingsError: the sizes or costs cannot be judged, or `confidence` or `slack` is out of range.
        BoundError: the budget's text is at fault.
    """
    bound = parse_budget(budget) if isinstance(budget, str) else budget
    if not 0 < confidence < 1:
        raise ReadingsError(f"confidence must lie between 0 and 1, not at {confidence!r}.")
    if not (math.isfinite(slack) and slack >= 0):
        raise ReadingsError(f"slack must be a number of at least 0, not {slack!r}.")
    if len(bound.variables) > 1:
        raise ReadingsError(
            f"the budget {bound.text!r} has several variables ({', '.join(bound.variables)}), but there is one "
            "number a size. State the bound in one variable."
        )
    variable = bound.variables[0] if bound.variables else "n"
    series = read_series(sizes, costs)
    promise = Promise(log_growth=bound.along({variable: 1.0}, {}), exponential=bound.exponential)
    for size in series.sizes:
        if not math.isfinite(promise.log_growth(size)):
            raise ReadingsError(f"the budget {bound.text!r} allows nothing at n = {size}. Leave that size out.")
    limits = given_limits(slack, confidence)
    evidence = gather(promise, {}, [series], promise.curve, CLOCK_NOISE)
    assert evidence is not None
    finding = on_one_scale(decide_once(promise, evidence, limits), promise.log_growth)
    return Judgement(
        **{name: getattr(finding, name) for name in Finding.__dataclass_fields__},
        bound=bound.text,
        theta=bound.theta,
        theorem=bound.theorem,
        steps=bound.steps,
        meter="the given cost",
        unit="",
        slack=slack,
        confidence=confidence,
        notes=(NO_MEMORY,),
        allowed=allowed(finding, promise.log_growth),
        variable=variable,
    )


def decide_once(promise: Promise, evidence: Evidence, limits: Limits) -> Finding:
    """The three-way verdict on one set of costs."""
    fit, gamma = evidence.plain, evidence.gamma
    excess = shown_excess(fit, gamma, limits.confidence)
    verdict: VerdictName
    if is_exceeded(fit, fit, gamma, limits.exceeded, limits) and rises_enough(evidence.seen):
        verdict, reason = "exceeded", reasons.exceeded(evidence, excess, limits, agreed="")
    elif is_within(fit, gamma, limits):
        verdict, reason = "within", reasons.within(evidence, limits)
    else:
        verdict, reason = "undecided", reasons.wide(evidence, excess, limits)
    return conclude(verdict, reason, promise, limits, evidence)


def read_series(sizes: Any, costs: Any) -> Series:
    """Sizes and costs as a series, sorted, with the costs of equal sizes put together. Raises `ReadingsError`."""
    many, each = _listed(sizes, "sizes"), _listed(costs, "costs")
    if len(many) != len(each):
        raise ReadingsError(
            f"there are {len(many)} sizes but costs for {len(each)}: give one cost, or one list of costs, a size."
        )
    together: dict[int, list[float]] = {}
    for place, (size, cost) in enumerate(zip(many, each, strict=True)):
        whole = _size(size, place)
        together.setdefault(whole, []).extend(_costs(cost, whole))
    if len(together) < FEWEST_SIZES:
        raise ReadingsError(
            f"{len(together)} different sizes were given where at least {FEWEST_SIZES} are needed to tell growth "
            "from noise. Measure at more sizes."
        )
    ordered = sorted(together)
    return Series(sizes=tuple(ordered), costs=tuple(tuple(together[size]) for size in ordered))


def _listed(values: Any, name: str) -> list[Any]:
    if isinstance(values, np.ndarray):
        if values.ndim not in ((1,) if name == "sizes" else (1, 2)):
            raise ReadingsError(f"{name} has {values.ndim} dimensions, which cannot be matched to sizes.")
        listed: list[Any] = values.tolist()
        return listed
    if isinstance(values, (str, bytes)) or not isinstance(values, Iterable):
        raise ReadingsError(f"{name} must be a list of numbers, not {values!r}.")
    return list(values)


def _number(value: Any, what: str) -> float:
    if isinstance(value, (str, bytes, bool)):
        raise ReadingsError(f"{what} is {value!r}, which is not a number.")
    try:
        return float(value)
    except (TypeError, ValueError):
        raise ReadingsError(f"{what} is {value!r}, which is not a number.") from None


def _size(value: Any, place: int) -> int:
    what = f"the size at position {place}"
    number = _number(value, what)
    if not math.isfinite(number) or number < 1 or number != int(number):
        raise ReadingsError(f"{what} is {value!r}; a size is a whole number of at least 1.")
    return int(number)


def _costs(value: Any, size: int) -> list[float]:
    many = list(value) if isinstance(value, Iterable) and not isinstance(value, (str, bytes)) else [value]
    if not many:
        raise ReadingsError(f"there is no cost at n = {size}. Leave that size out.")
    numbers = [_number(each, f"a cost at n = {size}") for each in many]
    for number in numbers:
        if not math.isfinite(number) or number <= 0:
            raise ReadingsError(f"a cost at n = {size} is {number!r}; costs must be positive and finite.")
    return numbers
