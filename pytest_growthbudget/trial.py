"""One budgeted test, from its plans to its judgements: ties the rooms together for one reported item."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import asdict
from typing import TYPE_CHECKING

import pytest

from pytest_growthbudget.fitting.judgement import Finding, Judgement
from pytest_growthbudget.measuring.campaign import Campaign, Limits
from pytest_growthbudget.measuring.guards import Watch
from pytest_growthbudget.measuring.readings import MemoryCurve, Promise, Reading
from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.protocol import Meter, MeterError
from pytest_growthbudget.meters.registry import meter_for
from pytest_growthbudget.reporting.wire import to_wire
from pytest_growthbudget.workloads.repeat import (
    BodyFailed,
    GrowthItem,
    Repeater,
    collector_spared,
    warnings_apart,
)

if TYPE_CHECKING:
    from pytest_growthbudget.settings import Plan

#: The memory curve of this machine, once it was needed.
curve_key = pytest.StashKey["MemoryCurve | None"]()
CURVE_CACHE = "growthbudget/memory_curve"


def hold(item: GrowthItem) -> None:
    """Judge every budget of `item`, keep the judgements on it, and fail the test where one is not kept."""
    failure: BodyFailed | None = None
    with collector_spared(), warnings_apart() as forget:
        for plan in item.plans:
            try:
                judgement = judge_plan(item, plan, forget)
            except BodyFailed as error:
                failure = error
                break
            item.judgements.append(to_wire(judgement, undecided=plan.undecided))
    if failure is not None:
        item.failed_at = str(failure)
        assert failure.__cause__ is not None
        raise failure.__cause__
    from pytest_growthbudget.reporting.failure import fails, first_line

    broken = [judgement for judgement in item.judgements if fails(judgement)]
    if broken:
        pytest.fail("\n".join(first_line(judgement) for judgement in broken), pytrace=False)


def judge_plan(item: GrowthItem, plan: Plan, forget: Callable[[], None]) -> Judgement:
    """Measure one budget of `item` and judge it. Raises `BodyFailed` where the test itself fails."""
    from pytest_growthbudget.fitting.rule import decide

    (variable,) = plan.vary
    fixture = plan.vary[variable]
    began = clocks.wall_time_ns()
    meter = meter_for(plan.meter)
    watch = Watch(plan.time_limit)
    repeater = Repeater(item, lambda size: {fixture: size}, watch)
    growth = plan.budget.along({variable: 1.0}, {})
    promise = Promise(
        log_growth=growth,
        exponential=plan.budget.exponential,
        slack=plan.slack,
        confidence=plan.confidence,
        deterministic=meter.deterministic,
        curve=lambda: memory_curve(item.config),
    )
    campaign = Campaign(
        take=taker(repeater, meter, forget),
        footprint=repeater.footprint,
        now=clocks.wall_time_ns,
        limits=Limits(
            time=plan.time_limit * 1e9,
            smallest=plan.smallest,
            largest=plan.largest,
            exponential=plan.budget.exponential,
            repeatable=repeater.repeatable,
            clock=not meter.deterministic,
        ),
        seed=f"{plan.seed}/{item.nodeid}/{plan.meter}",
    )
    with watch.start():
        try:
            finding = campaign.run(decide(promise))
        except MeterError as error:
            finding = Finding(verdict="unmeasured", reason=str(error))
    return Judgement(
        **{name: getattr(finding, name) for name in Finding.__dataclass_fields__},
        bound=plan.budget.text,
        theta=plan.budget.theta,
        theorem=plan.budget.theorem,
        steps=plan.budget.steps,
        meter=plan.meter,
        unit=meter.unit,
        slack=plan.slack,
        confidence=plan.confidence,
        seconds=(clocks.wall_time_ns() - began) / 1e9,
        seed=plan.seed,
    )


def taker(repeater: Repeater, meter: Meter, forget: Callable[[], None]) -> Callable[[int, int], Reading]:
    """What the campaign calls for one reading. Warnings that the body gave are forgotten after each."""

    def take(size: int, calls: int) -> Reading:
        taken = repeater.take(size, meter, calls)
        forget()
        return Reading(size=size, cost=taken.cost, calls=calls, wall=taken.wall, elapsed=taken.elapsed)

    return take


def memory_curve(config: pytest.Config) -> MemoryCurve | None:
    """What memory adds to linear code on this machine: from this run, pytest's cache, or measured now."""
    if curve_key in config.stash:
        return config.stash[curve_key]
    from pytest_growthbudget.measuring import kernels

    cache = getattr(config, "cache", None)
    key = kernels.machine_key()
    kept = cache.get(CURVE_CACHE, {}) if cache is not None else {}
    curve = kernels.from_dict(kept[key]) if key in kept else None
    if curve is None:
        curve = kernels.measure_curve()
        if cache is not None:
            cache.set(CURVE_CACHE, {key: asdict(curve)})
    config.stash[curve_key] = curve
    return curve
