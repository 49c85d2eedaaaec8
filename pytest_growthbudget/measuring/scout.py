"""A scout: each size larger than all before is tried in a child process first, which can be killed.

A call that stays inside C code (a regular expression that backtracks, a dense solver) does not hear the signal that
interrupts Python code. A child process can be ended all the same. Readings are still taken in this process: the
scout only tells whether a size comes back at all. POSIX only, and opt-in: the child inherits what the fixtures
hold (files, connections) and runs the body once on it.
"""

from __future__ import annotations

import os
import signal
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from time import sleep

from pytest_growthbudget.measuring.guards import Overrun
from pytest_growthbudget.measuring.readings import Reading

#: Whether this platform can send a scout.
USABLE = hasattr(os, "fork")
_PAUSE = 0.0005
_LONGEST_PAUSE = 0.02


@dataclass(slots=True)
class Scouted:
    """`take`, with a scout sent ahead at every new largest size. `allowance()`: nanoseconds that it may be away.

    Raises `Overrun` where the scout had to be killed.
    """

    take: Callable[[int, int], Reading]
    allowance: Callable[[], float]
    now: Callable[[], int]
    _largest: int = 0

    def __call__(self, size: int, calls: int) -> Reading:
        if size > self._largest:
            self._largest = size
            self._send(size)
        return self.take(size, calls)

    def _send(self, size: int) -> None:
        deadline = self.now() + self.allowance()
        child = _fork()
        if child == 0:
            # Whatever goes wrong here goes wrong again, and is reported, in the process that sent the scout.
            try:
                self.take(size, 1)
            finally:
                os._exit(0)
        pause = _PAUSE
        while os.waitpid(child, os.WNOHANG)[0] == 0:
            if self.now() > deadline:
                os.kill(child, signal.SIGKILL)
                os.waitpid(child, 0)
                raise Overrun
            sleep(pause)
            pause = min(2 * pause, _LONGEST_PAUSE)


def _fork() -> int:
    with warnings.catch_warnings():
        # Since 3.12 a fork in a process with threads warns; numpy's are idle here.
        warnings.simplefilter("ignore", DeprecationWarning)
        return os.fork()
