"""Guards: a call that does not come back in time is interrupted, where the platform can."""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType


class Overrun(BaseException):
    """A call of the body ran past its allowance. Not an Exception: a body's `except Exception` must not eat it."""


class Watch:
    """Interrupts the code run under `guarded` once `seconds` of wall time have passed since `start`.

    Python code is interrupted between two bytecodes. A call that stays inside C code is not.
    """

    def __init__(self, seconds: float) -> None:
        self._seconds = seconds
        self._guarding = False
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
        signal.setitimer(signal.ITIMER_REAL, self._seconds, 0.05)
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
            signal.setitimer(signal.ITIMER_REAL, left + seconds, 0.05)

    def guard(self) -> None:
        self._guarding = True

    def release(self) -> None:
        self._guarding = False
