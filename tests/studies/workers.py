"""Do tests that are measured side by side disturb one another? Verdicts of the sample project by number of workers.

    python -m tests.studies.workers --runs 3

Runs the sample project's tests (sound) and its faulty twins alone and under xdist, each time with another seed, and
prints how often a sound one was reported and a faulty one was not, and how long the runs took.
"""

from __future__ import annotations

import argparse
import json
import os
import subprocess
import sys
import tempfile
import time
from collections import Counter
from pathlib import Path

ROOT = Path(__file__).parents[2]
FOLDERS = {"sound": "tests", "faulty": "faulty_twins"}


def verdicts(folder: str, workers: int, seed: int) -> tuple[dict[str, str], float]:
    """The verdict of each budget of one run, by test and meter; and the seconds that the run took."""
    with tempfile.TemporaryDirectory() as place:
        records = Path(place) / "records.jsonl"
        began = time.perf_counter()
        subprocess.run(
            [
                sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider", folder, "-n", str(workers),
                "--growth-seed", str(seed), "--growth-records", str(records),
            ],
            cwd=ROOT / "sample_project", capture_output=True, check=False,
            env={**os.environ, "PYTHONPATH": str(ROOT)},
        )  # fmt: skip
        seconds = time.perf_counter() - began
        lines = [json.loads(line) for line in records.read_text(encoding="utf-8").splitlines()]
    return {f"{line['test']} {line['judgement']['meter']}": line["judgement"]["verdict"] for line in lines}, seconds


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--runs", type=int, default=3)
    parser.add_argument("--workers", type=int, nargs="*", default=[0, 2, 4])
    given = parser.parse_args()
    print(f"{os.cpu_count()} cores, load average {os.getloadavg()[0]:.1f} at the start")
    print("| budgets | workers | within | exceeded | undecided | unmeasured | seconds a run |")
    print("| --- | ---: | ---: | ---: | ---: | ---: | ---: |")
    odd: Counter[str] = Counter()
    for kind, folder in FOLDERS.items():
        for workers in given.workers:
            counts: Counter[str] = Counter()
            spent = 0.0
            for seed in range(1, given.runs + 1):
                found, seconds = verdicts(folder, workers, seed)
                spent += seconds
                counts.update(found.values())
                expected = "within" if kind == "sound" else "exceeded"
                odd.update(f"{kind}, -n {workers}: {test}: {v}" for test, v in found.items() if v != expected)
            row = [counts[verdict] for verdict in ("within", "exceeded", "undecided", "unmeasured")]
            print(f"| {kind} | {workers} | {' | '.join(map(str, row))} | {spent / given.runs:.0f} |", flush=True)
    for line, count in sorted(odd.items()):
        print(f"{count} x {line}")


if __name__ == "__main__":
    main()
