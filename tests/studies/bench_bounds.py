"""How many expressions are explained a second, how long the slowest takes, and how long `explain` takes to start.

python tests/studies/bench_bounds.py
"""

from __future__ import annotations

import json
import subprocess
import sys
import time
from pathlib import Path

from pytest_growthbudget.bounds import budget
from pytest_growthbudget.bounds.language import BoundError

CORPORA = Path(__file__).parent.parent / "bounds"


def texts(*files: str) -> list[str]:
    return [entry["input"] for f in files for entry in json.loads((CORPORA / f).read_text("utf-8"))]


def explain(text: str) -> None:
    """One expression, without the cache of parsed texts."""
    try:
        budget.describe(budget._parse.__wrapped__(text))
    except BoundError:
        return


def rate(inputs: list[str], rounds: int = 5) -> float:
    """Inputs a second of processor time, best of the rounds."""
    best = float("inf")
    for _ in range(rounds):
        start = time.process_time()
        for text in inputs:
            explain(text)
        best = min(best, time.process_time() - start)
    return len(inputs) / best


def slowest(inputs: list[str]) -> tuple[float, str]:
    """Processor seconds of the slowest input, best of three."""
    out = (0.0, "")
    for text in inputs:
        best = float("inf")
        for _ in range(3):
            start = time.process_time()
            explain(text)
            best = min(best, time.process_time() - start)
        out = max(out, (best, text))
    return out


def start_up() -> tuple[float, float]:
    """Wall seconds of a bare interpreter and of one that explains a recurrence, best of seven."""
    commands = (["-c", "pass"], ["-m", "pytest_growthbudget", "explain", "--json", "T(n) = 2 T(n/2) + n"])
    out = []
    for command in commands:
        best = float("inf")
        for _ in range(7):
            start = time.perf_counter()
            subprocess.run([sys.executable, *command], check=True, capture_output=True)
            best = min(best, time.perf_counter() - start)
        out.append(best)
    return out[0], out[1]


def main() -> None:
    for name, files in {
        "bounds": ["valid/bounds.json"],
        "recurrences": ["valid/recurrences.json"],
        "faults": ["invalid/faults.json"],
        "all valid": ["valid/bounds.json", "valid/recurrences.json"],
    }.items():
        inputs = texts(*files)
        cost, text = slowest(inputs)
        print(f"{name:<12} {len(inputs):>4} inputs  {rate(inputs):>7,.0f} a second", end="  ")
        print(f"slowest {cost * 1000:.2f} ms  {text[:40]!r}")
    bare, explained = start_up()
    print(f"start-up of explain: {explained * 1000:.0f} ms, of which the bare interpreter {bare * 1000:.0f} ms")


if __name__ == "__main__":
    main()
