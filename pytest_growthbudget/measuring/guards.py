"""Guards: a call that does not come back in time is interrupted, where the platform can."""

from __future__ import annotations

import math
import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType

#: Seconds after which an alarm that came outside a guarded call is tried again.
REPEAT = 0.05


class Overrun(BaseException):
    """A call of the body ran past its allowance. Not an Exception: a body's `except Exception` must not eat it."""


class Exhausted(Exception):
    """The workload of one size could not be built for want of memory, where smaller ones could."""


class Watch:
    """Interrupts the code run under `guarded` once `seconds` of wall time have passed since `start`.

    Python code is interrupted between two bytecodes. A call that stays inside C code is not.
    """

    def __init__(self, seconds: float) -> None:
        self._seconds = seconds
        self._guarding = False
        self._at_most = math.inf
        self._kept_back = 0.0
        self.usable = (
            hasattr(signal, "setitimer")
            and threading.current_thread() is threading.main_thread()
            and signal.getitimer(signal.ITIMER_REAL)[0] == 0
            and signal.getsignal(signal.SIGALRM) is signal.SIG_DFL
        )

    @contextmanager
    def start(self) -> Iterator[Watch]:
        if not self.usable:
            yield self
            return
        signal.signal(signal.SIGALRM, self._on_alarm)
        signal.setitimer(signal.ITIMER_REAL, self._seconds, REPEAT)
        try:
            yield self
        finally:
            signal.setitimer(signal.ITIMER_REAL, 0)
            signal.signal(signal.SIGALRM, signal.SIG_DFL)

    def _on_alarm(self, number: int, frame: FrameType | None) -> None:
        # Outside the body pytest's own bookkeeping is at work, which must not be cut short: the timer repeats.
        if self._guarding:
            self._guarding = False
            raise Overrun

    def extend(self, seconds: float) -> None:
        """Allow so much more: for time that went into something else than the body."""
        if self.usable:
            left = signal.getitimer(signal.ITIMER_REAL)[0]
            signal.setitimer(signal.ITIMER_REAL, left + seconds, REPEAT)

    def allow(self, nanoseconds: float) -> None:
        """Give each guarded call from now on at most so long, within the whole."""
        self._at_most = nanoseconds / 1e9

    def guard(self) -> None:
        if self.usable and self._at_most < math.inf:
            left = signal.getitimer(signal.ITIMER_REAL)[0]
            self._kept_back = max(left - self._at_most, 0.0)
            if self._kept_back:
                signal.setitimer(signal.ITIMER_REAL, max(self._at_most, 1e-3), REPEAT)
        self._guarding = True

    def release(self) -> None:
        self._guarding = False
        if self._kept_back:
            left = signal.getitimer(signal.ITIMER_REAL)[0]
            signal.setitimer(signal.ITIMER_REAL, left + self._kept_back, REPEAT)
            self._kept_back = 0.0

    def stand_back(self) -> None:
        """Interrupt nothing any more: somebody is debugging the body."""
        self.release()
        if self.usable:
            self.usable = False
            signal.setitimer(signal.ITIMER_REAL, 0)
