"""Calls by `sys.monitoring` (PEP 669), on Python 3.12 and later.

Events are turned on for the audited code object alone, so that other code runs at full speed; steps, where they
are wanted, are counted by `meters.monitoring`, whose callbacks are in C. An exception that leaves a call is told by
PY_UNWIND, which exists only for all code at once; it costs nothing while nothing is raised.
"""

from __future__ import annotations

import sys
import threading
from types import CodeType
from typing import Any, Final

from pytest_growthbudget.auditing.calls import Ledger
from pytest_growthbudget.auditing.target import Target
from pytest_growthbudget.meters.protocol import MeterError

assert sys.version_info >= (3, 12)

from pytest_growthbudget.meters.monitoring import StepWatch  # noqa: E402 - there is none before 3.12

_monitoring = sys.monitoring
_EVENTS = _monitoring.events
# 3 and 4 are left to the counting of steps, which tries them first; 1 is coverage's.
_CANDIDATES: Final = (0, 2, 5, 4, 3)


class _Counter(StepWatch):
    """A count of steps that can be read while it runs."""

    def so_far(self) -> int:
        assert self._tally is not None
        return self._tally.read()


class CallWatch:
    """Writes the calls of `target` to `ledger` between `begin` and `end`; with `count`, own work is in steps."""

    def __init__(self, target: Target, ledger: Ledger, *, count: bool) -> None:
        self._code, self._generator = target.code, target.generator
        self._ledger = ledger
        self.counts = count
        self._steps = _Counter()
        self._tool = -1
        self._thread = 0

    def begin(self) -> None:
        self.end()
        self._thread = threading.get_ident()
        self._tool = _claim()
        register, tool = _monitoring.register_callback, self._tool
        register(tool, _EVENTS.PY_START, self._start)
        register(tool, _EVENTS.PY_RETURN, self._return)
        register(tool, _EVENTS.PY_UNWIND, self._unwind)
        events = _EVENTS.PY_START | _EVENTS.PY_RETURN
        everywhere = _EVENTS.PY_UNWIND
        if self._generator:
            register(tool, _EVENTS.PY_YIELD, self._yield)
            register(tool, _EVENTS.PY_RESUME, self._resume)
            register(tool, _EVENTS.PY_THROW, self._throw)
            events |= _EVENTS.PY_YIELD | _EVENTS.PY_RESUME
            everywhere |= _EVENTS.PY_THROW
        try:
            if self.counts:
                self._steps.begin()
                self._ledger.read = self._steps.so_far
        except MeterError:
            self._release()
            raise
        _monitoring.set_local_events(tool, self._code, events)
        _monitoring.set_events(tool, everywhere)

    def end(self) -> None:
        if self._tool >= 0:
            self._release()
        if self.counts:
            self._ledger.read = int
            self._steps.let_go()

    def _release(self) -> None:
        tool = self._tool
        _monitoring.set_events(tool, 0)
        _monitoring.set_local_events(tool, self._code, 0)
        for event in ("PY_START", "PY_RETURN", "PY_UNWIND", "PY_YIELD", "PY_RESUME", "PY_THROW"):
            _monitoring.register_callback(tool, getattr(_EVENTS, event), None)
        self._tool = -1
        _monitoring.free_tool_id(tool)

    def _elsewhere(self) -> bool:
        return threading.get_ident() != self._thread

    def _start(self, code: CodeType, offset: int) -> object:
        if self._ledger.closed:
            self._steps.let_go()
            return _monitoring.DISABLE
        if self._elsewhere():
            return None
        frame = sys._getframe(1)
        self._ledger.enter(frame.f_locals, frame if self._generator else None)
        return None

    def _return(self, code: CodeType, offset: int, value: Any) -> object:
        if self._ledger.closed:
            return _monitoring.DISABLE
        if not self._elsewhere():
            self._ledger.leave(value)
        return None

    def _unwind(self, code: CodeType, offset: int, error: BaseException) -> None:
        if code is self._code and not self._elsewhere():
            self._ledger.leave()

    def _yield(self, code: CodeType, offset: int, value: Any) -> None:
        if not self._elsewhere():
            self._ledger.suspend()

    def _resume(self, code: CodeType, offset: int) -> None:
        if not self._elsewhere():
            self._ledger.resume(sys._getframe(1))

    def _throw(self, code: CodeType, offset: int, error: BaseException) -> None:
        if code is self._code:
            self._resume(code, offset)


def _claim() -> int:
    for candidate in _CANDIDATES:
        try:
            _monitoring.use_tool_id(candidate, "growth budget audit")
        except ValueError:
            continue
        return candidate
    names = ", ".join(str(_monitoring.get_tool(tool)) for tool in range(6))
    raise MeterError(
        f"an audit needs a tool id of sys.monitoring, and all are taken: {names}. Run without one of them."
    )
