"""Steps: lines executed and functions entered, by the body and all the Python code it calls.

The same input gives the same count on the same interpreter, whatever the machine and its load. Counts are not
comparable between Python versions, which compile the same source differently; their growth is.

Work inside functions written in C is not seen: `x in some_list` is part of one line, whatever the list's
length. A verdict on steps alone is therefore not enough; see `hidden work` in the guide.

How it counts, and which threads: `monitoring` (Python 3.12 and later) and `tracing` (before). Whose frames
count: `frames`.
"""

from __future__ import annotations

import contextlib
import sys
from collections.abc import Callable
from typing import Final

from pytest_growthbudget.meters.protocol import MeterError

if sys.version_info >= (3, 12):
    from pytest_growthbudget.meters.monitoring import LineWatch, StepWatch
else:
    from pytest_growthbudget.meters.tracing import LineWatch, StepWatch


class Steps:
    """Lines executed and functions entered between `start` and `stop`.

    `start` raises MeterError where the interpreter's tracing is taken; `stop` where the body took it away.
    """

    name: Final = "steps"
    unit: Final = "steps"
    deterministic: Final = True

    def __init__(self) -> None:
        self._watch = StepWatch()

    def start(self) -> None:
        self._watch.begin()

    def stop(self) -> float:
        return float(self._watch.end())

    def close(self) -> None:
        """Let go of the hooks, also where an alarm came in the midst of `start` or `stop`."""
        self._watch.let_go()


def count_lines(body: Callable[[], object]) -> dict[tuple[str, int], int]:
    """How often each line ran in one call of `body` and all it calls: (file name, line number) -> executions.

    A turn of a loop that stands on one line counts as an execution of that line. Raises MeterError where the
    interpreter's tracing is taken, and whatever `body` raises.
    """
    watch = LineWatch()
    try:
        watch.begin()
        body()
    except BaseException:
        with contextlib.suppress(MeterError):
            watch.end()
        raise
    return watch.end()
