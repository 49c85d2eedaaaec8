"""Findings: the verdict on some evidence with everything that the report says beside it."""

from __future__ import annotations

from pytest_growthbudget.fitting.evidence import Evidence
from pytest_growthbudget.fitting.excess import FEWEST_SIZES, Excess, fit_excess, observe
from pytest_growthbudget.fitting.forecast import bends_at, forecast, nearest_growth
from pytest_growthbudget.fitting.judgement import Finding, Interval, VerdictName
from pytest_growthbudget.fitting.verdict import Limits, is_flat
from pytest_growthbudget.measuring.readings import Promise


def conclude(
    verdict: VerdictName,
    reason: str,
    promise: Promise,
    limits: Limits,
    evidence: Evidence | None,
    *,
    whole: Evidence | None = None,
    stage: str = "",
    confirmed: bool | None = None,
    memory: bool = False,
) -> Finding:
    """The finding on `evidence`, which may be a window of `whole`. `memory`: its allowance counts in the resolution."""
    if evidence is None or len(evidence) < FEWEST_SIZES:
        return Finding(verdict=verdict, reason=reason, sizes=() if evidence is None else evidence.rows(), stage=stage)
    seen, confidence = evidence.seen, limits.confidence
    excess = shown_excess(evidence.plain, evidence.gamma, confidence)
    exponent = None if promise.exponential else measured_exponent(evidence, confidence)
    return Finding(
        verdict=verdict,
        reason=reason,
        excess=excess,
        exponent=exponent,
        resolution=resolution(evidence, excess, limits, memory=memory),
        nearest=None if exponent is None else nearest_growth(seen, exponent),
        sizes=(whole or evidence).rows(),
        forecast=forecast(
            seen,
            promise.log_growth,
            exponential=promise.exponential,
            confidence=confidence,
            noise=evidence.noise,
        ),
        bends_at=bends_at(seen) if verdict == "exceeded" else None,
        confirmed=confirmed,
        stage=stage,
    )


def shown_excess(fit: Excess, gamma: float, confidence: float) -> Interval:
    """The excess that the verdict is about: for flat budgets that of the whole cost at the largest size."""
    return (fit.at_top if is_flat(gamma) else fit.delta).interval(confidence)


def measured_exponent(evidence: Evidence, confidence: float) -> Interval:
    """The exponent of the cost itself: its excess over a constant."""
    against_nothing = observe(evidence.seen.sizes, evidence.seen.costs, lambda n: 0.0)
    fit = fit_excess(against_nothing, noise=evidence.noise)
    return (fit.at_top if is_flat(evidence.gamma) else fit.delta).interval(confidence)


def resolution(evidence: Evidence, excess: Interval, limits: Limits, *, memory: bool) -> float:
    """The smallest excess that these readings could have told from none: slack, half an interval, and the slope
    that the memory allowance could have made.
    """
    smallest = limits.exceeded + excess.estimate - excess.low
    if memory and evidence.allowed is not None:
        span = evidence.seen.regressor[-1] - evidence.seen.regressor[0]
        smallest += float((evidence.allowed[-1] - evidence.allowed[0]) / span)
    return smallest
