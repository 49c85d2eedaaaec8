"""The time that a whole session may spend on measuring. Budgets that come after it are unmeasured, their tests run."""

from __future__ import annotations

from collections.abc import Callable
from contextlib import suppress
from dataclasses import replace
from typing import TYPE_CHECKING, Final

from pytest_growthbudget.fitting.judgement import Judgement
from pytest_growthbudget.measuring.guards import Watch
from pytest_growthbudget.meters.clocks import WallTime
from pytest_growthbudget.meters.protocol import MeterError
from pytest_growthbudget.running.underway import underway
from pytest_growthbudget.workloads.fixtures import settings_key, shared_key
from pytest_growthbudget.workloads.rays import rays
from pytest_growthbudget.workloads.repeat import GrowthItem, Repeater

if TYPE_CHECKING:
    from pytest_growthbudget.plans import Plan

Judge = Callable[["GrowthItem", "Plan", Callable[[], None]], Judgement]
#: Seconds below which measuring is not begun: a verdict seldom takes less.
LEAST: Final = 0.2


def judged(item: GrowthItem, plan: Plan, forget: Callable[[], None], judge: Judge) -> Judgement:
    """What `judge` finds, within what the session's time limit leaves; unmeasured where it leaves nothing.

    Raises `BodyFailed` where the test itself fails.
    """
    limit = item.config.stash[settings_key].session_time_limit
    if limit is None:
        return judge(item, plan, forget)
    left = limit - underway(item.config).spent_by_now()
    if left < min(LEAST, limit / 2):
        if not item.judgements:
            _run_once(item, plan)
        return _unmeasured(item, plan, limit)
    if left >= plan.time_limit:
        return judge(item, plan, forget)
    judgement = judge(item, replace(plan, time_limit=left), forget)
    note = f"the session's time limit left {left:.2g} s for this budget, of {plan.time_limit:g} s."
    return replace(judgement, notes=(*judgement.notes, note))


def _run_once(item: GrowthItem, plan: Plan) -> None:
    """Run the test at the ordinary size: what it asserts holds or fails, whatever time there is to measure."""
    size = item.config.stash[shared_key].ordinary_size
    watch = Watch(plan.time_limit)
    with suppress(MeterError):
        Repeater(item, rays(plan.vary, size)[-1].assign, watch).take(size, WallTime())


def _unmeasured(item: GrowthItem, plan: Plan, limit: float) -> Judgement:
    whose = "this worker" if hasattr(item.config, "workerinput") else "this session"
    budget = plan.budget
    name = getattr(plan.yardstick, "__name__", "the reference")
    return Judgement(
        verdict="unmeasured",
        reason=(
            f"the {limit:g} s that {whose} may spend on measuring are used up; raise session_time_limit, or run "
            "this test in a session of its own"
        ),
        bound=budget.text if budget is not None else f"yardstick {name}",
        theta=budget.theta if budget is not None else f"{name}'s growth",
        theorem=budget.theorem if budget is not None else "",
        steps=budget.steps if budget is not None else (),
        meter=plan.meter,
        unit="",
        slack=plan.slack,
        confidence=plan.confidence,
        seed=plan.seed,
    )
