"""Calls by `sys.settrace`, on Python 3.10 and 3.11; by `sys.setprofile` where the trace function is taken.

Where steps are not wanted, line events are off in every frame: only entries of functions and the ends of audited
calls cost anything.
"""

from __future__ import annotations

import sys
from types import FrameType
from typing import Any

from pytest_growthbudget.auditing.calls import Ledger
from pytest_growthbudget.auditing.target import Target
from pytest_growthbudget.meters.frames import counted
from pytest_growthbudget.meters.protocol import MeterError


class CallWatch:
    """Writes the calls of `target` to `ledger` between `begin` and `end`; with `count`, own work is in steps.

    `counts` turns False where a tool holds the trace function: own work is then what `ledger.read` reads.
    """

    def __init__(self, target: Target, ledger: Ledger, *, count: bool) -> None:
        self._target, self._ledger = target, ledger
        self.counts = count
        self._hook: Any = None
        self._profiles = False

    def begin(self) -> None:
        self.end()
        self._profiles = sys.gettrace() is not None
        if not self._profiles:
            self._hook = self._counting() if self.counts else self._bare()
            sys.settrace(self._hook)
            return
        holder = sys.getprofile()
        if holder is not None:
            raise MeterError(
                "an audit needs sys.settrace or sys.setprofile on this version of Python, and other tools hold both. "
                "Run this test without coverage, debugger or profiler, or use Python 3.12 or later."
            )
        self.counts = False
        self._hook = self._profile
        sys.setprofile(self._hook)

    def end(self) -> None:
        hook, self._hook = self._hook, None
        if hook is None:
            return
        held = sys.getprofile() if self._profiles else sys.gettrace()
        if held is None and self._ledger.closed:
            return
        if held != hook:
            raise MeterError(
                "the code replaced the trace or profile function while it was audited, so calls are missing. "
                "Take sys.settrace, sys.setprofile and debugger calls out of it."
            )
        if self._profiles:
            sys.setprofile(None)
        else:
            sys.settrace(None)

    def _enter(self, frame: FrameType) -> None:
        if not self._target.generator:
            self._ledger.enter(frame.f_locals)
        elif self._ledger.knows(frame):
            self._ledger.resume(frame)
        else:
            self._ledger.enter(frame.f_locals, frame)

    def _leave(self, value: Any) -> None:
        # The last return of a generator looks like any other of its pauses.
        if self._target.generator and value is not None:
            self._ledger.suspend()
        else:
            self._ledger.leave(value)

    def _bare(self) -> Any:
        code = self._target.code

        def local(frame: FrameType, event: str, arg: Any) -> Any:
            if event == "return":
                self._leave(arg)
            return local

        def new(frame: FrameType, event: str, arg: Any) -> Any:
            if frame.f_code is not code:
                return None
            if self._ledger.closed:
                sys.settrace(None)
                return None
            frame.f_trace_lines = False
            self._enter(frame)
            return local

        return new

    def _counting(self) -> Any:
        code, ledger = self._target.code, self._ledger
        steps = 0

        def other(frame: FrameType, event: str, arg: Any) -> None:
            nonlocal steps
            if event == "line":
                steps += 1

        def audited(frame: FrameType, event: str, arg: Any) -> Any:
            nonlocal steps
            if event == "line":
                steps += 1
            elif event == "return":
                self._leave(arg)
            return audited

        def new(frame: FrameType, event: str, arg: Any) -> Any:
            nonlocal steps
            if frame.f_code is code:
                if ledger.closed:
                    sys.settrace(None)
                    return None
                self._enter(frame)
                steps += 1
                return audited
            if not counted(frame.f_code.co_filename):
                return None
            steps += 1
            return other

        ledger.read = lambda: steps
        return new

    def _profile(self, frame: FrameType, event: str, arg: Any) -> None:
        if frame.f_code is self._target.code:
            if event == "call":
                self._enter(frame)
            elif event == "return":
                self._leave(arg)
