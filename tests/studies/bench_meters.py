"""What the meters themselves cost: the time of a body that is read, over the time of the body alone.

    python -m tests.studies.bench_meters [rounds]

Each round runs the body bare and under each meter, one after another, and takes the ratio within the round; printed is
the median over the rounds. Start and stop of the meter are part of its cost. The collector is off during a reading, as
it is in a test. The bodies are ordinary code, but for the last two, which do nothing but what is counted: the worst
that can be.

Goals: `steps` at most 3 times the bare body on Python 3.12 and later, 7 times before; `peak_memory` at most 5 times.
"""

from __future__ import annotations

import collections
import gc
import json
import math
import random
import statistics
import sys
from collections.abc import Callable

import numpy as np

from pytest_growthbudget.meters.clocks import cpu_time_ns
from pytest_growthbudget.meters.protocol import Meter
from pytest_growthbudget.meters.registry import meter_for
from pytest_growthbudget.workloads import shapes

GOALS = {"steps": 3.0 if sys.version_info >= (3, 12) else 7.0, "peak_memory": 5.0}
LEAST_NS = 10e6


def merge_sort(values: list[int]) -> list[int]:
    if len(values) < 2:
        return values
    half = len(values) // 2
    left, right = merge_sort(values[:half]), merge_sort(values[half:])
    merged = []
    i = j = 0
    while i < len(left) and j < len(right):
        if right[j] < left[i]:
            merged.append(right[j])
            j += 1
        else:
            merged.append(left[i])
            i += 1
    return merged + left[i:] + right[j:]


def reach(graph: shapes.Graph) -> int:
    seen, waiting = {0}, collections.deque([0])
    while waiting:
        for other in graph[waiting.popleft()]:
            if other not in seen:
                seen.add(other)
                waiting.append(other)
    return len(seen)


def manifest_by_quay(lines: list[str]) -> dict[str, int]:
    tonnes: dict[str, int] = {}
    for line in lines:
        quay, _, weight = line.partition(",")
        tonnes[quay] = tonnes.get(quay, 0) + int(weight)
    return tonnes


def ledger(lines: list[str]) -> str:
    return json.dumps([dict(zip(("quay", "weight"), line.split(","), strict=True)) for line in lines])


def lists_of_lists(n: int) -> int:
    return sum(len([0.5 * berth for berth in range(50)]) for _ in range(n))


def array_sums(tide: np.ndarray) -> float:
    return float(sum((tide * scale).sum() for scale in range(20)))


def calls(n: int) -> int:
    return n if n < 2 else calls(n - 1) + calls(n - 2)


def loop(n: int) -> int:
    total = 0
    for one in range(n):
        total += one
        if total % 3 == 0:
            total -= 1
    return total


def bodies() -> dict[str, Callable[[int], Callable[[], object]]]:
    """Name -> size -> a body with its workload built."""
    rng = random.Random(20)

    def fed(body: Callable[..., object], build: Callable[[int], object]) -> Callable[[int], Callable[[], object]]:
        def at(n: int) -> Callable[[], object]:
            workload = build(n)
            return lambda: body(workload)

        return at

    def lines(n: int) -> list[str]:
        return [f"quay {rng.randrange(9)},{rng.randrange(1000)}" for _ in range(n)]

    return {
        "merge sort": fed(merge_sort, lambda n: shapes.SHAPES["shuffled"](n, rng)),
        "breadth-first search": fed(reach, lambda n: shapes.SHAPES["random_sparse"](n, rng)),
        "sums by key": fed(manifest_by_quay, lines),
        "records to JSON": fed(ledger, lines),
        "lists of floats": fed(lists_of_lists, lambda n: n),
        "numpy arrays": fed(array_sums, lambda n: np.ones(20 * n)),
        "nothing but calls": fed(calls, lambda n: int(math.log(n, 1.618))),
        "nothing but a loop": fed(loop, lambda n: n),
    }


def time_of(body: Callable[[], object], meter: Meter | None) -> int:
    gc.collect()
    gc.disable()
    started = cpu_time_ns()
    if meter is None:
        body()
    else:
        meter.start()
        body()
        meter.stop()
    elapsed = cpu_time_ns() - started
    gc.enable()
    return elapsed


def sized(at: Callable[[int], Callable[[], object]]) -> Callable[[], object]:
    """The body at the first size, doubling, at which it takes 10 ms."""
    n = 1000
    while True:
        body = at(n)
        body()
        if time_of(body, None) >= LEAST_NS:
            return body
        n *= 2


def overheads(rounds: int) -> dict[str, dict[str, float]]:
    """Body -> meter -> median ratio."""
    meters = {name: meter_for(name) for name in GOALS}
    found: dict[str, dict[str, float]] = {}
    for name, at in bodies().items():
        body = sized(at)
        for meter in meters.values():
            time_of(body, meter)
        ratios: dict[str, list[float]] = {meter: [] for meter in meters}
        for _ in range(rounds):
            bare = time_of(body, None)
            for meter_name, meter in meters.items():
                ratios[meter_name].append(time_of(body, meter) / bare)
        found[name] = {meter_name: statistics.median(values) for meter_name, values in ratios.items()}
    return found


def main(arguments: list[str]) -> None:
    rounds = int(arguments[0]) if arguments else 15
    found = overheads(rounds)
    print(f"Python {sys.version.split()[0]}, {rounds} rounds: time under the meter / time of the bare body\n")
    print(f"{'body':24}" + "".join(f"{meter:>14}" for meter in GOALS))
    for name, ratios in found.items():
        print(f"{name:24}" + "".join(f"{ratios[meter]:14.2f}" for meter in GOALS))
    print()
    for label, summary in (("geometric mean", statistics.geometric_mean), ("largest", max)):
        print(f"{label:24}" + "".join(f"{summary([r[meter] for r in found.values()]):14.2f}" for meter in GOALS))
    print(f"{'goal':24}" + "".join(f"{goal:14.2f}" for goal in GOALS.values()))


if __name__ == "__main__":
    main(sys.argv[1:])
