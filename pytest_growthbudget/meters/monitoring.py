"""Counting by `sys.monitoring` (PEP 669), on Python 3.12 and later.

Two tool ids are held between start and stop. The *scout* hears every function entry, once a place: it decides
whether the code counts (`frames.counted`), and if so turns on the *counter*'s events for that code object
alone. So code that does not count costs nothing after its first call, and the counter's callback need not
look at what it counts: it can be a function written in C, which is where most of the speed is.

Counted: every line executed (LINE), every function entered and generator resumed (PY_START, PY_RESUME), and,
in code with a loop that stands on one line, every jump (JUMP): LINE is silent while a loop stays on its line,
and a comprehension over n values would count as one step. Callbacks of the counter never return DISABLE.

Monitoring is of the whole process. So functions that other threads enter during the reading count too,
whether the body started them or not; a loop that another thread was in already does not.
"""

from __future__ import annotations

import dis
import functools
import operator
import sys
from collections import defaultdict
from collections.abc import Callable
from queue import SimpleQueue
from types import CodeType, FrameType
from typing import Any

from pytest_growthbudget.meters.frames import counted
from pytest_growthbudget.meters.protocol import MeterError

assert sys.version_info >= (3, 12)

_monitoring = sys.monitoring
_EVENTS = _monitoring.events
_CANDIDATES = (3, 4, 5, 2, 0)  # 3 and 4 have no meaning of their own; 1 is coverage's
_NAME = "growth budget"
_QUICK_LIMIT = 1 << 21

Callback = Callable[..., Any]


@functools.lru_cache(maxsize=4096)
def _has_one_line_loop(code: CodeType) -> bool:
    """Whether a backward jump in `code` lands on its own line."""
    line_at: dict[int, int | None] = {}
    line: int | None = None
    for instruction in dis.get_instructions(code):
        if sys.version_info >= (3, 13):
            line = instruction.line_number
        elif instruction.starts_line is not None:
            line = instruction.starts_line
        line_at[instruction.offset] = line
        if instruction.opcode in dis.hasjrel:
            target = instruction.argval
            if target <= instruction.offset and line_at.get(target) == line:
                return True
    return False


@functools.lru_cache(maxsize=4096)
def _stands_on_one_line(code: CodeType) -> bool:
    return {line for _, _, line in code.co_lines() if line is not None} == {code.co_firstlineno}


def _claim(held: list[int]) -> None:
    """Two free tool ids, put into `held` one by one. Raises MeterError, naming the holders, where there are none."""
    for candidate in _CANDIDATES:
        held.append(candidate)  # first: what an alarm leaves here is given back, if it is ours
        try:
            _monitoring.use_tool_id(candidate, _NAME)
        except ValueError:
            held.pop()
        if len(held) == 2:
            return
    for taken in held:
        _monitoring.free_tool_id(taken)
    held.clear()
    names = {tool: _monitoring.get_tool(tool) for tool in range(6)}
    holders = ", ".join(f"{tool} ({name})" for tool, name in names.items() if name is not None)
    raise MeterError(
        f"the meter 'steps' needs two tool ids of sys.monitoring, and too few are free: taken are {holders}. "
        "Run without one of these tools, or choose another meter."
    )


class _Watch:
    """Delivers the events of counted code to callbacks, between `begin` and `end`.

    A `begin` or `end` that an alarm cuts short is made good by another `end`.
    """

    def __init__(self) -> None:
        self._codes: dict[int, CodeType] = {}
        self._held: list[int] = []
        self._scout = self._counter = -1

    def begin(
        self, events_of: Callable[[CodeType], int], on_line: Callback, on_entry: Callback, on_jump: Callback
    ) -> None:
        """`events_of(code)`: the events that matter in that code object."""
        self._events_of, self._on_entry = events_of, on_entry
        _claim(self._held)
        self._scout, self._counter = self._held
        register = _monitoring.register_callback
        register(self._counter, _EVENTS.LINE, on_line)
        register(self._counter, _EVENTS.PY_START, on_entry)
        register(self._counter, _EVENTS.PY_RESUME, on_entry)
        register(self._counter, _EVENTS.JUMP, on_jump)
        register(self._scout, _EVENTS.PY_START, self._meet)
        register(self._scout, _EVENTS.PY_RESUME, self._meet)
        # What an earlier scout disabled would stay silent for this one.
        _monitoring.restart_events()
        frame: FrameType | None = sys._getframe()
        while frame is not None:
            if counted(frame.f_code.co_filename):
                self._adopt(frame.f_code)
            frame = frame.f_back
        _monitoring.set_events(self._scout, _EVENTS.PY_START | _EVENTS.PY_RESUME)

    def end(self) -> None:
        self._scout = self._counter = -1
        while self._held:
            tool = self._held[-1]
            if _monitoring.get_tool(tool) == _NAME:
                _monitoring.set_events(tool, 0)
                for code in list(self._codes.values()):
                    _monitoring.set_local_events(tool, code, 0)
                for event in (_EVENTS.LINE, _EVENTS.PY_START, _EVENTS.PY_RESUME, _EVENTS.JUMP):
                    _monitoring.register_callback(tool, event, None)
                _monitoring.free_tool_id(tool)
            self._held.pop()
        self._codes.clear()

    def _adopt(self, code: CodeType) -> int:
        """Turn on the counter's events for `code`: these events, or 0 where they are on already."""
        events = self._events_of(code)
        # Keyed by identity: code objects that compare equal are instrumented one by one. Nothing from here to
        # set_local_events gives way to another thread: so an entry is counted by one of the two tools, never by
        # both, and a thread that outlives the reading does not touch ids that were given back.
        if self._counter < 0 or id(code) in self._codes:
            return 0
        self._codes[id(code)] = code
        _monitoring.set_local_events(self._counter, code, events)
        return events

    def _meet(self, code: CodeType, offset: int) -> object:
        if counted(code.co_filename) and self._adopt(code) & _EVENTS.PY_START:
            self._on_entry(code, offset)
        return _monitoring.DISABLE


class _Tally:
    """Counts calls of its callbacks, which take two or three arguments, in C and without a Python frame."""

    def __init__(self, quick: bool) -> None:
        if quick:
            # put(item, block, timeout) ignores the latter two, whatever they are. It keeps a pointer a call,
            # so it is for counts that are known to be moderate: up to 8 bytes a step.
            held: SimpleQueue[object] = SimpleQueue()
            self.pair: Callback = held.put
            self.triple: Callback = held.put
            self.read: Callable[[], int] = held.qsize
        else:
            # A cache of size 0 keeps nothing and counts its misses.
            pair, triple = functools.lru_cache(maxsize=0)(operator.is_), functools.lru_cache(maxsize=0)(slice)
            self.pair, self.triple = pair, triple
            self.read = lambda: pair.cache_info().misses + triple.cache_info().misses


class StepWatch:
    """Lines executed and functions entered, as one number."""

    def __init__(self) -> None:
        self._watch = _Watch()
        self._last = _QUICK_LIMIT
        self._tally: _Tally | None = None

    def begin(self) -> None:
        self._watch.end()
        self._tally = tally = _Tally(quick=self._last < _QUICK_LIMIT)
        self._watch.begin(self._events_of, tally.pair, tally.pair, tally.triple)

    def end(self) -> int:
        self._watch.end()
        assert self._tally is not None
        self._last, self._tally = self._tally.read(), None
        return self._last

    def let_go(self) -> None:
        self._watch.end()

    @staticmethod
    def _events_of(code: CodeType) -> int:
        entries = _EVENTS.LINE | _EVENTS.PY_START | _EVENTS.PY_RESUME
        return entries | _EVENTS.JUMP if _has_one_line_loop(code) else entries


class LineWatch:
    """How often each line ran: (file name, line number) -> executions."""

    def __init__(self) -> None:
        self._watch = _Watch()
        self._counts: defaultdict[tuple[str, int], int] = defaultdict(int)

    def begin(self) -> None:
        self._watch.begin(self._events_of, self._on_line, self._on_entry, self._on_jump)

    def end(self) -> dict[tuple[str, int], int]:
        self._watch.end()
        return dict(self._counts)

    @staticmethod
    def _events_of(code: CodeType) -> int:
        # From 3.13 on, entering a function that stands on one line is no change of line, so LINE is silent there.
        start = _EVENTS.PY_START if _stands_on_one_line(code) else _EVENTS.LINE
        return start | _EVENTS.JUMP if _has_one_line_loop(code) else start

    def _on_line(self, code: CodeType, line: int) -> None:
        self._counts[code.co_filename, line] += 1

    def _on_entry(self, code: CodeType, offset: int) -> None:
        self._counts[code.co_filename, code.co_firstlineno] += 1

    def _on_jump(self, code: CodeType, offset: int, target: int) -> None:
        if target <= offset:
            line = _line_at(code, target)
            if line is not None and line == _line_at(code, offset):
                self._counts[code.co_filename, line] += 1


@functools.lru_cache(maxsize=65536)
def _line_at(code: CodeType, offset: int) -> int | None:
    return next((line for start, end, line in code.co_lines() if start <= offset < end), None)
