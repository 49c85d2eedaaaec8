"""Declared and observed terms of textbook recursions and of twins with a planted fault.

    python -m tests.studies.audit_table [NAME ...] [--full]

`--full` prints the report of each audit besides.
"""

from __future__ import annotations

import argparse
import random
import sys
import time

from pytest_growthbudget.auditing.audit import Audit, audit
from tests.auditing.examples import FAULTY, SOUND, Example


def audited(example: Example, seed: int = 3) -> Audit:
    arguments = example.build(random.Random(seed))
    return audit(example.call, *arguments, of=example.of, size_of=example.size_of, bound=example.declared)


def row(example: Example, found: Audit, seconds: float) -> str:
    observed = found.observed.text if found.observed else "none"
    implied = found.observed.theta if found.observed else ""
    broken = ", ".join(dict.fromkeys(check.about for check in found.broken)) or "none"
    return (
        f"{example.name:<33} {example.declared:<30} {observed:<36} {implied:<24} {broken:<28} "
        f"{found.calls:>8,} {seconds:5.1f} s"
    )


def main(words: list[str]) -> int:
    parser = argparse.ArgumentParser(description="Declared and observed terms of textbook recursions.")
    parser.add_argument("names", nargs="*", help="Print only examples whose name holds one of these.")
    parser.add_argument("--full", action="store_true", help="Print the report of each audit besides.")
    options = parser.parse_args(words)
    sys.setrecursionlimit(10_000)
    print(f"{'':<33} {'declared':<30} {'observed':<36} {'implies':<24} {'does not agree':<28} {'calls':>8}")
    for group in (SOUND, FAULTY):
        for example in group:
            if options.names and not any(name in example.name for name in options.names):
                continue
            began = time.perf_counter()
            found = audited(example)
            print(row(example, found, time.perf_counter() - began), flush=True)
            if options.full:
                print(f"\n{found}\n")
        print()
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
