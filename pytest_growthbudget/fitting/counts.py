"""The decision rule for deterministic meters: the same estimate, a small noise floor, no stages and no memory."""

from __future__ import annotations

from collections.abc import Generator
from typing import Final

from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.fitting.excess import COUNTER_NOISE, FEWEST_SIZES
from pytest_growthbudget.fitting.finding import conclude, shown_excess
from pytest_growthbudget.fitting.judgement import Finding
from pytest_growthbudget.fitting.run import Run
from pytest_growthbudget.fitting.verdict import count_limits, is_exceeded, is_within
from pytest_growthbudget.measuring.readings import Answer, Climb, Promise, Request, Rounds

SIZES: Final = 12


def decide_counts(promise: Promise) -> Generator[Request, Answer, Finding]:
    """Reads every size once, and once more, with other workloads, where the budget seems exceeded."""
    limits = count_limits(promise.slack, promise.confidence)
    run = Run(promise, limits, COUNTER_NOISE)
    yield from run.climb(Climb(float("inf"), at_least=SIZES))
    first, last = run.ladder.readable, len(run.ladder.sizes)
    if run.readable < FEWEST_SIZES:
        return conclude("unmeasured", reasons.too_few(run.ladder, run.readable, FEWEST_SIZES), promise, limits, None)
    evidence = yield from run.read(Rounds(first, last))
    if evidence is None or len(evidence) < FEWEST_SIZES:
        count = 0 if evidence is None else len(evidence)
        return conclude("unmeasured", reasons.too_few(run.ladder, count, FEWEST_SIZES), promise, limits, evidence)
    fit, gamma = evidence.plain, evidence.gamma
    excess = shown_excess(fit, gamma, limits.confidence)
    if is_exceeded(fit, fit, gamma, limits.exceeded, limits):
        again = yield from run.read(Rounds(first, last, repeat=1))
        if again is None or len(again) < FEWEST_SIZES:
            again = run.climbed(first)
        assert again is not None
        if is_exceeded(again.plain, again.plain, again.gamma, limits.exceeded, limits):
            reason = reasons.exceeded(evidence, excess, limits, agreed=reasons.BY_SECOND_SET)
            return conclude("exceeded", reason, promise, limits, evidence, confirmed=True)
        return conclude("undecided", reasons.UNCONFIRMED, promise, limits, evidence, confirmed=False)
    if is_within(fit, gamma, limits):
        return conclude("within", reasons.within(evidence, limits, deflated=False), promise, limits, evidence)
    return conclude("undecided", reasons.wide(evidence, excess, limits), promise, limits, evidence)
