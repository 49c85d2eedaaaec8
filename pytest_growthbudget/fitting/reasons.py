"""Why a verdict is what it is: whole sentences without numbers of their own making."""

from __future__ import annotations

from typing import Final

from pytest_growthbudget.fitting.evidence import Evidence
from pytest_growthbudget.fitting.judgement import Interval, two_places
from pytest_growthbudget.fitting.verdict import Limits

UNCONFIRMED: Final = "one set of readings is above the slack, and a second set did not agree"
SUSPICIOUS: Final = "the excess is small, but too surely above zero for the budget to be called kept"
NO_CURVE: Final = (
    "the cost is above the slack, but how much of that is the memory of this machine is not known, "
    "so it cannot be called exceeded"
)

NOTHING_COUNTED: Final = (
    "nothing was counted at any size; see that the body does what the meter counts, and that a tally is spelt "
    "as in the budget"
)

_SHORT_OF: Final = {
    "": "the cost soon grows too dear to go further; use a smaller `smallest`",
    "largest": "`largest` is too near to the smallest size that can be read; raise `largest` or lower `smallest`",
    "rounds": "the time limit ended the readings; raise `time_limit`",
    "time": "the time limit ended the climb; raise `time_limit` or lower `smallest`",
    "memory": "the workload grew too large for memory; lower `smallest`, or let the workload hold less",
    "runaway": "the next call ran away and was stopped; lower `smallest`, or look at that call first",
}
TOO_FAST: Final = (
    "no call lasts long enough for the clock (5 us); give the workload a module scope so that calls can be "
    "repeated in one reading, do more work in a call, raise `largest`, or use the `steps` meter"
)


def over(evidence: Evidence) -> str:
    """The sizes of the evidence: `n = 12 to 4096`."""
    return f"n = {evidence.seen.sizes[0]:.0f} to {evidence.seen.sizes[-1]:.0f}"


def within(evidence: Evidence, limits: Limits, *, deflated: bool = False) -> str:
    memory = ", once memory is allowed for," if deflated else ""
    return f"over {over(evidence)} the excess{memory} is below the limit of {limits.within:.2f}"


BY_SECOND_SET: Final = ", and a second set of readings agrees"
BY_CLIMB: Final = ", and the first calls at each size agree"


def exceeded(evidence: Evidence, excess: Interval, limits: Limits, *, agreed: str, deflated: bool = False) -> str:
    """`excess`: the interval that decided; `deflated`: memory had been allowed for in it."""
    memory = ", once memory is allowed for" if deflated else ""
    return (
        f"over {over(evidence)} the excess is at least {two_places(excess.low)}{memory}, "
        f"above the slack of {limits.exceeded:.2f}{agreed}"
    )


def wide(evidence: Evidence, excess: Interval, limits: Limits, memory: Interval | None = None) -> str:
    """Why an interval does not decide. `memory`: the excess that is left once memory is allowed for, if it was."""
    between = f"over {over(evidence)} the excess lies between {two_places(excess.low)} and {two_places(excess.high)}"
    if memory is not None:
        between += f", or {two_places(memory.low)} and {two_places(memory.high)} once memory is allowed for"
    if excess.low > limits.exceeded and memory is None:
        return f"{between}, but has not risen far enough to be told from a single step among so few sizes"
    return f"{between}: neither surely above {limits.exceeded:.2f} nor surely below {limits.within:.2f}"


def too_few(ended: str, count: int, needed: int) -> str:
    sizes = "no size" if count == 0 else "only 1 size" if count == 1 else f"only {count} sizes"
    return f"{sizes} could be read where {needed} are needed: {_SHORT_OF[ended]}"


def runaway(size: int) -> str:
    """Why a ladder that ended with a call which did not come back is no ground for keeping a budget."""
    return (
        f"up to n = {size} the budget is kept, but a call at the next size did not come back within the time limit; "
        "raise `time_limit`, or look at what the body does there"
    )


def low(size: int, cost: float) -> str:
    """Why a ladder that time cut off is no ground for saying that the budget is kept."""
    return f"the largest size reached is n = {size}, where a call takes {cost / 1e3:.0f} us: too little to go by"


def out_of_time(reason: str) -> str:
    return f"the time limit ended the readings before they could decide ({reason}); raise `time_limit`"
