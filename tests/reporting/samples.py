"""Records to test with: real ones of the sample project, and made-up ones whose growth is known."""

from __future__ import annotations

import random
from pathlib import Path
from typing import Any

from pytest_growthbudget.fitting.judge import judge
from pytest_growthbudget.reporting.records import Record, line_of, read_records, record_of
from pytest_growthbudget.reporting.wire import to_wire

RECORDS = Path(__file__).parent.parent / "data" / "records.jsonl"
SIZES = tuple(round(32 * 2 ** (step / 2)) for step in range(14))

ENVIRONMENT: dict[str, Any] = {
    "python": "3.11.7",
    "implementation": "CPython",
    "platform": "Linux-6.1-x86_64",
    "machine": "x86_64",
    "processor": "Harbour 1",
    "cores": 2,
    "version": "0.1.0",
}


def real_records() -> list[Record]:
    """Eight records of the sample project: clocks and counts, kept and broken budgets, one exponential."""
    return list(read_records([RECORDS]).records)


def judgement(
    exponent: float,
    *,
    bound: str = "n",
    sizes: tuple[int, ...] = SIZES,
    scale: float = 100.0,
    noise: float = 0.01,
    seed: int = 1,
    footprint: float = 0.0,
    meter: str = "cpu_time",
) -> dict[str, Any]:
    """The judgement, in wire form, of costs scale · n^exponent with log-normal noise."""
    draw = random.Random(seed)
    costs = [scale * size**exponent * draw.lognormvariate(0, noise) for size in sizes]
    wire = to_wire(judge(sizes, costs, bound), undecided="warn")
    wire.update(meter=meter, unit="ns" if meter == "cpu_time" else meter, seconds=0.25, seed=seed)
    for row in wire["sizes"]:
        row["footprint"] = footprint * row["size"]
    return wire


def record(
    exponent: float,
    *,
    test: str = "tests/test_berths.py::test_every_ship_has_a_berth",
    run: str = "aaaaaaaaaaaa",
    time: str = "2026-03-01T08:00:00Z",
    environment: dict[str, Any] | None = None,
    **how: Any,
) -> Record:
    """A record of `judgement(exponent, **how)`."""
    facts = {"id": run, "time": time, "seed": 1, "workers": 0}
    return record_of({"test": test, **judgement(exponent, **how)}, facts, environment or ENVIRONMENT)


def write(path: Path, records: list[Record]) -> Path:
    path.write_bytes(b"".join(line_of(each) for each in records))
    return path
