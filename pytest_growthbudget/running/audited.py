"""The audit of one budgeted test: runs its body at the sizes that were measured, with the calls recorded."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING, Any, Final

from pytest_growthbudget.auditing.audit import TIMED_LIMIT, assess, record, repeat
from pytest_growthbudget.auditing.target import TargetError, resolve, sizer
from pytest_growthbudget.auditing.watching import CallMeter
from pytest_growthbudget.auditing.wire import not_made
from pytest_growthbudget.bounds.budget import Budget
from pytest_growthbudget.measuring.guards import Overrun, Watch
from pytest_growthbudget.meters.protocol import MeterError
from pytest_growthbudget.workloads.fixtures import shared_key
from pytest_growthbudget.workloads.rays import rays
from pytest_growthbudget.workloads.repeat import BodyFailed, GrowthItem, Repeater

if TYPE_CHECKING:
    from pytest_growthbudget.fitting.judgement import Judgement
    from pytest_growthbudget.plans import Plan

#: Sizes are climbed until this many calls are recorded.
ENOUGH_CALLS: Final = 8000
#: The largest cost of a body, by unit, at which its calls are recorded line by line, and timed.
MODERATE: Final = {"ns": 30e6, "steps": 200_000.0}


def audit_test(item: GrowthItem, plan: Plan, judgement: Judgement, forget: Callable[[], None]) -> dict[str, Any]:
    """The audit that `plan` asks for, in wire form.

    Where it cannot be made (the hooks are taken, the body fails under them), the reason stands in its notes: an
    audit informs, and never fails a test.
    """
    target = resolve(plan.audit)
    ray = rays(plan.vary, item.config.stash[shared_key].ordinary_size)[-1]
    watch = Watch(plan.time_limit)
    repeater = Repeater(item, ray.assign, watch)
    sizes = sizes_to_run(judgement) or [item.config.stash[shared_key].ordinary_size]
    order = iter(sizes)
    reached = last = sizes[0]

    def one_by_one(meter: CallMeter) -> None:
        nonlocal reached, last
        last = next(order, last)
        reached = max(reached, last)
        repeater.take(last, meter)
        forget()

    def at_the_top(meter: CallMeter) -> None:
        repeater.take(reached, meter)
        forget()

    cut = "One of the runs was cut short by the time limit."
    notes: tuple[str, ...] = ()
    try:
        size = sizer(target, plan.size_of)
        steps, timed = record(target, size, "steps"), record(target, size, "time", TIMED_LIMIT)
        with watch.start():
            try:
                repeat(steps, one_by_one, at_least=1, enough=ENOUGH_CALLS)
                repeat(timed, at_the_top)
            except Overrun:
                notes = (cut,)
            finally:
                steps.close()
                timed.close()
        budget = plan.budget if isinstance(plan.budget, Budget) else None
        audit = assess(target, steps, timed, budget)
    except (MeterError, TargetError) as error:
        return not_made(target.name, str(error))
    except BodyFailed as error:
        return not_made(target.name, f"The test failed at {error} while its calls were recorded: {error.__cause__}")
    return replace(audit, notes=(*notes, *audit.notes)).wire()


def sizes_to_run(judgement: Judgement) -> list[int]:
    """The sizes to record, in order: from the largest of moderate cost down; up from the smallest where costs are
    in a unit that says nothing of time.
    """
    moderate = MODERATE.get(judgement.unit)
    rows = sorted(judgement.sizes, key=lambda row: row.size)
    if moderate is None:
        return [row.size for row in rows]
    fitting = [row.size for row in rows if row.cost <= moderate]
    return fitting[::-1] or [row.size for row in rows[:1]]
