"""How often the ratchet accuses an unchanged body, and how small a rise it sees, over recorded sessions.

    python -m tests.studies.drift_rates

Each body was read in three sessions, two of them quiet and one with both cores busy. Every set of one session stands
for the accepted record, every set of another session for a later run. A rise is put in by multiplying the later
costs by n^rise. One measurement only: the ratchet asks for a second before it fails a test.
"""

from __future__ import annotations

import gzip
import json
from collections.abc import Iterator, Sequence
from typing import Any

from pytest_growthbudget.fitting.drift import cost_at, exponent_over
from pytest_growthbudget.fitting.evidence import lower_quartile
from pytest_growthbudget.reporting.drift import CLOCK_MARGIN, rises
from pytest_growthbudget.reporting.trend import moved
from tests.studies.recordings import DATA, SESSIONS

RISES = (0.0, 0.05, 0.1, 0.15, 0.2, 0.3, 0.5)
CHEAPEST, DEAREST = 5e3, 5e6
FEWEST = 6
FLAT = ("1", "log")

Costs = list[tuple[float, float]]


def sets() -> dict[str, dict[str, tuple[str, list[Costs]]]]:
    """By session and body: its growth and its two sets, as (size, lower quartile) where a clock can read them."""
    found: dict[str, dict[str, tuple[str, list[Costs]]]] = {}
    for session in SESSIONS:
        with gzip.open(DATA / f"readings_{session}.json.gz", "rt") as file:
            bodies: dict[str, Any] = json.load(file)
        found[session] = {
            name: (body["growth"], [_quartiles(body, each) for each in body["sets"]]) for name, body in bodies.items()
        }
    return found


def _quartiles(body: dict[str, Any], readings: Sequence[Sequence[float]]) -> Costs:
    costs = [(size, lower_quartile(read)) for size, read in zip(body["sizes"], readings, strict=False) if read]
    return [(size, cost) for size, cost in costs if CHEAPEST <= cost <= DEAREST]


def pairs() -> Iterator[tuple[bool, Costs, Costs]]:
    """An earlier and a later set of one body, from two sessions, and whether the body is flat."""
    known = sets()
    for earlier in SESSIONS:
        for later in SESSIONS:
            for name, (growth, before) in known[earlier].items():
                if earlier != later and name in known[later]:
                    for one in before:
                        for other in known[later][name][1]:
                            if min(len(one), len(other)) >= FEWEST:
                                yield growth in FLAT, one, other


def main() -> None:
    interval = {"confidence": 0.95, "counted": False}
    every = list(pairs())
    fits = [exponent_over(*zip(*one, strict=True), **interval, flat=flat) for flat, one, _ in every]  # type: ignore[arg-type]
    print(f"{len(every)} pairs; the margin is {CLOCK_MARGIN}")
    print("rise put in   reported as risen")
    for rise in RISES:
        count = 0
        for (flat, _, other), before in zip(every, fits, strict=True):
            risen = [(size, cost * size**rise) for size, cost in other]
            now = exponent_over(*zip(*risen, strict=True), **interval, flat=flat)  # type: ignore[arg-type]
            assert before is not None
            assert now is not None
            count += rises(_plain(before), _plain(now), CLOCK_MARGIN)
        print(f"{rise:11.2f}   {count:5d}  {100 * count / len(every):5.1f} %")
    moves = 0
    for _, one, other in every:
        at = min(one[-1][0], other[-1][0])
        costs = [cost_at(*zip(*each, strict=True), at, **interval) for each in (one, other)]  # type: ignore[arg-type]
        moves += bool(moved(*(cost and _plain(cost) for cost in costs)))
    print(f"costs at a common size marked as changed, though the body is the same: {100 * moves / len(every):.1f} %")


def _plain(interval: Any) -> dict[str, float]:
    return {"estimate": interval.estimate, "low": interval.low, "high": interval.high}


if __name__ == "__main__":
    main()
