"""The only module that reads a clock.

The functions are taken from `time` when this module is imported, so that a test which replaces `time.time` or
`time.process_time` does not change what is measured.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from time import perf_counter_ns, process_time_ns
from typing import Final

cpu_time_ns: Final = process_time_ns
wall_time_ns: Final = perf_counter_ns


#: Steps of a clock, in nanoseconds, above which short readings are not to be had.
COARSE_TICK: Final = 1_000_000


def tick_ns(clock: Callable[[], int] = cpu_time_ns, *, looks: int = 3) -> int:
    """The smallest step that `clock` shows, in nanoseconds: the smallest of `looks` increments seen.

    The resolution that a platform reports is not the step at which its clock advances (a Windows CPU clock reports
    100 ns and steps by 15.6 ms), so the step is measured.
    """
    steps = []
    for _ in range(looks):
        start = now = clock()
        while now == start:
            now = clock()
        steps.append(now - start)
    return min(steps)


@lru_cache(maxsize=1)
def cpu_clock() -> Callable[[], int]:
    """The clock that the meter `cpu_time` reads: elapsed time where the CPU clock's measured step is too coarse."""
    return cpu_time_ns if tick_ns() <= COARSE_TICK else wall_time_ns


class CpuTime:
    """CPU time of this process, all threads, in nanoseconds: the default meter."""

    name: Final = "cpu_time"
    unit: Final = "ns"
    deterministic: Final = False

    def __init__(self) -> None:
        self._start = 0
        self._clock = cpu_clock()

    def start(self) -> None:
        self._start = self._clock()

    def stop(self) -> float:
        return self._clock() - self._start


class WallTime:
    """Elapsed time in nanoseconds, waiting included: for bodies that wait on I/O, threads or other processes."""

    name: Final = "wall_time"
    unit: Final = "ns"
    deterministic: Final = False

    def __init__(self) -> None:
        self._start = 0

    def start(self) -> None:
        self._start = wall_time_ns()

    def stop(self) -> float:
        return wall_time_ns() - self._start
