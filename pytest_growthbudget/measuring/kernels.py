"""What memory adds to linear code on this machine: four linear kernels, by the bytes they touch.

Each kernel does the same work for every element but reaches its elements in random order, as code over boxed
objects does. Its cost for each element rises once its footprint leaves the caches; the largest rise over the
kernels is the `MemoryCurve`. A kernel with more elements than one reading can afford visits a random part of them,
after a sweep over all: what the caches hold then is what a pass over all would find.
"""

from __future__ import annotations

import gc
import math
import os
import platform
import sys
from collections import deque
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import islice, pairwise
from pathlib import Path
from typing import Any, Final

import numpy as np

from pytest_growthbudget.measuring.readings import MemoryCurve
from pytest_growthbudget.meters.clocks import cpu_time_ns

Clock = Callable[[], int]

#: Below this a body is at home in every second-level cache, and its fixed costs outweigh the caches.
SMALLEST: Final = 1 << 17
LARGEST: Final = 1 << 26
VISITS: Final = 1 << 14
READINGS: Final = 5
RESIDENT_INFLATION: Final = 1.2


@dataclass(frozen=True, slots=True)
class Kernel:
    """One way to go through scattered objects.

    `build(count, rng)` makes objects one after the other, `hold(objects, count)` what a pass over the first
    `count` of them needs, and `aim(held, places)` a pass that visits some of them in the order given.
    `bytes_each`: what one element holds, pointers and the dictionary's or list's own share included.
    """

    name: str
    bytes_each: int
    build: Callable[[int, np.random.Generator], list[Any]]
    hold: Callable[[list[Any], int], Any]
    aim: Callable[[Any, list[int]], Callable[[], object]]


def measure_curve(
    clock: Clock = cpu_time_ns, *, largest: int = LARGEST, kernels: Sequence[Kernel] | None = None
) -> MemoryCurve:
    """Measures the curve up to `largest` bytes, about a second; `clock` in nanoseconds."""
    footprints = [SMALLEST << octave for octave in range((largest // SMALLEST).bit_length())]
    rng = np.random.default_rng(20)
    collecting = gc.isenabled()
    gc.disable()
    try:
        costs = [kernel_costs(each, footprints, clock, rng) for each in kernels or KERNELS]
    finally:
        if collecting:
            gc.enable()
    return curve_of(footprints, costs)


def kernel_costs(kernel: Kernel, footprints: Sequence[int], clock: Clock, rng: np.random.Generator) -> list[float]:
    """Nanoseconds an element at each footprint, the median of a few readings."""
    objects = kernel.build(footprints[-1] // kernel.bytes_each, rng)
    costs = []
    for footprint in footprints:
        count = footprint // kernel.bytes_each
        held = kernel.hold(objects, count)
        readings = [_reading(kernel, objects, held, count, clock, rng) for _ in range(READINGS)]
        costs.append(max(float(np.median(readings)), 1e-3))
    return costs


def _reading(
    kernel: Kernel, objects: list[Any], held: Any, count: int, clock: Clock, rng: np.random.Generator
) -> float:
    places = _places(count, rng)
    visit = kernel.aim(held, places)
    # Handing an object out touches its reference count, hence its cache line.
    deque(islice(objects, count), maxlen=0)
    passes = max(1, VISITS // len(places))
    if passes > 1:
        visit()
    start = clock()
    for _ in range(passes):
        visit()
    return (clock() - start) / (passes * len(places))


def _places(count: int, rng: np.random.Generator) -> list[int]:
    """Random places among `count`, no place twice: all of them where one reading can visit all."""
    among = np.arange(count) if count <= VISITS else np.unique(rng.integers(0, count, VISITS))
    places: list[int] = rng.permutation(among).tolist()
    return places


def curve_of(footprints: Sequence[int], costs: Sequence[Sequence[float]]) -> MemoryCurve:
    """The curve from nanoseconds an element by kernel and footprint, `costs[k][i]`."""
    table = np.asarray(costs, dtype=float)
    inflation = np.maximum.accumulate(np.log(table / table[:, :1]).max(axis=0))
    extra = np.maximum.accumulate((table - table[:, :1]).max(axis=0))
    log_bytes = np.log(np.asarray(footprints, dtype=float))
    return MemoryCurve(
        log_bytes=tuple(log_bytes.tolist()),
        log_inflation=tuple(inflation.tolist()),
        extra=tuple(extra.tolist()),
        resident=_resident(log_bytes.tolist(), inflation.tolist()),
        cheapest=float(table.min()),
    )


def _resident(log_bytes: Sequence[float], log_inflation: Sequence[float]) -> float:
    """The bytes at which the inflation reaches 1.2, interpolated; the largest measured where it never does."""
    limit = math.log(RESIDENT_INFLATION)
    above = next((index for index, value in enumerate(log_inflation) if value > limit), None)
    if above is None:
        return math.exp(log_bytes[-1])
    low, high = log_inflation[above - 1], log_inflation[above]
    share = (limit - low) / (high - low)
    return math.exp(log_bytes[above - 1] + share * (log_bytes[above] - log_bytes[above - 1]))


def from_dict(kept: Mapping[str, Any]) -> MemoryCurve | None:
    """The curve that `dataclasses.asdict` made into JSON; None where that is not one."""
    try:
        curve = MemoryCurve(
            log_bytes=tuple(float(each) for each in kept["log_bytes"]),
            log_inflation=tuple(float(each) for each in kept["log_inflation"]),
            extra=tuple(float(each) for each in kept["extra"]),
            resident=float(kept["resident"]),
            cheapest=float(kept["cheapest"]),
        )
    except (KeyError, TypeError, ValueError):
        return None
    shapes = {len(curve.log_bytes), len(curve.log_inflation), len(curve.extra)}
    return curve if len(shapes) == 1 and curve.log_bytes else None


def machine_key() -> str:
    """What the curve depends on, as one line: processor, caches, interpreter. Names neither host nor user."""
    parts = [
        platform.system(),
        platform.machine(),
        _processor(),
        *_caches(),
        f"{platform.python_implementation()} {platform.python_version()}",
        f"{sys.maxsize.bit_length() + 1} bit",
        f"{os.cpu_count()} cores",
    ]
    return ", ".join(part for part in parts if part)


def _processor() -> str:
    try:
        lines = Path("/proc/cpuinfo").read_text(encoding="utf-8", errors="replace").splitlines()
    except OSError:
        return platform.processor()
    for line in lines:
        name, _, value = line.partition(":")
        if name.strip() in ("model name", "CPU part", "cpu model"):
            return value.strip()
    return platform.processor()


def _caches() -> list[str]:
    found = []
    for place in sorted(Path("/sys/devices/system/cpu/cpu0/cache").glob("index*")):
        try:
            level = (place / "level").read_text(encoding="ascii").strip()
            size = (place / "size").read_text(encoding="ascii").strip()
        except OSError:
            continue
        found.append(f"L{level} {size}")
    return found


# ---------------------------------------------------------------- the kernels


def _boxed_floats(count: int, rng: np.random.Generator) -> list[Any]:
    floats: list[Any] = rng.random(count).tolist()
    return floats


def _nodes(count: int, rng: np.random.Generator) -> list[Any]:
    return [[None, place] for place in range(count)]


def _keys(count: int, rng: np.random.Generator) -> list[Any]:
    keys: list[Any] = rng.integers(0, 1 << 40, count).tolist()
    return keys


def _as_built(objects: list[Any], count: int) -> list[Any]:
    return objects


def _table(keys: list[Any], count: int) -> tuple[list[Any], dict[Any, int]]:
    return keys, dict.fromkeys(islice(keys, count), 1)


def _sum(floats: list[Any], places: list[int]) -> Callable[[], object]:
    scattered = [floats[place] for place in places]
    return lambda: sum(scattered)


def _access(floats: list[Any], places: list[int]) -> Callable[[], object]:
    def visit() -> float:
        total = 0.0
        for place in places:
            total += floats[place]
        return total

    return visit


def _chain(nodes: list[Any], places: list[int]) -> Callable[[], object]:
    for here, there in pairwise(places):
        nodes[here][0] = nodes[there]
    nodes[places[-1]][0] = None
    head = nodes[places[0]]

    def visit() -> int:
        total, node = 0, head
        while node is not None:
            total += node[1]
            node = node[0]
        return total

    return visit


def _lookups(held: tuple[list[Any], dict[Any, int]], places: list[int]) -> Callable[[], object]:
    keys, table = held
    wanted = [keys[place] for place in places]

    def visit() -> int:
        total = 0
        for key in wanted:
            total += table[key]
        return total

    return visit


KERNELS: Final = (
    Kernel("sum over scattered floats", 32, _boxed_floats, _as_built, _sum),
    Kernel("a list at random places", 72, _boxed_floats, _as_built, _access),
    Kernel("a scattered linked list", 128, _nodes, _as_built, _chain),
    Kernel("a dictionary at random keys", 110, _keys, _table, _lookups),
)
