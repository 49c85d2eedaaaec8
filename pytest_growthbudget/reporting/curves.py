"""The curves of a judgement's plot, from its record alone: readings, fit with its band, budget, forecast.

The fit is the model of the verdict, cost = c + a · g(n) · n^δ with c ≥ 0, at the δ that the record tells and its
interval's ends; c and a are those that leave the smallest relative residuals. Where the budget is flat, δ is that at
the largest size, and the fit is drawn about there alone. Beyond the sizes that were read the
fit and its band are the forecast and its interval.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from pytest_growthbudget.reporting.records import is_flat

Points = tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Curves:
    """Points (size, cost), ascending by size. `band`: (size, low, high). `linear`: sizes step by one, not by factors.

    `read`: the sizes up to here were read; beyond, the fit is a forecast.
    """

    readings: Points
    fit: Points
    band: tuple[tuple[float, float, float], ...]
    budget: Points
    read: float
    bends_at: float | None
    linear: bool


def curves(judgement: Mapping[str, Any]) -> Curves | None:
    """The curves of a judgement in wire form; None where fewer than two sizes have a positive cost."""
    rows = judgement["sizes"]
    limits = judgement["allowed"] if len(judgement["allowed"]) == len(rows) else [None] * len(rows)
    known = [(row["size"], row["cost"], limit) for row, limit in zip(rows, limits, strict=True) if row["cost"] > 0]
    if len(known) < 2:
        return None
    sizes, costs = [size for size, _, _ in known], [cost for _, cost, _ in known]
    budget = [(size, limit) for size, _, limit in known if limit]
    exponential = judgement["exponent"] is None and judgement["excess"] is not None
    fit, band = _fitted(judgement, sizes, costs, [limit for _, limit in budget], exponential=exponential)
    for row in judgement["forecast"]:
        cost = row["cost"]
        if not fit or None in cost.values() or not cost["low"] > 0:
            break
        fit.append((row["size"], cost["estimate"]))
        band.append((row["size"], cost["low"], cost["high"]))
        if row["allowed"] and budget:
            budget.append((row["size"], row["allowed"]))
    return Curves(
        readings=tuple(zip(sizes, costs, strict=True)),
        fit=tuple(fit),
        band=tuple(band),
        budget=tuple(budget),
        read=sizes[-1],
        bends_at=judgement["bends_at"],
        linear=exponential,
    )


def _fitted(
    judgement: Mapping[str, Any],
    sizes: Sequence[float],
    costs: Sequence[float],
    limits: Sequence[float],
    *,
    exponential: bool,
) -> tuple[list[tuple[float, float]], list[tuple[float, float, float]]]:
    if len(limits) == len(sizes):
        steepness = judgement["excess"]
    else:
        limits, steepness = [1.0] * len(sizes), judgement["exponent"]
    if steepness is None:
        return [], []
    flat = is_flat(judgement)
    if flat:  # the excess is that at the largest size, so it is drawn about there alone
        top = max(3, len(sizes) // 4)
        sizes, costs, limits = sizes[-top:], costs[-top:], limits[-top:]
    at = {
        name: _curve(sizes, costs, _shape(sizes, limits, steepness[name], exponential=exponential), offset=not flat)
        for name in ("low", "estimate", "high")
    }
    fit = list(zip(sizes, at["estimate"], strict=True))
    band = [(size, min(three), max(three)) for size, *three in zip(sizes, *at.values(), strict=True)]
    return fit, band


def _shape(sizes: Sequence[float], limits: Sequence[float], delta: float, *, exponential: bool) -> list[float]:
    """Growth with an excess, 1 at the largest size; a power of the growth itself where that is exponential."""
    ratios = [limit / limits[-1] for limit in limits] if exponential else [size / sizes[-1] for size in sizes]
    return [limit / limits[-1] * ratio**delta for limit, ratio in zip(limits, ratios, strict=True)]


def _curve(sizes: Sequence[float], costs: Sequence[float], shape: Sequence[float], *, offset: bool) -> list[float]:
    """c + a · shape, with the c ≥ 0 and a > 0 that leave the smallest sum of squared relative residuals."""
    ones = [1 / cost for cost in costs]
    rise = [value / cost for value, cost in zip(shape, costs, strict=True)]
    s11 = math.fsum(value * value for value in ones)
    s12 = math.fsum(one * value for one, value in zip(ones, rise, strict=True))
    s22 = math.fsum(value * value for value in rise)
    s1, s2 = math.fsum(ones), math.fsum(rise)
    det = s11 * s22 - s12 * s12
    c, a = 0.0, s2 / s22
    if offset and det > 1e-12 * s11 * s22:
        free_c, free_a = (s22 * s1 - s12 * s2) / det, (s11 * s2 - s12 * s1) / det
        if free_c > 0 and free_a > 0:
            c, a = free_c, free_a
    return [c + a * value for value in shape]
