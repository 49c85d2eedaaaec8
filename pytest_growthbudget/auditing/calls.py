"""The calls of one function during one or more runs: who called whom, at what size, and what each did itself.

`Ledger` is written to by a watch (`watching`) while the code runs; `Calls` is what it holds afterwards. A call
costs 32 bytes, so that a million of them cost 32 MB.
"""

from __future__ import annotations

from array import array
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from pytest_growthbudget.auditing.fingerprint import UNTOLD, Fingerprints
from pytest_growthbudget.auditing.target import Sizer, Target, TargetError

#: Where recording stops by default. The run itself goes on to its end.
LIMIT: Final = 1_000_000

Ints = NDArray[np.int64]
Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """One outermost call: its size, the calls under it (itself included) and how deep they nested."""

    size: float
    calls: int
    depth: int


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Calls:
    """Recorded calls in the order in which they began; arrays of shape (m,).

    `parent`: index of the nearest enclosing call of the same function, -1 for an outermost one. `own`: work inside
    the call and outside its children, in steps or nanoseconds. `key`: equal where the arguments are (0: not told).
    `whole`: False where recording stopped while the call was still open. `stopped`: whether it stopped at the
    limit. `returned`: whether some call returned a value other than None.
    """

    parent: Ints
    size: Floats
    own: Ints
    key: Ints
    whole: NDArray[np.bool_]
    runs: tuple[Run, ...]
    stopped: bool
    returned: bool

    def __len__(self) -> int:
        return len(self.parent)


class Ledger:
    """Takes down calls as they begin and end. `read` is a counter of steps or a clock."""

    def __init__(self, target: Target, size: Sizer, *, keys: bool = True, limit: int = LIMIT) -> None:
        self._target, self._size, self._limit = target, size, limit
        self._fingerprints = Fingerprints() if keys else None
        self._parent, self._depth, self._sizes = array("i"), array("i"), array("d")
        self._own, self._keys = array("q"), array("q")
        self._stack: list[int] = []
        self._suspended: dict[object, int] = {}
        self._cut: list[int] = []
        self._mark = 0
        self._returned = False
        self.read: Callable[[], int] = int
        #: Whether nothing more is taken down, at the limit or after a fault.
        self.closed = False
        #: What went wrong in `size_of`; "" where nothing did.
        self.fault = ""

    def __len__(self) -> int:
        return len(self._parent)

    @property
    def stopped(self) -> bool:
        return len(self._parent) >= self._limit

    def enter(self, arguments: Mapping[str, Any], frame: object = None) -> None:
        """A call began. `frame` is given for generators, which may be suspended."""
        now = self.read()
        if self.closed:
            return
        stack, index = self._stack, len(self._parent)
        if index >= self._limit:
            self._close()
            return
        try:
            size = self._size(arguments)
        except TargetError as error:
            self._fail(str(error))
            return
        except Exception as error:  # the user's own function may raise anything
            self._fail(f"the size of a call of {self._target.name} could not be told: {type(error).__name__}: {error}")
            return
        if stack:
            self._own[stack[-1]] += now - self._mark
        self._parent.append(stack[-1] if stack else -1)
        self._sizes.append(size)
        self._own.append(0)
        told = self._fingerprints
        self._keys.append(told.of(map(arguments.__getitem__, self._target.arguments)) if told else UNTOLD)
        stack.append(index)
        self._depth.append(len(stack))
        if frame is not None:
            self._suspended[frame] = index
        self._mark = self.read()

    def leave(self, value: object = None) -> None:
        """The innermost open call ended and returned `value`."""
        now = self.read()
        if self.closed or not self._stack:
            return
        index = self._stack.pop()
        self._own[index] += now - self._mark
        if value is not None:
            self._returned = True
        self._mark = self.read()

    def suspend(self) -> None:
        """The innermost open call, a generator, gave a value and waits."""
        now = self.read()
        if self.closed or not self._stack:
            return
        self._own[self._stack.pop()] += now - self._mark
        self._returned = True
        self._mark = self.read()

    def resume(self, frame: object) -> None:
        """A waiting generator goes on."""
        now = self.read()
        if self.closed or frame not in self._suspended:
            return
        if self._stack:
            self._own[self._stack[-1]] += now - self._mark
        self._stack.append(self._suspended[frame])
        self._mark = self.read()

    def knows(self, frame: object) -> bool:
        return frame in self._suspended

    def end(self) -> None:
        """The run is over, or was broken off: what is still open stays open."""
        self._cut.extend(self._stack)
        self._stack.clear()
        self._suspended.clear()

    def _close(self) -> None:
        self.end()
        self.closed = True

    def _fail(self, fault: str) -> None:
        self.fault = fault
        self._close()

    def _runs(self) -> Iterator[Run]:
        starts = [index for index, parent in enumerate(self._parent) if parent < 0]
        for start, end in pairwise([*starts, len(self._parent)]):
            yield Run(size=self._sizes[start], calls=end - start, depth=max(self._depth[start:end]))

    def calls(self) -> Calls:
        """What was taken down so far."""
        whole = np.ones(len(self._parent), dtype=bool)
        whole[self._cut] = False
        return Calls(
            parent=np.array(self._parent, dtype=np.int64),
            size=np.array(self._sizes, dtype=float),
            own=np.array(self._own, dtype=np.int64),
            key=np.array(self._keys, dtype=np.int64),
            whole=whole,
            runs=tuple(self._runs()),
            stopped=self.stopped and self.closed,
            returned=self._returned,
        )
