"""The decision rule for deterministic meters: the same estimate, a small noise floor, no stages and no memory."""

from __future__ import annotations

from collections.abc import Generator
from typing import Final

from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.fitting.evidence import Evidence
from pytest_growthbudget.fitting.excess import COUNTER_NOISE, FEWEST_SIZES, Observations
from pytest_growthbudget.fitting.finding import conclude, shown_excess
from pytest_growthbudget.fitting.judgement import Finding
from pytest_growthbudget.fitting.run import Run
from pytest_growthbudget.fitting.verdict import Limits, count_limits, is_exceeded, is_within
from pytest_growthbudget.measuring.readings import Answer, Climb, Promise, Request, Rounds

SIZES: Final = 12


def decide_counts(promise: Promise) -> Generator[Request, Answer, Finding]:
    """Reads every size, and reads again, with other workloads, where that does not show the budget kept."""
    limits = count_limits(promise.slack, promise.confidence)
    run = Run(promise, COUNTER_NOISE)
    yield from run.climb(Climb(float("inf"), at_least=SIZES))
    first, last = run.ladder.readable, len(run.ladder.sizes)
    evidence = yield from run.read(Rounds(first, last))
    if evidence is None or len(evidence) < FEWEST_SIZES:
        count = 0 if evidence is None else len(evidence)
        nothing = last - first >= FEWEST_SIZES and not any(run.ladder.costs)
        few = reasons.too_few(run.ended, count, FEWEST_SIZES)
        reason = reasons.NOTHING_COUNTED if nothing else few
        return conclude("unmeasured", reason, promise, limits, evidence)
    if not _exceeds(evidence, limits) and is_within(evidence.plain, evidence.gamma, limits):
        reason = reasons.within(evidence, limits)
        return conclude("within", reason, promise, limits, evidence)

    again = yield from run.read(Rounds(first, last, repeat=1))
    if again is None or len(again) < FEWEST_SIZES:
        again = run.climbed(first)
    assert again is not None
    excess = shown_excess(evidence.plain, evidence.gamma, limits.confidence)
    if _exceeds(evidence, limits):
        if _exceeds(again, limits):
            reason = reasons.exceeded(evidence, excess, limits, agreed=reasons.BY_SECOND_SET)
            return conclude("exceeded", reason, promise, limits, evidence, confirmed=True)
        return conclude("undecided", reasons.UNCONFIRMED, promise, limits, evidence, confirmed=False)
    both = yield from run.read(Rounds(first, last), Rounds(first, last, repeat=1))
    assert both is not None
    if is_within(both.plain, both.gamma, limits):
        return conclude("within", reasons.within(both, limits), promise, limits, both)
    excess = shown_excess(both.plain, both.gamma, limits.confidence)
    return conclude("undecided", reasons.wide(both, excess, limits), promise, limits, both)


def _exceeds(evidence: Evidence, limits: Limits) -> bool:
    if not _runs_ahead(evidence.seen, limits.exceeded):
        return False
    return is_exceeded(evidence.plain, evidence.plain, evidence.gamma, limits.exceeded, limits)


def _runs_ahead(seen: Observations, limit: float) -> bool:
    """Whether the counts, having been lowest against the budget, have risen by half the limit since.

    A cost that falls towards its budget and then keeps to it (an array that needs buffers while it is small) bends as
    a constant beside a steeper power would, and the model takes it for that.
    """
    ahead = seen.ahead
    lowest = int(ahead.argmin())
    span = seen.regressor[-1] - seen.regressor[lowest]
    return bool(ahead[-1] - ahead[lowest] > limit / 2 * span)
