"""What distorts readings in this process, one whole sentence each, for the report."""

from __future__ import annotations

import statistics
import sys
from collections.abc import Sequence

from pytest_growthbudget.meters import clocks

#: Elapsed time over CPU time from which on the machine counts as busy.
BUSY = 1.5
#: Elapsed time over CPU time below which several threads were at work.
THREADED = 0.8


def distortions(meter: str) -> tuple[str, ...]:
    """What is active in this process that changes what `meter` reads."""
    found = [*_tracers(meter)]
    if hasattr(sys, "gettotalrefcount"):
        found.append("this is a debug build of Python, whose costs are not those of a release build.")
    if meter == "cpu_time" and clocks.cpu_clock() is not clocks.cpu_time_ns:
        found.append(
            f"the CPU clock of this platform steps by {clocks.tick_ns() / 1e6:.0f} ms: elapsed time was read instead."
        )
    return tuple(found)


def _tracers(meter: str) -> list[str]:
    if meter not in ("cpu_time", "wall_time"):
        return []
    names = []
    if sys.gettrace() is not None:
        names.append(_module_of(sys.gettrace()))
    if sys.getprofile() is not None:
        names.append(_module_of(sys.getprofile()))
    if sys.version_info >= (3, 12):
        names += [name for tool in range(6) if (name := sys.monitoring.get_tool(tool)) is not None]
    return [
        f"{name} traces this process: it slows the interpreter down and can raise the exponent of pure-Python code "
        "by a tenth or two; run budgets without it where a verdict is close."
        for name in dict.fromkeys(names)
    ]


def _module_of(function: object) -> str:
    module = getattr(type(function), "__module__", "") or ""
    if module == "builtins":
        module = getattr(function, "__module__", "") or ""
    return module.partition(".")[0] or "a tracer"


def busy(ratios: Sequence[float], meter: str) -> tuple[str, ...]:
    """A note where elapsed time ran far ahead of CPU time; `ratios`: elapsed over CPU time, one a reading."""
    if len(ratios) < 5:
        return ()
    if meter == "cpu_time" and statistics.median(ratios) < THREADED:
        return (
            (
                "CPU time ran ahead of elapsed time: several threads worked at once, and how many may depend on the "
                "size; for numpy set OMP_NUM_THREADS=1 before it is imported."
            ),
        )
    if statistics.median(ratios) < BUSY:
        return ()
    times = f"{statistics.median(ratios):.1f}"
    if meter == "wall_time":
        return (
            (
                f"elapsed time was {times} times the CPU time of this process: either the body waits, as wall_time is "
                "meant for, or the machine was busy, and then these readings are too long."
            ),
        )
    return (f"elapsed time was {times} times CPU time: the machine was busy, or the body waits, which is not read.",)
