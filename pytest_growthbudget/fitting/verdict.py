"""The decision on one set of readings: pure predicates, without a word to the campaign.

Two hypotheses are put to the same estimate, as in a pair of one-sided tests (Schuirmann 1987): that the excess is
more than the slack, and that it is less than a larger limit. Where neither can be refused nothing is decided.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from enum import Enum
from typing import Final

import numpy as np

from pytest_growthbudget.fitting.evidence import Evidence
from pytest_growthbudget.fitting.excess import FEWEST_SIZES, Excess, Observations
from pytest_growthbudget.measuring.readings import MemoryCurve

CLOCK_SLACK: Final = 0.15
FLAT_GAMMA: Final = 0.2
TOP_SIZES: Final = 10
TOP_FOOTPRINT: Final = 2 * 2.0**20
CHEAP_UNITS: Final = 2.0
CHEAP_GAMMA: Final = 0.9
CHEAP_SIZES: Final = 7
RESIDENT: Final = 2.0**20
SMALL_FOOTPRINT: Final = 256 * 1024.0
SMALL_SIZES: Final = 7
UTMOST_INFLATION: Final = float(np.log(20.0))
FEW_SIZES: Final = 9
FEW_RISE: Final = float(np.log(3.0))
OVERWHELMING: Final = 0.15
OVERWHELMING_RISE: Final = float(np.log(4.0))


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """The thresholds on the excess, and the confidence of the bounds that are held against them.

    `exceeded`: the lower bound above which a budget is exceeded; `exceeded_top`: the same for the last sizes alone;
    `exceeded_flat`: the least such bound for a flat budget.
    `within`, `within_hidden`: the upper bounds below which it is kept. `suspect`, `suspect_later`, `suspect_last`:
    the lower bounds above which a fit that would be within is not believed at stage A, at stage B, and when there
    is no stage to come. `look_ahead`: the excess tolerated at one larger size, and `look_on` the one above which
    dearer sizes are read all the same. `resident`: the lower bound on cache-resident sizes above which a deflated fit
    is not believed. Those that are left out bound nothing.
    """

    confidence: float
    exceeded: float
    exceeded_top: float = math.inf
    exceeded_flat: float
    within: float
    within_hidden: float
    suspect: float = math.inf
    suspect_later: float = math.inf
    suspect_last: float = math.inf
    look_ahead: float = math.inf
    look_on: float = math.inf
    resident: float = math.inf

    @property
    def lower(self) -> float:
        """The probability below the lower bound of an interval."""
        return (1 - self.confidence) / 2

    @property
    def upper(self) -> float:
        """The probability below the upper bound of an interval."""
        return (1 + self.confidence) / 2


def clock_limits(slack: float = CLOCK_SLACK, confidence: float = 0.95) -> Limits:
    """The limits for a clock. A larger slack moves each by as much; a smaller one leaves the suspicions alone."""
    wider = max(0.0, slack - CLOCK_SLACK)
    return Limits(
        confidence=confidence,
        exceeded=slack,
        exceeded_top=slack + 0.05,
        exceeded_flat=max(slack, 0.20),
        within=slack + 0.15,
        within_hidden=slack + 0.30,
        suspect=0.02 + wider,
        suspect_later=0.05 + wider,
        suspect_last=0.10 + wider,
        look_ahead=slack + 0.15,
        look_on=slack,
        resident=0.05 + wider,
    )


def count_limits(slack: float, confidence: float = 0.95) -> Limits:
    """The limits for a deterministic meter. Nothing is suspected of counts, and no stage looks further."""
    return Limits(
        confidence=confidence,
        exceeded=slack,
        exceeded_flat=slack,
        within=slack + 0.05,
        within_hidden=slack + 0.05,
    )


def given_limits(slack: float, confidence: float = 0.95) -> Limits:
    """The limits for costs that were read elsewhere: as for a clock, but tighter where the slack is."""
    margin = min(slack, CLOCK_SLACK)
    return replace(
        clock_limits(slack, confidence),
        exceeded_flat=slack if slack < CLOCK_SLACK else max(slack, 0.20),
        within=slack + margin,
        within_hidden=slack + 2 * margin,
    )


def is_flat(gamma: float) -> bool:
    """Whether the budget is so flat (O(1), O(log n)) that it is judged on the excess at the largest size."""
    return gamma < FLAT_GAMMA


def is_exceeded(plain: Excess, deflated: Excess, gamma: float, limit: float, limits: Limits) -> bool:
    """Whether the excess is above `limit`: its lower bound is, once memory is allowed for, and the cost as it was
    read does run ahead of the budget at the largest size.
    """
    if plain.at_top.quantiles((0.5,))[0] <= limit / 2:
        return False
    if is_flat(gamma):
        return deflated.at_top.quantiles((limits.lower,))[0] > max(limit, limits.exceeded_flat)
    return deflated.delta.quantiles((limits.lower,))[0] > limit


def is_within(fit: Excess, gamma: float, limits: Limits) -> bool:
    """Whether the excess is below the limit, in the term that leads and in what hides behind the budget's own.

    The limit on the hidden term is the wider, because it is known less well.
    """
    upper = (limits.upper,)
    if is_flat(gamma):
        return min(fit.at_top.quantiles(upper)[0], fit.delta.quantiles(upper)[0]) < limits.within
    return fit.delta.quantiles(upper)[0] < limits.within and fit.hidden.quantiles(upper)[0] < limits.within_hidden


def is_suspicious(fit: Excess, gamma: float, limit: float, limits: Limits) -> bool:
    """Whether a fit that may be within has a lower bound so high that more should be read first."""
    return not is_flat(gamma) and fit.delta.quantiles((limits.lower,))[0] > limit


class Says(Enum):
    """What a set of readings says of an excess above a limit."""

    NO = 0
    YES = 1
    NOT_WITHOUT_CURVE = 2  # it would, if memory were allowed for


def exceeds(evidence: Evidence, limit: float, limits: Limits, curve: Callable[[], MemoryCurve | None]) -> Says:
    """Whether a set of readings shows an excess above `limit` that memory does not explain.

    The curve is asked for only where the plain costs exceed and the footprint is large enough to matter.
    """
    if len(evidence) < FEWEST_SIZES:
        return Says.NO
    if not is_exceeded(evidence.plain, evidence.plain, evidence.gamma, limit, limits):
        return Says.NO
    if 0 < evidence.footprint <= SMALL_FOOTPRINT:
        return Says.YES if rises_enough(evidence.seen) else Says.NO
    known = curve()
    if known is None or evidence.allowed is None:
        return exceeds_uncurved(evidence, limit, limits)
    if is_cheap(evidence, known):
        # No kernel is so cheap as this body, so none can say what memory multiplies it by outside the caches.
        evidence = evidence.up_to(known.resident)
        if len(evidence) < CHEAP_SIZES:
            return Says.NO
    deflated, allowed = evidence.deflated, evidence.allowed
    assert deflated is not None
    assert allowed is not None
    shown = is_exceeded(evidence.plain, deflated, evidence.gamma, limit, limits)
    return Says.YES if shown and rises_enough(evidence.seen.divided_by(allowed)) else Says.NO


def rises_enough(deflated: Observations) -> bool:
    """Whether the cost has run ahead far enough for so few sizes: threefold, where there are fewer than nine.

    The interval from five sizes is honest about noise, but not about a single step (a resize, the edge of a cache)
    that falls among them.
    """
    return len(deflated) >= FEW_SIZES or rise(deflated) > FEW_RISE


def rise(seen: Observations) -> float:
    """By how much, in logs, the cost has run ahead of the growth allowed from the first size to the last."""
    return float(seen.ahead[-1] - seen.ahead[0])


def is_cheap(evidence: Evidence, curve: MemoryCurve) -> bool:
    """Whether a body outside the caches costs less per unit of growth than two elements of the cheapest kernel."""
    return (
        evidence.footprint > curve.resident
        and evidence.gamma >= CHEAP_GAMMA
        and evidence.unit_cost() < CHEAP_UNITS * curve.cheapest
    )


def exceeds_uncurved(evidence: Evidence, limit: float, limits: Limits) -> Says:
    """What can be said where the memory of this machine, or of this body, is not known.

    Sizes with a small footprint need no allowance. And no memory has been seen to slow linear code down more than
    `UTMOST_INFLATION`; a step of that height in the middle of the sizes tilts a line by 1.5 times the height over
    the span.
    """
    span = float(evidence.seen.regressor[-1] - evidence.seen.regressor[0])
    most = limit + 1.5 * UTMOST_INFLATION / span
    if is_exceeded(evidence.plain, evidence.plain, evidence.gamma, most, limits) and rises_enough(evidence.seen):
        return Says.YES
    small = evidence.up_to(SMALL_FOOTPRINT)
    if (
        len(small) >= SMALL_SIZES
        and small.footprint > 0
        and is_exceeded(small.plain, small.plain, small.gamma, limit, limits)
        and rises_enough(small.seen)
    ):
        return Says.YES
    return Says.NOT_WITHOUT_CURVE


def runs_far_ahead(evidence: Evidence) -> bool:
    """Whether the cost has run ahead of the budget at least fourfold over the sizes."""
    return rise(evidence.seen) > OVERWHELMING_RISE
