"""Counting by `sys.settrace`, on Python 3.10 and 3.11.

Counted: every line executed and every function entered or generator resumed, in the thread of the reading and
in threads that start during it (`threading.settrace`). Threads that ran before are not seen.

There is one trace function a thread. Where another tool has set it, counting is refused: taking it away would
break that tool, and leaving it would count nothing.
"""

from __future__ import annotations

import sys
import threading
from collections import defaultdict
from collections.abc import Callable
from types import FrameType
from typing import Any

from pytest_growthbudget.meters.frames import counted
from pytest_growthbudget.meters.protocol import MeterError

Tracer = Callable[[FrameType, str, Any], Any]


class _Watch:
    """Installs a trace function for new frames, and a local one in those that wait for the body."""

    def __init__(self) -> None:
        self._new: Tracer | None = None

    def begin(self, new: Tracer, local: Tracer) -> None:
        holder = sys.gettrace()
        if holder is not None:
            raise MeterError(
                "the meter 'steps' needs sys.settrace on this version of Python, and "
                f"{_described(holder)} holds it. Run this test without coverage or a debugger, use Python 3.12 "
                "or later, where both can count at once, or choose another meter."
            )
        self._hook = threading.gettrace()
        self._frames: list[tuple[FrameType, Any]] = []
        self._new = new
        frame: FrameType | None = sys._getframe()
        while frame is not None:
            if counted(frame.f_code.co_filename):
                self._frames.append((frame, frame.f_trace))
                frame.f_trace = local
            frame = frame.f_back
        threading.settrace(new)
        sys.settrace(new)

    def end(self) -> bool:
        """Remove what `begin` installed; whether it was still there."""
        if self._new is None:
            return True
        ours = sys.gettrace() is self._new
        if ours:
            sys.settrace(None)
        threading.settrace(self._hook)
        for frame, previous in self._frames:
            frame.f_trace = previous
        self._frames.clear()
        self._new = None
        return ours


def _described(tracer: object) -> str:
    kind = tracer if hasattr(tracer, "__qualname__") else type(tracer)
    return f"{getattr(kind, '__module__', '?')}.{getattr(kind, '__qualname__', '?')}"


def _check(ours: bool) -> None:
    if not ours:
        raise MeterError(
            "the body replaced the trace function while the meter 'steps' was reading, so steps are missing. "
            "Take sys.settrace and debugger calls out of the body, or choose another meter."
        )


class StepWatch:
    """Lines executed and functions entered, as one number."""

    def __init__(self) -> None:
        self._watch = _Watch()

    def begin(self) -> None:
        self._watch.end()
        steps, active = 0, True
        known: set[str] = set()

        # Threads give way to each other only at calls and backward jumps, so `steps += 1` is not torn apart.
        def local(frame: FrameType, event: str, arg: Any) -> None:
            nonlocal steps
            if event == "line":
                steps += 1

        def new(frame: FrameType, event: str, arg: Any) -> Tracer | None:
            nonlocal steps
            filename = frame.f_code.co_filename
            if filename in known:  # the short way, as every call takes it
                steps += 1
                return local
            if not active:  # a thread that outlives the reading
                sys.settrace(None)
            elif counted(filename):
                known.add(filename)
                steps += 1
                return local
            return None

        def finish() -> int:
            nonlocal active
            active = False
            known.clear()
            return steps

        self._finish = finish
        self._watch.begin(new, local)

    def end(self) -> int:
        ours = self._watch.end()
        steps = self._finish()
        _check(ours)
        return steps

    def let_go(self) -> None:
        self._watch.end()


class LineWatch:
    """How often each line ran: (file name, line number) -> executions."""

    def __init__(self) -> None:
        self._watch = _Watch()
        self._counts: defaultdict[tuple[str, int], int] = defaultdict(int)

    def begin(self) -> None:
        self._watch.begin(self._enter, self._line)

    def end(self) -> dict[tuple[str, int], int]:
        ours = self._watch.end()
        _check(ours)
        return dict(self._counts)

    def _enter(self, frame: FrameType, event: str, arg: Any) -> Tracer | None:
        return self._line if counted(frame.f_code.co_filename) else None

    def _line(self, frame: FrameType, event: str, arg: Any) -> None:
        if event == "line":
            self._counts[frame.f_code.co_filename, frame.f_lineno] += 1
