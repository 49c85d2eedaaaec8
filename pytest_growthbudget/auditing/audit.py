"""An audit: from recorded calls to what the report says, and the function that audits one call of one's own."""

from __future__ import annotations

import contextlib
import copy
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from types import CodeType
from typing import Any, Final

from pytest_growthbudget.auditing import compare
from pytest_growthbudget.auditing.calls import LIMIT, Calls, Ledger
from pytest_growthbudget.auditing.compare import Check
from pytest_growthbudget.auditing.observed import Observed, observe_terms, observed
from pytest_growthbudget.auditing.pattern import Pattern, pattern
from pytest_growthbudget.auditing.target import Sizer, Target, TargetError, inner, resolve, sizer
from pytest_growthbudget.auditing.toll import Toll, Work, excess_over, hidden_toll, is_flat, toll_of, work_by_size
from pytest_growthbudget.auditing.watching import CallMeter
from pytest_growthbudget.bounds.budget import Budget, parse_budget
from pytest_growthbudget.fitting.judgement import Interval
from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.protocol import MeterError

#: Where the second recording, by the clock, stops: it needs fewer calls.
TIMED_LIMIT: Final = 200_000
#: Enough runs for the clock, and for a function with few calls a run.
_FEWEST_RUNS, _MOST_RUNS = 5, 40
_ENOUGH_CALLS: Final = 2000
_SPEND_NS: Final = 0.4e9
_GROWING: Final = 0.05
UNCOPIED: Final = "The arguments cannot be copied, so work hidden in C functions was not looked for."

Take = Callable[[CallMeter], None]


@dataclass(frozen=True, kw_only=True)
class Audit:
    """What the calls of one function show. `str()` of it is a report; `wire()` the same as plain builtins.

    `calls`: how many were recorded, in how many `runs`. `declared`: the bound or recurrence that it was held against,
    "" for none. `observed`: the recurrence that the code seems to follow, None where the sizes do not shrink or there
    was nothing to see. `relation`: the growth it implies against the declared one ("faster" breaks the promise).
    `checks`: the declared terms one by one, and overlapping subproblems. `notes`: what the reader has to know of the
    recording, whole sentences.
    """

    function: str
    declared: str
    theta: str
    calls: int
    runs: int
    pattern: Pattern | None
    toll: Toll | None
    observed: Observed | None
    relation: str
    checks: tuple[Check, ...]
    notes: tuple[str, ...] = field(default=())

    @property
    def broken(self) -> tuple[Check, ...]:
        """The checks that do not agree with what was declared."""
        return tuple(check for check in self.checks if check.agrees is False)

    def wire(self) -> dict[str, Any]:
        from pytest_growthbudget.auditing.wire import to_wire

        return to_wire(self)

    def __str__(self) -> str:
        from pytest_growthbudget.reporting.audit import describe

        return describe(self.wire())


def audit(
    function: Callable[..., Any],
    *args: Any,
    of: object = None,
    size_of: Callable[..., float] | str | None = None,
    bound: str | Budget | None = None,
    limit: int = LIMIT,
    **keywords: Any,
) -> Audit:
    """Call `function(*args, **keywords)` a few times, record the calls of `of`, and say what recurrence they follow.

    `of`: the function to audit where it is not `function` itself: a function, a method, the name of a function
    defined inside `function`, or text "module:qualified.name". `size_of`: gives a call's size from its arguments;
    by default the length of the first argument that has one, or the first whole number (see `target.sizer`).
    `bound`: a recurrence or bound to hold the calls against. `limit`: where recording stops.

    Each run gets a deep copy of the arguments; where they cannot be copied there is one run, and work that is
    hidden in C functions is not looked for.

    Raises TargetError (a ValueError) for a target or size that cannot be used, BoundError for a bound, MeterError
    where other tools hold the interpreter's hooks, and whatever `function` raises.
    """
    target = _target(function, of)
    size = sizer(target, size_of)
    budget = parse_budget(bound) if isinstance(bound, str) else bound
    given = (args, keywords)
    fresh = _can_be_copied(given)

    def take(meter: CallMeter) -> None:
        arguments, named = copy.deepcopy(given) if fresh else given
        run(meter, lambda: function(*arguments, **named))

    steps = record(target, size, "steps", limit)
    if not fresh:
        repeat(steps, take, at_least=1, enough=0)
        return assess(target, steps, None, budget, (UNCOPIED,))
    repeat(steps, take, at_least=1)
    timed = record(target, size, "time", min(limit, TIMED_LIMIT))
    repeat(timed, take)
    return assess(target, steps, timed, budget)


def _target(function: Callable[..., Any], of: object) -> Target:
    if of is None:
        return resolve(function)
    if isinstance(of, str) and ":" not in of:
        place: CodeType | None = resolve(function).code
        for part in (part for part in of.split(".") if part != "<locals>"):
            place = inner(place, part) if place is not None else None
        if place is None:
            raise TargetError(f"{getattr(function, '__name__', function)} defines no function named {of!r}")
        return resolve(place)
    return resolve(of)


def _can_be_copied(given: object) -> bool:
    try:
        copy.deepcopy(given)
    except Exception:  # __deepcopy__ and __reduce__ may raise anything
        return False
    return True


def record(target: Target, size: Sizer, gauge: Any, limit: int = LIMIT) -> CallMeter:
    """A meter that records the calls of `target`, with own work in "steps" or in "time"."""
    return CallMeter(target, Ledger(target, size, keys=gauge == "steps", limit=limit), gauge)


def run(meter: CallMeter, body: Callable[[], object]) -> None:
    """One run of `body` under `meter`, whose hooks are taken away whatever happens."""
    meter.start()
    try:
        body()
    except BaseException:
        with contextlib.suppress(MeterError):
            meter.stop()
        raise
    meter.stop()


def repeat(meter: CallMeter, take: Take, *, at_least: int = _FEWEST_RUNS, enough: int = _ENOUGH_CALLS) -> None:
    """Take runs until there are calls `enough`, or they have taken long enough; `at_least` so many.

    Raises TargetError where the size of a call could not be told.
    """
    began = clocks.wall_time_ns()
    for number in range(1, _MOST_RUNS + 1):
        take(meter)
        if meter.ledger.fault:
            raise TargetError(meter.ledger.fault)
        long = clocks.wall_time_ns() - began > _SPEND_NS
        if meter.ledger.closed or not len(meter.ledger):
            return
        if number >= at_least and (long or len(meter.ledger) >= enough):
            return


def assess(
    target: Target, steps: CallMeter, timed: CallMeter | None, budget: Budget | None, notes: tuple[str, ...] = ()
) -> Audit:
    """What the recordings show, held against `budget` where there is one."""
    calls = steps.ledger.calls()
    seen = pattern(calls) if len(calls) else None
    variable = budget.variables[0] if budget is not None and budget.variables else "n"
    work, toll = _toll_and_work(calls, steps.counts_steps, timed)
    excess = None
    if toll is not None and work is not None and work.unit == "ns" and not toll.hidden and is_flat(work):
        work, toll = None, replace(toll, nearest="1")
    if work is not None and budget is not None and budget.recurrence is not None:
        growth = compare.toll_growth(budget.recurrence.toll)
        excess = excess_over(work, growth.log_value)
    found = None
    shrinks = seen is None or seen.growing <= _GROWING
    if len(calls) and shrinks and toll is not None:
        found = _observed(seen, toll, budget, excess, variable)
    checks: list[Check] = []
    if seen is not None and shrinks:
        if found is not None and budget is not None and budget.recurrence is not None:
            checks += compare.checks(budget.recurrence, seen, found, toll, excess)
        again = compare.overlap(seen)
        checks += [again] if again is not None else []
    return Audit(
        function=target.name,
        declared=budget.text if budget is not None else "",
        theta=budget.theta if budget is not None else "",
        calls=len(calls),
        runs=len(calls.runs),
        pattern=seen,
        toll=toll,
        observed=found,
        relation=compare.relation(found, budget) if found is not None and budget is not None else "",
        checks=tuple(checks),
        notes=(*notes, *_notes(target, calls, seen, toll, steps.counts_steps)),
    )


def _toll_and_work(calls: Calls, counts_steps: bool, timed: CallMeter | None) -> tuple[Work | None, Toll | None]:
    """The work that stands for the toll: steps, or time where it shows what steps do not."""
    time = None
    if timed is not None and len(timed.ledger):
        time = work_by_size(timed.ledger.calls(), "ns")
    if not counts_steps or not len(calls):
        return time, toll_of(time) if time is not None else None
    steps = work_by_size(calls, "steps")
    if time is not None:
        hidden = hidden_toll(steps, time)
        if hidden is not None:
            return hidden[1], hidden[0]
    return steps, toll_of(steps)


def _observed(
    seen: Pattern | None, toll: Toll, budget: Budget | None, excess: Interval | None, variable: str
) -> Observed:
    terms = observe_terms(seen, variable) if seen is not None else ()
    recurrence = budget.recurrence if budget is not None else None
    nearest = toll.nearest if variable == "n" else _renamed(toll.nearest, variable)
    as_declared = excess is not None and (
        excess.low <= 0 <= excess.high or (toll.hidden and excess.low > 0 and compare.keeps_toll(toll, excess))
    )
    if recurrence is not None and as_declared:
        # What was declared is as good a name for the toll as any that is consistent with it.
        text = compare.toll_text(recurrence)
        nearest = "1" if text == "0" else text
    return observed(terms, nearest, variable)


def _renamed(text: str, variable: str) -> str:
    import re

    return re.sub(r"\bn\b", variable, text)


def _notes(
    target: Target, calls: Calls, seen: Pattern | None, toll: Toll | None, counts_steps: bool
) -> tuple[str, ...]:
    notes = []
    if not len(calls):
        notes.append(f"{target.name} was not called: audit the function that does the work.")
        return tuple(notes)
    if calls.stopped:
        notes.append(f"Recording stopped after {len(calls):,} calls; those still open then are left out.")
    if not counts_steps:
        notes.append(
            "Another tool holds the trace function, so own work was read by the clock, which that tool slows down."
        )
    if seen is None:
        notes.append(f"{target.name} makes no calls of itself.")
    elif seen.growing > _GROWING:
        notes.append(
            f"In {100 * seen.growing:.0f} % of the calls a subproblem is no smaller than its parent: what size_of "
            "gives does not shrink. Give a size that does, such as size_of=lambda low, high: high - low."
        )
    if toll is None:
        notes.append("The calls have too few different sizes to tell how own work grows; run it on a larger input.")
    return tuple(notes)
