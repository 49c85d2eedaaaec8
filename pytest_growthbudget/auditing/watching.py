"""Watching the calls of one code object: the meter that writes a ledger.

From Python 3.12 on by `sys.monitoring`, before by `sys.settrace`; where a tool (coverage, a debugger) holds the
trace function, by `sys.setprofile`, which sees calls but no lines. The user's modules are not touched.

Only the thread of the reading is watched. A call in another thread is not taken down.
"""

from __future__ import annotations

import contextlib
import sys
from collections.abc import Callable
from typing import Final, Literal

from pytest_growthbudget.auditing.calls import Ledger
from pytest_growthbudget.auditing.target import Target
from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.protocol import MeterError

if sys.version_info >= (3, 12):
    from pytest_growthbudget.auditing.by_monitoring import CallWatch
else:
    from pytest_growthbudget.auditing.by_tracing import CallWatch

#: What own work is read in.
Gauge = Literal["steps", "time"]
_COARSE_TICK_NS: Final = 2000


class CallMeter:
    """A meter (`meters.protocol`) whose readings fill `ledger`; several readings add up.

    `start` raises MeterError where the interpreter's hooks are taken, `stop` where the code took them away.
    """

    name: Final = "audit"
    unit: Final = "calls"
    deterministic: Final = True

    def __init__(self, target: Target, ledger: Ledger, gauge: Gauge) -> None:
        self.ledger = ledger
        self._watch = CallWatch(target, ledger, count=gauge == "steps")
        if gauge == "time":
            ledger.read = _clock()

    @property
    def counts_steps(self) -> bool:
        """Whether own work was read in steps; known after the first reading."""
        return self._watch.counts

    def start(self) -> None:
        self._watch.begin()

    def stop(self) -> float:
        try:
            self._watch.end()
        finally:
            self.ledger.end()
        return float(len(self.ledger))

    def close(self) -> None:
        """Let go of the hooks, also where an alarm came in the midst of `start` or `stop`."""
        with contextlib.suppress(MeterError):
            self._watch.end()


def _clock() -> Callable[[], int]:
    """CPU time where its clock is fine enough for single calls, else elapsed time."""
    return clocks.cpu_time_ns if clocks.tick_ns() <= _COARSE_TICK_NS else clocks.wall_time_ns
