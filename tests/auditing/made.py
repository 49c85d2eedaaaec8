"""Made-up calls, whose pattern is known, and calls recorded from a function."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any, Literal

import numpy as np

from pytest_growthbudget.auditing.calls import LIMIT, Calls, Ledger, Run
from pytest_growthbudget.auditing.target import resolve, sizer
from pytest_growthbudget.auditing.watching import CallMeter

Split = Callable[[int], list[int]]


def made(size: int, split: Split, toll: Callable[[int], float] = lambda n: 1, *, returned: bool = True) -> Calls:
    """The calls of a recursion that divides a size by `split` (no parts: a base case), each with its own key."""
    parents, sizes, own, depths = [], [], [], []

    def call(n: int, parent: int, depth: int) -> None:
        index = len(parents)
        parents.append(parent)
        sizes.append(n)
        own.append(round(1000 * toll(n)))
        depths.append(depth)
        for part in split(n):
            call(part, index, depth + 1)

    call(size, -1, 1)
    count = len(parents)
    return Calls(
        parent=np.array(parents),
        size=np.array(sizes, dtype=float),
        own=np.array(own),
        key=np.arange(1, count + 1),
        whole=np.ones(count, dtype=bool),
        runs=(Run(size=size, calls=count, depth=max(depths)),),
        stopped=False,
        returned=returned,
    )


def recorded(
    function: Any,
    *runs: tuple[Any, ...],
    call: Callable[..., Any] | None = None,
    size_of: Any = None,
    gauge: Literal["steps", "time"] = "steps",
    limit: int = LIMIT,
) -> Calls:
    """The calls of `function` in one run for each tuple of arguments."""
    meter = meter_of(function, size_of=size_of, gauge=gauge, limit=limit)
    for arguments in runs:
        meter.start()
        try:
            (call or function)(*arguments)
        finally:
            meter.stop()
    assert not meter.ledger.fault
    return meter.ledger.calls()


def meter_of(
    function: Any, *, size_of: Any = None, gauge: Literal["steps", "time"] = "steps", limit: int = LIMIT
) -> CallMeter:
    target = resolve(function)
    return CallMeter(target, Ledger(target, sizer(target, size_of), limit=limit), gauge)


def sizes_of_children(calls: Calls) -> Iterator[tuple[int, list[int]]]:
    """Each call's size with those of its children, in order."""
    for index, size in enumerate(calls.size.tolist()):
        yield int(size), [int(s) for s in calls.size[calls.parent == index]]
