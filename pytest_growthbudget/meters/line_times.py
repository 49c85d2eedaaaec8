"""How often each line of the user's own code ran, and the time that passed while it was the current one.

Own code is what stands neither in the standard library nor among installed packages, nor belongs to pytest. The time
of everything else (functions in C, installed Python code) falls to the line of own code that called it.

By `sys.settrace` on every version of Python: only the thread of the reading is seen, and where another tool holds
the trace function (coverage, a debugger), nothing is read. The trace itself takes time: about as much for each
execution, whatever the line, which `overhead_ns` measures.
"""

from __future__ import annotations

import functools
import os
import statistics
import sys
import sysconfig
from collections import defaultdict
from collections.abc import Callable
from pathlib import PurePath
from types import FrameType
from typing import Any, Final

from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.frames import counted
from pytest_growthbudget.meters.protocol import MeterError

#: A line of source: file name, as the code object has it, and line number.
Place = tuple[str, int]
Tracer = Callable[[FrameType, str, Any], Any]

NOWHERE: Final[Place] = ("", 0)
_COARSE_TICK_NS: Final = 2000


@functools.cache
def own(filename: str) -> bool:
    """Whether code compiled from `filename` (a code object's `co_filename`) is the user's own."""
    if filename.startswith("<") or not counted(filename):
        return False
    path = os.path.normcase(os.path.abspath(filename))
    # common practice: installers put packages into folders of these two names
    if {"site-packages", "dist-packages"} & set(PurePath(path).parts):
        return False
    return not path.startswith(_library())


@functools.cache
def _library() -> tuple[str, ...]:
    places = (sysconfig.get_path(name) for name in ("stdlib", "platstdlib"))
    return tuple(os.path.join(os.path.normcase(os.path.abspath(place)), "") for place in places if place)


def _clock() -> Callable[[], int]:
    return clocks.cpu_time_ns if clocks.tick_ns() <= _COARSE_TICK_NS else clocks.wall_time_ns


class LineTimes:
    """A meter (`meters.protocol`) that fills `counts` and `times`; several readings add up.

    `times`: nanoseconds of CPU time, of elapsed time where the CPU clock is too coarse. Once `limit` nanoseconds have
    passed within readings, the trace is taken away, the body goes on without it, and `cut` is true.
    `start` raises MeterError where the trace function is taken; `stop` where the body took it away.
    """

    name: Final = "line_times"
    unit: Final = "ns"
    deterministic: Final = False

    def __init__(
        self,
        limit: float = float("inf"),
        own: Callable[[str], bool] = own,
        clock: Callable[[], int] | None = None,
    ) -> None:
        self.counts: defaultdict[Place, int] = defaultdict(int)
        self.times: defaultdict[Place, int] = defaultdict(int)
        self.cut = False
        self._left = limit
        self._own = own
        self._clock = clock or _clock()
        self._new: Tracer | None = None
        self._frames: list[tuple[FrameType, Any]] = []

    def start(self) -> None:
        if sys.gettrace() is not None:
            raise MeterError("the trace function is taken. Run without coverage or a debugger.")
        waiting: list[FrameType] = []
        frame: FrameType | None = sys._getframe(1)
        while frame is not None:
            if self._own(frame.f_code.co_filename):
                waiting.append(frame)
            frame = frame.f_back
        current = [NOWHERE, *((frame.f_code.co_filename, frame.f_lineno) for frame in reversed(waiting))]
        self._new, local = self._tracers(current)
        self._frames = [(frame, frame.f_trace) for frame in waiting]
        for frame in waiting:
            frame.f_trace = local
        sys.settrace(self._new)

    def _tracers(self, current: list[Place]) -> tuple[Tracer, Tracer]:
        """The trace functions for new frames and for those entered. `current`: the line each waiting frame is at."""
        counts, times, clock, is_own = self.counts, self.times, self._clock, self._own
        last = began = clock()
        deadline = began + self._left

        def passed() -> None:
            nonlocal last
            now = clock()
            times[current[-1]] += now - last
            if now > deadline:
                self.cut = True
                sys.settrace(None)
            last = now

        def new(frame: FrameType, event: str, arg: Any) -> Tracer | None:
            if self.cut or not is_own(frame.f_code.co_filename):
                return None
            passed()
            current.append((frame.f_code.co_filename, frame.f_lineno))
            return local

        def local(frame: FrameType, event: str, arg: Any) -> Tracer | None:
            if self.cut:
                return None
            if event == "line":
                passed()
                current[-1] = place = (frame.f_code.co_filename, frame.f_lineno)
                counts[place] += 1
            elif event == "return":
                passed()
                if len(current) > 1:
                    current.pop()
            return local

        def finish() -> None:
            passed()
            self._left = deadline - last

        self._finish = finish
        return new, local

    def stop(self) -> float:
        if self._new is None:
            return 0.0
        ours = sys.gettrace() is self._new
        if ours:
            sys.settrace(None)
        for frame, previous in self._frames:
            frame.f_trace = previous
        self._frames.clear()
        self._new = None
        if self.cut:
            return 0.0
        if not ours:
            raise MeterError("the body replaced the trace function. Take debugger calls out of the body.")
        self._finish()
        return 0.0

    def close(self) -> None:
        """Give the trace function back, where a reading was broken off."""
        if self._new is not None and sys.gettrace() is self._new:
            sys.settrace(None)
        self._new = None


def overhead_ns(looks: int = 5) -> float:
    """Nanoseconds that the trace adds to one execution of a line: the median of what a line that does nothing takes."""
    seen = []
    for _ in range(looks):
        meter = LineTimes(own=_nothing.__code__.co_filename.__eq__)
        meter.start()
        try:
            _nothing()
        finally:
            meter.stop()
        place = max(meter.counts, key=lambda place: meter.counts[place])
        seen.append(meter.times[place] / meter.counts[place])
    return statistics.median(seen)


def _nothing() -> None:
    for _ in range(100):
        pass
