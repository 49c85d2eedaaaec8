"""Peak memory: bytes at the highest point of the body, above what was held at its start, by tracemalloc.

Seen: every block of Python's own allocators, and numpy's array data, which numpy reports to tracemalloc. Not
seen: what a library written in C takes from malloc for itself. The workload is excluded, since it was built
before.

tracemalloc is of the whole process: what other threads allocate meanwhile counts too.
"""

from __future__ import annotations

import gc
import tracemalloc
from typing import Final

from pytest_growthbudget.meters.protocol import MeterError


class PeakMemory:
    """Bytes at the peak between `start` and `stop` above those held at `start`.

    If tracemalloc was already running it is used as it is and left running; else it runs for the reading
    alone. In the first case a body that lets go of its workload while it builds its output is credited with
    what it freed; in the second the workload's blocks are unknown to tracemalloc, and it is not.
    """

    name: Final = "peak_memory"
    unit: Final = "bytes"
    deterministic: Final = True

    def __init__(self) -> None:
        self._own = False
        self._before = 0
        self._notes: tuple[str, ...] = ()

    def start(self) -> None:
        # Garbage that is due would otherwise be freed during the body, at a moment that is not the body's doing.
        # While the collector is off nothing is.
        if gc.isenabled():
            gc.collect()
        if not tracemalloc.is_tracing():
            self._own = True  # first: `close` stops it also where an alarm comes in between
            tracemalloc.start()
        self._notes = () if self._own else (_already_running(),)
        self._before = tracemalloc.get_traced_memory()[0]
        tracemalloc.reset_peak()

    def stop(self) -> float:
        """Raises MeterError where the body stopped tracemalloc or cleared its traces."""
        peak = tracemalloc.get_traced_memory()[1]
        tracing = tracemalloc.is_tracing()
        self.close()
        if not tracing or peak < self._before:
            raise MeterError(
                f"the body {'cleared the traces of' if tracing else 'stopped'} tracemalloc while the meter "
                "'peak_memory' was reading, so its peak is lost. Take tracemalloc out of the body."
            )
        return float(peak - self._before)

    def notes(self) -> tuple[str, ...]:
        return self._notes

    def close(self) -> None:
        """Stop tracemalloc, if this meter started it."""
        if self._own:
            self._own = False
            tracemalloc.stop()


def _already_running() -> str:
    depth = tracemalloc.get_traceback_limit()
    frames = "1 frame" if depth == 1 else f"{depth} frames"
    return (
        f"tracemalloc was already running, keeping {frames} a block: "
        "memory of the workload that the body frees is set against what it allocates."
    )
