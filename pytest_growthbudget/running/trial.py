"""One budgeted test, from its plans to its judgements: ties the rooms together for one reported item."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import asdict, replace
from typing import TYPE_CHECKING, Any

import pytest

from pytest_growthbudget.fitting import remarks
from pytest_growthbudget.fitting.judgement import Finding, ForecastRow, Judgement
from pytest_growthbudget.fitting.scale import allowed, on_one_scale
from pytest_growthbudget.measuring.campaign import Campaign, Limits
from pytest_growthbudget.measuring.guards import Watch
from pytest_growthbudget.measuring.readings import MemoryCurve, Promise
from pytest_growthbudget.measuring.scout import USABLE, Scouted
from pytest_growthbudget.measuring.yardstick import YardstickGrowth
from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.protocol import MeterError, close_meter
from pytest_growthbudget.reporting.wire import to_wire
from pytest_growthbudget.running.session_limit import judged as judged_in_time
from pytest_growthbudget.running.taking import Taker
from pytest_growthbudget.running.underway import underway, watched
from pytest_growthbudget.workloads.collect import meter_of
from pytest_growthbudget.workloads.fixtures import settings_key, shared_key
from pytest_growthbudget.workloads.rays import Ray, rays
from pytest_growthbudget.workloads.repeat import (
    BodyFailed,
    GrowthItem,
    Repeater,
    collector_spared,
    warnings_apart,
)

if TYPE_CHECKING:
    from pytest_growthbudget.plans import Plan

#: The memory curve of this machine by its key, once it was needed: it outlives a run within one process.
_curves: dict[str, MemoryCurve] = {}
CURVE_CACHE = "growthbudget/memory_curve"
#: How many workloads of one size a meter that always counts the same reads, where they are random.
RANDOM_WORKLOADS = 3
#: Below these costs, by unit, the fixed parts of a count drown what grows.
FLOOR = {"bytes": 1024.0, "ns": 5_000.0}
FEW_COUNTS = 30.0
#: From the best verdict of a ray to the worst; the worst is the test's.
WORSE = ("within", "undecided", "unmeasured", "exceeded")


def hold(item: GrowthItem) -> None:
    """Judge every budget of `item`, keep the judgements on it, and fail the test where one is not kept."""
    failure: BodyFailed | None = None
    with underway(item.config).holding(item), collector_spared(), warnings_apart() as forget:
        for plan in item.plans:
            try:
                judgement = judged_in_time(item, plan, forget, judge_plan)
                if judgement.verdict == "exceeded":
                    from pytest_growthbudget.running.hotspots import with_lines

                    judgement = with_lines(item, plan, judgement, forget)
                wire = against_accepted(item, plan, to_wire(judgement, undecided=plan.undecided), forget)
            except BodyFailed as error:
                failure = error
                break
            if plan.audit is not None:
                from pytest_growthbudget.running.audited import audit_test

                wire["audit"] = audit_test(item, plan, judgement, forget)
            item.ihook.pytest_growthbudget_judged(item=item, judgement=judgement)
            item.judgements.append(wire)
    if failure is not None:
        item.failed_at = str(failure)
        assert failure.__cause__ is not None
        raise failure.__cause__
    from pytest_growthbudget.reporting.failure import fails, first_line

    broken = [judgement for judgement in item.judgements if fails(judgement)]
    if broken:
        pytest.fail("\n".join(first_line(judgement) for judgement in broken), pytrace=False)


def against_accepted(
    item: GrowthItem, plan: Plan, judgement: dict[str, Any], forget: Callable[[], None]
) -> dict[str, Any]:
    """The judgement in wire form with what the ratchet says of it, where it is switched on."""
    if plan.ratchet is None:
        return judgement
    from pytest_growthbudget.running import ratchet

    def again() -> dict[str, Any]:
        return to_wire(judge_plan(item, replace(plan, seed=plan.seed + 1), forget))

    return ratchet.held(item, plan.ratchet, judgement, again)


def judge_plan(item: GrowthItem, plan: Plan, forget: Callable[[], None]) -> Judgement:
    """Measure one budget of `item` along each of its rays; the worst ray's judgement is the budget's.

    Raises `BodyFailed` where the test itself fails.
    """
    began = clocks.wall_time_ns()
    every = rays(plan.vary, item.config.stash[shared_key].ordinary_size)
    judged: list[Judgement] = []
    for ray in every:
        judged.append(_judge_ray(item, plan, ray, plan.time_limit / len(every), forget))
        if judged[-1].verdict == "exceeded":
            break
    worst = max(judged, key=lambda judgement: WORSE.index(judgement.verdict))
    if plan.meter == "steps" and worst.verdict == "within" and all(p.meter != "cpu_time" for p in item.plans):
        worst = _with_hidden_work(item, plan, worst, forget)
    named = tuple((judgement.ray, judgement.verdict) for judgement in judged) if len(every) > 1 else ()
    return replace(worst, rays=named, seconds=(clocks.wall_time_ns() - began) / 1e9)


def _with_hidden_work(item: GrowthItem, plan: Plan, counted: Judgement, forget: Callable[[], None]) -> Judgement:
    """`counted`, unless the time behind the lines counted outgrows the budget: work inside C calls, which no line
    count sees.
    """
    slack = item.config.stash[settings_key].slack_of("cpu_time")
    timed = judge_plan(item, replace(plan, meter="cpu_time", slack=max(slack, plan.slack), at=None), forget)
    if timed.verdict == "exceeded":
        reason = f"the lines executed keep the budget, the time they take does not: {timed.reason}"
        return replace(timed, meter="cpu_time hidden behind steps", reason=reason)
    if timed.verdict == "within":
        return counted
    note = f"whether time hides behind the steps, inside C calls, was {timed.verdict}: {timed.reason}."
    return replace(counted, notes=(*counted.notes, note))


def _judge_ray(item: GrowthItem, plan: Plan, ray: Ray, time_limit: float, forget: Callable[[], None]) -> Judgement:
    from pytest_growthbudget.fitting.rule import decide

    reference = YardstickGrowth()
    value: Callable[[Mapping[str, float]], float] = (
        reference.log_value if plan.budget is None else plan.budget.ray(ray.moving).log_value
    )
    watch, shared = Watch(time_limit), item.config.stash[shared_key]
    repeater = Repeater(item, ray.assign, watch)

    def log_growth(n: float) -> float:
        return value({"n": n})

    def curve() -> MemoryCurve | None:
        before = clocks.wall_time_ns()
        measured = memory_curve(item.config)
        spent = clocks.wall_time_ns() - before
        campaign.extend(spent)
        watch.extend(spent / 1e9)
        return measured

    meter = meter_of(plan.meter, item.config)
    promise = Promise(
        log_growth=log_growth,
        exponential=plan.budget is not None and plan.budget.exponential,
        slack=plan.slack,
        confidence=plan.confidence,
        deterministic=meter.deterministic,
        curve=curve,
    )
    underway(item.config).begin(item, plan, ray, meter.unit, time_limit)
    take = Taker(repeater, meter, forget, plan.yardstick, reference)
    scouted = Scouted(take, lambda: campaign.left / 2, clocks.wall_time_ns)
    campaign = Campaign(
        take=watched(scouted if plan.scout and USABLE else take, underway(item.config)),
        footprint=repeater.footprint,
        now=clocks.wall_time_ns,
        limits=Limits(
            time=time_limit * 1e9,
            smallest=plan.smallest,
            largest=plan.largest,
            exponential=promise.exponential,
            repeatable=repeater.repeatable and plan.yardstick is None,
            clock=not meter.deterministic,
            once=RANDOM_WORKLOADS if repeater.random else 1,
            floor=FLOOR.get(meter.unit, FEW_COUNTS if meter.deterministic else FLOOR["ns"]),
        ),
        seed=f"{plan.seed}/{item.nodeid}/{plan.meter}/{ray.name}",
        allow=watch.allow,
    )
    shared.watch = watch
    notes: tuple[str, ...] = ()
    ceiling: ForecastRow | None = None
    try:
        with watch.start():
            finding = on_one_scale(campaign.run(decide(promise)), log_growth)
        finding, notes = with_remarks(finding, campaign, plan, ray, log_growth)
        if campaign.ran_away and not repeater.returned:
            raise never_returned(ray, *campaign.ran_away)
        notes = (*notes, *take.notes())
        if plan.at is not None and plan.ceiling is not None:
            from pytest_growthbudget.fitting.ceiling import under_ceiling

            finding, ceiling = under_ceiling(finding, promise, plan.at, plan.ceiling)
    except MeterError as error:
        finding = Finding(verdict="unmeasured", reason=str(error))
    finally:
        shared.watch = None
        close_meter(meter)
    budget = plan.budget
    return Judgement(
        **{name: getattr(finding, name) for name in Finding.__dataclass_fields__},
        bound=budget.text if budget is not None else f"yardstick {_name(plan.yardstick)}",
        theta=budget.theta if budget is not None else f"{_name(plan.yardstick)}'s growth",
        theorem=budget.theorem if budget is not None else "",
        steps=budget.steps if budget is not None else (),
        meter=plan.meter,
        unit=meter.unit,
        slack=plan.slack,
        confidence=plan.confidence,
        seed=plan.seed,
        notes=notes,
        allowed=allowed(finding, log_growth),
        variable=ray.variable,
        ray=ray.name,
        ceiling=ceiling,
        yardstick=() if budget is not None else tuple(reference.cost(row.size) for row in finding.sizes),
    )


def with_remarks(
    finding: Finding, campaign: Campaign, plan: Plan, ray: Ray, log_growth: Callable[[float], float]
) -> tuple[Finding, tuple[str, ...]]:
    """`finding`, with what became of calls that were cut off, and notes on what it does not say by itself."""
    notes = []
    if campaign.ran_away:
        finding = remarks.after_runaway(finding, *campaign.ran_away, ray.variable)
    if campaign.exhausted:
        notes.append(remarks.exhausted(campaign.exhausted, ray.variable))
    # Along one ray of several a cost may well be flat: another size outweighs it.
    if plan.budget is not None and len(plan.vary) == 1:
        notes.append(remarks.flat_cost(finding, log_growth, plan.budget.theta, ray.variable))
    return finding, tuple(note for note in notes if note)


def never_returned(ray: Ray, size: int, allowed: float) -> BodyFailed:
    """The failure of a test of which no call has come back."""
    text = (
        f"no call of this test came back: at its smallest size it was stopped after {allowed / 1e9:.3g} s, half of "
        "its time limit; raise time_limit or lower smallest, if it is not caught in a loop"
    )
    failure = BodyFailed(ray.assign(size))
    failure.__cause__ = pytest.fail.Exception(text, pytrace=False)
    return failure


def _name(reference: object) -> str:
    return str(getattr(reference, "__name__", "the reference"))


def memory_curve(config: pytest.Config) -> MemoryCurve | None:
    """What memory adds to linear code on this machine: from this process, pytest's cache, or measured now."""
    from pytest_growthbudget.measuring import kernels

    key = kernels.machine_key()
    if key not in _curves:
        cache = getattr(config, "cache", None)
        kept = cache.get(CURVE_CACHE, {}) if cache is not None else {}
        curve = kernels.from_dict(kept[key]) if key in kept else None
        if curve is None:
            curve = kernels.measure_curve()
            if cache is not None:
                cache.set(CURVE_CACHE, {key: asdict(curve)})
        _curves[key] = curve
    return _curves[key]
