"""The only module that reads a clock.

The functions are taken from `time` when this module is imported, so that a test which replaces `time.time` or
`time.process_time` does not change what is measured.
"""

from __future__ import annotations

from time import perf_counter_ns, process_time_ns
from typing import Final

cpu_time_ns: Final = process_time_ns
wall_time_ns: Final = perf_counter_ns


def tick_ns(clock: object = None, *, looks: int = 20) -> int:
    """The smallest step that the CPU clock (or `clock`) shows, in nanoseconds.

    The resolution that the platform reports is not the step at which its clock advances (a Windows CPU clock
    reports 100 ns and steps by 15.6 ms), so the step is measured: the smallest of `looks` increments seen.
    """
    read = cpu_time_ns if clock is None else clock
    assert callable(read)
    smallest = 0
    for _ in range(looks):
        start = now = read()
        while now == start:
            now = read()
        smallest = min(smallest or now - start, now - start)
    return smallest


class CpuTime:
    """CPU time of this process, all threads, in nanoseconds: the default meter."""

    name: Final = "cpu_time"
    unit: Final = "ns"
    deterministic: Final = False

    def __init__(self) -> None:
        self._start = 0

    def start(self) -> None:
        self._start = cpu_time_ns()

    def stop(self) -> float:
        return cpu_time_ns() - self._start


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
